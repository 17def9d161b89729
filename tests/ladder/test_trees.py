"""Factoring, case splits and refinement keep the function and save contacts."""

from itertools import combinations

from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.ladder.cases import by_cases, needed
from contactlogic.ladder.factor import factor_products, factor_sums
from contactlogic.ladder.refine import refine
from contactlogic.ladder.small import size_table
from contactlogic.ladder.tree import Leaf, Parallel, Series, contact_count, leaves, table
from contactlogic.truth import Target, all_rows, rows_of


@st.composite
def partial_targets(draw: st.DrawFn, least: int = 2, most: int = 6) -> Target:
    n = draw(st.integers(least, most))
    on = draw(st.integers(1, all_rows(n)))
    free = draw(st.integers(0, all_rows(n))) & ~on
    return Target(n, on, free)


def minterms(n: int, on: int) -> list[frozenset[Leaf]]:
    return [frozenset(Leaf(i, bool(row >> i & 1)) for i in range(n)) for row in rows_of(on)]


def conducts(tree: object, row: int) -> bool:
    """One row, the slow and plain way."""
    match tree:
        case Leaf(relay, make):
            return bool(row >> relay & 1) == make
        case Series(parts):
            return all(conducts(part, row) for part in parts)
        case Parallel(parts):
            return any(conducts(part, row) for part in parts)
    raise TypeError(tree)


@given(partial_targets(most=5))
def test_table_is_what_conducts(target: Target) -> None:
    tree = factor_products(minterms(target.n, target.on))
    expected = sum(1 << row for row in range(1 << target.n) if conducts(tree, row))
    assert table(tree, target.n) == expected == target.on


@given(partial_targets(most=5))
def test_factored_sums_are_the_product_of_sums(target: Target) -> None:
    if not target.off:
        return
    sums = [
        frozenset(Leaf(leaf.relay, not leaf.make) for leaf in t)
        for t in minterms(target.n, target.off)
    ]
    tree = factor_sums(sums)
    assert table(tree, target.n) == target.on | target.free


@settings(deadline=None, max_examples=60)
@given(partial_targets())
def test_cases_and_refinement_keep_the_target(target: Target) -> None:
    tree = by_cases(target)
    if tree is None:
        assert not target.off
        return
    assert target.accepts(table(tree, target.n))
    better = refine(tree, target)
    assert target.accepts(table(better, target.n))
    assert contact_count(better) <= contact_count(tree)


@settings(deadline=None, max_examples=30)
@given(partial_targets(most=4))
def test_refined_minterms_never_beat_the_least(target: Target) -> None:
    if not target.off:
        return
    start = factor_products(minterms(target.n, target.on))
    spread, width = (target.on, target.off), target.n
    while width < 4:
        spread = tuple(t | t << (1 << width) for t in spread)  # type: ignore[assignment]
        width += 1
    least, _ = size_table().completions(spread[0], 0xFFFF & ~(spread[0] | spread[1]))
    assert contact_count(refine(start, target)) == least


@given(partial_targets(most=5))
def test_needed_relays_suffice(target: Target) -> None:
    relays = needed(target)
    if relays is None:
        assert not target.off
        return
    mask = sum(1 << i for i in relays)
    on = {row & mask for row in rows_of(target.on)}
    off = {row & mask for row in rows_of(target.off)}
    assert not on & off
    for i in range(target.n):  # a relay that two rows prove necessary is always kept
        if target.needs(i):
            assert i in relays


def test_textbook_factoring() -> None:
    # A C + A D + B C + B D = (A + B)(C + D): 4 contacts from 8 (Brayton and McMullen 1982)
    a, b, c, d = (Leaf(i, True) for i in range(4))
    tree = factor_products([frozenset(pair) for pair in ((a, c), (a, d), (b, c), (b, d))])
    assert contact_count(tree) == 4


def test_parity_splits_in_halves() -> None:
    # odd parity of two and three relays combined: 2 * (4 + 10) contacts, from the published least
    # 4 and 10 of its halves (OEIS A056287 plus one)
    odd = sum(1 << row for row in range(32) if bin(row).count("1") % 2)
    tree = by_cases(Target(5, odd))
    assert tree is not None
    assert contact_count(tree) == 28
    assert table(tree, 5) == odd


def test_shannon_1938_figure_5_to_6() -> None:
    # W + W'(X+Y) + (X+Z)(S+W'+Z)(Z'+Y+S'V) = W+X+Y+ZS'V, 6 contacts from 13 (Shannon 1938, seen)
    names = {name: i for i, name in enumerate("WXYZSV")}

    def on(row: int) -> bool:
        w, x, y, z, s, v = (bool(row >> names[c] & 1) for c in "WXYZSV")
        return (
            w
            or (not w and (x or y))
            or ((x or z) and (s or not w or z) and (not z or y or (not s and v)))
        )

    target = Target(6, sum(1 << row for row in range(64) if on(row)))
    tree = by_cases(target)
    assert tree is not None
    assert contact_count(refine(tree, target)) == 6


def test_selected_contacts_differ() -> None:
    tree = Series((Leaf(0, True), Parallel((Leaf(1, False), Leaf(2, True)))))
    assert len(list(leaves(tree))) == 3
    assert all(a != b for a, b in combinations(leaves(tree), 2))
