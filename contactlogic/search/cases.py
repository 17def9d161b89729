"""One size of network, split into cases and put to the solver (design.md section 8.1).

A size P splits into one case for every permitted grouping of loads on nets and every way to share
P poles out over the relays, up to relays that the wants cannot tell apart.  A case has as many
inner nets as P poles can have.  Cases are asked in turn with growing conflict budgets, so that an
easy answer is found before a hard refutation is finished.  P is refuted once each of its cases is.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass
from time import monotonic

from contactlogic.search.alike import Symmetries
from contactlogic.search.bounds import Demand, least_by_kind, total
from contactlogic.search.encoding import Encoding, Ends, Kind
from contactlogic.search.problem import (
    Grouping,
    Problem,
    compositions,
    rows_of_grouping,
)
from contactlogic.search.rows import Rows, merged
from contactlogic.search.solver import Session, Status
from contactlogic.search.symmetry import break_symmetry, order_throws, strike_waste

__all__ = ["Answer", "Budget", "Case", "ask", "cases", "most_poles"]

_FIRST_CONFLICTS = 2000
_EAGER_ROWS = 16  # above this, rows enter the clauses once a candidate gets them wrong
_OPEN = 48  # cases whose solver is kept from one round to the next; the others start again


@dataclass(frozen=True)
class Case:
    """One grouping with one sharing-out of poles.

    Args:
        turnable: relays whose first pole may be taken to have the lower net at its make.
    """

    problem: Problem
    way: Grouping
    kinds: tuple[Kind, ...]
    turnable: frozenset[int]

    @property
    def inner(self) -> int:
        """Most inner nets: every inner net takes two of the poles' ends, the others one each."""
        ends = sum(3 if kind.form == "C" else 2 for kind in self.kinds)
        return max(0, (ends - self.way.fixed) // 2)


def cases(
    problem: Problem, way: Grouping, poles: int, demands: Collection[Demand]
) -> Iterator[Case]:
    """The cases of one grouping that together hold every network worth looking at."""
    if total(demands) > poles:
        return
    kinds = problem.kinds
    symmetric = Symmetries(problem, way)
    least, most = least_by_kind(problem, way), _most_by_kind(problem, poles)
    for counts in compositions(kinds, poles, least, most):
        if not all(demand.met(counts) for demand in demands):
            continue
        if not symmetric.foremost(counts):
            continue
        own = _poles(problem, dict(zip(kinds, counts, strict=True)))
        if own is not None:
            yield Case(problem, way, own, symmetric.turnable)


def most_poles(problem: Problem, poles: int) -> int:
    """Poles that the limits allow, if they allow no more than `poles`; else at least that."""
    return sum(_most_by_kind(problem, poles).values())


def _most_by_kind(problem: Problem, poles: int) -> dict[Kind, int]:
    most = {}
    for kind in problem.kinds:
        name = problem.relays[kind.relay]
        limit = problem.budgets.get(name, poles)
        if name in problem.separate:
            have = problem.separate[name]
            limit = min(limit, have.makes if kind.form == "A" else have.breaks)
        most[kind] = limit
    return most


def _poles(problem: Problem, counts: Mapping[Kind, int]) -> tuple[Kind, ...] | None:
    """Poles to wire for so many of each kind, sorted; None if they break a pole budget.

    Where makes and breaks are counted singly, a relay with more of them than its budget has poles
    must pair what is over as changeovers wired on both throws.  Any network that keeps the budget
    has so many pairs, and which of its pairs are taken does not matter.
    """
    poles: list[Kind] = []
    for i, name in enumerate(problem.relays):
        own = [kind for kind in counts if kind.relay == i]
        budget = problem.budgets.get(name)
        over = 0 if budget is None else max(0, sum(counts[kind] for kind in own) - budget)
        if over and (problem.objective == "poles" or name in problem.separate):
            return None
        if over > min(counts[kind] for kind in own):
            return None
        poles += [Kind(i, "C")] * over
        poles += [kind for kind in own for _ in range(counts[kind] - over)]
    return tuple(sorted(poles))


@dataclass
class Budget:
    """What a search may still spend: conflicts, and time up to a deadline; None: no limit."""

    conflicts: int | None = None
    deadline: float | None = None
    spent: int = 0

    @property
    def seconds(self) -> float | None:
        return None if self.deadline is None else max(0.0, self.deadline - monotonic())

    def part(self, conflicts: int) -> Budget:
        """A budget of its own for one piece of work; what it spends is to be added here."""
        return Budget(self.grant(conflicts), self.deadline)

    def grant(self, wanted: int) -> int:
        """Conflicts that may be spent of those wanted."""
        if self.seconds == 0.0:
            return 0
        return wanted if self.conflicts is None else min(wanted, self.conflicts - self.spent)


@dataclass(frozen=True)
class Answer:
    """Outcome for one size: "sat" with a case and its poles; "unsat": every case refuted."""

    status: Status
    case: Case | None = None
    poles: tuple[Ends, ...] = ()


class _Asked:
    """A case on its solver; rows are written as they are needed."""

    def __init__(self, case: Case, solver: str) -> None:
        encoding = Encoding([(kind,) for kind in case.kinds], case.way.fixed, case.inner)
        break_symmetry(encoding, ends_alike=case.way.fixed == 2)
        order_throws(encoding, case.turnable)
        strike_waste(encoding)
        self.encoding = encoding
        self.rows = Rows(merged(rows_of_grouping(case.problem, case.way)), case.problem.n)
        self.written = 0
        self.session = Session(solver=solver)
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


def ask(level: Iterable[Case], budget: Budget, solver: str) -> Answer:
    """Cases in turn, each with a doubled share every time round; keeps account in `budget`."""
    share = _FIRST_CONFLICTS
    open_: list[tuple[Case, _Asked | None]] = [(case, None) for case in level]
    still: list[tuple[Case, _Asked | None]] = []
    try:
        while open_:
            while open_:
                granted = budget.grant(share)
                if granted <= 0:
                    return Answer("unknown")
                case, asked = open_.pop(0)
                asked = asked or _Asked(case, solver)
                before = asked.session.conflicts
                status, poles = asked.advance(granted, budget.seconds)
                budget.spent += asked.session.conflicts - before
                if status == "unknown" and sum(kept is not None for _, kept in still) < _OPEN:
                    still.append((case, asked))
                    continue
                asked.session.close()
                if status == "sat":
                    return Answer("sat", case, poles)
                if status == "unknown":
                    still.append((case, None))
            open_, still = still, []
            share *= 2
        return Answer("unsat")
    finally:
        for _, kept in open_ + still:
            if kept is not None:
                kept.session.close()
