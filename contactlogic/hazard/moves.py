"""Which moves of one relay are looked at, and what the loads should do meanwhile.

A move is a pair of settings that differ in one relay.  It is named by the row in which the relay
is released; contacts in transit do the same whichever way the relay moves.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from contactlogic.job.model import Job
from contactlogic.truth import Target, all_rows, literal

__all__ = ["Moves", "listed_moves", "pairs_within", "stays_off", "stays_on", "step_moves"]


@dataclass(frozen=True)
class Moves:
    """Moves of one relay at a time.

    Args:
        relays: in bit order.
        released: for each relay the rows, with that relay released, that its moves start from or
            end in, as a truth table.
    """

    relays: tuple[str, ...]
    released: Mapping[str, int]

    @property
    def count(self) -> int:
        """How many moves there are."""
        return sum(rows.bit_count() for rows in self.released.values())


def listed_moves(job: Job) -> Moves:
    """Every pair of the job's listed rows that differ in one relay."""
    return pairs_within(job.relays, job.listed)


def pairs_within(relays: Sequence[str], rows: int) -> Moves:
    """Every pair of the given rows that differ in one relay."""
    n = len(relays)
    return Moves(
        tuple(relays),
        {name: rows & rows >> (1 << i) & literal(n, i, False) for i, name in enumerate(relays)},
    )


def step_moves(relays: Sequence[str], steps: Iterable[tuple[int, int]]) -> Moves:
    """The moves of a sequence, given as (state, number of the relay that moves out of it)."""
    released = dict.fromkeys(relays, 0)
    for state, mover in steps:
        released[relays[mover]] |= 1 << (state & ~(1 << mover))
    return Moves(tuple(relays), released)


def stays_on(target: Target, i: int, released: int) -> int:
    """Those of the moves of relay `i` through which the load must be on, before and after."""
    return released & target.on & target.on >> (1 << i) & all_rows(target.n)


def stays_off(target: Target, i: int, released: int) -> int:
    """Those of the moves of relay `i` through which the load must be off, before and after."""
    return released & target.off & target.off >> (1 << i) & all_rows(target.n)
