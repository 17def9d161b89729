"""One problem's bound raised size by size, as far as a budget goes (design.md section 8.1)."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import islice
from math import comb
from random import Random
from typing import Literal

from contactlogic.network import Network
from contactlogic.search.assemble import assemble
from contactlogic.search.bounds import Demand, demands, least_by_load, total
from contactlogic.search.cases import Budget, Case, ask, cases, most_poles
from contactlogic.search.problem import Problem, groupings
from contactlogic.search.solver import SOLVER

__all__ = ["Rise"]

_MOST_RELAYS = 8
_MOST_GROUPINGS = 500
_MOST_CASES = 3000  # of one size
_MOST_CLAUSES = 600_000  # of one case, about; some 100 MB

State = Literal["open", "closed", "stuck"]


class Rise:
    """Raises the bound of a problem until a network is found or nothing smaller is of interest.

    Attributes:
        at_least: poles (contacts, for that objective) that every network needs; proved.
        state: "closed" once a network of `at_least` is found, or one is known, or proved that
            there is none; "stuck" if the next size would take too much memory.
        network: the network found, proved row by row.
        feasible: False if proved that no network at all keeps the limits.
    """

    def __init__(
        self, problem: Problem, *, size: int | None = None, seed: int = 0, solver: str = SOLVER
    ) -> None:
        """`size` is that of a network already known."""
        self.problem = problem
        self.state: State = "open"
        self.network: Network | None = None
        self.feasible = True
        self._size = size
        self._random = Random(seed)
        self._solver = solver
        self._common = least_by_load(problem)
        self.at_least = total(self._common)
        self._ways = []
        if problem.n <= _MOST_RELAYS:
            self._ways = list(islice(groupings(problem), _MOST_GROUPINGS + 1))
        self._own = [demands(problem, way) for way in self._ways]
        self._settle()
        if self.state != "open":
            return
        if not self._ways or len(self._ways) > _MOST_GROUPINGS:
            self.state = "stuck"
        elif not self._ways[0].groups:
            self.network, self.state = assemble(problem, self._ways[0], ()), "closed"

    def learn(self, more: Iterable[Demand]) -> None:
        """Take in demands that every network of the problem meets."""
        self._common.extend(more)
        self.at_least = max(self.at_least, total(self._common))
        self._settle()

    def abandon(self) -> None:
        """Note that there is no network: a smaller problem has none within the limits."""
        self.feasible, self.state = False, "closed"

    def advance(self, budget: Budget) -> bool:
        """Refute one size or close; False if the budget ran out first or nothing is left to do."""
        if self.state != "open":
            return False
        problem, poles = self.problem, self.at_least
        if most_poles(problem, poles) < poles:
            self.abandon()
            return True
        level = self._level(poles)
        if level is None:
            self.state = "stuck"
            return False
        self._random.shuffle(level)
        answer = ask(level, budget, self._solver)
        if answer.case is not None:
            self.network = assemble(problem, answer.case.way, answer.poles)
            self.state = "closed"
        elif answer.status == "unsat":
            self.at_least += 1
            self._settle()
        return answer.status != "unknown"

    def _settle(self) -> None:
        if self._size is not None and self.at_least >= self._size:
            self.state = "closed"

    def _level(self, poles: int) -> list[Case] | None:
        """The cases of one size; None if they are too many or too big."""
        every = (
            case
            for way, own in zip(self._ways, self._own, strict=True)
            for case in cases(self.problem, way, poles, [*self._common, *own])
        )
        level = list(islice(every, _MOST_CASES + 1))
        if len(level) > _MOST_CASES or any(_clauses(case) > _MOST_CLAUSES for case in level):
            return None
        return level


def _clauses(case: Case) -> int:
    """About how many clauses a case takes with all its rows."""
    poles, nets = len(case.kinds), case.way.fixed + case.inner
    paths = sum(target.on.bit_count() for target in case.way.targets)
    cuts = sum(bool(target.off) for target in case.way.targets) << case.problem.n
    return nets * (paths * (comb(poles, 3) + 5 * poles) + cuts * 5 * poles)
