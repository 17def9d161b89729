"""Bounds from what is left when some relays stand still.

Hold the relays outside a set T at one position.  The closed contacts of theirs then join nets for
good and the others are open for good, so the poles of T alone do what the problem asks in the
rows left, loads joined for good sharing a net.  Hence the poles of T are at least as many as the
smaller problem needs, for every T and every position.  Together these bound all poles: for n relays
whose every n - 1 need L poles, n L / (n - 1), rounded up.  (Odd parity: if n - 1 relays need
2(n - 2), n need 2n - 2 - 2/(n - 1), so 2(n - 1) for all n from 4 on once it is proved for 3.)
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations

from contactlogic.search.alike import moved, turns
from contactlogic.search.bounds import Demand
from contactlogic.search.cases import Budget
from contactlogic.search.catalogue import bound
from contactlogic.search.problem import Problem
from contactlogic.search.rise import Rise
from contactlogic.search.shares import demands_of, least_of_sets
from contactlogic.truth import Target

__all__ = ["Restrictions", "restricted"]

_NORMAL_RELAYS = 4  # problems of so many relays are told apart only up to names and negations
_STEPWISE_RELAYS = 6  # up to which one relay at a time is held; above, all but four

_Loads = tuple[tuple[int, int, bool], ...]  # on, free, isolated
_Key = tuple[int, _Loads, tuple[object, ...]]


class _Smaller:
    """A smaller problem, and the smaller ones it leads to."""

    def __init__(self, problem: Problem, seed: int, solver: str, catalogue: bool) -> None:
        self.problem = problem
        self.next: list[tuple[tuple[int, ...], _Smaller]] = []  # relays kept, in the next's order
        self._seed, self._solver = seed, solver
        self._rise: Rise | None = None
        self.shares: dict[int, int] = {}  # least poles of each set of relays, as bits
        self.feasible = True
        self.known = False  # whether the catalogue has all there is to know
        if catalogue:
            self._look_up()

    def _look_up(self) -> None:
        problem = self.problem
        self.shares = least_of_sets(problem)
        if problem.budgets or problem.separate or len(problem.targets) != 1:
            return
        (target,) = problem.targets.values()
        least = bound(target, "contacts" if problem.objective == "contacts" else "bridge")
        if least is not None:
            self.known = True
            self.shares[(1 << problem.n) - 1] = least

    def gather(self) -> None:
        """Take over what the smaller problems show of sets of relays."""
        for kept, smaller in self.next:
            for relays, least in smaller.shares.items():
                here = sum(1 << relay for k, relay in enumerate(kept) if relays >> k & 1)
                self.shares[here] = max(self.shares.get(here, 0), least)

    def work(self, budget: Budget) -> None:
        """Raise the bound as far as the budget goes."""
        if self.known:
            return
        if self._rise is None:
            self._rise = Rise(self.problem, seed=self._seed, solver=self._solver)
        rise = self._rise
        if rise.state == "open":
            rise.learn(self.demands())
            while rise.advance(budget):
                pass
        self.shares[(1 << self.problem.n) - 1] = rise.at_least
        self.feasible = rise.feasible

    def demands(self) -> list[Demand]:
        """The shares as demands."""
        return demands_of(self.problem, self.shares)


class Restrictions:
    """The problems left when some relays of a problem stand still, and what each needs.

    Those that differ only in names and negations of relays, or in loads that are alike, are worked
    on once.
    """

    def __init__(self, problem: Problem, *, seed: int, solver: str, catalogue: bool = True) -> None:
        """`catalogue`: whether problems of one load are looked up there."""
        self._start = (seed, solver, catalogue)
        self._known: dict[_Key, _Smaller] = {}
        self._root = _Smaller(problem, *self._start)
        self._descend(self._root)
        self._all = sorted(self._known.values(), key=lambda smaller: smaller.problem.n)

    def _descend(self, node: _Smaller) -> None:
        n = node.problem.n
        if n < 2 or node.known:
            return
        size = n - 1 if n <= _STEPWISE_RELAYS else _NORMAL_RELAYS
        for kept in combinations(range(n), size):
            for row in _positions(n, kept):
                order, smaller = _normal(restricted(node.problem, kept, row))
                key = _key(smaller)
                if key not in self._known:
                    self._known[key] = _Smaller(smaller, *self._start)
                    self._descend(self._known[key])
                node.next.append((tuple(kept[k] for k in order), self._known[key]))

    @property
    def feasible(self) -> bool:
        """False if one of them is proved to have no network within its limits."""
        return all(smaller.feasible for smaller in self._all)

    def work(self, budget: Budget, share: int) -> list[Demand]:
        """Spend up to `share` conflicts on every smaller problem; demands on the whole problem."""
        for smaller in self._all:
            smaller.gather()
            part = budget.part(share)
            smaller.work(part)
            budget.spent += part.spent
        self._root.gather()
        return self._root.demands()


def _positions(n: int, kept: tuple[int, ...]) -> Iterator[int]:
    """Rows in which the relays kept are released."""
    mask = sum(1 << i for i in kept)
    return (row for row in range(1 << n) if not row & mask)


def restricted(problem: Problem, kept: tuple[int, ...], row: int) -> Problem:
    """The problem of the relays kept while all others stand as in `row`; loads alike taken once.

    A load that may be always off, or always on, asks for nothing and is left out.
    """
    rows = [
        row | sum((small >> k & 1) << relay for k, relay in enumerate(kept))
        for small in range(1 << len(kept))
    ]
    loads: dict[Target, bool] = {}
    for name, target in problem.targets.items():
        on = sum((target.on >> r & 1) << k for k, r in enumerate(rows))
        free = sum((target.free >> r & 1) << k for k, r in enumerate(rows))
        left = Target(len(kept), on, free)
        if left.on and left.off:
            loads[left] = loads.get(left, False) or name in problem.isolated
    names = [problem.relays[i] for i in kept]
    ordered = sorted(loads, key=lambda target: (target.on, target.free))
    return Problem(
        tuple(names),
        {f"load {k}": target for k, target in enumerate(ordered)},
        {name: problem.budgets[name] for name in names if name in problem.budgets},
        {name: problem.separate[name] for name in names if name in problem.separate},
        frozenset(f"load {k}" for k, target in enumerate(ordered) if loads[target]),
        problem.objective,
    )


def _normal(problem: Problem) -> tuple[tuple[int, ...], Problem]:
    """The same for all problems equal up to names and negations, and the relays in its order."""
    n = problem.n
    if problem.budgets or problem.separate or n > _NORMAL_RELAYS:
        return tuple(range(n)), problem
    loads = [(target, name in problem.isolated) for name, target in problem.targets.items()]
    best: _Loads | None = None
    order: tuple[int, ...] = ()
    for perm, mask in turns(n):
        table: _Loads = tuple(
            sorted(
                (turned.on, turned.free, alone)
                for target, alone in loads
                for turned in [moved(target, perm, mask)]
            )
        )
        if best is None or table < best:
            best, order = table, perm
    assert best is not None
    place = [0] * n
    for relay, new in enumerate(order):
        place[new] = relay
    return tuple(place), Problem(
        problem.relays,
        {f"load {k}": Target(n, on, free) for k, (on, free, _) in enumerate(best)},
        isolated=frozenset(f"load {k}" for k, (_, _, alone) in enumerate(best) if alone),
        objective=problem.objective,
    )


def _key(problem: Problem) -> _Key:
    limits = tuple(
        (problem.budgets.get(name), problem.separate.get(name)) for name in problem.relays
    )
    loads = tuple(
        (target.on, target.free, name in problem.isolated)
        for name, target in problem.targets.items()
    )
    return problem.n, loads, limits
