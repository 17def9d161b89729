"""Switching algebra text, read by a grammar.

    LAMP = "UP DOWN' + FLOOD"          series by a space, * or ·; parallel +; break '
    HORN = "2oo3(UP, DOWN, FLOOD)"     at least 2 of 3; =2oo3(...) exactly 2 of 3 (IEC 61508 MooN)

Binding, tightest first: `'`, series, `^` (exclusive or), `+`.  The grammar is read by lark's LALR
parser, which neither recurses nor evaluates; what it builds are the values of
`contactlogic.algebra`, whose public names stand here too.
"""

from __future__ import annotations

import re
from dataclasses import replace
from functools import cache
from typing import Any, NamedTuple

from contactlogic.algebra import (
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
    to_text,
)
from contactlogic.errors import FormulaError, Place
from contactlogic.naming import shortened, why_not_a_name

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
    "parse",
    "to_text",
]

_MOST_CHARACTERS = 100_000
_DEEPEST = 200  # keeps all that walks an expression far from Python's limit of recursion

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
    VOTE.3: /=?[0-9]+oo[0-9]+(?![A-Za-z0-9_])/i
    CONSTANT.2: /[01](?![A-Za-z0-9_])/
    NAME.1: /[0-9_]*[A-Za-z][A-Za-z0-9_]*/
    _TIMES: "*" | "·"
    %ignore /[ \t\r\n]+/
"""

_WORD = re.compile(r"=?\w+|.", re.DOTALL)
_VOTE = re.compile(r"=?[0-9]+oo[0-9]+", re.IGNORECASE)
_LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789_="

_OTHER_SIGNS = {
    "&": "series is a space, * or ·",
    "∧": "series is a space, * or ·",
    ".": "series is a space, * or ·",
    "|": "parallel is +",
    "∨": "parallel is +",
    "⊕": "exclusive or is ^",
    "!": "a break is ' after the contact, as in A'",
    "~": "a break is ' after the contact, as in A'",
    "¬": "a break is ' after the contact, as in A'",
    "/": "a break is ' after the contact, as in A'",
    "-": "a break is ' after the contact, as in A'",
    "’": "the sign for a break is the straight '",
    "′": "the sign for a break is the straight '",
    "`": "the sign for a break is the straight '",
    "[": "brackets are ( and )",
    "]": "brackets are ( and )",
    "{": "brackets are ( and )",
    "}": "brackets are ( and )",
    ";": "the parts of a vote are divided by commas",
}
"""What to write for signs that other notations use."""


def parse(text: str, *, place: Place | None = None) -> Expression:
    """The expression a formula stands for.

    Args:
        text: switching algebra.
        place: file, section and row for messages; the caret is added here.

    Raises:
        FormulaError: with a caret under the place that does not fit.
    """
    from lark import UnexpectedInput

    where = place or Place()
    if len(text) > _MOST_CHARACTERS:
        raise FormulaError(
            f"the formula has {len(text)} characters",
            place=where,
            expected=f"at most {_MOST_CHARACTERS}",
            hint="a table says it better",
        )
    if not text.strip():
        raise FormulaError(
            "the formula is empty",
            place=where,
            expected="switching algebra such as UP DOWN' + FLOOD, or 0 or 1",
        )
    try:
        _check_brackets(text)
        part: _Part = _parser().parse(text)
    except UnexpectedInput as error:
        wrong = _unexpected(text, error)
    except _Wrong as error:
        wrong = error
    else:
        return part.expression
    line = re.sub(r"[\r\n]", " ", text)
    raise FormulaError(
        str(wrong),
        place=replace(where, line=line, column=wrong.start, width=wrong.width),
        expected=wrong.expected,
        hint=wrong.hint,
    )


class _Wrong(Exception):
    """What is wrong at a place of the text, on its way to a FormulaError."""

    def __init__(
        self, what: str, expected: str, start: int, width: int = 1, hint: str | None = None
    ) -> None:
        super().__init__(what)
        self.expected = expected
        self.start = start
        self.width = width
        self.hint = hint


class _Part(NamedTuple):
    """An expression being built, how deep it is nested, and where it begins in the text."""

    expression: Expression
    depth: int
    start: int


@cache
def _parser() -> Any:
    from lark import Lark

    return Lark(_GRAMMAR, parser="lalr", transformer=_Builder(), maybe_placeholders=False)


class _Builder:
    """Called by the parser at each reduction, under the names the grammar gives."""

    def start(self, children: list[_Part]) -> _Part:
        return children[0]

    def name(self, children: list[Any]) -> _Part:
        token = children[0]
        problem = why_not_a_name(token)
        if problem:
            expected = "letters A-Z, digits and _, with at least one letter"
            what = f"{shortened(token)} is no relay name: {problem}"
            raise _Wrong(what, expected, token.start_pos, len(token))
        return _Part(Name(str(token)), 1, token.start_pos)

    def constant(self, children: list[Any]) -> _Part:
        return _Part(Constant(children[0] == "1"), 1, children[0].start_pos)

    def broken(self, children: list[_Part]) -> _Part:
        return _nested(Break(children[0].expression), children, children[0].start)

    def series(self, children: list[_Part]) -> _Part:
        return _nested(Series(_flat(Series, children)), children, children[0].start)

    def parallel(self, children: list[_Part]) -> _Part:
        return _nested(Parallel(_flat(Parallel, children)), children, children[0].start)

    def exclusive(self, children: list[_Part]) -> _Part:
        return _nested(Exclusive(_flat(Exclusive, children)), children, children[0].start)

    def vote(self, children: list[Any]) -> _Part:
        token, *parts = children
        start, width = token.start_pos, len(token)
        least, of = token.lower().removeprefix("=").split("oo")
        if len(of) > 6 or int(of) != len(parts):
            found = f"{len(parts)} part{' is' if len(parts) == 1 else 's are'} listed"
            raise _Wrong(
                f"{shortened(token)} is a vote of {shortened(of)} and {found}",
                "as many parts between the brackets as the vote says, divided by commas",
                start,
                width,
            )
        if len(least) > 6 or int(least) > int(of):
            raise _Wrong(
                f"{shortened(token)} can never be met",
                f"a number from 0 to {int(of)} before the oo",
                start,
                width,
            )
        inside = tuple(part.expression for part in parts)
        return _nested(Vote(int(least), token.startswith("="), inside), parts, start)


def _flat(kind: type[Series | Parallel | Exclusive], children: list[_Part]) -> Any:
    """Parts of a group, with those of groups of the same kind in brackets drawn into it."""
    parts: list[Expression] = []
    for child in children:
        inner = child.expression
        parts += inner.parts if isinstance(inner, kind) else (inner,)
    return tuple(parts)


def _nested(expression: Expression, children: list[_Part], start: int) -> _Part:
    depth = 1 + max(child.depth for child in children)
    if depth > _DEEPEST:
        raise _Wrong("the formula is nested too deeply", f"at most {_DEEPEST} levels", start)
    return _Part(expression, depth, start)


def _check_brackets(text: str) -> None:
    """Raise at a bracket without its partner; found before the parser stops somewhere else."""
    opened = []
    for i, character in enumerate(text):
        if character == "(":
            opened.append(i)
        elif character == ")":
            if not opened:
                raise _Wrong("this bracket was never opened", "a ( before it", i)
            opened.pop()
    if opened:
        raise _Wrong("this bracket is never closed", "a ) after it", opened[-1])


def _unexpected(text: str, error: Any) -> _Wrong:
    """The parser's complaint in words of the trade."""
    ended = getattr(getattr(error, "token", None), "type", None) == "$END"
    start = len(text.rstrip()) if ended else error.pos_in_stream
    found = _WORD.match(text, start)
    word = "" if ended or found is None else found.group()
    before = text[:start].rstrip()
    last = before[len(before.rstrip(_LETTERS)) :]
    hint = None
    if _VOTE.fullmatch(last):
        expected = "a ( and the parts of the vote"
    elif not before or before[-1] in "+^*·(,":
        expected = "a relay, 0, 1, a bracket or a vote such as 2oo3(A, B, C)"
    else:
        expected = f"another contact, +, ^, ' or {_end(before)}"
    if not word:
        what = "the formula breaks off here"
    elif word.isdigit() or word.replace("_", "").isdigit() or set(word) == {"_"}:
        what = f"{shortened(word)} is no relay name"
        expected = "0, 1, or a name with at least one letter"
        if re.fullmatch("[0-9]00[0-9]", word) and text[start + len(word) :].lstrip()[:1] == "(":
            hint = f"did you mean {word[0]}oo{word[-1]}?"
    else:
        what = f"{shortened(word)} does not fit here"
        hint = _OTHER_SIGNS.get(word)
    return _Wrong(what, expected, start, max(1, len(word)), hint)


def _end(before: str) -> str:
    """What may end the part of the formula that is open after `before`."""
    opened = []
    for i, character in enumerate(before):
        if character == "(":
            head = before[:i].rstrip()[-20:]
            opened.append(_VOTE.fullmatch(head[len(head.rstrip(_LETTERS)) :]) is not None)
        elif character == ")":
            opened.pop()
    if not opened:
        return "the end of the formula"
    return "a comma or )" if opened[-1] else "a )"
