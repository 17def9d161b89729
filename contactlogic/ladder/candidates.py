"""Several good series-parallel trees for each load, and good ways to combine them.

Up to four relays every tree offered has the least contacts there are; above that the trees come
from factored covers, sums of products and products of sums, and from case splits, each simplified
inside its own freedom.
"""

from __future__ import annotations

from collections.abc import Sequence
from random import Random

from contactlogic.ladder.cases import by_cases, least_small, needed
from contactlogic.ladder.factor import Term, factor_products, factor_sums
from contactlogic.ladder.recognise import expression
from contactlogic.ladder.refine import refine
from contactlogic.ladder.small import RELAYS
from contactlogic.ladder.tree import (
    Leaf,
    Tree,
    canonical,
    contact_count,
    fewest_poles,
    leaves,
    sort_key,
)
from contactlogic.minimize import cover
from contactlogic.minimize.cube import Cover
from contactlogic.truth import Target

__all__ = ["candidate_trees", "combine", "formula_of", "least_tree", "plain_tree", "tree_of_cover"]

_LEAST_TREES = 60  # least trees looked at for a load of few relays
_FEW_RELAYS = 6  # up to here a formula is searched for, above it is factored from a cover
_LARGE = 150  # a tree of more contacts is left as its factoring made it: refining would take long


def candidate_trees(target: Target, covers: Sequence[Cover], limit: int) -> list[Tree | bool]:
    """Up to `limit` trees for a load, best first; a single True or False if it may be constant.

    Best is the fewest poles any arrangement could give, then the fewest contacts; with four
    relays or fewer, the fewest contacts, then poles.
    """
    relays = needed(target)
    if relays is None:
        return [bool(target.on)]
    found: dict[Tree, None] = {}
    few = target.n <= RELAYS or len(relays) <= RELAYS
    if few:
        chosen = range(target.n) if target.n <= RELAYS else relays
        for tree in least_small(target, chosen, limit=_LEAST_TREES) or ():
            found.setdefault(canonical(tree))
    else:
        for known in covers:
            found.setdefault(canonical(_refined(_factored(known), target)))
        found.setdefault(canonical(least_tree(target)))

    def rank(tree: Tree) -> tuple[object, ...]:
        sizes = (fewest_poles([tree]), contact_count(tree))
        return (*(sizes[::-1] if few else sizes), sort_key(tree))

    ranked = sorted(found, key=rank)
    return list(ranked[:limit])


def least_tree(target: Target) -> Tree:
    """One good tree by cases; `target` must not accept a constant."""
    tree = by_cases(target)
    if tree is None:
        raise ValueError("the target accepts a constant")
    return _refined(tree, target)


def formula_of(table: int, relays: Sequence[str]) -> str:
    """A short formula for what a load does, "0" or "1" where constant."""
    from contactlogic.formula import to_text

    target = Target(len(relays), table)
    tree: Tree | bool
    if not target.on or not target.off:
        tree = bool(target.on)
    elif len(needed(target) or ()) <= _FEW_RELAYS:
        tree = least_tree(target)
    else:
        tree = _factored(cover(target, "sop", seconds=1.0))
    return to_text(expression(tree, relays))


def plain_tree(target: Target, covers: Sequence[Cover]) -> Tree | bool:
    """The better of the factored covers as it comes, in little time."""
    if not target.on or not target.off:
        return bool(target.on)
    return min((_factored(known) for known in covers), key=contact_count)


def tree_of_cover(known: Cover) -> Tree | bool:
    """A cover factored; True or False where it is constant."""
    if not known.cubes or not all(known.groups):
        return bool(known.cubes) == (known.kind == "sop")
    return _factored(known)


def _factored(found: Cover) -> Tree:
    terms: list[Term] = [frozenset(Leaf(*c) for c in group) for group in found.groups]
    return factor_products(terms) if found.kind == "sop" else factor_sums(terms)


def _refined(tree: Tree, target: Target) -> Tree:
    return tree if contact_count(tree) > _LARGE else refine(tree, target)


def combine(
    choices: Sequence[Sequence[Tree | bool]],
    count: int,
    separate: frozenset[int],
    seed: int,
) -> list[tuple[Tree | bool, ...]]:
    """Up to `count` different selections of one tree a load, fewest possible poles first.

    A relay takes at least the larger of its makes and its breaks over all loads, so trees are
    chosen to balance each other: coordinate descent on that bound from seeded random starts.
    """
    random = Random(seed)
    found: dict[tuple[int, ...], tuple[int, int]] = {}
    for start in range(3 * count):
        picked = [0 if start == 0 else random.randrange(len(options)) for options in choices]
        cost = _bound(choices, picked, separate)
        improved = True
        while improved:
            improved = False
            for load, options in enumerate(choices):
                for option in range(len(options)):
                    trial = [*picked[:load], option, *picked[load + 1 :]]
                    if (trial_cost := _bound(choices, trial, separate)) < cost:
                        picked, cost, improved = trial, trial_cost, True
        found.setdefault(tuple(picked), cost)
    ranked = sorted(found, key=lambda picked: (found[picked], picked))
    return [
        tuple(options[k] for options, k in zip(choices, picked, strict=True))
        for picked in ranked[:count]
    ]


def _bound(
    choices: Sequence[Sequence[Tree | bool]], picked: Sequence[int], separate: frozenset[int]
) -> tuple[int, int]:
    trees = [
        tree
        for options, k in zip(choices, picked, strict=True)
        if not isinstance(tree := options[k], bool)
    ]
    return fewest_poles(trees, separate), sum(1 for tree in trees for _ in leaves(tree))
