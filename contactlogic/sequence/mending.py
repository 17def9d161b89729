"""One drive made anew so that everything recovers, the other drives as they are.

For systems whose states are too many to look at one by one.  The new drive is a cover of the states
in which it must be as wanted, everything else free (`minimize.listed`); the whole space is searched
for traps, bit-parallel, and in each trap a state is listed with the drive that lets a run leave it,
until none is left or nothing can be listed: as in `growing`, but with one drive to change, so that
not being able to is no proof.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import islice
from typing import Any

from contactlogic.job.model import DrivesJob
from contactlogic.ladder.candidates import tree_of_cover
from contactlogic.ladder.recognise import expression
from contactlogic.minimize.cube import Cover
from contactlogic.minimize.listed import Wants, listed_covers
from contactlogic.sequence.candidates import contacts_of
from contactlogic.sequence.drives import FormulaDrives, formula_drive
from contactlogic.sequence.motion import Motion, MoveRules, build_motion
from contactlogic.sequence.prove import move_rules, wanted_sequence
from contactlogic.sequence.recovery import Recovery, Wanted, recover
from contactlogic.sequence.space import Watch
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.traps import traps
from contactlogic.sequence.wants import listed_drives

__all__ = ["MOST_MENDED", "Mending", "mend", "mended_drive", "wrong_drives"]

MOST_MENDED = 24
"""Most relays and inputs for which a repair is looked for."""

_WORK = 1 << 28  # states looked at for one relay, about
_ROUNDS = 25
_KEPT = 4096  # most states of a trap that is kept as it is

_TRAPS = 24  # looked at in one round
_MEMBERS = 200  # states of one trap looked at

Drive = Callable[[Mapping[str, Any]], Any]


@dataclass(frozen=True)
class Mending:
    """What is to recover, and under which rules.

    Args:
        columns: relays and inputs.
        drives: all drives as they are, as for `sequence.prove.prove_drives`.
        wanted: the states that all runs shall come to.
    """

    columns: tuple[str, ...]
    drives: Mapping[str, Drive]
    rules: MoveRules
    wanted: Wanted
    inputs_return: bool


def mended_drive(
    case: Mending, relay: str, kept: Mapping[int, int], *, rounds: int, watch: Watch
) -> Cover | None:
    """A drive of one relay with which everything recovers, None if none was found.

    Args:
        kept: states in which the drive must have the given value.
        rounds: most searches of the whole space.
    """
    one = _One(case, relay, dict(kept), watch)
    for _ in range(rounds):
        cover = one.cover()
        motion = one.motion(cover)
        listed = one.failing(motion)
        if listed is None:
            return cover
        if not listed:
            return None
        one.kept.update(listed)
    return None


def mend(
    job: DrivesJob, recovery: Recovery, expansion: Expansion | None, watch: Watch
) -> tuple[str, Cover] | str:
    """The relay whose drive made anew costs least, and that drive; or why there is none.

    Args:
        recovery: what was found of the drives, with single moves.
        expansion: the sequence they are meant for.  Without one the largest trap is kept.
    """
    n = len(job.columns)
    if n > MOST_MENDED or recovery.moves == "together":
        return (
            "among so many relays and inputs one is looked for with single moves alone, up to "
            f"{MOST_MENDED} of them"
        )
    rules = move_rules(job.columns, job.timing, job.inputs, expansion)
    drives = {name: formula_drive(drive) for name, drive in job.drives.items()}
    if expansion is not None:
        wanted, kept = wanted_sequence(expansion), listed_drives(expansion)
    else:
        motion = build_motion(rules, FormulaDrives(job.columns, drives), watch=watch)
        largest = max(recovery.traps, key=lambda trap: (trap.states, -trap.example))
        if largest.states > _KEPT:
            return f"the largest trap has {largest.states} states: too many to keep to"
        states = motion.listing(motion.forward(motion.of((largest.example,))), largest.states)
        wanted = Wanted({s: tuple(motion.successors(s)) for s in states}, tuple(states))
        kept = {
            name: {s: _value(job.columns, drive, s) for s in states}
            for name, drive in drives.items()
        }
    wrong = [
        name
        for name, drive in drives.items()
        if any(_value(job.columns, drive, s) != value for s, value in kept[name].items())
    ]
    if len(wrong) > 1:
        return wrong_drives(wrong)
    inputs_return = expansion is None or expansion.inputs_return
    case = Mending(job.columns, drives, rules, wanted, inputs_return)
    rounds = max(1, min(_ROUNDS, _WORK >> n))
    found: list[tuple[int, int, str, Cover]] = []
    for number, name in enumerate(wrong or drives):
        watch.tick("looking for a repair", number)
        cover = mended_drive(case, name, kept[name], rounds=rounds, watch=watch)
        if cover is not None:
            change = cover.literals - contacts_of(job.drives[name])
            found.append((change, number, name, cover))
    if found:
        _, _, name, cover = min(found, key=lambda one: one[:2])
        return name, cover
    what = "the sequence" if expansion is not None else "the largest trap"
    return f"no change of one drive alone was found that brings every run to {what}"


def _value(columns: Sequence[str], drive: Drive, state: int) -> int:
    """A drive at one state."""
    value: int = drive({name: state >> i & 1 for i, name in enumerate(columns)}) & 1
    return value


def wrong_drives(names: Sequence[str]) -> str:
    """What to say of several drives that are wrong in the sequence itself."""
    return (
        f"the drives of {' and '.join(names)} are wrong in states of the sequence, so that no "
        "change of one drive alone repairs it"
    )


class _One:
    def __init__(self, case: Mending, relay: str, kept: dict[int, int], watch: Watch) -> None:
        self.case = case
        self.relay = relay
        self.column = case.columns.index(relay)
        self.kept = kept
        self.watch = watch

    def cover(self) -> Cover:
        on = tuple(state for state, value in self.kept.items() if value)
        off = tuple(state for state, value in self.kept.items() if not value)
        return listed_covers(len(self.case.columns), [Wants(on, off)])[0][0]

    def motion(self, cover: Cover) -> Motion:
        names = self.case.columns
        new = formula_drive(expression(tree_of_cover(cover), names))
        source = FormulaDrives(names, {**self.case.drives, self.relay: new})
        return build_motion(self.case.rules, source, watch=self.watch)

    def failing(self, motion: Motion) -> dict[int, int] | None:
        """States to list further, with the drive there; None if everything recovers."""
        case = self.case
        cycle = motion.of(case.wanted.ends)
        home = motion.backward(cycle)
        outside = motion.without(motion.everything(), home)
        if motion.none(outside):
            found = recover(
                motion, case.columns, wanted=case.wanted, inputs_return=case.inputs_return
            )
            if found.verdict == "recovers":
                return None
            groups: list[Sequence[int]] = [found.hunting] if found.hunting else []
            groups += [(trap.example,) for trap in found.traps if not trap.wanted]
        else:
            some = islice(traps(motion, outside), _TRAPS)
            groups = [motion.listing(trap, _MEMBERS) for trap in some]
        listed: dict[int, int] = {}
        for members in groups:
            if any(state in listed for state in members):
                continue
            for state, value in self._turns(motion, members, home):
                listed[state] = value
                break
        return listed

    def _turns(
        self, motion: Motion, members: Sequence[int], home: Any
    ) -> Iterator[tuple[int, int]]:
        """States whose drive, turned to what the nearest wanted state has, changes the moves.

        Those come first from which every move then leads out, to where the wanted states are
        reached.
        """
        inside = set(members)
        later = []
        for state in members:
            now = self._now(motion, state)
            value = self._nearest(state) >> self.column & 1
            if state in self.kept or value == now:
                continue
            onward = self._onward(state, value)
            if not inside.intersection(onward) and all(motion.has(home, s) for s in onward):
                yield state, value
            elif sorted(onward) != sorted(motion.successors(state)):
                later.append((state, value))
        yield from later

    def _nearest(self, state: int) -> int:
        return min(self.case.wanted.ways, key=lambda there: ((state ^ there).bit_count(), there))

    def _now(self, motion: Motion, state: int) -> int:
        """The drive at a state, read off the moves: as `_onward` with it leads on."""
        actual = sorted(motion.successors(state))
        return int(sorted(self._onward(state, 1)) == actual)

    def _onward(self, state: int, value: int) -> list[int]:
        """States after one move, with the drive chosen."""
        names, rules = self.case.columns, self.case.rules
        at = {name: state >> i & 1 for i, name in enumerate(names)}
        quick: list[int] = []
        slow: list[int] = []
        for i, name in enumerate(names):
            if name not in self.case.drives:
                continue
            fed = value if i == self.column else self.case.drives[name](at) & 1
            if fed != at[name]:
                late = i in (rules.slow_release if at[name] else rules.slow_operate)
                (slow if late else quick).append(i)
        movers = quick or slow or sorted(rules.waiting.get(state, rules.inputs))
        return [state ^ (1 << i) for i in movers]
