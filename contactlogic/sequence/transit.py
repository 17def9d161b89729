"""Contacts in transit: gaps and flashes at coils while a relay moves (design.md section 7).

A changeover opens before it closes, and the contacts of one relay do not move together.  While
relay `m` moves, each of its poles is old, open or new.  A coil fed before and after has a *gap*
if some mixture leaves it unfed: the least is all poles open, so that one case decides.  A coil
fed neither before nor after *flashes* if some mixture feeds it: more is fed the more is closed,
so only mixtures with every pole on make or on break count, and poles used on one throw are
closed in all of them.  None of these cases depends on the position of `m` itself, so each is
worked out for all states at once.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING, Literal

from contactlogic.network import Network, Pole
from contactlogic.sequence import bits
from contactlogic.sequence.drives import conducting, variables

if TYPE_CHECKING:
    from contactlogic.sequence.bits import Words
    from contactlogic.sequence.motion import Motion

__all__ = ["Transit", "transits"]

_MIXED = 8  # changeovers of one relay whose mixtures are all tried


@dataclass(frozen=True)
class Transit:
    """What a coil may see while a relay moves.

    Args:
        kind: "gap" (fed before and after, not fed between) or "flash" (the reverse).
        mover, coil: relay names; they may be the same.
        states: states that the mover may move from in which this happens.
        in_sequence: how many of those are in the sequence.
        example: the lowest such state, of the sequence if any is.
        sure: False if the mover has so many changeovers that not every mixture was tried; then
            the flash may be impossible.
    """

    kind: Literal["gap", "flash"]
    mover: str
    coil: str
    states: int
    in_sequence: int
    example: int
    sure: bool = True


def transits(
    network: Network, motion: Motion, sequence: Collection[int] = ()
) -> tuple[Transit, ...]:
    """Every gap and flash at a coil, by mover and coil in relay order, gaps first.

    Args:
        network: the finished wiring; its relays are the columns of `motion`, coils stand among
            its loads.
        motion: the moves of the same wiring.
        sequence: states of the wanted sequence, told apart from all others.
    """
    wanted = motion.of(sequence)
    tally: dict[tuple[str, str, str], _Tally] = {}
    for start in range(0, motion.words, motion.chunk):
        stop = start + motion.chunk
        for i, mover in enumerate(network.relays):
            if not motion.busy[i][start // motion.chunk]:
                continue
            moving = motion.enabled[i, start:stop]
            for kind, coil, states in _unsteady(network, mover, start, stop):
                seen = states & moving
                if seen.any():
                    entry = tally.setdefault((mover, coil, kind), _Tally())
                    entry.add(seen, wanted[start:stop], start)
    order = {name: k for k, name in enumerate(network.relays)}
    found = sorted(tally.items(), key=lambda e: (order[e[0][0]], order[e[0][1]], e[0][2] != "gap"))
    return tuple(
        Transit(
            "gap" if kind == "gap" else "flash",
            mover,
            coil,
            entry.states,
            entry.in_sequence,
            entry.example,
            kind == "gap" or len(_changeovers(network, mover)) <= _MIXED,
        )
        for (mover, coil, kind), entry in found
    )


class _Tally:
    """States in which one thing happens, counted over chunks."""

    def __init__(self) -> None:
        self.states = 0
        self.in_sequence = 0
        self.example = -1

    def add(self, seen: Words, wanted: Words, start: int) -> None:
        ours = seen & wanted
        if self.example < 0 or (not self.in_sequence and ours.any()):
            self.example = 64 * start + bits.lowest(ours if ours.any() else seen)
        self.states += bits.count_of(seen)
        self.in_sequence += bits.count_of(ours)


def _changeovers(network: Network, mover: str) -> list[Pole]:
    return [p for p in network.poles if p.relay == mover and p.make and p.break_]


def _unsteady(
    network: Network, mover: str, start: int, stop: int
) -> list[tuple[Literal["gap", "flash"], str, Words]]:
    """Gaps and flashes while one relay moves, whatever state it moves from."""
    import numpy as np

    values = variables(network.relays, start, stop)
    ones = np.full(stop - start, ~np.uint64(0), dtype=np.uint64)
    fixed = [
        (c.common, c.throw, values[c.relay] if c.make else ~values[c.relay])
        for c in network.contacts()
        if c.relay != mover
    ]
    own = [p for p in network.poles if p.relay == mover]
    if not own:
        return []
    coils = {name: network.loads[name] for name in network.relays if name in network.loads}

    def live(makes: Collection[Pole], breaks: Collection[Pole]) -> dict[str, Words]:
        closed = [(p.common, p.make, ones) for p in makes if p.make is not None]
        closed += [(p.common, p.break_, ones) for p in breaks if p.break_ is not None]
        return conducting(network.supply, [*fixed, *closed], stop - start)

    nothing = np.zeros(stop - start, dtype=np.uint64)
    operated, released, between = live(own, ()), live((), own), live((), ())
    found: list[tuple[Literal["gap", "flash"], str, Words]] = []
    dark: dict[str, Words] = {}
    for coil, net in coils.items():
        if net is None:
            continue
        on, off = operated.get(net, nothing), released.get(net, nothing)
        gap = on & off & ~between.get(net, nothing)
        if gap.any():
            found.append(("gap", coil, gap))
        unfed = ~(on | off)
        if unfed.any():
            dark[coil] = unfed
    every = live(own, own)
    dark = {c: w for c, w in dark.items() if (w & every.get(coils[c] or "", nothing)).any()}
    if not dark:
        return found
    both = _changeovers(network, mover)
    single = [p for p in own if p not in both]
    mixtures = [every]
    if len(both) <= _MIXED:
        mixtures = [
            live(
                [*single, *(p for p, make in zip(both, picked, strict=True) if make)],
                [*single, *(p for p, make in zip(both, picked, strict=True) if not make)],
            )
            for picked in product((False, True), repeat=len(both))
        ]
    for coil, unfed in dark.items():
        fed = nothing.copy()
        for mixture in mixtures:
            fed |= mixture.get(coils[coil] or "", nothing)
        if (fed & unfed).any():
            found.append(("flash", coil, fed & unfed))
    return found
