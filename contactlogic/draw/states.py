"""The state graph: what every state of a sequencer leads to.

The wanted cycle is a ring, read clockwise from the top; the states that recover stand outside it
in layers, one for each move they are away.  Traps and hunting loops are islands of their own,
under black plates.  Up to `MOST_DRAWN` states all are drawn; above that the cycle, the traps, a
hunting loop and the shortest runs into them.  Positions come from `state_places`, arrows from
`state_arrows`; the text is for `render`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from itertools import groupby, pairwise
from typing import TYPE_CHECKING, Literal

if TYPE_CHECKING:
    from contactlogic.sequence.recovery import Recovery, Trap

__all__ = ["MOST_DRAWN", "Group", "Scene", "choose", "state_graph"]

MOST_DRAWN = 64
"""Most states of which all are drawn."""

_MOST_MEMBERS = 40  # most states drawn of one trap or loop of a larger state space
_ENDS = 8  # states drawn at each end of a ring that is too long
_MOST_SEARCHED = 4000  # states looked at for the run from the slowest start

Kind = Literal["cycle", "trap", "loop", "single"]
Successors = Callable[[int], Sequence[int]]


@dataclass(frozen=True)
class Group:
    """States drawn as an island: the cycle, a trap, a hunting loop.

    Args:
        states: in order round the ring; a negative number stands for states left out.
        size: how many states it has, drawn or not.
        basin: from how many states some run can end in it, None if not known.
        parked: stays only because no input ever moves again.
    """

    kind: Kind
    states: tuple[int, ...]
    size: int
    basin: int | None = None
    parked: bool = False


@dataclass
class Scene:
    """What is drawn: groups, the layers of states outside each, and the moves between them."""

    groups: list[Group] = field(default_factory=list)
    layers: list[list[list[int]]] = field(default_factory=list)
    moves: list[tuple[int, int]] = field(default_factory=list)
    left_out: dict[int, int] = field(default_factory=dict)  # stand-in -> states it stands for
    trapped: frozenset[int] = frozenset()  # in a trap that holds the wanted cycle too
    loop: frozenset[tuple[int, int]] = frozenset()

    @property
    def states(self) -> list[int]:
        """Every state drawn, stand-ins excepted, group by group."""
        found = [s for group in self.groups for s in group.states if s >= 0]
        return found + [s for layers in self.layers for layer in layers for s in layer]


def state_graph(
    recovery: Recovery,
    successors: Successors,
    *,
    title: str,
    fingerprint: str,
    slow: Callable[[str, bool], bool] | None = None,
    inputs: Sequence[str] = (),
    sequence: Mapping[int, Sequence[int]] | None = None,
) -> str:
    """The state graph of a recovery, as text in the DOT language for `render`.

    Args:
        successors: the next states of a state (`Space.successors` of what was checked).
        title: any text; shown on one line and shortened where it is too long.
        fingerprint: tells this design from others.
        slow: whether a relay's next move is slow, given whether it is operated now
            (`Timing.slow`); all are quick where not given.
        inputs: columns moved from outside.
        sequence: next states of each state of the wanted sequence (`wants.ways`), so that the
            states before its cycle are marked too.
    """
    from contactlogic.draw.state_sheet import Facts, scene_text

    scene = choose(recovery, successors)
    facts = Facts(title, fingerprint, slow or _never_slow, tuple(inputs), sequence or {})
    return scene_text(recovery, scene, facts)


def _never_slow(_relay: str, _operated: bool) -> bool:
    return False


# What is drawn --------------------------------------------------------------------------------


def choose(recovery: Recovery, successors: Successors) -> Scene:
    """States, groups and layers to draw."""
    scene = Scene()
    whole = recovery.states <= MOST_DRAWN
    taken: set[int] = set()
    if recovery.cycle is not None:
        wanted = next((trap for trap in recovery.traps if trap.wanted), None)
        basin = wanted.reached_from if wanted else None
        cycle = recovery.cycle
        scene.groups.append(Group("cycle", cycle, len(cycle), basin))
        taken.update(cycle)
    for trap in recovery.traps:
        if trap.wanted and recovery.cycle is not None:
            continue
        members = _members(trap, successors, recovery.states if whole else _MOST_MEMBERS)
        if taken.intersection(members):
            scene.trapped |= frozenset(members)
            continue
        kind: Kind = "cycle" if trap.wanted else "trap"
        scene.groups.append(Group(kind, members, trap.states, trap.reached_from, trap.parked))
        taken.update(members)
    if recovery.hunting:
        run = recovery.hunting
        scene.loop = frozenset(pairwise((*run, run[0])))
        states = tuple(dict.fromkeys(run))
        if not whole:
            states = states[:_MOST_MEMBERS]
        if not taken.intersection(states):
            scene.groups.append(Group("loop", states, len(set(run))))
            taken.update(states)
    drawn = set(range(recovery.states)) if whole else taken | _on_runs(recovery, successors)
    if recovery.stray is not None:
        drawn.update((recovery.stray[0], *recovery.stray[1]))
    scene.moves = [
        (here, there) for here in sorted(drawn) for there in successors(here) if there in drawn
    ]
    if not whole:
        drawn -= _leave_out(scene)
    _lay(scene, drawn)
    return scene


def _members(trap: Trap, successors: Successors, most: int) -> tuple[int, ...]:
    """States of a trap in an order that follows its moves as far as it can, at most `most`."""
    if trap.parked:
        return (trap.example,)
    order: dict[int, None] = {}
    waiting = [trap.example]
    while waiting and len(order) < most:
        state = waiting.pop()
        if state not in order:
            order[state] = None
            waiting += sorted(successors(state), reverse=True)
    if len(order) < trap.states and trap.run and trap.run[-1] not in order:
        order[trap.run[-1]] = None
    return tuple(order)


def _on_runs(recovery: Recovery, successors: Successors) -> set[int]:
    """States on the shortest runs into the traps, and from the slowest start into the cycle."""
    found = {state for trap in recovery.traps for state in trap.run}
    if recovery.slowest is None or recovery.cycle is None:
        return found
    goal = set(recovery.cycle)
    came: dict[int, int] = {recovery.slowest.start: recovery.slowest.start}
    waiting = [recovery.slowest.start]
    for state in waiting:
        if state in goal:
            while came[state] != state:
                found.add(state)
                state = came[state]
            found.add(state)
            break
        if len(came) > _MOST_SEARCHED:
            break
        for there in successors(state):
            if there not in came:
                came[there] = state
                waiting.append(there)
    return found


def _leave_out(scene: Scene) -> set[int]:
    """Replace stretches of long rings, to which nothing leads, by stand-ins; what was left out."""
    gone: set[int] = set()
    for place, group in enumerate(scene.groups):
        ring = list(group.states)
        if len(ring) > _MOST_MEMBERS:
            ring = _with_stand_ins(scene, ring, _kept(scene, ring))
            gone.update(set(group.states).difference(ring))
        elif group.size > len(ring):
            ring.append(_stand_in(scene, group.size - len(ring)))
        scene.groups[place] = replace(group, states=tuple(ring))
    scene.moves = [m for m in scene.moves if m[0] not in gone and m[1] not in gone]
    return gone


def _stand_in(scene: Scene, count: int) -> int:
    number = -1 - len(scene.left_out)
    scene.left_out[number] = count
    return number


def _kept(scene: Scene, ring: Sequence[int]) -> set[int]:
    """States of a long ring that are drawn: both ends of the list, and where moves come or go."""
    inside = set(ring)
    gates = {
        state
        for move in scene.moves
        for state in move
        if state in inside and (move[0] in inside) != (move[1] in inside)
    }
    keep = {*ring[:_ENDS], *ring[-_ENDS:]}
    for i, state in enumerate(ring):
        if state in gates:
            keep.update((ring[i - 1], state, ring[(i + 1) % len(ring)]))
    return keep


def _with_stand_ins(scene: Scene, ring: Sequence[int], keep: set[int]) -> list[int]:
    shown: list[int] = []
    for kept, stretch in groupby(ring, keep.__contains__):
        states = list(stretch)
        if kept or len(states) <= 2:
            shown += states
        else:
            shown.append(_stand_in(scene, len(states)))
    return shown


def _lay(scene: Scene, drawn: set[int]) -> None:
    """Share the other states out to the groups, by the fewest moves to one of them."""
    before: dict[int, list[int]] = {}
    for here, there in scene.moves:
        before.setdefault(there, []).append(here)
    home = {state: k for k, group in enumerate(scene.groups) for state in group.states}
    scene.layers = [[] for _ in scene.groups]
    frontier = list(home)
    while frontier:
        reached: dict[int, int] = {}
        for state in frontier:
            for other in before.get(state, ()):
                if other not in home:
                    reached[other] = min(home[state], reached.get(other, home[state]))
        for k in sorted(set(reached.values())):
            scene.layers[k].append(sorted(state for state in reached if reached[state] == k))
        home.update(reached)
        frontier = sorted(reached)
    for state in sorted(drawn.difference(home)):  # of a search that was stopped early
        scene.groups.append(Group("single", (state,), 1))
        scene.layers.append([])
