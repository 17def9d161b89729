"""Switching algebra text: parsing, truth tables, printing.

    LAMP = "UP DOWN' + FLOOD"          series by a space, * or ·; parallel +; break '
    HORN = "2oo3(UP, DOWN, FLOOD)"     at least 2 of 3; =2oo3(...) exactly 2 of 3 (IEC 61508 MooN)

Binding, tightest first: `'`, series, `^` (exclusive or), `+`.  The grammar is read by lark's LALR
parser, which neither recurses nor evaluates; what it builds is plain data.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cache
from typing import Any, Union

from contactlogic.errors import FormulaError, Place
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
    "is_name",
    "names",
    "parse",
    "to_text",
    "why_not_a_name",
]

_MOST_CHARACTERS = 100_000
_DEEPEST = 200

_GRAMMAR = r"""
    start: sum
    ?sum: exclusive | exclusive ("+" exclusive)+ -> parallel
    ?exclusive: product | product ("^" product)+ -> exclusive
    ?product: factor | factor (_TIMES? factor)+ -> series
    ?factor: atom | factor "'" -> broken
    ?atom: NAME -> name
        | CONSTANT -> constant
        | VOTE "(" sum ("," sum)* ")" -> vote
        | "(" sum ")"
    VOTE.3: /=?[0-9]+oo[0-9]+(?![A-Za-z0-9_])/
    CONSTANT.2: /[01](?![A-Za-z0-9_])/
    NAME.1: /[A-Za-z0-9_]*[A-Za-z][A-Za-z0-9_]*/
    _TIMES: "*" | "·"
    %ignore /[ \t\r\n]+/
"""

_NAME = re.compile(r"[A-Za-z0-9_]*[A-Za-z][A-Za-z0-9_]*")
_VOTE = re.compile(r"=?[0-9]+oo[0-9]+")
_WORD = re.compile(r"\w+|.", re.DOTALL)


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
    """Closed where every part is."""

    parts: tuple[Expression, ...]


@dataclass(frozen=True)
class Parallel:
    """Closed where any part is."""

    parts: tuple[Expression, ...]


@dataclass(frozen=True)
class Exclusive:
    """Closed where an odd number of parts is."""

    parts: tuple[Expression, ...]


@dataclass(frozen=True)
class Vote:
    """Closed where at least (or `exactly`) `least` of the parts are."""

    least: int
    exactly: bool
    parts: tuple[Expression, ...]


Expression = Union[Name, Constant, Break, Series, Parallel, Exclusive, Vote]  # noqa: UP007 - names classes defined by now, read by type checkers only


def is_name(text: str) -> bool:
    """Whether `text` can name a relay or load."""
    return why_not_a_name(text) is None


def why_not_a_name(text: str) -> str | None:
    """What is wrong with a name, in words that follow "... is no name: "; None if it is one."""
    if not text:
        return "it is empty"
    if _VOTE.fullmatch(text):
        return "MooN is kept for votes such as 2oo3(A, B, C)"
    if not re.fullmatch(r"[A-Za-z0-9_]+", text):
        return "only letters A-Z, digits and _ may stand in one"
    if not _NAME.fullmatch(text):
        return "it needs at least one letter"
    return None


def parse(text: str, *, place: Place | None = None) -> Expression:
    """The expression a formula stands for.

    Args:
        text: switching algebra.
        place: file, section and row for messages; the caret is added here.

    Raises:
        FormulaError: with a caret under the place that does not fit.
    """
    from lark import UnexpectedInput
    from lark.exceptions import VisitError

    where = place or Place()
    if len(text) > _MOST_CHARACTERS:
        raise FormulaError(
            f"the formula has {len(text)} characters",
            place=where,
            expected=f"at most {_MOST_CHARACTERS}",
        )
    if not text.strip():
        raise FormulaError(
            "the formula is empty",
            place=where,
            expected="switching algebra such as UP DOWN' + FLOOD, or 0 or 1",
        )
    _check_brackets(text, where)
    try:
        expression, _ = _parser().parse(text)
    except UnexpectedInput as error:
        raise _unexpected(text, error, where) from None
    except VisitError as error:
        if isinstance(error.orig_exc, _Wrong):
            raise _at(text, error.orig_exc.start, error.orig_exc, where) from None
        raise
    except _Wrong as error:
        raise _at(text, error.start, error, where) from None
    result: Expression = expression
    return result


class _Wrong(Exception):
    """A formula that parses but says something impossible, from inside the parser."""

    def __init__(self, what: str, expected: str, start: int, width: int = 1) -> None:
        super().__init__(what)
        self.expected = expected
        self.start = start
        self.width = width


def _at(text: str, start: int, wrong: _Wrong, where: Place) -> FormulaError:
    place = replace(where, line=_one_line(text), column=start, width=wrong.width)
    return FormulaError(str(wrong), place=place, expected=wrong.expected)


def _one_line(text: str) -> str:
    return re.sub(r"[\r\n]", " ", text)


@cache
def _parser() -> Any:
    from lark import Lark

    return Lark(_GRAMMAR, parser="lalr", transformer=_Builder(), maybe_placeholders=False)


class _Builder:
    """Called by the parser at each reduction; every value is (expression, depth)."""

    def start(self, children: list[Any]) -> Any:
        return children[0]

    def name(self, children: list[Any]) -> Any:
        return Name(str(children[0])), 1

    def constant(self, children: list[Any]) -> Any:
        return Constant(children[0] == "1"), 1

    def broken(self, children: list[Any]) -> Any:
        part, depth = children[0]
        return Break(part), _deeper([depth])

    def series(self, children: list[Any]) -> Any:
        return _flat(Series, children)

    def parallel(self, children: list[Any]) -> Any:
        return _flat(Parallel, children)

    def exclusive(self, children: list[Any]) -> Any:
        return _flat(Exclusive, children)

    def vote(self, children: list[Any]) -> Any:
        token, *rest = children
        least, of = map(int, token.removeprefix("=").split("oo"))
        if of != len(rest):
            raise _Wrong(
                f"{token} names {of} parts, {len(rest)} are listed",
                f"{of} parts between the brackets",
                token.start_pos,
                len(token),
            )
        if least > of:
            raise _Wrong(
                f"{token} can never be met",
                f"a number from 0 to {of} before the oo",
                token.start_pos,
                len(token),
            )
        parts = tuple(part for part, _ in rest)
        return Vote(least, token.startswith("="), parts), _deeper([depth for _, depth in rest])


def _flat(kind: Any, children: list[Any]) -> Any:
    parts: list[Expression] = []
    for part, _ in children:
        parts += part.parts if isinstance(part, kind) else (part,)
    return kind(tuple(parts)), _deeper([depth for _, depth in children])


def _deeper(depths: list[int]) -> int:
    depth = max(depths) + 1
    if depth > _DEEPEST:
        raise _Wrong("the formula is nested too deeply", f"at most {_DEEPEST} levels", 0)
    return depth


def _check_brackets(text: str, where: Place) -> None:
    opened = []
    for i, character in enumerate(text):
        if character == "(":
            opened.append(i)
        elif character == ")":
            if not opened:
                wrong = _Wrong("this bracket was never opened", "a ( before it", i)
                raise _at(text, i, wrong, where)
            opened.pop()
    if opened:
        wrong = _Wrong("this bracket is never closed", "a ) after it", opened[-1])
        raise _at(text, opened[-1], wrong, where)


def _unexpected(text: str, error: Any, where: Place) -> FormulaError:
    """The parser's complaint in words of the trade."""
    start = getattr(error, "pos_in_stream", None)
    if start is None or start < 0 or start >= len(text):
        start = len(text.rstrip())
    token = getattr(error, "token", None)
    if token is not None and token.type == "$END":
        start = len(text.rstrip())
    found = _WORD.match(text, start)
    word = found.group().strip() if found else ""
    before = text[:start].rstrip()
    operand = "a relay, 0, 1, a bracket or a vote such as 2oo3(A, B, C)"
    if before.endswith(tuple("+^*·(,")) or not before:
        expected = operand
    elif _VOTE.search(before) and re.search(r"=?[0-9]+oo[0-9]+$", before):
        expected = "( and the parts of the vote"
    else:
        expected = "another contact, +, ^, ' or the end of the formula"
    if not word:
        what = "the formula breaks off here"
    elif word.isdigit() or (word.replace("_", "").isdigit()):
        what, expected = f"{word} is no relay name", "0, 1, or a name with at least one letter"
    elif _VOTE.fullmatch(word):
        what, expected = f"{word} is a vote without its parts", f"{word}(A, B, C)"
    else:
        what = f"{word} does not fit here"
    wrong = _Wrong(what, expected, start, max(1, len(word)))
    return _at(text, start, wrong, where)


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
            raise _unknown(name, relays, text, place or Place())
    return _table(expression, index, len(relays))


def _table(expression: Expression, index: dict[str, int], n: int) -> int:
    full = all_rows(n)
    if isinstance(expression, Name):
        return variable(n, index[expression.name])
    if isinstance(expression, Constant):
        return full if expression.value else 0
    if isinstance(expression, Break):
        return full & ~_table(expression.part, index, n)
    tables = [_table(part, index, n) for part in expression.parts]
    if isinstance(expression, Vote):
        # met[k]: rows in which at least k of the parts seen so far are closed
        met = [full] + [0] * (len(tables) + 1)
        for seen, table in enumerate(tables, start=1):
            for k in range(seen, 0, -1):
                met[k] |= met[k - 1] & table
        more = met[expression.least + 1] if expression.exactly else 0
        return met[expression.least] & ~more
    result = full if isinstance(expression, Series) else 0
    for table in tables:
        if isinstance(expression, Series):
            result &= table
        elif isinstance(expression, Parallel):
            result |= table
        else:
            result ^= table
    return result


def _unknown(name: str, relays: Sequence[str], text: str | None, where: Place) -> FormulaError:
    from difflib import get_close_matches

    found = re.search(rf"(?<![A-Za-z0-9_]){name}(?![A-Za-z0-9_])", text) if text else None
    if text is not None and found:
        where = replace(where, line=_one_line(text), column=found.start(), width=len(name))
    near = get_close_matches(name, relays, n=1)
    upper = [relay for relay in relays if relay.upper() == name.upper()]
    close = upper or near
    return FormulaError(
        f"there is no relay {name}",
        place=where,
        expected="one of " + ", ".join(relays[:12]) + (", ..." if len(relays) > 12 else ""),
        hint=f"did you mean {close[0]}?" if close else None,
    )


_BINDING = {Parallel: 0, Exclusive: 1, Series: 2}
_JOINED_BY = {Parallel: " + ", Exclusive: " ^ ", Series: " "}


def to_text(expression: Expression) -> str:
    """The expression with as few brackets as its binding needs; `parse` reads it back."""
    if isinstance(expression, Name):
        return expression.name
    if isinstance(expression, Constant):
        return "1" if expression.value else "0"
    if isinstance(expression, Break):
        inner = to_text(expression.part)
        return f"({inner})'" if type(expression.part) in _BINDING else f"{inner}'"
    if isinstance(expression, Vote):
        mark = "=" if expression.exactly else ""
        listed = ", ".join(to_text(part) for part in expression.parts)
        return f"{mark}{expression.least}oo{len(expression.parts)}({listed})"
    own = _BINDING[type(expression)]
    texts = [
        f"({to_text(part)})" if _BINDING.get(type(part), 3) < own else to_text(part)
        for part in expression.parts
    ]
    return _JOINED_BY[type(expression)].join(texts)
