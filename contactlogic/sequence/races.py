"""Races: two pending relays whose order decides where the sequence ends.

A state races if moving one or the other of two relays that may both move leaves different sets
of traps within reach.  Only states on the border of some trap's basin can, so only those are
looked at.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TypeVar

from contactlogic.sequence.space import Space

__all__ = ["Race", "races"]

S = TypeVar("S")

_LOOKED_AT = 4096  # border states looked at for each trap


@dataclass(frozen=True)
class Race:
    """Two columns that race.

    Args:
        columns: the two, ascending.
        example: the lowest state seen in which they do.
        states: in how many states they do; `at_least` if not every state was looked at.
        endings: for each of the two, if it moves first, the traps (their lowest states) then
            within reach.
    """

    columns: tuple[int, int]
    example: int
    states: int
    at_least: bool
    endings: tuple[tuple[int, ...], tuple[int, ...]]


def races(space: Space[S], basins: Sequence[S], examples: Sequence[int]) -> tuple[Race, ...]:
    """Every pair of columns that races, by column order.

    Args:
        basins: for each trap the states from which some run ends in it.
        examples: for each trap, in the same order, its lowest state.
    """
    border: set[int] = set()
    cut = False
    for basin in basins:
        rest = space.without(space.everything(), basin)
        both = space.both(space.pre(basin), space.pre(rest))
        some = space.listing(both, _LOOKED_AT + 1)
        cut |= len(some) > _LOOKED_AT
        border.update(some[:_LOOKED_AT])
    found: dict[tuple[int, int], list[tuple[int, tuple[int, ...], tuple[int, ...]]]] = {}
    for state in sorted(border):
        free = [i for i in range(space.n) if space.has(space.movable(i), state)]
        if all(i in space.inputs for i in free):
            continue  # an operator's choice is no race
        goals = {
            i: tuple(
                example
                for basin, example in zip(basins, examples, strict=False)
                if space.has(basin, state ^ (1 << i))
            )
            for i in free
        }
        for k, one in enumerate(free):
            for two in free[k + 1 :]:
                if goals[one] != goals[two]:
                    found.setdefault((one, two), []).append((state, goals[one], goals[two]))
    return tuple(
        Race(pair, seen[0][0], len(seen), cut, seen[0][1:]) for pair, seen in sorted(found.items())
    )
