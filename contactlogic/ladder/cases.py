"""Trees by cases: split a load on what a few relays do, exact at the bottom.

For a set A of relays, the settings of A that leave the same to be done form a case; the network is
one branch for each case, the case's condition on A in series with what is left.  With one relay in
A this is the expansion of Shannon 1938, whose make and break meet at one net and pair as one pole;
with two cases it is the disjoint decomposition of Ashenhurst 1957.  Functions of up to four relays
come from the exact table in `small`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

from contactlogic.ladder.small import RELAYS, least_trees, size_table
from contactlogic.ladder.tree import Leaf, Tree, contact_count, parallel, rename, series
from contactlogic.truth import Target, all_rows, cofactor, literal

__all__ = ["by_cases", "least_small", "needed", "project"]

_MOST_CASES = 3  # of a split on two relays or more; more seldom pays
_ALL_SPLITS = 6  # up to this many relays every split is followed, above it the best few
_FEW_SPLITS = 3


def needed(target: Target) -> tuple[int, ...] | None:
    """Relays that a network for `target` can get by with, found by dropping one after another.

    None if the target accepts a constant.
    """
    if not target.on or not target.off:
        return None
    on, off, n = target.on, target.off, target.n
    kept = []
    for i in range(n):
        wider_on = cofactor(on, n, i, 0) | cofactor(on, n, i, 1)
        wider_off = cofactor(off, n, i, 0) | cofactor(off, n, i, 1)
        if wider_on & wider_off:
            kept.append(i)
        else:
            on, off = wider_on, wider_off
    return tuple(kept)


def project(table: int, n: int, relays: Sequence[int]) -> int:
    """Settings of `relays` (bit order: their order here) that occur among the rows of `table`."""
    for i in range(n):
        if i not in relays:
            table = cofactor(table, n, i, 0) | cofactor(table, n, i, 1)
    result = 0
    for setting in range(1 << len(relays)):
        row = sum(((setting >> k) & 1) << relay for k, relay in enumerate(relays))
        result |= ((table >> row) & 1) << setting
    return result


def least_small(target: Target, relays: Sequence[int], limit: int = 1) -> list[Tree] | None:
    """Least trees over at most four given relays; None if no function of those relays will do.

    The target must not accept a constant.
    """
    chosen, width = list(relays), len(relays)
    on, off = project(target.on, target.n, chosen), project(target.off, target.n, chosen)
    if on & off:
        return None
    while width < RELAYS:  # fewer relays than the table has: repeat, so that the rest is idle
        on, off = on | on << (1 << width), off | off << (1 << width)
        width += 1
    _, functions = size_table().completions(on, 0xFFFF & ~(on | off))
    trees: list[Tree] = []
    for function in functions:
        for tree in least_trees(function, limit):
            trees.append(rename(tree, chosen))
            if len(trees) >= limit:
                return trees
    return trees


@dataclass(frozen=True)
class _Case:
    """Settings of the splitting relays (a table over them), and what is left to be done then."""

    settings: int
    on: int
    off: int


def by_cases(target: Target) -> Tree | None:
    """A tree by splitting into cases again and again; None if the target accepts a constant."""
    memo: dict[tuple[int, int], Tree | None] = {}
    n, full = target.n, all_rows(target.n)

    def solve(on: int, off: int) -> Tree | None:
        key = (on, off)
        if key not in memo:
            memo[key] = split(Target(n, on, full & ~(on | off)))
        return memo[key]

    def split(goal: Target) -> Tree | None:
        relays = needed(goal)
        if relays is None:
            return None
        if len(relays) <= RELAYS:
            small = least_small(goal, relays)
            assert small is not None
            return small[0]
        best: Tree | None = None
        for chosen, cases in _splits(goal, relays):
            tree = parallel(
                branch
                for case in cases
                if (branch := _branch(n, chosen, case, solve(case.on, case.off))) is not None
            )
            if best is None or contact_count(tree) < contact_count(best):
                best = tree
        return best

    return solve(target.on, target.off)


def _branch(n: int, chosen: Sequence[int], case: _Case, rest: Tree | None) -> Tree | None:
    """One case's condition in series with what is left; None if nothing is on in it."""
    if not case.on:
        return None
    condition: Tree
    if len(chosen) == 1:
        condition = Leaf(chosen[0], case.settings == 0b10)
    else:
        on = 0
        for setting in range(1 << len(chosen)):
            if (case.settings >> setting) & 1:
                on |= _rows_at(n, chosen, setting)
        found = least_small(Target(n, on), chosen)
        assert found is not None
        condition = found[0]
    return condition if rest is None else series((condition, rest))


def _splits(goal: Target, relays: Sequence[int]) -> list[tuple[tuple[int, ...], list[_Case]]]:
    """Sets of relays worth splitting on, with their cases."""
    ranked = []
    for size in range(1, min(RELAYS, len(relays) - 1) + 1):
        for chosen in combinations(relays, size):
            cases = _cases(goal, chosen, 2 if size == 1 else _MOST_CASES)
            if cases is None:
                continue
            left = 0
            for case in cases:
                rest = Target(goal.n, case.on, all_rows(goal.n) & ~(case.on | case.off))
                left += 1 << len(needed(rest) or ())
            ranked.append((left, len(cases), chosen, cases))
    ranked.sort(key=lambda item: item[:3])
    if len(relays) > _ALL_SPLITS:
        del ranked[_FEW_SPLITS:]
    return [(chosen, cases) for _, _, chosen, cases in ranked]


def _cases(goal: Target, chosen: Sequence[int], most: int) -> list[_Case] | None:
    """Settings of `chosen` put together where one remainder serves them; None if over `most`."""
    cases: list[_Case] = []
    for setting in range(1 << len(chosen)):
        on, off = goal.on, goal.off
        for k, relay in enumerate(chosen):
            value = (setting >> k) & 1
            on, off = cofactor(on, goal.n, relay, value), cofactor(off, goal.n, relay, value)
        for i, case in enumerate(cases):
            if not (case.on & off or case.off & on):
                cases[i] = _Case(case.settings | 1 << setting, case.on | on, case.off | off)
                break
        else:
            cases.append(_Case(1 << setting, on, off))
            if len(cases) > most:
                return None
    return cases if len(cases) > 1 else None


def _rows_at(n: int, chosen: Sequence[int], setting: int) -> int:
    rows = all_rows(n)
    for k, relay in enumerate(chosen):
        rows &= literal(n, relay, bool((setting >> k) & 1))
    return rows
