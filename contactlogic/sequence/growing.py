"""Self-starting drives from the listed states alone: constraints grow with every trap they leave.

Where a table of all states is out of reach, each drive is a cover of the listed states in which its
value is wanted (`minimize.listed`), everything else free.  The whole space is then searched for
traps, bit-parallel.  In each trap a state is chosen from which one move more, or one less, would
lead to where the sequence is reached; that drive is listed there too, and the covers are made anew:
counterexample-guided synthesis (Solar-Lezama et al. 2006).  The change that serves most traps goes
first, so that few drives come to look at many relays: a ring ends with one relay that waits for all
others.  Loops that may be run round for ever are broken in the same way.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import islice
from time import monotonic
from typing import TYPE_CHECKING

from contactlogic.ladder.candidates import tree_of_cover
from contactlogic.ladder.recognise import expression
from contactlogic.ladder.tree import Tree
from contactlogic.minimize.cube import Cover
from contactlogic.minimize.listed import Wants, listed_covers
from contactlogic.sequence.drives import FormulaDrives, formula_drive
from contactlogic.sequence.motion import Motion, MoveRules, build_motion
from contactlogic.sequence.prove import move_rules, wanted_sequence
from contactlogic.sequence.recovery import Recovery, Wanted, recover
from contactlogic.sequence.space import Watch
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.traps import traps
from contactlogic.sequence.wants import listed_drives

if TYPE_CHECKING:
    from contactlogic.sequence.bits import Words

__all__ = ["Grown", "grow"]

_ROUNDS = 400
_FEWEST_ROUNDS = 8
_WORK = 1 << 27  # states looked at in all rounds, about
_TRAPS = 48  # looked at in one round
_MEMBERS = 120  # states of one trap looked at


@dataclass(frozen=True)
class Grown:
    """Drives by coil, with the covers they were factored from and what comes of them."""

    trees: Mapping[str, Tree | bool]
    covers: Mapping[str, Cover]
    recovery: Recovery


@dataclass(frozen=True)
class _Fix:
    """Drives to be listed at one state, (relay, value) each, so that `relay` moves there."""

    state: int
    relay: int
    drives: tuple[tuple[int, int], ...]


def grow(
    expansion: Expansion, *, seconds: float | None = None, watch: Watch | None = None
) -> Grown:
    """Drives that do what the sequence wants and, if they can be found, recover.

    Args:
        expansion: unambiguous.
        seconds: wall-clock limit beside that of the work; the drives reached by then come back as
            they are.

    Whether they recover is told by `Grown.recovery`.
    """
    began = monotonic()
    growing = _Growing(expansion, watch or Watch())
    for _ in range(max(_FEWEST_ROUNDS, min(_ROUNDS, _WORK >> growing.n))):
        fixes = growing.fixes()
        if not fixes or (seconds is not None and monotonic() - began > seconds):
            break
        growing.add(fixes)
    return growing.grown()


class _Growing:
    def __init__(self, expansion: Expansion, watch: Watch) -> None:
        self.expansion = expansion
        self.watch = watch
        self.n = len(expansion.columns)
        self.wanted: Wanted = wanted_sequence(expansion)
        self.rules: MoveRules = move_rules(
            expansion.columns, expansion.timing, expansion.inputs, expansion
        )
        self.column = {name: i for i, name in enumerate(expansion.columns)}
        self.listed = {
            self.column[name]: dict(values) for name, values in listed_drives(expansion).items()
        }
        self.inputs = sum(1 << i for i in self.rules.inputs)
        self.moves: dict[int, int] = {}  # relay chosen to move, at states listed further
        self.covers: dict[int, Cover] = {}
        self._cover(list(self.listed))
        self.recovery: Recovery | None = None

    def _cover(self, relays: Sequence[int]) -> None:
        wants = [
            Wants(
                tuple(s for s, value in self.listed[r].items() if value),
                tuple(s for s, value in self.listed[r].items() if not value),
            )
            for r in relays
        ]
        for relay, (best, _) in zip(relays, listed_covers(self.n, wants), strict=True):
            self.covers[relay] = best

    def motion(self) -> Motion:
        names = self.expansion.columns
        drives = {
            names[r]: formula_drive(expression(tree_of_cover(cover), names))
            for r, cover in self.covers.items()
        }
        return build_motion(self.rules, FormulaDrives(names, drives), watch=self.watch)

    def grown(self) -> Grown:
        names = self.expansion.columns
        covers = {names[r]: cover for r, cover in self.covers.items()}
        trees = {name: tree_of_cover(cover) for name, cover in covers.items()}
        return Grown(trees, covers, self.recovery or self._recovery(self.motion()))

    def _recovery(self, motion: Motion) -> Recovery:
        return recover(
            motion,
            self.expansion.columns,
            wanted=self.wanted,
            inputs_return=self.expansion.inputs_return,
            most_traps=_TRAPS,
        )

    def fixes(self) -> list[_Fix]:
        """What to list next; nothing if the drives recover, or nothing can be done."""
        motion = self.motion()
        self.recovery = None
        cycle = motion.of(self.wanted.ends)
        home = motion.backward(cycle)
        outside = motion.without(motion.everything(), home)
        offered: list[list[_Fix]] = []
        for members in self._stuck(motion, outside):
            fixes = [fix for state in members for fix in self._freed(state)]
            onward = [fix for fix in fixes if motion.has(home, fix.state ^ (1 << fix.relay))]
            offered.append(onward or fixes)
        if not offered:
            self.recovery = self._recovery(motion)
            loop = self.recovery.hunting
            if self.recovery.verdict != "hunts" or not loop:
                return []
            offered = [
                [
                    fix
                    for here, there in zip(loop, (*loop[1:], loop[0]), strict=True)
                    for fix in self._turned(here, (here ^ there).bit_length() - 1)
                ]
            ]
        return _chosen(offered)

    def _stuck(self, motion: Motion, outside: Words) -> Iterator[list[int]]:
        """Members of some traps outside, and states at rest where the operator may stop."""
        if not self.expansion.inputs_return and motion.inputs:
            rest = motion.movable(motion.inputs[0])
            for i in motion.inputs[1:]:
                rest = motion.either(rest, motion.movable(i))
            rest = motion.without(rest, motion.of(self.wanted.ways))
            for state in motion.listing(rest, _TRAPS):
                yield [state]
        if motion.none(outside):
            return
        for trap in islice(traps(motion, outside), _TRAPS):
            yield motion.listing(trap, _MEMBERS)

    def _toward(self, state: int) -> list[int]:
        """Relays whose move leads nearer to a listed state with the inputs as they are.

        Once one is chosen for a state it stays so: what is listed then never contradicts itself,
        and since the distance falls with each such move, no trap and no loop can be all of them.
        """
        if state in self.moves:
            return [self.moves[state]]
        near = [there for there in self.wanted.ways if not (state ^ there) & self.inputs]
        if state in near or not near:
            return []
        least = min((state ^ there).bit_count() for there in near)
        differ = {
            r
            for there in near
            if (state ^ there).bit_count() == least
            for r in self.covers
            if (state ^ there) >> r & 1
        }
        return sorted(differ, key=lambda r: (1 - (state >> r & 1), r))  # releases first

    def _freed(self, state: int) -> Iterator[_Fix]:
        """Ways to let a relay move from a state that leads nearer to the sequence."""
        fed = self._fed(state)
        for relay in self._toward(state):
            now = state >> relay & 1
            drives = [(relay, 1 - now)]
            if self._slow(relay, now):  # quick ones would go first
                drives += [
                    (other, state >> other & 1)
                    for other, value in fed.items()
                    if other != relay
                    and value != state >> other & 1
                    and not self._slow(other, state >> other & 1)
                ]
            yield from self._unlisted(state, relay, drives)

    def _turned(self, state: int, mover: int) -> Iterator[_Fix]:
        """Ways to turn a state from a loop's move to one that leads nearer to the sequence."""
        for relay in self._toward(state):
            drives = [(relay, 1 - (state >> relay & 1))]
            if mover in self.covers and mover != relay:
                drives.append((mover, state >> mover & 1))
            yield from self._unlisted(state, relay, drives)

    def _unlisted(
        self, state: int, relay: int, drives: Sequence[tuple[int, int]]
    ) -> Iterator[_Fix]:
        """The fix, without what is listed already; none if that is all."""
        left = tuple(pair for pair in drives if state not in self.listed[pair[0]])
        if left:
            yield _Fix(state, relay, left)

    def _slow(self, relay: int, now: int) -> bool:
        return relay in (self.rules.slow_release if now else self.rules.slow_operate)

    def _fed(self, state: int) -> dict[int, int]:
        """Drives at a state."""
        fed = {}
        for relay, cover in self.covers.items():
            inside = any(state & cube.care == cube.value for cube in cover.cubes)
            fed[relay] = int(inside == (cover.kind == "sop"))
        return fed

    def add(self, fixes: Sequence[_Fix]) -> None:
        changed = set()
        for fix in fixes:
            if self.moves.setdefault(fix.state, fix.relay) != fix.relay:
                continue
            for relay, value in fix.drives:
                self.listed[relay][fix.state] = value
                changed.add(relay)
        self._cover(sorted(changed))


def _chosen(offered: Sequence[Sequence[_Fix]]) -> list[_Fix]:
    """One fix for each trap that has any: fewest drives, then the drive that serves most traps."""
    waiting = []
    for fixes in offered:
        few = min((len(fix.drives) for fix in fixes), default=0)
        waiting.append([fix for fix in fixes if len(fix.drives) == few])
    picked: list[_Fix] = []
    while waiting := [fixes for fixes in waiting if fixes]:
        serves = Counter(key for fixes in waiting for key in {d for f in fixes for d in f.drives})
        best = min(serves, key=lambda key: (-serves[key], key))
        left = []
        for fixes in waiting:
            own = [fix for fix in fixes if best in fix.drives]
            if own:
                picked.append(min(own, key=lambda fix: fix.state))
            else:
                left.append(fixes)
        waiting = left
    return picked
