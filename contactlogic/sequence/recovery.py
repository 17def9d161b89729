"""Recovery: whether a sequencer falls into its cycle from every power-on state.

Exhaustive over all `2**n` states, after the definitions of design.md section 7.  Works on any
state space that keeps the contract of `space`: packed bits (`motion`, `groups`) or decision
diagrams (`symbolic`).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Generic, Literal, TypeVar

from contactlogic.sequence.races import Race, races
from contactlogic.sequence.runs import fair_loop, run_into
from contactlogic.sequence.space import Peeled, Space, Stopped
from contactlogic.sequence.traps import endless, first_trap, traps

__all__ = ["Recovery", "Slowest", "Trap", "Verdict", "Wanted", "recover"]

S = TypeVar("S")

Verdict = Literal["recovers", "hunts", "sticks"]

_ORDERED = 4096  # most states of a trap that are put into running order


@dataclass(frozen=True)
class Wanted:
    """The sequence that is to be recovered.

    Args:
        ways: the next states of each of its states; several where it waits for one of several
            inputs, none where it ends.
        ends: the states it comes to and never leaves, in order: its cycle, or its last state.
    """

    ways: Mapping[int, tuple[int, ...]]
    ends: tuple[int, ...]


@dataclass(frozen=True)
class Trap:
    """One set of states that is never left.

    Args:
        states: its size.
        example: its lowest state.
        wanted: whether it is the wanted cycle.
        reached_from: from how many states, its own included, some run can end in it.
        run: a shortest run into it: from the wanted sequence if that leaks into it, else from
            all relays released, else one move in from outside.
        parked: a state at rest that stays so only because no input ever moves again.
    """

    states: int
    example: int
    wanted: bool
    reached_from: int
    run: tuple[int, ...]
    parked: bool = False


@dataclass(frozen=True)
class Slowest:
    """The most moves that any run takes to enter the cycle, and the lowest state that can."""

    start: int
    moves: int


@dataclass(frozen=True)
class Recovery:
    """What the states of a sequencer come to.

    Args:
        verdict: None if the search was stopped before it was known.
        cycle: the wanted states in order; without a wanted sequence those of the single trap,
            None if it has many or no single order.
        traps: the wanted one first, the others by their lowest state.
        traps_known: how many were found; all there are if `complete`.
        hunting: states of a fair loop outside all traps, in running order.
        stray: a state of the wanted sequence with other ways out than wanted, and its ways out.
        complete: whether every part was worked out to the end.
    """

    columns: tuple[str, ...]
    moves: Literal["single", "together"]
    verdict: Verdict | None
    cycle: tuple[int, ...] | None
    traps: tuple[Trap, ...]
    traps_known: int
    hunting: tuple[int, ...] | None = None
    slowest: Slowest | None = None
    stray: tuple[int, tuple[int, ...]] | None = None
    races: tuple[Race, ...] = ()
    complete: bool = True

    @property
    def states(self) -> int:
        return 1 << len(self.columns)


@dataclass(frozen=True)
class _Kept(Generic[S]):
    """A trap found: its states if they are few, since a whole set takes much memory."""

    states: tuple[int, ...] | None
    whole: S | None

    @staticmethod
    def of(space: Space[S], trap: S) -> _Kept[S]:
        if space.count(trap) <= _ORDERED:
            return _Kept(tuple(space.listing(trap, _ORDERED)), None)
        return _Kept(None, trap)

    def trap(self, space: Space[S]) -> S:
        return self.whole if self.whole is not None else space.of(self.states or ())


@dataclass
class _Found(Generic[S]):
    """What is known so far, kept while the search goes on."""

    kept: list[_Kept[S]] = field(default_factory=list)
    cut: bool = False
    parked: list[int] = field(default_factory=list)
    traps: list[Trap] = field(default_factory=list)
    stray: tuple[int, tuple[int, ...]] | None = None
    peeled: Peeled[S] | None = None
    searched: bool = False
    hunting: tuple[int, ...] | None = None
    hunts: bool | None = None
    races: tuple[Race, ...] = ()


def recover(
    space: Space[S],
    columns: tuple[str, ...],
    *,
    wanted: Wanted | None = None,
    moves: Literal["single", "together"] = "single",
    inputs_return: bool = True,
    most_traps: int = 10_000,
) -> Recovery:
    """The verdict on a state space, with everything that shows why.

    Args:
        wanted: the sequence; without it a single trap counts as the wanted one.
        inputs_return: whether the operator goes on operating the inputs.  If not, a state at
            rest outside the sequence can last for ever and is a trap.
        most_traps: traps looked for; if there are more the recovery is not complete.
    """
    found: _Found[S] = _Found()
    complete = True
    try:
        _search(space, wanted, inputs_return, most_traps, found)
    except Stopped:
        complete = False
    return _conclude(space, columns, wanted, moves, found, complete)


def _search(
    space: Space[S], wanted: Wanted | None, inputs_return: bool, most: int, found: _Found[S]
) -> None:
    parked = None if inputs_return else _parked(space, wanted)
    if wanted is not None:
        found.stray = _stray(space, wanted)
    if wanted is not None and found.stray is None:
        cycle = space.of(wanted.ends)
        found.kept.append(_Kept.of(space, cycle))
        others = space.without(space.everything(), cycle)
        found.peeled = space.peel(others)
        stuck = space.without(others, space.pre(space.everything()))
        if space.none(found.peeled.left) and space.none(stuck) and parked is None:
            found.searched = True
            found.traps = [_whole(space, cycle, True)]
            found.hunts = False
            return
        others = space.without(others, space.backward(cycle))
        _collect(space, others, parked, most, found)
    else:
        _collect(space, space.everything(), parked, most, found)
    found.searched = True
    _describe(space, wanted, most, found)
    if found.cut:
        return
    if found.peeled is None or len(found.kept) + len(found.parked) > 1:
        few = {state for kept in found.kept for state in kept.states or ()}
        outside = space.without(space.everything(), space.of({*few, *found.parked}))
        for kept in found.kept:
            if kept.whole is not None:
                outside = space.without(outside, kept.whole)
        found.peeled = space.peel(outside)
    fair = found.peeled.left
    if not space.none(fair):
        fair = endless(space, fair)
    if space.none(fair):
        found.hunts = False
    else:
        found.hunts = True
        found.hunting = fair_loop(space, first_trap(space, fair))


def _parked(space: Space[S], wanted: Wanted | None) -> S | None:
    """States at rest, outside the sequence, in which an operator may stop for ever."""
    if not space.inputs:
        return None
    rest = space.movable(space.inputs[0])
    for i in space.inputs[1:]:
        rest = space.either(rest, space.movable(i))
    if wanted is not None:
        rest = space.without(rest, space.of(wanted.ways))
    return None if space.none(rest) else rest


def _stray(space: Space[S], wanted: Wanted) -> tuple[int, tuple[int, ...]] | None:
    for state, onward in wanted.ways.items():
        actual = tuple(sorted(space.successors(state)))
        if actual != tuple(sorted(onward)):
            return state, actual
    return None


def _collect(space: Space[S], region: S, parked: S | None, most: int, found: _Found[S]) -> None:
    """Find the traps of a region that no move leaves."""
    if parked is not None:
        found.parked = space.listing(parked, most)
        # An operator who stops in one of these takes every other trap round it apart.
        region = space.without(region, space.backward(parked))
    for trap in traps(space, region):
        if len(found.kept) >= most:
            found.cut = True
            return
        found.kept.append(_Kept.of(space, trap))
        space.watch.tick("finding traps", len(found.kept))


def _whole(space: Space[S], trap: S, wanted: bool) -> Trap:
    """The trap that every state ends in."""
    example = space.pick(trap)
    run = run_into(space, trap, space.everything(), (0,))
    return Trap(space.count(trap), example, wanted, 1 << space.n, run)


def _describe(space: Space[S], wanted: Wanted | None, most: int, found: _Found[S]) -> None:
    """Size, basin and a run for each trap; races where there are several."""
    parked = [_Kept[S]((state,), None) for state in found.parked]
    several = [*found.kept, *parked][:most]
    if len(several) == 1 and not parked:
        only = several[0].trap(space)
        ours = wanted is None or _same(space, only, wanted)
        found.traps = [_whole(space, only, ours)]
        return
    starts = (0,) if found.stray is None else (found.stray[0], 0)
    basins = []
    for number, kept in enumerate(several):
        trap = kept.trap(space)
        basin = space.backward(trap)
        if number < _BASINS:
            basins.append(basin)
        example = space.pick(trap)
        ours = wanted is not None and _same(space, trap, wanted)
        run = run_into(space, trap, basin, starts)
        size = space.count(trap)
        parks = number >= len(found.kept)
        found.traps.append(Trap(size, example, ours, space.count(basin), run, parks))
    found.races = races(space, basins, [trap.example for trap in found.traps])


_BASINS = 8  # basins kept for the races


def _same(space: Space[S], trap: S, wanted: Wanted) -> bool:
    return space.count(trap) == len(set(wanted.ends)) and all(
        space.has(trap, state) for state in wanted.ends
    )


def _conclude(
    space: Space[S],
    columns: tuple[str, ...],
    wanted: Wanted | None,
    moves: Literal["single", "together"],
    found: _Found[S],
    complete: bool,
) -> Recovery:
    known = len(found.kept) + len(found.parked)
    single = found.searched and known == 1 and not (wanted and found.parked)
    verdict: Verdict | None = None
    if found.stray is not None or known > 1 or (found.searched and not single):
        verdict = "sticks"
    elif single and found.hunts is not None:
        verdict = "hunts" if found.hunts else "recovers"
    slowest = None
    if verdict == "recovers" and found.peeled is not None and space.none(found.peeled.left):
        longest = found.peeled
        start = wanted.ends[0] if wanted is not None else found.traps[0].example
        slowest = Slowest(start if longest.last is None else longest.last, longest.rounds)
    cycle = None
    if wanted is not None:
        cycle = wanted.ends
    elif single and found.kept:
        cycle = _in_order(space, found.kept[0])
    listed = sorted(found.traps, key=lambda trap: (not trap.wanted, trap.example))
    return Recovery(
        columns,
        moves,
        verdict,
        cycle,
        tuple(listed),
        known,
        found.hunting,
        slowest,
        found.stray,
        found.races,
        complete and not found.cut,
    )


def _in_order(space: Space[S], kept: _Kept[S]) -> tuple[int, ...] | None:
    """States of a trap in running order from the lowest, None if it has many or no one order."""
    if kept.states is None:
        return None
    first = kept.states[0]
    run = [first]
    while True:
        onward = space.successors(run[-1])
        if len(onward) > 1:
            return None
        if not onward or onward[0] == first:
            return tuple(run)
        run.append(onward[0])
