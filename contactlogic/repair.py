"""The cheapest change of one drive that makes failing drives recover.

Which relays can be helped at all is decided exactly: with every other drive as it is, a state can
be brought home by relay `r` if some choice of `r`'s drive there leads on to a state that can (the
backward fixed point of strong cyclic planning, Cimatti et al. 2003; the choices in different
states do not bear on each other).  Candidates are then all series-parallel formulas of few
contacts that do in the wanted states what is wanted, fewest contacts first, each proved by the
recovery engine; where none of those does it, least covers under constraints that grow with every
trap they leave.  The best few are wired, all drives as one network, and their poles counted.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from heapq import merge
from typing import Any

from contactlogic.algebra import evaluate, to_text
from contactlogic.formula import parse
from contactlogic.job.model import DrivesJob, Job, Load
from contactlogic.job.sequence import state_text
from contactlogic.minimize import covers
from contactlogic.sequence.candidates import contacts_of, formulas, plain_formulas
from contactlogic.sequence.drives import TableDrives
from contactlogic.sequence.groups import GroupMotion
from contactlogic.sequence.mending import mend, wrong_drives
from contactlogic.sequence.motion import Motion, MoveRules, build_motion
from contactlogic.sequence.prove import move_rules, wanted_sequence
from contactlogic.sequence.recovery import Recovery, Wanted, recover
from contactlogic.sequence.space import Watch
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.wants import drive_targets
from contactlogic.synthesis import wire
from contactlogic.truth import Target, all_rows

__all__ = ["MOST_COLUMNS", "NoRepair", "Repair", "cheapest_repair", "repair_json"]

MOST_COLUMNS = 10
"""Most relays and inputs up to which every drive that could repair is considered."""


_WIRED = 5  # columns up to which poles are counted on wiring; above, one for each contact
_EFFORT = 4  # windows for each wiring
_CANDIDATES = 3  # of fewest contacts that are wired
_VISITS = 1 << 20  # states looked at for the formulas of one relay, about
_PROOFS = 40  # most formulas proved for one relay
_ROUNDS = 30  # of growing constraints
_COVER_SECONDS = 5.0


@dataclass(frozen=True)
class Repair:
    """One drive changed so that everything recovers.

    Args:
        before: the drive as it was.
        after: the drive to wire instead.
        poles_before: poles of all drives as one network, as they are.
        poles_after: the same with the change.
        wired: whether the poles were counted on wiring found; if not, they are what the
            formulas take at most, one for each contact.
        cheapest: whether formulas were tried by rising number of contacts; if not, this is the
            best found.
    """

    relay: str
    before: str
    after: str
    poles_before: int
    poles_after: int
    wired: bool
    cheapest: bool = True


@dataclass(frozen=True)
class NoRepair:
    """Why there is no change of a single drive to propose."""

    why: str


@dataclass(frozen=True)
class _Candidate:
    contacts: int
    column: int
    text: str
    table: int


def repair_json(repair: Repair | NoRepair) -> dict[str, Any]:
    """The repair as it stands beside a recovery."""
    if isinstance(repair, NoRepair):
        return {"relay": None, "why": repair.why}
    return {
        "relay": repair.relay,
        "before": repair.before,
        "after": repair.after,
        "poles_before": repair.poles_before,
        "poles_after": repair.poles_after,
        "poles_are": "wired" if repair.wired else "at most",
        "cheapest": repair.cheapest,
    }


def cheapest_repair(
    job: DrivesJob,
    recovery: Recovery,
    expansion: Expansion | None = None,
    *,
    watch: Watch | None = None,
) -> Repair | NoRepair:
    """The change of one drive that makes everything recover with the fewest poles in all.

    Args:
        job: the drives.
        recovery: what was found of them; its moves are those to recover under.
        expansion: the sequence they are meant for.  Without one the largest trap is kept.
    """
    if len(job.columns) > MOST_COLUMNS:
        return _mended(job, recovery, expansion, watch or Watch())
    case = _Case(job, recovery, expansion, watch or Watch())
    if isinstance(case.columns, str):
        return NoRepair(case.columns)
    candidates: list[_Candidate] = []
    helpless: list[tuple[int, int]] = []
    for column in case.columns:
        case.watch.tick("looking for a repair", column)
        choice = case.way_home(column)
        if isinstance(choice, int):
            helpless.append((column, choice))
            continue
        candidates += case.candidates(column, choice)
    if not candidates:
        return NoRepair(case.why_none(helpless))
    candidates.sort(key=lambda c: (c.contacts, c.column, c.text))
    before = case.poles({})
    counted: list[tuple[int, _Candidate]] = []
    for candidate in candidates[:_CANDIDATES]:
        case.watch.tick("wiring repairs", len(counted))
        counted.append((case.poles({candidate.column: candidate}), candidate))
    after, best = min(counted, key=lambda one: one[0])
    name = job.columns[best.column]
    return Repair(name, job.formulas[name], best.text, before, after, len(job.columns) <= _WIRED)


def _mended(
    job: DrivesJob, recovery: Recovery, expansion: Expansion | None, watch: Watch
) -> Repair | NoRepair:
    """The best change found of one drive, among many columns."""
    found = mend(job, recovery, expansion, watch)
    if isinstance(found, str):
        return NoRepair(found)
    name, cover = found
    before = sum(contacts_of(drive) for drive in job.drives.values())
    after = before - contacts_of(job.drives[name]) + cover.literals
    text = cover.to_text(job.columns)
    return Repair(name, job.formulas[name], text, before, after, False, False)


class _Case:
    """One set of drives with what is wanted of it.

    `columns` are the relays whose drive may be changed, or the reason why none can help.
    """

    def __init__(
        self, job: DrivesJob, recovery: Recovery, expansion: Expansion | None, watch: Watch
    ) -> None:
        self.job = job
        self.watch = watch
        self.n = len(job.columns)
        self.moves = recovery.moves
        self.formulas = list(formulas(job.columns))
        self._before: dict[int, list[tuple[int, int]]] = {}
        self.inputs_return = expansion is None or expansion.inputs_return
        self.rules: MoveRules = move_rules(job.columns, job.timing, job.inputs, expansion)
        self.tables = [
            evaluate(job.drives[name], job.columns) if name in job.drives else None
            for name in job.columns
        ]
        self.columns: Sequence[int] | str = [
            i for i, table in enumerate(self.tables) if table is not None
        ]
        if expansion is not None:
            self.wanted = wanted_sequence(expansion)
            self.fixed = {
                job.columns.index(name): target for name, target in drive_targets(expansion).items()
            }
            wrong = [i for i in self.columns if self._wrong(i)]
            if len(wrong) > 1:
                self.columns = wrong_drives([job.columns[i] for i in wrong])
            elif wrong:
                self.columns = wrong
        else:
            self.wanted = self._largest(recovery)
            self.fixed = {i: self._kept(i) for i in self.columns}

    def _wrong(self, column: int) -> bool:
        target = self.fixed[column]
        return bool(((self.tables[column] or 0) ^ target.on) & ~target.free)

    def _largest(self, recovery: Recovery) -> Wanted:
        """The largest trap, which the other states shall come to."""
        motion = self.motion(self.tables)
        lasting = [trap for trap in recovery.traps if not trap.parked] or recovery.traps
        largest = max(lasting, key=lambda trap: (trap.states, -trap.example))
        states = motion.listing(motion.forward(motion.of((largest.example,))), largest.states)
        return Wanted({s: tuple(motion.successors(s)) for s in states}, tuple(states))

    def _kept(self, column: int) -> Target:
        """The drive as it is where another would change the moves of a wanted state."""
        table = self.tables[column] or 0
        held = 0
        for state, onward in self.wanted.ways.items():
            other = set(self._onward(state, column, 1 - (table >> state & 1)))
            if self.moves == "together" or other != set(onward):
                held |= 1 << state
        return Target(self.n, table & held, all_rows(self.n) & ~held)

    def motion(self, tables: Sequence[int | None]) -> Motion | GroupMotion:
        single = build_motion(self.rules, TableDrives(self.n, tuple(tables)))
        return single if self.moves == "single" else GroupMotion(single)

    def prove(self, column: int, table: int) -> Recovery:
        """What comes of the drives with one of them changed."""
        tables = list(self.tables)
        tables[column] = table
        return recover(
            self.motion(tables),
            self.job.columns,
            wanted=self.wanted,
            moves=self.moves,
            inputs_return=self.inputs_return,
        )

    def way_home(self, column: int) -> dict[int, int] | int:
        """For each state a drive of one relay that leads a move nearer to the wanted states.

        Returns:
            The drive by state; or, if some states cannot be led home whatever it is, the lowest.
        """
        target = self.fixed[column]
        before: dict[int, list[tuple[int, int]]] = {state: [] for state in range(1 << self.n)}
        self._before = before
        for state in range(1 << self.n):
            free = target.free >> state & 1
            for drive in (0, 1) if free else (target.on >> state & 1,):
                for onward in self._onward(state, column, drive):
                    before[onward].append((state, drive))
        choice = self._homeward(None)
        stranded = [s for s in range(1 << self.n) if s not in choice]
        return stranded[0] if stranded else choice

    def _homeward(self, table: int | None) -> dict[int, int]:
        """States that some run leads home, by the drive that does it; any drive if none is given.

        `_before` lists for each state what leads to it in one move, and with which drive.
        """
        choice = dict.fromkeys(self.wanted.ends, -1)
        waiting = sorted(choice)
        while waiting:  # breadth first, so that the way is a shortest one
            following = []
            for here in waiting:
                for state, drive in self._before[here]:
                    if state in choice or (table is not None and (table >> state & 1) != drive):
                        continue
                    choice[state] = drive
                    following.append(state)
            waiting = following
        return choice

    def _onward(self, state: int, column: int, drive: int) -> Iterator[int]:
        """States after one move, with a drive of one relay chosen."""
        quick: list[int] = []
        slow: list[int] = []
        for i, table in enumerate(self.tables):
            if table is None:
                continue
            now = state >> i & 1
            if (drive if i == column else table >> state & 1) != now:
                late = i in (self.rules.slow_release if now else self.rules.slow_operate)
                (slow if late else quick).append(i)
        movers: Sequence[int] = quick or slow
        if not movers:
            movers = sorted(self.rules.waiting.get(state, self.rules.inputs))
        return (state ^ (1 << i) for i in movers)

    def candidates(self, column: int, choice: Mapping[int, int]) -> list[_Candidate]:
        """Changes of one drive that recover, of the fewest contacts found."""
        target = self.fixed[column]
        found: list[_Candidate] = []
        looked = proved = 0
        seen = {self.tables[column]}
        plain = plain_formulas(target, self.job.columns)
        # the plain ones first among equals: there are few, and they are what is usual
        for contacts, table, formula in merge(plain, self.formulas, key=lambda one: one[0]):
            if found and contacts > found[0].contacts:
                break
            if (table ^ target.on) & ~target.free or table in seen:
                continue
            seen.add(table)
            looked += 1
            self.watch.tick("looking for a repair", looked)
            if looked << self.n > _VISITS or proved == _PROOFS:
                break
            if len(self._homeward(table)) < 1 << self.n:
                continue
            proved += 1
            if self.prove(column, table).verdict == "recovers":
                found.append(_Candidate(contacts, column, to_text(formula), table))
                if len(found) == _CANDIDATES:
                    break
        return found or self._by_covers(column, choice)

    def _by_covers(self, column: int, choice: Mapping[int, int]) -> list[_Candidate]:
        """Least covers of what is fixed, with more fixed wherever states cannot come home."""
        target = self.fixed[column]
        for turn in range(_ROUNDS):
            self.watch.tick("looking for a repair", turn)
            cover = covers(target, seconds=_COVER_SECONDS)[0]
            text = cover.to_text(self.job.columns)
            table = evaluate(parse(text), self.job.columns)
            home = self._homeward(table)
            bad = [state for state in choice if state not in home]
            if not bad:
                found = self.prove(column, table)
                if found.verdict == "recovers":
                    return [_Candidate(cover.literals, column, text, table)]
                bad = list(found.hunting or ())
            loose = [s for s in sorted(choice) if target.free >> s & 1 and choice[s] >= 0]
            fresh = [s for s in loose if s in bad] or loose
            if not fresh:
                break
            for state in fresh:
                bit = 1 << state
                on = target.on | bit if choice[state] else target.on
                target = replace(target, on=on, free=target.free & ~bit)
        return []

    def why_none(self, helpless: Sequence[tuple[int, int]]) -> str:
        """Why nothing is proposed, given relays that can help no state of those named."""
        kept = "the sequence" if self.job.table is not None else "the largest trap"
        if self.moves == "single" and len(helpless) == len(self.columns):
            column, state = helpless[0]
            others = "; the other relays are no better" if len(helpless) > 1 else ""
            return (
                f"no change of one drive alone repairs it: with any drive of "
                f"{self.job.columns[column]}, state {state_text(state, self.n)} cannot be led to "
                f"{kept}{others}"
            )
        return f"no change of one drive alone was found that brings every run to {kept}"

    def poles(self, changed: Mapping[int, _Candidate]) -> int:
        """Poles of all drives as one network, with the changes made."""
        loads, contacts = [], 0
        for i, name in enumerate(self.job.columns):
            table = self.tables[i]
            if table is None:
                continue
            if i in changed:
                table = changed[i].table
                contacts += changed[i].contacts
            else:
                contacts += contacts_of(self.job.drives[name])
            loads.append(Load(name, Target(self.n, table), "coil"))
        if self.n > _WIRED:
            return contacts
        slow = {*self.job.timing.slow_release, *self.job.timing.slow_operate}
        asked = Job(
            self.job.title,
            self.job.columns,
            tuple(loads),
            all_rows(self.n),
            file=self.job.file,
            stored=frozenset(slow),
        )
        result = wire(asked, form="bridge", effort=_EFFORT, workers=1)
        return len(result.designs[0].network.poles)
