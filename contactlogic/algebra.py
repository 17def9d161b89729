"""Switching algebra as values: expressions, their truth tables, their text.

Written by hand or read by `contactlogic.formula`.  Tables are made for all rows at once
(`contactlogic.truth`); votes are counted in binary, one table per binary digit, so that a vote of
k parts takes about 2k passes over the table and not one per choice of parts.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from contactlogic.errors import FormulaError, Place
from contactlogic.naming import did_you_mean, listed, place_of
from contactlogic.truth import all_rows, variable

__all__ = [
    "Break",
    "Constant",
    "Exclusive",
    "Expression",
    "Name",
    "Parallel",
    "Series",
    "Vote",
    "evaluate",
    "names",
    "to_text",
]


@dataclass(frozen=True)
class Name:
    """A relay, closed while it is operated."""

    name: str


@dataclass(frozen=True)
class Constant:
    """Always closed (True) or never (False)."""

    value: bool


@dataclass(frozen=True)
class Break:
    """The opposite of a part: a break contact where the part is a relay."""

    part: Expression


@dataclass(frozen=True)
class Series:
    """Closed where every part is; at least one part."""

    parts: tuple[Expression, ...]


@dataclass(frozen=True)
class Parallel:
    """Closed where any part is; at least one part."""

    parts: tuple[Expression, ...]


@dataclass(frozen=True)
class Exclusive:
    """Closed where an odd number of parts is; at least one part."""

    parts: tuple[Expression, ...]


@dataclass(frozen=True)
class Vote:
    """Closed where at least (or `exactly`) `least` of the parts are (IEC 61508: MooN)."""

    least: int
    exactly: bool
    parts: tuple[Expression, ...]


Expression = Name | Constant | Break | Series | Parallel | Exclusive | Vote


def names(expression: Expression) -> tuple[str, ...]:
    """Relays in order of first appearance."""
    return tuple(dict.fromkeys(_names(expression)))


def _names(expression: Expression) -> Iterator[str]:
    if isinstance(expression, Name):
        yield expression.name
    elif isinstance(expression, Break):
        yield from _names(expression.part)
    elif not isinstance(expression, Constant):
        for part in expression.parts:
            yield from _names(part)


def evaluate(
    expression: Expression,
    relays: Sequence[str],
    *,
    text: str | None = None,
    place: Place | None = None,
) -> int:
    """Truth table over `relays`, in the bit order of `truth`.

    Args:
        expression: what to evaluate.
        relays: relay names; relay i is bit i of the row number.
        text: the formula as written, for the caret.
        place: where it stands.

    Raises:
        FormulaError: a relay that is not among `relays`.
    """
    index = {name: i for i, name in enumerate(relays)}
    for name in names(expression):
        if name not in index:
            where = place or Place()
            raise FormulaError(
                f"there is no relay {name}",
                place=where if text is None else place_of(name, text, where),
                expected=listed(relays),
                hint=did_you_mean(name, relays),
            )
    return _table(expression, index, len(relays))


def _table(expression: Expression, index: dict[str, int], n: int) -> int:
    full = all_rows(n)
    if isinstance(expression, Name):
        return variable(n, index[expression.name])
    if isinstance(expression, Constant):
        return full if expression.value else 0
    if isinstance(expression, Break):
        return full & ~_table(expression.part, index, n)
    if isinstance(expression, Vote):
        return _vote(expression, [_table(part, index, n) for part in expression.parts], full)
    result = full if isinstance(expression, Series) else 0
    for part in expression.parts:
        table = _table(part, index, n)
        if isinstance(expression, Series):
            result &= table
        elif isinstance(expression, Parallel):
            result |= table
        else:
            result ^= table
    return result


def _vote(vote: Vote, tables: list[int], full: int) -> int:
    digits: list[int] = []  # digits[k]: rows in which bit k of the number of closed parts is 1
    for carry in tables:
        for k, digit in enumerate(digits):
            if not carry:
                break
            digits[k], carry = digit ^ carry, digit & carry
        if carry:
            digits.append(carry)
    more, equal = 0, full
    for k in reversed(range(max(len(digits), vote.least.bit_length()))):
        digit = digits[k] if k < len(digits) else 0
        if vote.least >> k & 1:
            equal &= digit
        else:
            more |= equal & digit
            equal &= ~digit
    return equal if vote.exactly else equal | more


_BINDING = {Parallel: 0, Exclusive: 1, Series: 2}
_JOINED_BY = {Parallel: " + ", Exclusive: " ^ ", Series: " "}


def to_text(expression: Expression) -> str:
    """The expression with as few brackets as its binding needs; `formula.parse` reads it back.

    A group directly inside a group of its own kind reads back as one group, which means the same.
    """
    if isinstance(expression, Name):
        return expression.name
    if isinstance(expression, Constant):
        return "1" if expression.value else "0"
    if isinstance(expression, Break):
        inner = to_text(expression.part)
        return f"({inner})'" if type(expression.part) in _BINDING else f"{inner}'"
    if isinstance(expression, Vote):
        mark = "=" if expression.exactly else ""
        parts = ", ".join(to_text(part) for part in expression.parts)
        return f"{mark}{expression.least}oo{len(expression.parts)}({parts})"
    own = _BINDING[type(expression)]
    texts = [
        f"({to_text(part)})" if _BINDING.get(type(part), 3) < own else to_text(part)
        for part in expression.parts
    ]
    return _JOINED_BY[type(expression)].join(texts)
