"""Traps and endless loops of any state space, by set operations alone.

Terminal strongly connected components after Xie and Beerel (2000): from a seed take what it
reaches; if all of that reaches the seed back it is a trap, else go on from what does not; then
take away all that can run into the trap.  Fair loops as the greatest fixed point of Emerson and
Lei (1986): states that can, for ever, go on to a state in which column `i` may not move, or does
move, for every `i`.  Weak fairness is enough here, since what moves is a relay with its own coil.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TypeVar

from contactlogic.sequence.space import Space

__all__ = ["endless", "first_trap", "traps"]

S = TypeVar("S")

_LISTED = 4096  # states at rest listed at a time: there may be very many
_WALK = 8  # moves per column made at random-like choice before a seed is taken


def traps(space: Space[S], within: S | None = None) -> Iterator[S]:
    """Every terminal strongly connected component of `within`, which no move leaves.

    States at rest come first, ascending; then the others in the order in which they are found.
    """
    region = space.everything() if within is None else within
    resting = space.without(region, space.pre(space.everything()))
    if not space.none(resting):
        region = space.without(region, space.backward(resting))
    while not space.none(resting):
        some = space.listing(resting, _LISTED)
        for state in some:
            yield space.of((state,))
        resting = space.without(resting, space.of(some))
    while not space.none(region):
        found = first_trap(space, region)
        yield found
        region = space.without(region, space.backward(found, region))


def first_trap(space: Space[S], within: S) -> S:
    """One terminal strongly connected component of the moves inside a set that is not empty."""
    seed = _walk(space, within, space.pick(within))
    region = within
    while True:
        start = space.of((seed,))
        reached = space.forward(start, region)
        back = space.backward(start, reached)
        beyond = space.without(reached, back)
        if space.none(beyond):
            return reached
        # What the seed reaches and cannot come back from: its traps are traps of `within`.
        region = beyond
        seed = _walk(space, region, space.pick(beyond))


def _walk(space: Space[S], within: S, state: int) -> int:
    """Where a run of some moves ends that takes each column in turn: likely deep in a trap."""
    for step in range(_WALK * space.n):
        onward = [there for there in space.successors(state) if space.has(within, there)]
        if not onward:
            return state
        state = onward[step % len(onward)]
    return state


def endless(space: Space[S], region: S) -> S:
    """States of a region from which some fair run can stay inside for ever; empty if none can.

    A run is unfair if some column may move in every state from some moment on but never does.
    """
    left = space.peel(region).left
    while not space.none(left):
        before = space.count(left)
        for i in range(space.n):
            may = space.both(left, space.movable(i))
            ignored = space.without(may, space.moving(i, left))
            if space.none(ignored):
                continue
            heeding = space.without(left, ignored)
            left = space.peel(space.backward(heeding, left)).left
            if space.none(left):
                return left
        if space.count(left) == before:
            break
    return left
