"""Rows of a truth table to what each load must do.

A `Grid` is a table as written, whatever file it came from.  `-` in an input stands for both
values, in a load for "either".  Where one row leaves a load free and an overlapping one fixes it,
the fixed value holds; 0 against 1 is an error that names both rows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

from contactlogic.errors import LimitError, Place, TableError
from contactlogic.truth import MAX_INPUTS, Target, all_rows, literal, rows_of, settings

__all__ = ["Grid", "GridRow", "Unlisted", "read_columns", "read_rows", "targets_of"]

Unlisted = Literal["off", "free"]
_MOST_ROWS = 1_000_000


@dataclass(frozen=True)
class GridRow:
    """Cells of one row, inputs first; `label` is what the user calls it, `text` what is shown."""

    cells: tuple[str, ...]
    label: str
    text: str
    starts: tuple[int, ...]  # where each cell begins in `text`


@dataclass(frozen=True)
class Grid:
    """A table as written: input relays, loads, rows; `place` is its file and section."""

    relays: tuple[str, ...]
    loads: tuple[str, ...]
    rows: tuple[GridRow, ...]
    place: Place


def read_columns(text: str, place: Place) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Input relays and loads of a `columns` line such as "UP DOWN | LAMP"."""
    if text.count("|") != 1:
        raise TableError(
            "columns need one | between relays and loads",
            place=replace(place, line=text),
            expected='text such as "UP DOWN FLOOD | LAMP HORN"',
        )
    left, right = (part.replace(",", " ").split() for part in text.split("|"))
    if not left or not right:
        raise TableError(
            f"no {'relay' if not left else 'load'} is named",
            place=replace(place, line=text),
            expected="at least one relay before the | and one load after it",
        )
    return tuple(left), tuple(right)


def read_rows(text: str, inputs: int, loads: int, place: Place) -> tuple[GridRow, ...]:
    """Rows of inline text; blank lines and what follows a # are passed over."""
    rows: list[GridRow] = []
    for line in text.splitlines():
        shown = line.split("#", 1)[0].rstrip()
        if not shown.strip():
            continue
        label = f"row {len(rows) + 1}"
        cells: list[str] = []
        starts: list[int] = []
        bars: list[int] = []
        for start, word in _words(shown):
            if word == "|":
                bars.append(len(cells))
            else:
                cells.append(word)
                starts.append(start)
        if bars not in ([], [inputs]) or len(cells) != inputs + loads:
            where = replace(place, row=label, line=shown)
            found = f"{len(cells)} cells"
            if len(bars) == 1:
                found = f"{bars[0]} before the | and {len(cells) - bars[0]} after it"
            raise TableError(
                f"the row has {found}",
                place=where,
                expected=f"{inputs} before the | and {loads} after it",
            )
        rows.append(GridRow(tuple(cells), label, shown, tuple(starts)))
        if len(rows) > _MOST_ROWS:
            raise LimitError(f"the table has more than {_MOST_ROWS} rows", place=place)
    return tuple(rows)


def _words(line: str) -> list[tuple[int, str]]:
    """Cells and bars with their positions; spaces, tabs and commas separate."""
    found, start = [], None
    for i, character in enumerate(line + " "):
        if character in " \t,|":
            if start is not None:
                found.append((start, line[start:i]))
                start = None
            if character == "|":
                found.append((i, "|"))
        elif start is None:
            start = i
    return found


def targets_of(grid: Grid, unlisted: Unlisted | None) -> tuple[dict[str, Target], int]:
    """What each load must do over the grid's relays, and the rows that are listed.

    Raises:
        LimitError: too many relays.
        TableError: an illegal cell, rows that contradict each other, rows missing.
    """
    n = len(grid.relays)
    if n > MAX_INPUTS:
        raise LimitError(
            f"the table has {n} input relays",
            place=grid.place,
            expected=f"at most {MAX_INPUTS}: every one of the 2^{MAX_INPUTS} rows is proved",
        )
    if not grid.rows:
        raise TableError("the table has no rows", place=grid.place, expected="at least one row")
    filled = {mark: [_Rows(n) for _ in grid.loads] for mark in "01-"}
    for row in grid.rows:
        _check_cells(row, grid.place)
        inputs, wants = row.cells[:n], row.cells[n:]
        for load, mark in enumerate(wants):
            filled[mark][load].add(inputs)
    targets, listed = {}, 0
    for load, name in enumerate(grid.loads):
        on, off, free = (filled[mark][load].table() for mark in "10-")
        if on & off:
            raise _contradiction(grid, load, next(rows_of(on & off)))
        listed |= on | off | free
        targets[name] = (on, off)
    missing = all_rows(n) & ~listed
    if missing and unlisted is None:
        raise _missing(grid, missing)
    return {
        name: Target(n, on, (listed & ~(on | off)) | (missing if unlisted == "free" else 0))
        for name, (on, off) in targets.items()
    }, listed


class _Rows:
    """A set of rows gathered one by one or by the cube."""

    def __init__(self, n: int) -> None:
        self._n = n
        self._single = bytearray(-(-(1 << n) // 8))
        self._cubes = 0

    def add(self, inputs: Sequence[str]) -> None:
        """Add the rows that these input cells stand for."""
        if "-" not in inputs:
            row = sum(1 << i for i, cell in enumerate(inputs) if cell == "1")
            self._single[row >> 3] |= 1 << (row & 7)
            return
        cube = all_rows(self._n)
        for i, cell in enumerate(inputs):
            if cell != "-":
                cube &= literal(self._n, i, cell == "1")
        self._cubes |= cube

    def table(self) -> int:
        """The rows as a truth table."""
        return int.from_bytes(self._single, "little") | self._cubes


def _check_cells(row: GridRow, place: Place) -> None:
    for cell, start in zip(row.cells, row.starts, strict=True):
        if cell not in ("0", "1", "-"):
            where = replace(place, row=row.label, line=row.text, column=start, width=len(cell))
            shown = cell or "an empty cell"
            raise TableError(f"{shown} is no value", place=where, expected="0, 1 or -")


def _contradiction(grid: Grid, load: int, row: int) -> TableError:
    n = len(grid.relays)
    bits = settings(row, n)
    both = [
        next(
            r
            for r in grid.rows
            if r.cells[n + load] == mark
            and all(cell in ("-", str(bit)) for cell, bit in zip(r.cells[:n], bits, strict=True))
        )
        for mark in "10"
    ]
    first, second = sorted(both, key=grid.rows.index)
    name = grid.loads[load]
    setting = " ".join(f"{relay}={bit}" for relay, bit in zip(grid.relays, bits, strict=True))
    where = replace(grid.place, row=second.label, line=second.text, column=second.starts[n + load])
    return TableError(
        f"{name} is {second.cells[n + load]} here and {first.cells[n + load]} in {first.label}"
        f" ({first.text.strip()})",
        place=where,
        expected=f"one value of {name} for {setting}",
    )


def _missing(grid: Grid, missing: int) -> TableError:
    bits = settings(next(rows_of(missing)), len(grid.relays))
    setting = " ".join(f"{relay}={bit}" for relay, bit in zip(grid.relays, bits, strict=True))
    count = missing.bit_count()
    return TableError(
        f"{count} of {1 << len(grid.relays)} rows {'are' if count > 1 else 'is'} missing, the"
        f" first is {setting}",
        place=grid.place,
        expected='every row, or unlisted = "off" or "free"',
        hint="unlisted says what loads do in rows that are not listed",
    )
