"""Contacts in transit: gaps and flashes at coils while a relay moves (design.md section 7).

A changeover opens before it closes, and the contacts of one relay do not move together.  While
relay `m` moves, each of its poles is old, open or new (`contactlogic.hazard.mixture`).  A coil fed
before and after has a *gap* if some mixture leaves it unfed; a coil fed neither before nor after
*flashes* if some mixture feeds it.  Neither depends on the position of `m` itself, so each is
worked out for all states at once.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

from contactlogic.hazard import mixture
from contactlogic.network import Network
from contactlogic.sequence import bits
from contactlogic.sequence.drives import variables

if TYPE_CHECKING:
    from contactlogic.sequence.bits import Words
    from contactlogic.sequence.motion import Motion

__all__ = ["Transit", "transits"]


@dataclass(frozen=True)
class Transit:
    """What a coil may see while a relay moves.

    Args:
        kind: "gap" (fed before and after, not fed between) or "flash" (the reverse).
        mover, coil: relay names; they may be the same.
        states: states that the mover may move from in which this happens.
        in_sequence: how many of those are in the sequence.
        example: the lowest such state, of the sequence if any is.
    """

    kind: Literal["gap", "flash"]
    mover: str
    coil: str
    states: int
    in_sequence: int
    example: int


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
            for kind, coil, seen in _unsteady(network, mover, moving, start):
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


def _unsteady(
    network: Network, mover: str, able: Words, start: int
) -> list[tuple[Literal["gap", "flash"], str, Words]]:
    """Gaps and flashes while one relay moves from the states it may move from.

    Args:
        able: words of those states, from word `start` on.
    """
    import numpy as np

    own = [pole for pole in network.poles if pole.relay == mover]
    if not own:
        return []
    stop = start + len(able)
    states = _bits(able)
    values = {name: _bits(words) for name, words in variables(network.relays, start, stop).items()}
    fixed = [
        (c.common, c.throw, values[c.relay] if c.make else states & ~values[c.relay])
        for c in network.contacts()
        if c.relay != mover
    ]
    moving = mixture.Transit(network.supply, fixed, own, states)
    operated, released = moving.steady(True), moving.steady(False)
    every = moving.with_all_closed()
    found: list[tuple[Literal["gap", "flash"], str, Words]] = []

    def add(kind: Literal["gap", "flash"], coil: str, where: int) -> None:
        if where:
            packed = np.frombuffer(where.to_bytes(8 * len(able), "little"), dtype="<u8")
            found.append((kind, coil, packed.astype(np.uint64)))

    for coil in network.relays:
        net = network.loads.get(coil)
        if net is None:
            continue
        on, off = operated.get(net, 0), released.get(net, 0)
        fed, dark = on & off, every.get(net, 0) & ~(on | off)
        if fed:  # most coils are out of the mover's reach: asking costs more than the answer
            add("gap", coil, moving.can_leave(net, fed))
        if dark:
            add("flash", coil, moving.can_feed(net, dark))
    return found


def _bits(words: Words) -> int:
    return int.from_bytes(words.astype("<u8").tobytes(), "little")
