"""Switching algebra: round trips, truth tables against sympy, messages to the letter."""

import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from contactlogic.errors import FormulaError, Place
from contactlogic.formula import (
    Break,
    Constant,
    Exclusive,
    Expression,
    Name,
    Parallel,
    Series,
    Vote,
    evaluate,
    is_name,
    names,
    parse,
    to_text,
)

RELAYS = ("UP", "DOWN", "1CR", "K7")


def grouped(kind: type, inner: st.SearchStrategy[Expression]) -> st.SearchStrategy[Expression]:
    """Groups as the parser builds them: no group directly inside one of its own kind."""
    return st.lists(inner.filter(lambda e: not isinstance(e, kind)), min_size=2, max_size=4).map(
        lambda parts: kind(tuple(parts))
    )


def expressions() -> st.SearchStrategy[Expression]:
    leaf = st.one_of(st.sampled_from(RELAYS).map(Name), st.booleans().map(Constant))

    def votes(inner: st.SearchStrategy[Expression]) -> st.SearchStrategy[Expression]:
        return st.lists(inner, min_size=1, max_size=4).flatmap(
            lambda parts: st.builds(
                Vote, st.integers(0, len(parts)), st.booleans(), st.just(tuple(parts))
            )
        )

    return st.recursive(
        leaf,
        lambda inner: st.one_of(
            inner.map(Break),
            grouped(Series, inner),
            grouped(Parallel, inner),
            grouped(Exclusive, inner),
            votes(inner),
        ),
        max_leaves=12,
    )


def in_sympy(expression: Expression, symbols: dict[str, sympy.Symbol]) -> sympy.Basic:
    match expression:
        case Name(name):
            return symbols[name]
        case Constant(value):
            return sympy.true if value else sympy.false
        case Break(part):
            return sympy.Not(in_sympy(part, symbols))
        case Series(parts):
            return sympy.And(*(in_sympy(p, symbols) for p in parts))
        case Parallel(parts):
            return sympy.Or(*(in_sympy(p, symbols) for p in parts))
        case Exclusive(parts):
            result: sympy.Basic = sympy.false
            for p in parts:
                result = sympy.Xor(result, in_sympy(p, symbols), evaluate=False)
            return result
    raise TypeError(expression)


def without_votes(expression: Expression) -> bool:
    if isinstance(expression, Vote):
        return False
    parts = (
        (expression.part,) if isinstance(expression, Break) else getattr(expression, "parts", ())
    )
    return all(without_votes(part) for part in parts)


@given(expressions())
def test_text_reads_back_to_the_same_expression(expression: Expression) -> None:
    assert parse(to_text(expression)) == expression


@given(expressions().filter(without_votes))
def test_table_equals_sympy(expression: Expression) -> None:
    symbols = dict(zip(RELAYS, sympy.symbols("a b c d"), strict=True))
    other = in_sympy(expression, symbols)
    table = evaluate(expression, RELAYS)
    for row in range(16):
        values = {symbol: bool(row >> i & 1) for i, symbol in enumerate(symbols.values())}
        assert bool(other.subs(values)) == bool(table >> row & 1)


@given(st.integers(0, 4), st.booleans())
def test_votes_count(least: int, exactly: bool) -> None:
    table = evaluate(Vote(least, exactly, tuple(map(Name, RELAYS))), RELAYS)
    for row in range(16):
        count = row.bit_count()
        assert bool(table >> row & 1) == (count == least if exactly else count >= least)


def test_binding() -> None:
    # ' before series before ^ before +, as design.md section 5 lays down
    a, b, c, d = map(Name, "ABCD")
    assert parse("A B' ^ C + D") == Parallel((Exclusive((Series((a, Break(b))), c)), d))
    assert parse("A*B·C(D)") == Series((a, b, c, d))
    assert parse("A''") == Break(Break(a))


def test_row_bits_follow_relay_order() -> None:
    assert evaluate(parse("B A'"), ("A", "B")) == 0b0100
    assert names(parse("B + A B")) == ("B", "A")


@pytest.mark.parametrize("text", ["K7", "1CR", "12TPR", "UP", "_a", "oo3", "2oo"])
def test_names(text: str) -> None:
    assert is_name(text)
    assert parse(text) == Name(text)


@pytest.mark.parametrize("text", ["", "7", "_", "2oo3", "A-B", "A B", "É", "A'"])
def test_no_names(text: str) -> None:
    assert not is_name(text)


ERRORS = {
    "": "job.toml, [formulas], LAMP: the formula is empty\n"
    "  expected: switching algebra such as UP DOWN' + FLOOD, or 0 or 1",
    "A (B": "job.toml, [formulas], LAMP: this bracket is never closed\n"
    "    A (B\n      ^\n  expected: a ) after it",
    "A)": "job.toml, [formulas], LAMP: this bracket was never opened\n"
    "    A)\n     ^\n  expected: a ( before it",
    "A + ": "job.toml, [formulas], LAMP: the formula breaks off here\n"
    "    A + \n       ^\n  expected: a relay, 0, 1, a bracket or a vote such as 2oo3(A, B, C)",
    "12 A": "job.toml, [formulas], LAMP: 12 is no relay name\n"
    "    12 A\n    ^^\n  expected: 0, 1, or a name with at least one letter",
    "A & B": "job.toml, [formulas], LAMP: & does not fit here\n"
    "    A & B\n      ^\n  expected: another contact, +, ^, ' or the end of the formula",
    "2oo3(A, B)": "job.toml, [formulas], LAMP: 2oo3 names 3 parts, 2 are listed\n"
    "    2oo3(A, B)\n    ^^^^\n  expected: 3 parts between the brackets",
    "4oo3(A, B, C)": "job.toml, [formulas], LAMP: 4oo3 can never be met\n"
    "    4oo3(A, B, C)\n    ^^^^\n  expected: a number from 0 to 3 before the oo",
}


@pytest.mark.parametrize("text", ERRORS)
def test_messages(text: str) -> None:
    with pytest.raises(FormulaError) as caught:
        parse(text, place=Place(file="job.toml", section="formulas", row="LAMP"))
    assert str(caught.value) == ERRORS[text]


def test_misspelt_relay() -> None:
    with pytest.raises(FormulaError) as caught:
        evaluate(parse("UP DWON'"), ("UP", "DOWN"), text="UP DWON'")
    assert str(caught.value) == (
        "there is no relay DWON\n    UP DWON'\n       ^^^^\n"
        "  expected: one of UP, DOWN\n  did you mean DOWN?"
    )


def test_depth_and_length_are_limited_not_crashed() -> None:
    assert parse("(" * 5000 + "A" + ")" * 5000) == Name("A")
    with pytest.raises(FormulaError, match="nested too deeply"):
        parse("A" + "'" * 5000)
    with pytest.raises(FormulaError, match="200001 characters"):
        parse("A+" * 100_000 + "A")
