"""Boolean simplification of a tree inside the freedom its surroundings leave.

A node of a tree matters only in rows where everything in series with it, up to the root, conducts
and nothing in parallel with it does; in all other rows it is free (observability don't-cares, exact
here because a tree shares nothing).  Any node, or any two neighbours of one group, is replaced by
the least network over at most four relays that fits those rows, as long as contacts are saved.
"""

from __future__ import annotations

from itertools import combinations

from contactlogic.ladder.cases import least_small, needed
from contactlogic.ladder.small import RELAYS
from contactlogic.ladder.tree import Leaf, Series, Tree, contact_count, parallel, series, table
from contactlogic.truth import Target, all_rows, support

__all__ = ["refine"]

_MOST_SUBSETS = 80  # relay choices tried for one node; all of them up to eight relays


def refine(tree: Tree, target: Target) -> Tree:
    """A tree for the same target with no more contacts; `target` must not accept a constant."""
    while True:
        better = _improve(tree, target)
        if isinstance(better, bool):
            raise ValueError("the target accepts a constant")
        if better == tree:
            return tree
        tree = better


def _improve(tree: Tree, goal: Target) -> Tree | bool:
    """One pass from the root down; True or False if the node may be always or never closed."""
    if not goal.on:
        return False
    if not goal.off:
        return True
    size = contact_count(tree)
    if size == 1:
        return tree
    smaller = _replacement(goal, tree, size)
    if smaller is not None:
        return smaller
    assert not isinstance(tree, Leaf)
    in_series = isinstance(tree, Series)
    join = series if in_series else parallel
    parts = list(tree.parts)
    tables = [table(part, goal.n) for part in parts]
    if len(parts) > 2:
        for i, j in combinations(range(len(parts)), 2):
            inner = _inside(goal, [t for k, t in enumerate(tables) if k not in (i, j)], in_series)
            pair = join((parts[i], parts[j]))
            improved = _replacement(inner, pair, contact_count(pair))
            if improved is not None:
                return join([p for k, p in enumerate(parts) if k not in (i, j)] + [improved])
    for i, part in enumerate(parts):
        inner = _inside(goal, tables[:i] + tables[i + 1 :], in_series)
        better = _improve(part, inner)
        if better is in_series:  # always closed in a series, never closed in parallel: drop it
            return join(parts[:i] + parts[i + 1 :])
        assert not isinstance(better, bool)  # the other constant would have been found higher up
        if better != part:
            return join([*parts[:i], better, *parts[i + 1 :]])
    return tree


def _inside(goal: Target, beside: list[int], in_series: bool) -> Target:
    """What a part must do, given the tables of the other parts of its group."""
    full = all_rows(goal.n)
    if in_series:
        matters = full
        for other in beside:
            matters &= other
    else:
        matters = full
        for other in beside:
            matters &= ~other
    on, off = goal.on & matters, goal.off & matters
    return Target(goal.n, on, full & ~(on | off))


def _replacement(goal: Target, tree: Tree, size: int) -> Tree | None:
    """A tree of fewer contacts for `goal` over at most four relays."""
    if not goal.on or not goal.off or size < 2:
        return None
    must = [i for i in range(goal.n) if goal.needs(i)]
    if len(must) > RELAYS:
        return None
    near = needed(goal) or ()
    own = support(table(tree, goal.n), goal.n)
    others = [i for i in (*near, *own, *range(goal.n)) if i not in must]
    others = list(dict.fromkeys(others))
    spare = min(RELAYS - len(must), len(others))
    best: Tree | None = None
    for count, extra in enumerate(combinations(others, spare)):
        if count >= _MOST_SUBSETS:
            break
        found = least_small(goal, sorted((*must, *extra)))
        if found and contact_count(found[0]) < size:
            best, size = found[0], contact_count(found[0])
    return best
