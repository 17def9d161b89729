"""The fewest poles there are, by SAT (design.md section 8.1).

P is raised from a proved lower bound, each P split into cases (`cases`), until one of them has a
network; every P below is refuted by then.  `prove` tells of each step as it comes, for a process of
its own beside the windows; `exact` waits for the end.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from time import monotonic

from contactlogic.network import Network
from contactlogic.search.cases import Budget
from contactlogic.search.problem import Problem
from contactlogic.search.restriction import Restrictions
from contactlogic.search.rise import Rise
from contactlogic.search.shares import demands_of, least_of_sets
from contactlogic.search.solver import SOLVER

__all__ = ["ExactNews", "ExactResult", "exact", "prove"]

_FIRST_SHARE = 500  # conflicts for each smaller problem; four times as many every round
_WHOLE = 10  # times that for the problem itself


@dataclass(frozen=True)
class ExactNews:
    """What an exact search has to tell.

    Args:
        at_least: poles (contacts, for that objective) that every network needs; proved.
        network: a network smaller than the one known, checked row by row; it has `at_least`.
        finished: whether the network found, or else the one known, is proved to be smallest (or,
            if not `feasible`, that there is none).
        feasible: False if proved that no network at all keeps the limits.
    """

    at_least: int
    network: Network | None = None
    finished: bool = False
    feasible: bool = True


@dataclass(frozen=True)
class ExactResult:
    """Outcome of an exact search.

    Args:
        network: a network of the least size reached, checked row by row; None if none was found.
        at_least: poles (contacts, for that objective) that every network needs; proved.
        proven: whether the network has no more than that.
        feasible: False if proved that no network at all keeps the limits.
        conflicts: conflicts of the solver in all.
    """

    network: Network | None
    at_least: int
    proven: bool
    feasible: bool = True
    conflicts: int = 0


def prove(
    problem: Problem,
    *,
    known: Network | None = None,
    conflicts: int | None = None,
    most: int | None = None,
    seed: int = 0,
) -> Iterator[ExactNews]:
    """Raise the bound until the smallest network is known; a generator for `child.Stream`.

    The first news is a bound that takes no search.  Ends without `finished` where the budget is
    spent, or at once where clauses would take too much memory.  Looks at no clock: the same
    arguments give the same news.

    Args:
        known: a correct network; the search ends once nothing smaller is left.
        conflicts: budget of the solver, over all; None for no limit.
        most: as in `exact`; needed where it may be that no network keeps the budgets.
        seed: order in which cases are asked.

    Raises:
        ProofFailed: a network found does not do what was asked.
    """
    yield from _news(problem, known, most, seed, Budget(conflicts), SOLVER, True)


def exact(
    problem: Problem,
    *,
    seconds: float | None = None,
    conflicts: int | None = None,
    seed: int = 0,
    most: int | None = None,
    known: Network | None = None,
    solver: str = SOLVER,
    catalogue: bool = True,
) -> ExactResult:
    """Search for a network with the fewest poles and prove that there is none with fewer.

    Args:
        seconds: wall-clock budget; None for no limit.
        conflicts: budget of the solver, over all; reproducible, unlike `seconds`.
        seed: order in which cases are asked.
        most: stop once every network with at most so many poles is refuted (for a size already
            known, pass one less); the result then has no network but `at_least = most + 1`.
        known: a correct network (from windows, say); only smaller ones are searched for, and it
            is the answer if there are none or the time runs out.
        solver: name of the python-sat solver.
        catalogue: whether smaller problems may be looked up in the catalogue.

    Raises:
        ProofFailed: a network found does not do what was asked.
    """
    budget = Budget(conflicts, None if seconds is None else monotonic() + seconds)
    news = ExactNews(0)
    for step in _news(problem, known, most, seed, budget, solver, catalogue):
        news = step
    network = known if news.network is None and news.feasible else news.network
    proven = news.finished and news.feasible
    return ExactResult(network, news.at_least, proven, news.feasible, budget.spent)


def _news(
    problem: Problem,
    known: Network | None,
    most: int | None,
    seed: int,
    budget: Budget,
    solver: str,
    catalogue: bool,
) -> Iterator[ExactNews]:
    size = None if known is None else _size(problem, known)
    whole = Rise(problem, size=size, seed=seed, solver=solver)
    if whole.state == "open" and catalogue:
        whole.learn(demands_of(problem, least_of_sets(problem)))
    told = whole.at_least
    yield _told(whole)
    smaller: Restrictions | None = None
    share = _FIRST_SHARE
    while whole.state == "open" and (most is None or whole.at_least <= most):
        if smaller is not None:
            whole.learn(smaller.work(budget, share))
            if not smaller.feasible:
                whole.abandon()
        part = budget.part(_WHOLE * share)
        while whole.state == "open" and (most is None or whole.at_least <= most):
            if whole.at_least > told:
                told = whole.at_least
                yield _told(whole)
            if not whole.advance(part):
                break
        budget.spent += part.spent
        if whole.state != "open" or budget.grant(1) <= 0:
            break
        share *= 4
        if smaller is None and problem.n > 1:
            smaller = Restrictions(problem, seed=seed, solver=solver, catalogue=catalogue)
    if whole.state == "closed" or whole.at_least > told:
        yield _told(whole)


def _told(whole: Rise) -> ExactNews:
    return ExactNews(whole.at_least, whole.network, whole.state == "closed", whole.feasible)


def _size(problem: Problem, network: Network) -> int:
    """What the objective counts."""
    if problem.objective == "poles":
        return len(network.poles)
    return sum(1 for _ in network.contacts())
