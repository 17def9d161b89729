"""Rungs that share what they have in common: a tree of series-parallel branches.

A `Plan` is a rooted tree.  Its root, node 0, is the supply rail; each branch is a series-parallel
tree from one node to a new one; loads hang on nodes.  A load reached through several branches is
fed in series through all of them, so a load may be tapped from a joint of another's rung.  Branches
meet only at nodes through which all current has to pass, so there is no sneak path, and every
load's paths stay series-parallel.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from contactlogic.ladder.tree import Series, Tree, canonical, contact_count, series, sort_key

__all__ = ["Branch", "Plan", "plan_rungs"]


@dataclass(frozen=True)
class Branch:
    """A series-parallel tree from plan node `start` (supply side) to plan node `end`."""

    start: int
    end: int
    tree: Tree


@dataclass(frozen=True)
class Plan:
    """Branches, and for each load the node that feeds it (None: never on, 0: always on)."""

    branches: tuple[Branch, ...]
    loads: tuple[int | None, ...]


def plan_rungs(wanted: Sequence[Tree | bool], share: bool) -> Plan:
    """Rungs for loads given as trees, or as True (always on) or False (never on).

    With `share`, factors in series that several loads have in common are wired once: the factor
    that saves most contacts first, then on within each group.  Loads of equal trees share a node
    either way.
    """
    branches: list[Branch] = []
    loads: list[int | None] = [None] * len(wanted)
    nodes = 1

    def add(start: int, tree: Tree) -> int:
        nonlocal nodes
        nodes += 1
        branches.append(Branch(start, nodes - 1, tree))
        return nodes - 1

    def feed(start: int, rest: dict[tuple[Tree, ...], list[int]]) -> None:
        """Feed loads, grouped by the factors still to come, from node `start`."""
        waiting = dict(rest)
        for load in waiting.pop((), []):
            loads[load] = start
        while share and (factor := _best_shared(list(waiting))) is not None:
            taking = [factors for factors in waiting if factor in factors]
            group = {_without(factors, factor): waiting.pop(factors) for factors in taking}
            feed(add(start, factor), group)
        for factors, names in sorted(waiting.items(), key=lambda item: item[1]):
            end = add(start, series(factors))
            for load in names:
                loads[load] = end

    factors: dict[tuple[Tree, ...], list[int]] = {}
    for load, tree in enumerate(wanted):
        if isinstance(tree, bool):
            loads[load] = 0 if tree else None
            continue
        whole = canonical(tree)
        parts = whole.parts if isinstance(whole, Series) else (whole,)
        factors.setdefault(tuple(parts), []).append(load)
    feed(0, factors)
    return Plan(tuple(branches), tuple(loads))


def _best_shared(groups: Sequence[tuple[Tree, ...]]) -> Tree | None:
    """The factor whose sharing saves most contacts, None if no two groups have one in common."""
    best: tuple[int, Tree] | None = None
    for factor in sorted({part for factors in groups for part in factors}, key=sort_key):
        uses = sum(factor in factors for factors in groups)
        saved = (uses - 1) * contact_count(factor)
        if saved > 0 and (best is None or saved > best[0]):
            best = (saved, factor)
    return None if best is None else best[1]


def _without(factors: tuple[Tree, ...], factor: Tree) -> tuple[Tree, ...]:
    at = factors.index(factor)
    return factors[:at] + factors[at + 1 :]
