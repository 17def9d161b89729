"""The fewest poles there are, by SAT (design.md section 8.1).

P is raised from a proved lower bound, each P split into cases (`cases`), until one of them has a
network; every P below is refuted by then.  `prove` tells of each step as it comes, for a process of
its own beside the windows; `exact` waits for the end.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import islice
from math import comb
from random import Random
from time import monotonic

from contactlogic.network import Network
from contactlogic.search.assemble import assemble
from contactlogic.search.bounds import least_of_loads, least_poles
from contactlogic.search.cases import Budget, Case, ask, cases, most_poles
from contactlogic.search.problem import Grouping, Problem, groupings
from contactlogic.search.solver import SOLVER

__all__ = ["ExactNews", "ExactResult", "exact", "prove"]

_MOST_RELAYS = 8
_MOST_GROUPINGS = 500
_MOST_CASES = 3000  # of one size
_MOST_CLAUSES = 600_000  # of one case, about; some 100 MB


@dataclass(frozen=True)
class ExactNews:
    """What an exact search has to tell.

    Args:
        at_least: poles (contacts, for that objective) that every network needs; proved.
        network: a network smaller than the one known, proved row by row; it has `at_least`.
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
        network: a network of the least size reached, proved row by row; None if none was found.
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
    problem: Problem, *, known: Network | None = None, conflicts: int | None = None, seed: int = 0
) -> Iterator[ExactNews]:
    """Raise the bound until the smallest network is known; a generator for `child.Stream`.

    The first news is a bound that takes no search.  Ends without `finished` where the budget is
    spent, or at once where clauses would take too much memory.  Looks at no clock: the same
    arguments give the same news.

    Args:
        known: a correct network; the search ends once nothing smaller is left.
        conflicts: budget of the solver, over all; None for no limit.
        seed: order in which cases are asked.

    Raises:
        ProofFailed: a network found fails its proof by `contactlogic.check`.
    """
    yield from _rise(problem, known, None, seed, Budget(conflicts), SOLVER)


def exact(
    problem: Problem,
    *,
    seconds: float | None = None,
    conflicts: int | None = None,
    seed: int = 0,
    most: int | None = None,
    known: Network | None = None,
    solver: str = SOLVER,
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

    Raises:
        ProofFailed: a network found fails its proof by `contactlogic.check`.
    """
    budget = Budget(conflicts, None if seconds is None else monotonic() + seconds)
    news = ExactNews(0)
    for step in _rise(problem, known, most, seed, budget, solver):
        news = step
    network = known if news.network is None and news.feasible else news.network
    proven = news.finished and news.feasible
    return ExactResult(network, news.at_least, proven, news.feasible, budget.spent)


def _rise(
    problem: Problem,
    known: Network | None,
    most: int | None,
    seed: int,
    budget: Budget,
    solver: str,
) -> Iterator[ExactNews]:
    size = None if known is None else _size(problem, known)
    poles = least_of_loads(problem)
    done = size is not None and poles >= size
    yield ExactNews(poles, None, done)
    if done or problem.n > _MOST_RELAYS:
        return
    ways = list(islice(groupings(problem), _MOST_GROUPINGS + 1))
    if len(ways) > _MOST_GROUPINGS:
        return
    if not ways[0].groups:
        yield ExactNews(0, assemble(problem, ways[0], ()), True)
        return
    told, poles = poles, max(poles, min(least_poles(problem, way) for way in ways))
    random = Random(seed)
    while True:
        if poles > told:
            done = size is not None and poles >= size
            yield ExactNews(poles, None, done)
        if done or (most is not None and poles > most):
            return
        if most_poles(problem, poles) < poles:
            yield ExactNews(poles, None, True, False)
            return
        level = _level(problem, ways, poles)
        if level is None:
            return
        random.shuffle(level)
        answer = ask(level, budget, solver)
        if answer.case is not None:
            yield ExactNews(poles, assemble(problem, answer.case.way, answer.poles), True)
        if answer.status != "unsat":
            return
        poles += 1


def _level(problem: Problem, ways: list[Grouping], poles: int) -> list[Case] | None:
    """The cases of one size; None if they are too many or too big."""
    level = list(
        islice((case for way in ways for case in cases(problem, way, poles)), _MOST_CASES + 1)
    )
    if len(level) > _MOST_CASES or any(_clauses(case) > _MOST_CLAUSES for case in level):
        return None
    return level


def _clauses(case: Case) -> int:
    """About how many clauses a case takes with all its rows: the paths outweigh the rest."""
    poles, nets = len(case.kinds), case.way.fixed + case.inner
    paths = sum(target.on.bit_count() for target in case.way.targets)
    cuts = sum(bool(target.off) for target in case.way.targets) << case.problem.n
    return nets * (paths * (comb(poles, 3) + 5 * poles) + cuts * 5 * poles)


def _size(problem: Problem, network: Network) -> int:
    """What the objective counts."""
    if problem.objective == "poles":
        return len(network.poles)
    return sum(1 for _ in network.contacts())
