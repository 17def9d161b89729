"""The fewest poles there are, by SAT (design.md section 8.1).

P is raised from a proved lower bound.  At each P the question splits into cases: one for every
permitted grouping of loads on nets and every way to share P poles out over the relays (up to
relays that the wants cannot tell apart).  A case has as many inner nets as P poles can have.
Cases are asked in turn with growing conflict budgets, so that an easy answer is found before a
hard refutation is finished.  P - 1 is refuted once each of its cases is.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from random import Random
from time import monotonic

from contactlogic.network import Network
from contactlogic.search.assemble import assemble
from contactlogic.search.bounds import least_by_kind, least_poles
from contactlogic.search.encoding import Encoding, Ends, Kind
from contactlogic.search.problem import (
    Grouping,
    Problem,
    compositions,
    groupings,
    interchangeable,
    negations,
    rows_of_grouping,
)
from contactlogic.search.rows import Rows, merged
from contactlogic.search.solver import SOLVER, Session, Status
from contactlogic.search.symmetry import break_symmetry, order_throws, strike_waste

__all__ = ["ExactResult", "exact"]

_FIRST_CONFLICTS = 2000
_EAGER_ROWS = 16  # above this, rows enter the clauses once a candidate gets them wrong


@dataclass(frozen=True)
class ExactResult:
    """Outcome of an exact search.

    Args:
        network: a network of the least size reached, proved row by row; None if none was found.
        at_least: poles (contacts, for that objective) that every network needs; proved.
        proven: whether the network has no more than that.
        feasible: False if proved that no network at all keeps the budgets.
        cases: cases asked in all.
        conflicts: conflicts of the solver in all.
    """

    network: Network | None
    at_least: int
    proven: bool
    feasible: bool = True
    cases: int = 0
    conflicts: int = 0


def exact(
    problem: Problem,
    *,
    seconds: float | None = None,
    seed: int = 0,
    most: int | None = None,
    known: Network | None = None,
    solver: str = SOLVER,
) -> ExactResult:
    """Search for a network with the fewest poles and prove that there is none with fewer.

    Args:
        seconds: wall-clock budget; None for no limit.
        seed: order in which cases are asked.
        most: stop once every network with at most so many poles is refuted (for a size already
            known, pass one less); the result then has no network but `at_least = most + 1`.
        known: a correct network (from windows, say); only smaller ones are searched for, and it
            is the answer if there are none or the time runs out.
        solver: name of the python-sat solver.

    Raises:
        ProofFailed: a network found fails its proof by `contactlogic.check`.
    """
    deadline = None if seconds is None else monotonic() + seconds
    ways = list(groupings(problem))
    if not ways[0].groups:
        return ExactResult(assemble(problem, ways[0], ()), 0, True)
    poles = min(least_poles(problem, way) for way in ways)
    random = Random(seed)
    cases = conflicts = 0
    size = None if known is None else _size(problem, known)
    while most is None or poles <= most:
        if size is not None and poles >= size:
            return ExactResult(known, size, True, True, cases, conflicts)
        if _over_budget(problem, poles):
            return ExactResult(None, poles, False, False, cases, conflicts)
        level = [case for way in ways for case in _cases(problem, way, poles)]
        random.shuffle(level)
        cases += len(level)
        answer = _ask(level, deadline, solver)
        conflicts += answer.conflicts
        if answer.case is not None:
            network = assemble(problem, answer.case.way, answer.poles)
            return ExactResult(network, poles, True, True, cases, conflicts)
        if answer.status == "unknown":
            return ExactResult(known, poles, False, True, cases, conflicts)
        poles += 1
    return ExactResult(known, poles, False, True, cases, conflicts)


def _size(problem: Problem, network: Network) -> int:
    """What the objective counts."""
    if problem.objective == "poles":
        return len(network.poles)
    return sum(1 for _ in network.contacts())


def _over_budget(problem: Problem, poles: int) -> bool:
    return sum(_most_by_kind(problem, poles).values()) < poles


def _most_by_kind(problem: Problem, poles: int) -> dict[Kind, int]:
    most = {}
    for kind in problem.kinds:
        name = problem.relays[kind.relay]
        limit = problem.budgets.get(name, poles) if problem.objective == "poles" else poles
        if name in problem.separate:
            have = problem.separate[name]
            limit = min(limit, have.makes if kind.form == "A" else have.breaks)
        most[kind] = limit
    return most


@dataclass(frozen=True)
class _Case:
    """One grouping with one sharing-out of poles."""

    problem: Problem
    way: Grouping
    kinds: tuple[Kind, ...]
    turnable: frozenset[int]

    @property
    def inner(self) -> int:
        """Most inner nets: every inner net takes two of the poles' ends, the others one each."""
        ends = sum(3 if kind.form == "C" else 2 for kind in self.kinds)
        return max(0, (ends - self.way.fixed) // 2)


def _cases(problem: Problem, way: Grouping, poles: int) -> Iterator[_Case]:
    kinds = problem.kinds
    least = least_by_kind(problem, way)
    limits = _most_by_kind(problem, poles)
    if poles < least_poles(problem, way):
        return
    plain = not (problem.budgets or problem.separate or problem.objective == "contacts")
    classes = interchangeable(way.targets, problem.n) if plain else []
    masks = negations(way.targets, problem.n) if plain else []
    turnable = frozenset((mask & -mask).bit_length() - 1 for mask in masks)
    for counts in compositions(kinds, poles, least, limits):
        if any(counts[a] < counts[b] for group in classes for a, b in pairwise(group)):
            continue
        if any(
            sum(count for kind, count in zip(kinds, counts, strict=True) if kind.relay == i) > limit
            for i, name in enumerate(problem.relays)
            if (limit := problem.budgets.get(name, poles)) < poles and problem.objective == "poles"
        ):
            continue
        yield _Case(
            problem,
            way,
            tuple(kind for kind, count in zip(kinds, counts, strict=True) for _ in range(count)),
            turnable,
        )


@dataclass
class _Answer:
    status: Status
    case: _Case | None = None
    poles: tuple[Ends, ...] = ()
    conflicts: int = 0


class _Asked:
    """A case on its solver; rows are written as they are needed."""

    def __init__(self, case: _Case, solver: str) -> None:
        encoding = Encoding([(kind,) for kind in case.kinds], case.way.fixed, case.inner)
        break_symmetry(encoding, ends_alike=case.way.fixed == 2)
        order_throws(encoding, case.turnable)
        strike_waste(encoding)
        self.encoding = encoding
        self.rows = Rows(merged(rows_of_grouping(case.problem, case.way)), case.problem.n)
        self.written = 0
        self.session = Session(solver=solver)
        self.pending = (1 << len(self.rows.rows)) - 1
        if len(self.rows.rows) <= _EAGER_ROWS:
            for row in self.rows.rows:
                encoding.add_row(row)

    def advance(self, conflicts: int, seconds: float | None) -> tuple[Status, tuple[Ends, ...]]:
        """Spend about so many conflicts more."""
        goal = self.session.conflicts + conflicts
        deadline = None if seconds is None else monotonic() + seconds
        while True:
            self.session.add(self.encoding.clauses[self.written :])
            self.written = len(self.encoding.clauses)
            left = None if deadline is None else max(0.0, deadline - monotonic())
            status = self.session.solve(conflicts=goal - self.session.conflicts, seconds=left)
            if status != "sat":
                return status, ()
            poles = self.encoding.decode(self.session.model())
            wrong = self.rows.wrong(poles)
            if not wrong:
                return "sat", poles
            self.encoding.add_row(self.rows.rows[(wrong & -wrong).bit_length() - 1])


def _ask(level: list[_Case], deadline: float | None, solver: str) -> _Answer:
    """Cases in turn, each with a doubled budget every time round."""
    budget = _FIRST_CONFLICTS
    open_: list[tuple[_Case, _Asked | None]] = [(case, None) for case in level]
    spent = 0
    try:
        while open_:
            still: list[tuple[_Case, _Asked | None]] = []
            for i, (case, asked) in enumerate(open_):
                left = None if deadline is None else deadline - monotonic()
                if left is not None and left <= 0:
                    open_ = still + open_[i:]
                    return _Answer("unknown", conflicts=spent)
                if asked is None:
                    asked = _Asked(case, solver)
                before = asked.session.conflicts
                status, poles = asked.advance(budget, left)
                spent += asked.session.conflicts - before
                if status == "unknown":
                    still.append((case, asked))
                    continue
                asked.session.close()
                if status == "sat":
                    open_ = still + open_[i + 1 :]
                    return _Answer("sat", case, poles, spent)
            open_ = still
            budget *= 2
        return _Answer("unsat", conflicts=spent)
    finally:
        for _, asked in open_:
            if asked is not None:
                asked.session.close()
