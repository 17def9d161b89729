"""Truth tables against plain loops over rows."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from strategies import tables, targets

from contactlogic.truth import (
    Target,
    all_rows,
    cofactor,
    depends_on,
    literal,
    rows_of,
    settings,
    support,
    variable,
)

sizes = st.integers(1, 5)
sized_tables = sizes.flatmap(lambda n: st.tuples(st.just(n), tables(n), st.integers(0, n - 1)))


def bits(table: int, n: int) -> list[int]:
    return [table >> row & 1 for row in range(2**n)]


@given(sizes, st.data())
def test_input_i_is_bit_i_of_the_row(n, data):
    i = data.draw(st.integers(0, n - 1))
    expected = [row // 2**i % 2 for row in range(2**n)]
    assert bits(variable(n, i), n) == expected
    assert variable(n, i).bit_length() <= 2**n
    assert literal(n, i, True) == variable(n, i)
    assert bits(literal(n, i, False), n) == [1 - value for value in expected]
    assert [settings(row, n)[i] for row in range(2**n)] == expected


@given(sized_tables, st.integers(0, 1))
def test_a_cofactor_is_the_table_with_the_input_held(case, value):
    n, table, i = case
    held = [(row & ~(1 << i)) | value << i for row in range(2**n)]
    assert bits(cofactor(table, n, i, value), n) == [table >> row & 1 for row in held]


@given(sized_tables)
def test_support(case):
    n, table, i = case
    turned = [(table >> (row ^ 1 << i)) & 1 for row in range(2**n)]
    assert depends_on(table, n, i) == (turned != bits(table, n))
    assert support(table, n) == tuple(j for j in range(n) if depends_on(table, n, j))


@given(sizes.flatmap(tables))
def test_rows_of_a_table(table):
    assert sum(1 << row for row in rows_of(table)) == table
    assert list(rows_of(table)) == sorted(rows_of(table))


@given(sizes.flatmap(lambda n: st.tuples(targets(n), tables(n), st.integers(0, n - 1))))
def test_a_target_accepts_what_differs_only_where_it_is_free(case):
    target, table, i = case
    n = target.n
    wanted = [
        None if free else on
        for on, free in zip(bits(target.on, n), bits(target.free, n), strict=True)
    ]
    assert target.accepts(table) == all(
        want in (None, got) for want, got in zip(wanted, bits(table, n), strict=True)
    )
    assert bits(target.off, n) == [int(want == 0) for want in wanted]
    assert target.needs(i) == any(
        {wanted[row], wanted[row ^ 1 << i]} == {0, 1} for row in range(2**n)
    )


def test_a_target_is_within_its_table_and_never_both_on_and_free():
    with pytest.raises(ValueError, match="overlap"):
        Target(1, 0b01, 0b01)
    with pytest.raises(ValueError, match="outside"):
        Target(1, 0b100)
    assert all_rows(0) == 1
