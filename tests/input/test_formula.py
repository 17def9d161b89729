"""Switching algebra: round trips, truth tables against sympy, messages to the letter."""

import math

import pytest
import sympy
from hypothesis import given, settings
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
    names,
    parse,
    to_text,
)
from contactlogic.naming import is_name

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


@settings(max_examples=40)
@given(st.lists(expressions().filter(without_votes), min_size=1, max_size=6), st.data())
def test_votes_count(parts: list[Expression], data: st.DataObject) -> None:
    least, exactly = data.draw(st.integers(0, len(parts))), data.draw(st.booleans())
    table = evaluate(Vote(least, exactly, tuple(parts)), RELAYS)
    each = [evaluate(part, RELAYS) for part in parts]  # held against sympy above
    for row in range(16):
        count = sum(one >> row & 1 for one in each)
        assert bool(table >> row & 1) == (count == least if exactly else count >= least)


def test_binding() -> None:
    # ' before series before ^ before +, as design.md section 5 lays down
    a, b, c, d = map(Name, "ABCD")
    assert parse("A B' ^ C + D") == Parallel((Exclusive((Series((a, Break(b))), c)), d))
    assert parse("A*B·C(D)") == parse("A\tB\n C D") == Series((a, b, c, d))
    assert parse("(A + B)' C") == Series((Break(Parallel((a, b))), c))
    assert parse("A ^ B' ^ C") == Exclusive((a, Break(b), c))
    assert parse("A' '") == Break(Break(a))
    assert parse("=1oo2(A + B, C D)") == Vote(1, True, (Parallel((a, b)), Series((c, d))))
    assert parse("0 + 1A") == Parallel((Constant(False), Name("1A")))
    assert parse("1'0") == Series((Break(Constant(True)), Constant(False)))
    assert parse("A''") == Break(Break(a))


def test_row_bits_follow_relay_order() -> None:
    assert evaluate(parse("B A'"), ("A", "B")) == 0b0100
    assert names(parse("B + A B")) == ("B", "A")


@pytest.mark.parametrize("text", ["K7", "1CR", "12TPR", "UP", "_a", "oo3", "2oo"])
def test_names(text: str) -> None:
    assert is_name(text)
    assert parse(text) == Name(text)


@pytest.mark.parametrize(
    "text", ["", "7", "_", "2oo3", "2OO3", "A-B", "A B", "É", "A'", "A\n", "K" * 101]
)
def test_no_names(text: str) -> None:
    assert not is_name(text)


ERRORS = {
    "": "job.toml, [formulas], LAMP: the formula is empty\n"
    "  expected: switching algebra such as UP DOWN' + FLOOD, or 0 or 1",
    "A + ": "job.toml, [formulas], LAMP: the formula breaks off here\n"
    "    A + \n       ^\n  expected: a relay, 0, 1, a bracket or a vote such as 2oo3(A, B, C)",
    "A (B -C)": "job.toml, [formulas], LAMP: - does not fit here\n"
    "    A (B -C)\n         ^\n  expected: another contact, +, ^, ' or a )\n"
    "  a break is ' after the contact, as in A'",
    "2oo2(A; B)": "job.toml, [formulas], LAMP: ; does not fit here\n"
    "    2oo2(A; B)\n          ^\n  expected: another contact, +, ^, ' or a comma or )\n"
    "  the parts of a vote are divided by commas",
    "2oo3(A, B)": "job.toml, [formulas], LAMP: 2oo3 is a vote of 3 and 2 parts are listed\n"
    "    2oo3(A, B)\n    ^^^^\n"
    "  expected: as many parts between the brackets as the vote says, divided by commas",
    "A\u00a0B": "job.toml, [formulas], LAMP: \\xa0 does not fit here\n"
    "    A B\n     ^\n  expected: another contact, +, ^, ' or the end of the formula",
    "A \x1b[2J": "job.toml, [formulas], LAMP: \\x1b does not fit here\n"
    "    A  [2J\n      ^\n  expected: another contact, +, ^, ' or the end of the formula",
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


@given(st.text("AB1'()+^*·,=2o3 \t&-é", max_size=30))
def test_any_text_is_read_or_refused(text: str) -> None:
    refusal = None
    try:
        expression = parse(text)
    except FormulaError as error:
        refusal = error
    if refusal is None:
        assert parse(to_text(expression)) == expression
    else:
        assert refusal.expected
        assert refusal.place.column is None or 0 <= refusal.place.column <= len(text)


@pytest.mark.parametrize(
    "text",
    [
        "A" + "'" * 5000,
        "A (B + " * 1000 + "C" + ")" * 1000,
        "1oo1(" * 1000 + "C" + ")" * 1000,
        "A+" * 100_000 + "A",
        "9" * 5000 + "oo3(A, B, C)",
        "2oo" + "9" * 5000 + "(A, B, C)",
        "9" * 50_000,
        "A" * 50_000,
        "(" * 50_000,
    ],
    ids=["breaks", "brackets", "votes", "long", "least", "of", "digits", "name", "open"],
)
def test_hostile_text_is_refused_cleanly(text: str) -> None:
    with pytest.raises(FormulaError) as caught:
        parse(text)
    assert len(str(caught.value)) < 500


def test_brackets_alone_do_not_nest() -> None:
    assert parse("(" * 5000 + "A" + ")" * 5000) == Name("A")


def test_deepest_and_widest_formulas_are_evaluated() -> None:
    relays = [f"K{i}" for i in range(16)]
    deep = "K0"
    for i in range(98):
        deep = f"({deep} + K{i % 16}') K{(i + 5) % 16}"
    assert 0 < evaluate(parse(deep), relays).bit_length() <= 1 << 16
    parts = ", ".join(relays * 200)
    table = evaluate(parse(f"1600oo3200({parts})"), relays)
    assert table.bit_count() == sum(math.comb(16, k) for k in range(8, 17))
