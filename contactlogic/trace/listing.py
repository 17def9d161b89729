"""A list of wires as someone wrote it down: CSV or XLSX, one wire a line, in any order.

Only where a wire comes from and goes to is needed.  A header names these columns `from` and `to`;
without one the list has just these two, or the first four of contactlogic's own list (wire, net,
from, to).  All other columns are passed over.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from contactlogic.errors import LimitError, Place, WiringError
from contactlogic.job.sheet import read_lines
from contactlogic.naming import did_you_mean, shortened
from contactlogic.workbook import Cell

__all__ = ["End", "Wire", "read_wires"]

_MOST_WIRES = 5_000
_LONGEST = 200
_ENDS = ("from", "to")
_EXPECTED = "a header that names the columns from and to, then a line for each wire"


@dataclass(frozen=True)
class End:
    """One end of a wire: the terminal as written, and where it is written."""

    terminal: str
    place: Place


@dataclass(frozen=True)
class Wire:
    """One conductor between two terminals."""

    start: End
    end: End


def read_wires(path: str | Path) -> tuple[Wire, ...]:
    """The wires of a list.

    Raises:
        WiringError: a line that is no wire, with its line and column.
        InputError: the file cannot be read.
    """
    shown = str(path)
    place = Place(file=shown)
    wires: list[Wire] = []
    columns: tuple[int, int] | None = None
    for label, found in read_lines(Path(path), place, comments=False):
        cells = found
        while cells and not cells[-1].text and not cells[-1].formula:
            cells = cells[:-1]
        if not cells:
            continue
        words = [cell.text.strip().lower() for cell in cells]
        if words[0].startswith("#") and not set(_ENDS) <= set(words):
            continue  # a remark
        if columns is None:
            columns = _header(words, cells, shown, label)
            if columns is not None:
                continue
            columns = _bare(words, cells, shown, label)
        wires.append(_wire(cells, columns, shown, label))
        if len(wires) > _MOST_WIRES:
            raise LimitError("the list is too long", place=place, expected=f"{_MOST_WIRES} wires")
    if not wires:
        raise WiringError("the list holds no wire", place=place, expected=_EXPECTED)
    return tuple(wires)


def _header(
    words: Sequence[str], cells: Sequence[Cell], shown: str, label: str
) -> tuple[int, int] | None:
    """Columns of `from` and `to`; None if the line is no header."""
    there = [word for word in _ENDS if word in words]
    if not there:
        return None
    for word in there:
        if words.count(word) > 1:
            raise WiringError(
                f"the column {word} stands twice", place=_line(cells, shown, label), expected="once"
            )
    for word in _ENDS:
        if word not in there:
            others = [other for other in words if other not in there]
            near = next((other for other in others if did_you_mean(other, [word])), None)
            raise WiringError(
                f"there is no column {word}",
                place=_line(cells, shown, label),
                expected=_EXPECTED,
                hint=None if near is None else f"did you mean {word} by {shortened(near)}?",
            )
    return words.index("from"), words.index("to")


def _bare(words: Sequence[str], cells: Sequence[Cell], shown: str, label: str) -> tuple[int, int]:
    """Columns of the two ends in a list without a header, told from its first line."""
    if len(words) == 2:
        near = [word for word in words if did_you_mean(word, _ENDS)]
        if not near:
            return 0, 1
    elif len(words) >= 4 and words[0].isdecimal() and words[1].isdecimal():
        return 2, 3
    else:
        near = [word for word in words if did_you_mean(word, _ENDS)]
    hint = did_you_mean(near[0], _ENDS) if near else None
    raise WiringError(
        "which columns hold the two ends of a wire is not said",
        place=_line(cells, shown, label),
        expected=_EXPECTED,
        hint=hint or "a list without a header has two columns, or wire, net, from, to",
    )


def _line(cells: Sequence[Cell], shown: str, label: str, at: int | None = None) -> Place:
    """The line, with a caret under the cell in column `at`."""
    text = ", ".join(cell.text for cell in cells)
    if at is None:
        return Place(shown, row=label, line=text)
    before = sum(len(cell.text) + 2 for cell in cells[:at])
    width = max(1, len(cells[at].text)) if at < len(cells) else 1
    return Place(shown, None, f"{label}, column {at + 1}", text, before, width)


def _wire(cells: Sequence[Cell], columns: tuple[int, int], shown: str, label: str) -> Wire:
    ends = []
    for at in columns:
        place = _line(cells, shown, label, at)
        cell = cells[at] if at < len(cells) else Cell("")
        if cell.formula:
            raise WiringError(
                f"the cell holds a formula {shortened(cell.text)}",
                place=place,
                expected="a terminal such as UP:11",
                hint="nothing in a list is worked out: paste values in place of formulas",
            )
        # an apostrophe keeps a label such as +24 V from being computed by a spreadsheet program
        text = cell.text.removeprefix("'") if cell.text[1:2] in ("=", "+", "-", "@") else cell.text
        text = " ".join(text.split())
        if not text:
            raise WiringError(
                "the wire has one end only", place=place, expected="a terminal such as UP:11"
            )
        if len(text) > _LONGEST or not text.isprintable():
            raise WiringError(
                "this can be no terminal",
                place=place,
                expected=f"at most {_LONGEST} characters that can be printed",
            )
        ends.append(End(text, place))
    start, end = ends
    if start.terminal.casefold() == end.terminal.casefold():
        raise WiringError(
            f"both ends of the wire are {shortened(start.terminal)}",
            place=end.place,
            expected="two terminals",
        )
    return Wire(start, end)
