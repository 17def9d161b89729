"""Selecting trees: rungs for loads that are on in different settings of a few relays.

At a node, the relay that tells most loads apart (each on only while it is operated, or only while
it is released) splits them between its make and its break, one changeover; and so on below.  What
the contacts above already decide is free below.  The full selecting tree of n relays to 2**n loads
takes 2**n - 1 changeovers this way (Shannon 1949).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

from contactlogic.ladder.plan import Branch, Plan
from contactlogic.ladder.tree import Leaf, Tree
from contactlogic.truth import Target, all_rows, literal

__all__ = ["selecting_tree"]


def selecting_tree(targets: Sequence[Target], solve: Callable[[Target], Tree]) -> Plan:
    """A plan that splits loads between makes and breaks from the supply on.

    Args:
        targets: one for each load; all over the same relays.
        solve: gives a tree for a load (no constant) that no relay tells apart from the others.
    """
    branches: list[Branch] = []
    feeds: list[int | None] = [None] * len(targets)
    n = targets[0].n

    def add(start: int, tree: Tree) -> int:
        end = len(branches) + 1
        branches.append(Branch(start, end, tree))
        return end

    def feed(node: int, region: int, loads: list[int], left: frozenset[int]) -> None:
        rest = []
        for load in loads:
            if targets[load].off & region:
                rest.append(load)
            else:
                feeds[load] = node
        while choice := _choose(targets, region, rest, left):
            relay, sides = choice
            for make, group in sides:
                end = add(node, Leaf(relay, make))
                feed(end, region & literal(n, relay, make), group, left - {relay})
            taken = {load for _, group in sides for load in group}
            rest = [load for load in rest if load not in taken]
        for load in rest:
            goal = targets[load]
            off = goal.off & region
            feeds[load] = add(node, solve(Target(n, goal.on, all_rows(n) & ~(goal.on | off))))

    feed(0, all_rows(n), [k for k, t in enumerate(targets) if t.on], frozenset(range(n)))
    return Plan(tuple(branches), tuple(feeds))


def _choose(
    targets: Sequence[Target], region: int, loads: Sequence[int], left: frozenset[int]
) -> tuple[int, list[tuple[bool, list[int]]]] | None:
    """The relay that tells most loads apart, with the loads on each side; None below two loads.

    A relay that none of these loads needs would only lengthen their rungs, so it is passed over.
    """
    best: tuple[int, int, list[tuple[bool, list[int]]]] | None = None
    for relay in sorted(left):
        sides = []
        for make in (True, False):
            closed = literal(targets[0].n, relay, make)
            dead = region & ~closed
            group = [k for k in loads if not targets[k].on & ~closed and targets[k].off & dead]
            if group:
                sides.append((make, group))
        count = sum(len(group) for _, group in sides)
        if count >= 2 and (best is None or count > best[0]):
            best = (count, relay, sides)
    return None if best is None else (best[1], best[2])
