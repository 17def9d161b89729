"""Rows of a truth table to what each load must do.

A `Grid` is a table as written, whatever file it came from.  `-` in an input stands for both
values, in a load for "either".  Where one row leaves a load free and an overlapping one fixes it,
the fixed value holds: a free row asks for nothing, so it contradicts nothing.  0 against 1 is an
error that names both rows.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

from contactlogic.errors import LimitError, Place, TableError
from contactlogic.naming import shortened
from contactlogic.truth import MAX_INPUTS, Target, all_rows, literal, rows_of, settings

__all__ = [
    "MOST_LOADS",
    "MOST_ROWS",
    "Grid",
    "GridRow",
    "Unlisted",
    "no_value",
    "read_columns",
    "read_rows",
    "targets_of",
    "too_many_inputs",
]

Unlisted = Literal["off", "free"]

MOST_ROWS = 2 << MAX_INPUTS
"""Most rows of a table as written; a table may overlap itself, but hardly more than this."""

MOST_LOADS = 1024
"""Most loads of a job; a bound on time and memory that no cabinet comes near."""

_MARKS = frozenset("01-")

_HABITS = {
    **dict.fromkeys(
        ("", "–", "—", "−", "x", "X", "*", "?"),
        "write - for both values of an input, or for a load that may be either",
    ),
    **dict.fromkeys(
        ("true", "false", "on", "off", "yes", "no", "operated", "released"),
        "write 1 for operated or on, 0 for released or off",
    ),
}
"""What to write in place of other marks."""


@dataclass(frozen=True, eq=False)
class GridRow:
    """Cells of one row, inputs first; `label` is what the user calls it, `text` what is shown.

    In `text` the cells stand as the user wrote them, or, of a row of a sheet, one space apart
    (they may be empty there, or hold spaces).
    """

    cells: tuple[str, ...]
    label: str
    text: str
    of_sheet: bool = False

    def place(self, cell: int, place: Place) -> Place:
        """`place` with this row and a caret under a cell."""
        if self.of_sheet:
            start = sum(len(before) + 1 for before in self.cells[:cell])
        else:
            start = [found.start() for found in re.finditer(r"[^\s,|]+", self.text)][cell]
        width = len(self.cells[cell])
        return replace(place, row=self.label, line=self.text, column=start, width=width)


@dataclass(frozen=True)
class Grid:
    """A table as written: input relays, loads, rows; `place` is its file and section."""

    relays: tuple[str, ...]
    loads: tuple[str, ...]
    rows: tuple[GridRow, ...]
    place: Place


def read_columns(text: str, place: Place) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Input relays and loads of a `columns` line such as "UP DOWN | LAMP"."""
    bars = [i for i, character in enumerate(text) if character == "|"]
    if len(bars) != 1:
        raise TableError(
            "columns have more than one |" if bars else "columns have no |",
            place=replace(place, line=text, column=bars[1] if bars else len(text.rstrip())),
            expected='relays, one |, loads: such as "UP DOWN FLOOD | LAMP HORN"',
        )
    left, right = (part.replace(",", " ").split() for part in text.split("|"))
    if not left or not right:
        raise TableError(
            f"columns name no {'load' if left else 'relay'}",
            place=replace(place, line=text, column=bars[0]),
            expected="at least one relay before the | and one load after it",
        )
    if len(left) > MAX_INPUTS:
        raise too_many_inputs("table", len(left), place)
    return tuple(left), tuple(right)


def read_rows(
    text: str, inputs: int, loads: int, place: Place, first_line: int | None = None
) -> tuple[GridRow, ...]:
    """Rows of inline text; blank lines and what follows a # are passed over.

    Args:
        text: one row a line; cells separated by spaces or commas, | optional.
        inputs: how many cells of a row are inputs.
        loads: how many are loads.
        place: file and section.
        first_line: line of the file on which `text` begins, if that is known.
    """
    rows: list[GridRow] = []
    for offset, line in enumerate(text.split("\n")):
        shown = line.split("#", 1)[0].rstrip()
        if not shown or shown.isspace():
            continue
        label = f"row {len(rows) + 1}"
        if first_line is not None:
            label += f", line {first_line + offset}"
        left, bar, right = shown.partition("|")
        before = left.replace(",", " ").split()
        after = right.replace(",", " ").split()
        cells = (*before, *after)
        if len(cells) != inputs + loads or "|" in right or (bar and len(before) != inputs):
            raise _ragged(GridRow(cells, label, shown), len(before), inputs, loads, place)
        if len(rows) == MOST_ROWS:
            raise LimitError(
                f"the table has more than {MOST_ROWS} rows", place=place, expected="fewer rows"
            )
        rows.append(GridRow(cells, label, shown))
    return tuple(rows)


def _ragged(row: GridRow, before: int, inputs: int, loads: int, place: Place) -> TableError:
    bars = row.text.count("|")
    found = f"{len(row.cells)} cell{'' if len(row.cells) == 1 else 's'}"
    if bars > 1:
        found = f"{bars} bars"
    elif bars:
        found = f"{before} before the | and {len(row.cells) - before} after it"
    run_on = any(len(cell) > 1 and _MARKS.issuperset(cell) for cell in row.cells)
    expected = f"{inputs} before the | and {loads} after it, as in columns"
    if not inputs:
        expected = f"{loads}, as in loads"
    elif not loads:
        expected = f"{inputs}, as in columns"
    return TableError(
        f"the row has {found}",
        place=replace(place, row=row.label, line=row.text),
        expected=expected,
        hint="separate the cells by spaces" if run_on else None,
    )


def too_many_inputs(what: str, count: int, place: Place) -> LimitError:
    """The refusal of a table or job with more input relays than can be proved."""
    return LimitError(
        f"the {what} has {count} input relays",
        place=place,
        expected=f"at most {MAX_INPUTS}: every one of the 2^{MAX_INPUTS} rows is proved",
    )


def targets_of(grid: Grid, unlisted: Unlisted | None) -> tuple[dict[str, Target], int]:
    """What each load must do over the grid's relays, and the rows that are listed.

    Raises:
        LimitError: too many relays or loads.
        TableError: an illegal cell, rows that contradict each other, rows missing.
    """
    n = len(grid.relays)
    if n > MAX_INPUTS:
        raise too_many_inputs("table", n, grid.place)
    if len(grid.loads) > MOST_LOADS:
        raise LimitError(
            f"the table has {len(grid.loads)} loads",
            place=grid.place,
            expected=f"at most {MOST_LOADS}",
        )
    if not grid.rows:
        raise TableError(
            "the table has no rows",
            place=grid.place,
            expected="at least one row, a cell 0, 1 or - for each column",
        )
    filled = [{mark: _Rows(n) for mark in "01-"} for _ in grid.loads]
    closed = [(literal(n, i, False), literal(n, i, True)) for i in range(n)]
    for row in grid.rows:
        if not _MARKS.issuperset(row.cells):
            raise _illegal(grid, row)
        inputs, wants = row.cells[:n], row.cells[n:]
        if "-" in inputs:
            cube = all_rows(n)
            for i, cell in enumerate(inputs):
                if cell != "-":
                    cube &= closed[i][cell == "1"]
            for load, mark in enumerate(wants):
                filled[load][mark].cubes |= cube
        else:
            number = int("".join(reversed(inputs)), 2)  # relay i is bit i
            byte, bit = number >> 3, 1 << (number & 7)
            for load, mark in enumerate(wants):
                filled[load][mark].single[byte] |= bit
    targets: dict[str, Target] = {}
    every, missing = all_rows(n), 0
    listed = every
    for load, name in enumerate(grid.loads):
        on, off, free = (filled[load][mark].table() for mark in "10-")
        if on & off:
            raise _contradiction(grid, load, next(rows_of(on & off)))
        listed = on | off | free  # the same for each load: a row has a cell for every one
        missing = every & ~listed
        may = listed & ~(on | off) | (missing if unlisted == "free" else 0)
        targets[name] = Target(n, on, may)
    if missing and unlisted is None:
        raise _missing(grid, missing)
    return targets, listed


class _Rows:
    """Rows gathered one by one (quick to set) and as cubes (quick to join)."""

    def __init__(self, n: int) -> None:
        self.single = bytearray(-(-(1 << n) // 8))
        self.cubes = 0

    def table(self) -> int:
        """The rows as a truth table."""
        return int.from_bytes(self.single, "little") | self.cubes


def _illegal(grid: Grid, row: GridRow) -> TableError:
    at = next(k for k, cell in enumerate(row.cells) if cell not in _MARKS)
    return no_value(row, at, (*grid.relays, *grid.loads)[at], grid.place)


def no_value(
    row: GridRow, at: int, column: str, place: Place, expected: str = "0, 1 or -"
) -> TableError:
    """The refusal of cell number `at` of a row, which is none of the values expected."""
    cell = row.cells[at]
    hint = _HABITS.get(cell) or _HABITS.get(cell.lower())
    if len(cell) > 1 and _MARKS.issuperset(cell):
        hint = "separate the cells by spaces"
    return TableError(
        f"{shortened(cell)} is no value of {column}" if cell else f"{column} has no value",
        place=row.place(at, place),
        expected=expected,
        hint=hint,
    )


def _setting(relays: Sequence[str], row: int) -> str:
    bits = settings(row, len(relays))
    return " ".join(f"{relay}={bit}" for relay, bit in zip(relays, bits, strict=True))


def _contradiction(grid: Grid, load: int, number: int) -> TableError:
    n = len(grid.relays)
    bits = settings(number, n)
    covering = [
        row
        for row in grid.rows
        if all(cell in ("-", str(bit)) for cell, bit in zip(row.cells[:n], bits, strict=True))
        and row.cells[n + load] != "-"
    ]
    first = covering[0]
    second = next(row for row in covering if row.cells[n + load] != first.cells[n + load])
    return TableError(
        f"{grid.loads[load]} is {second.cells[n + load]} here, but {first.cells[n + load]} in"
        f" {first.label} ({' '.join(first.text.split())})",
        place=second.place(n + load, grid.place),
        expected=f"one value where {_setting(grid.relays, number)}",
    )


def _missing(grid: Grid, missing: int) -> TableError:
    count = missing.bit_count()
    what = "1 row is missing: " if count == 1 else f"{count} rows are missing, the first of them "
    return TableError(
        what + _setting(grid.relays, next(rows_of(missing))),
        place=grid.place,
        expected=f"all {1 << len(grid.relays)} rows, or unlisted off or free",
        hint="unlisted says what loads do in rows that the table leaves out",
    )
