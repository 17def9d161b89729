"""Relays that the wants cannot tell apart.

Renaming relays and negating them (makes for breaks) carries networks over into networks of as many
poles.  Where it carries the wants over into themselves, loads maybe trading places, it carries
correct networks over into correct networks, and of the ways to share poles out over the relays
that it carries over into each other one is enough.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from itertools import pairwise, permutations

from contactlogic.search.encoding import Form
from contactlogic.search.problem import Grouping, Problem, interchangeable, negations
from contactlogic.truth import Target, variable

__all__ = ["Symmetries", "moved", "turns"]

_MOST_RELAYS = 5  # up to which every order and every negation of the relays is tried


class Symmetries:
    """What may be traded within one grouping of a problem.

    Only where nothing but the wants tells relays apart: no budgets, no separate contacts.

    Attributes:
        turnable: relays i such that some set of relays with i as its first may be negated together
            with no load changing.
    """

    def __init__(self, problem: Problem, way: Grouping) -> None:
        self._orders: list[tuple[int, ...]] = []
        self.turnable: frozenset[int] = frozenset()
        if problem.budgets or problem.separate:
            return
        n = problem.n
        if problem.objective == "poles":
            self.turnable = frozenset(
                (mask & -mask).bit_length() - 1 for mask in negations(way.targets, n)
            )
        self._orders = sorted(set(_orders(problem, way)))

    def foremost(self, counts: Sequence[int]) -> bool:
        """Whether these counts of poles are the greatest of those they may be traded for."""
        own = tuple(counts)
        return all(tuple(own[k] for k in order) <= own for order in self._orders)


def _orders(problem: Problem, way: Grouping) -> Iterator[tuple[int, ...]]:
    """For every symmetry found, the kinds that stand where `Problem.kinds` stood."""
    n = problem.n
    place = {kind: k for k, kind in enumerate(problem.kinds)}
    other: dict[Form, Form] = {"A": "B", "B": "A", "C": "C"}

    def order(perm: Sequence[int], mask: int) -> tuple[int, ...]:
        return tuple(
            place[
                kind._replace(
                    relay=perm[kind.relay],
                    form=other[kind.form] if mask >> kind.relay & 1 else kind.form,
                )
            ]
            for kind in problem.kinds
        )

    if n > _MOST_RELAYS:
        if problem.objective == "poles":
            for group in interchangeable(way.targets, n):
                for a, b in pairwise(group):
                    trade = list(range(n))
                    trade[a], trade[b] = b, a
                    yield order(trade, 0)
        return
    loads = [(t, v in way.isolated) for v, t in enumerate(way.targets, start=1)]
    known = Counter(loads)
    for perm, mask in turns(n):
        if all(known[moved(load[0], perm, mask), load[1]] == many for load, many in known.items()):
            yield order(perm, mask)


def turns(n: int) -> Iterator[tuple[tuple[int, ...], int]]:
    """Every order and every mask of negations of n relays."""
    for perm in permutations(range(n)):
        for mask in range(1 << n):
            yield perm, mask


def moved(target: Target, perm: Sequence[int], mask: int) -> Target:
    """The target with relay perm[i] (negated where bit i of the mask is 1) in place of relay i."""
    n = target.n
    return Target(n, _moved(target.on, n, perm, mask), _moved(target.free, n, perm, mask))


def _moved(table: int, n: int, perm: Sequence[int], mask: int) -> int:
    if not table:
        return 0
    for i in range(n):
        if mask >> i & 1:
            up = variable(n, i)
            table = (table & up) >> (1 << i) | (table & ~up) << (1 << i)
    where = list(perm)  # bring old relay i to place perm[i], one trade at a time
    for i in range(n):
        while where[i] != i:
            j = where[i]
            table = _swapped(table, n, i, j)
            where[i], where[j] = where[j], where[i]
    return table


def _swapped(table: int, n: int, i: int, j: int) -> int:
    low, high = min(i, j), max(i, j)
    a, b = variable(n, low), variable(n, high)
    shift = (1 << high) - (1 << low)
    return table & ~(a ^ b) | (table & a & ~b) << shift | (table & b & ~a) >> shift
