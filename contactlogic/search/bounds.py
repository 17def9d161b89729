"""Proved lower bounds on the number of poles, without search."""

from __future__ import annotations

from collections.abc import Collection

from contactlogic.search.encoding import Kind
from contactlogic.search.problem import Grouping, Problem, needs
from contactlogic.truth import Target

__all__ = ["least_by_kind", "least_of_loads", "least_poles"]


def least_of_loads(problem: Problem) -> int:
    """Poles (or contacts) that every network needs, however its loads share nets.

    Counts `_needed` kinds alone: a net that feeds several loads needs what each of them needs.
    """
    return sum(_needed(problem, problem.targets.values()).values())


def least_by_kind(problem: Problem, grouping: Grouping) -> dict[Kind, int]:
    """Least poles of each kind.

    A changeover of relay i is needed if two rows that differ in i alone want opposite things of
    one load: with no contact of i, both rows have the same closed contacts.  The way that feeds
    the load in the row where it is on must be cut by i in the other, so it passes a make of i if
    i is operated in the row where the load is on, and a break otherwise; hence the count for
    separate makes and breaks.
    """
    return _needed(problem, grouping.targets)


def _needed(problem: Problem, targets: Collection[Target]) -> dict[Kind, int]:
    least = {}
    for kind in problem.kinds:
        forms = {"C": (True, False), "A": (True,), "B": (False,)}[kind.form]
        least[kind] = int(
            any(needs(target, kind.relay, make) for target in targets for make in forms)
        )
    return least


def least_poles(problem: Problem, grouping: Grouping) -> int:
    """Poles (or contacts) that every network of this grouping needs."""
    return max(sum(least_by_kind(problem, grouping).values()), least_closed(grouping))


def least_closed(grouping: Grouping) -> int:
    """Contacts closed in the row with most nets on.

    In a row the supply and k load nets that are on lie in one connected graph of closed contacts
    on at least k + 1 nets, so at least k contacts are closed, and a pole closes one at a time.
    """
    rows = 1 << (grouping.targets[0].n if grouping.targets else 0)
    return max(
        (sum(target.on >> row & 1 for target in grouping.targets) for row in range(rows)),
        default=0,
    )
