"""Single runs through a state space: shortest ways into a set, and fair loops, to be shown.

Breadth first, state by state while that is few, by whole sets beyond.
"""

from __future__ import annotations

from itertools import pairwise
from typing import TypeVar

from contactlogic.sequence.space import Space

__all__ = ["fair_loop", "run_into", "shortest_run"]

S = TypeVar("S")

_SINGLY = 20_000  # states followed one by one before whole sets take over
_SET_BITS = 1 << 33  # bits of stored layers at most (1 GiB)


def shortest_run(
    space: Space[S], start: int, goal: S, within: S | None = None
) -> tuple[int, ...] | None:
    """A shortest run from a state into a set, both ends included; the state alone if it is in it.

    Returns:
        None if there is no run inside `within`, or if it would take too much memory to find.
    """
    if space.has(goal, start):
        return (start,)
    parent = {start: start}
    layer = [start]
    while layer and len(parent) <= _SINGLY:
        onward = []
        for state in layer:
            for there in space.successors(state):
                if there in parent or (within is not None and not space.has(within, there)):
                    continue
                parent[there] = state
                if space.has(goal, there):
                    return _trace(parent, start, there)
                onward.append(there)
        layer = onward
    return _run_by_sets(space, start, goal, within) if layer else None


def _trace(parent: dict[int, int], start: int, state: int) -> tuple[int, ...]:
    run = [state]
    while state != start:
        state = parent[state]
        run.append(state)
    return tuple(reversed(run))


def _run_by_sets(space: Space[S], start: int, goal: S, within: S | None) -> tuple[int, ...] | None:
    layers = [space.of((start,))]
    seen = layers[0]
    while space.none(space.both(layers[-1], goal)):
        fresh = space.without(space.post(layers[-1]), seen)
        if within is not None:
            fresh = space.both(fresh, within)
        if space.none(fresh) or (len(layers) << min(space.n, 28)) > _SET_BITS:
            return None
        seen = space.either(seen, fresh)
        layers.append(fresh)
        space.watch.tick("looking for a run", len(layers))
    run = [space.pick(space.both(layers[-1], goal))]
    for layer in reversed(layers[:-1]):
        run.append(next(s for s in sorted(space.predecessors(run[-1])) if space.has(layer, s)))
    return tuple(reversed(run))


def run_into(space: Space[S], trap: S, basin: S, starts: tuple[int, ...]) -> tuple[int, ...]:
    """The shortest run into a trap from the first of some states that can end there.

    Args:
        basin: all states from which some run ends in the trap.

    If none of `starts` can, one move in from outside; where nothing leads in, the trap's lowest
    state by itself.
    """
    for start in starts:
        if space.has(basin, start):
            run = shortest_run(space, start, trap)
            if run is not None:
                return run
    outside = space.without(space.pre(trap), trap)
    if space.none(outside):
        return (space.pick(trap),)
    before = space.pick(outside)
    after = next(s for s in sorted(space.successors(before)) if space.has(trap, s))
    return before, after


def fair_loop(space: Space[S], component: S) -> tuple[int, ...] | None:
    """A loop inside a strongly connected component that neglects no column for ever.

    The states in running order; the last leads back to the first.  None if it is too long to
    find.
    """
    here = first = space.pick(component)
    loop = [first]
    for i in range(space.n):
        if _heeds(space, loop, i):
            continue
        idle = space.without(component, space.movable(i))
        moving = space.both(component, space.moving(i, component))
        run = shortest_run(space, here, space.either(idle, moving), component)
        if run is None:
            return None
        loop += run[1:]
        if not space.has(idle, loop[-1]):
            loop.append(_by_moving(space, loop[-1], i, component))
        here = loop[-1]
    closing: tuple[int, ...] | None
    if here == first and len(loop) > 1:
        return tuple(loop[:-1])
    if here == first:
        onward = next(s for s in space.successors(first) if space.has(component, s))
        closing = shortest_run(space, onward, space.of((first,)), component)
        return None if closing is None else (first, *closing[:-1])
    closing = shortest_run(space, here, space.of((first,)), component)
    return None if closing is None else (*loop, *closing[1:-1])


def _heeds(space: Space[S], loop: list[int], i: int) -> bool:
    """Whether a run has a state in which column `i` may not move, or moves it."""
    turns = pairwise(loop)
    return any((one ^ two) >> i & 1 for one, two in turns) or any(
        not space.has(space.movable(i), state) for state in loop
    )


def _by_moving(space: Space[S], state: int, i: int, component: S) -> int:
    """A state of the component reached by a move of column `i`."""
    return next(
        there
        for there in space.successors(state)
        if (there ^ state) >> i & 1 and space.has(component, there)
    )
