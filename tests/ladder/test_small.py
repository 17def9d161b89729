"""Least series-parallel networks of up to four relays, against published and enumerated values."""

from itertools import product

import pytest

from contactlogic.ladder.cases import least_small
from contactlogic.ladder.small import least_trees, size_table
from contactlogic.ladder.tree import contact_count, table
from contactlogic.truth import Target, support


def worst(relays: int) -> int:
    """Most contacts any function needs whose support lies in the first `relays` of four."""
    sizes = size_table().size
    return max(int(sizes[f]) for f in range(65536) if all(i < relays for i in support(f, 4)))


# OEIS A056287 plus one (AND/OR operators to contacts), seen: 1, 4, 10, 16
@pytest.mark.parametrize(("relays", "contacts"), [(1, 1), (2, 4), (3, 10), (4, 16)])
def test_worst_case(relays: int, contacts: int) -> None:
    assert worst(relays) == contacts


def test_parity_needs_square() -> None:
    # Khrapchenko 1971: at least n*n literals; 4, 10, 16 for n = 2, 3, 4 (published-checks)
    sizes = size_table().size
    for n, contacts in ((2, 4), (3, 10), (4, 16)):
        odd = sum(1 << row for row in range(16) if bin(row % (1 << n)).count("1") % 2)
        assert sizes[odd] == contacts


def by_brute_force(n: int) -> dict[int, int]:
    """Formula sizes of all functions of n relays by closing under and/or, no symmetry used."""
    rows = range(1 << n)
    size = {}
    for i in range(n):
        makes = sum(1 << row for row in rows if row >> i & 1)
        size[makes] = size[(1 << (1 << n)) - 1 - makes] = 1
    total = 2
    while len(size) < (1 << (1 << n)) - 2 or total < 12:
        fresh = set()
        for (f, a), (g, b) in product(size.items(), repeat=2):
            if a + b == total:
                fresh |= {h for h in (f & g, f | g) if h not in size}
        for h in fresh - {0, (1 << (1 << n)) - 1}:
            size[h] = total
        total += 1
    return size


@pytest.mark.parametrize("n", [2, 3])
def test_sizes_equal_brute_force(n: int) -> None:
    for function, contacts in by_brute_force(n).items():
        if function not in (0, (1 << (1 << n)) - 1):
            trees = least_small(Target(n, function), range(n))
            assert trees is not None
            assert contact_count(trees[0]) == contacts
            assert table(trees[0], n) == function


def test_every_tree_offered_is_least_and_right() -> None:
    sizes = size_table()
    for function in range(1, 65535, 997):
        for tree in least_trees(function, 5):
            assert table(tree, 4) == function
            assert contact_count(tree) == sizes.size[function]


def test_free_rows_take_the_best_completion() -> None:
    # on in row 3 only of A B, free where A is released: A alone is closed in row 1 too, so B is
    # the one-contact answer
    target = Target(2, on=0b1000, free=0b0101)
    trees = least_small(target, range(2))
    assert trees is not None
    assert contact_count(trees[0]) == 1
    assert target.accepts(table(trees[0], 2))


def test_none_if_those_relays_cannot_do_it() -> None:
    odd = Target(3, 0b10010110)
    assert least_small(odd, (0, 1)) is None
