"""Truth tables kept in CSV and XLSX files: a header of names, then cells 0, 1 or -.

CSV cells may be divided by commas, semicolons or tabs; lines that begin with # are passed over.
Of an XLSX workbook the first sheet is read; what a cell's formula would give is never worked out.
"""

from __future__ import annotations

import csv
import io
import zipfile
from collections.abc import Iterator, Sequence
from pathlib import Path

from contactlogic.errors import InputError, JobFileError, LimitError, Place, TableError
from contactlogic.job.table import MOST_LOADS, MOST_ROWS, Grid, GridRow, too_many_inputs
from contactlogic.job.textfile import read_bytes, read_text
from contactlogic.naming import check_names, did_you_mean, listed, shortened
from contactlogic.truth import MAX_INPUTS
from contactlogic.workbook import Cell, read_first_sheet

__all__ = ["SUFFIXES", "Line", "read_cells", "read_lines", "read_sheet"]

SUFFIXES = (".csv", ".xlsx")
_MOST_COLUMNS = MOST_LOADS + 64  # room to say by how much there are too many relays
_MOST_CELLS = 3_000_000
_MOST_UNPACKED = 256 << 20  # bytes; a full table of 16 inputs and 8 loads is a third of this

_MARKS = "0, 1, - or a name"  # what a cell of a truth table may hold

Line = tuple[str, list[Cell]]
"""What the user calls the line, and its cells."""


def read_sheet(path: Path, loads: Sequence[str], shown: str) -> Grid:
    """The table of a CSV or XLSX file.

    Args:
        path: the file.
        loads: the columns that are loads; all others are input relays, in the file's order.
        shown: the file's name for messages.
    """
    place = Place(file=shown)
    lines = read_cells(path, shown, _MARKS)
    if not lines:
        raise TableError("the table is empty", place=place, expected="a header of names, then rows")
    label, header = lines[0]
    relays, fed = _columns(label, header, loads, place)
    order = [header.index(name) for name in (*relays, *fed)]
    rows = []
    for label, cells in lines[1:]:
        if len(cells) > len(header) or (len(cells) < len(header) and path.suffix.lower() == ".csv"):
            raise TableError(
                f"the row has {len(cells)} cell{'' if len(cells) == 1 else 's'}",
                place=Place(file=shown, row=label, line=" ".join(cells)),
                expected=f"{len(header)}, one for each column of the header",
            )
        cells += [""] * (len(header) - len(cells))  # a workbook does not keep empty cells
        chosen = tuple(cells[k] for k in order)
        rows.append(GridRow(chosen, label, " ".join(chosen), of_sheet=True))
    return Grid(relays, fed, tuple(rows), place)


def read_cells(path: Path, shown: str, expected: str) -> list[tuple[str, list[str]]]:
    """The lines of a CSV file or of a workbook's first sheet that hold something, as text.

    Args:
        path: the file.
        shown: the file's name for messages.
        expected: what a cell may hold, for a cell that holds a formula instead.

    Returns what the user calls each line ("line 4", "sheet Table, row 4") with its cells.
    """
    place = Place(file=shown)
    return _filled(read_lines(path, place), place, expected)


def read_lines(path: Path, place: Place, *, comments: bool = True) -> Iterator[Line]:
    """Lines of a CSV or XLSX file, empty ones too: what the user calls each, and its cells.

    Args:
        path: the file.
        place: the file's name for messages.
        comments: pass over lines of a CSV file that begin with #.

    Raises:
        JobError: the file cannot be read.
    """
    suffix = path.suffix.lower()
    if suffix not in SUFFIXES:
        raise JobFileError(
            f"a table file cannot end in {suffix}" if suffix else "a table file needs an ending",
            place=place,
            expected="a file ending in .csv or .xlsx",
        )
    return _csv(path, place, comments) if suffix == ".csv" else _xlsx(path, place)


def _filled(lines: Iterator[Line], place: Place, expected: str) -> list[tuple[str, list[str]]]:
    """Lines that hold something, without the empty cells past the last column of the header."""
    kept: list[tuple[str, list[str]]] = []
    width = read = 0
    for label, found in lines:
        cells = _plain(label, found, place, expected)
        read += 1 + len(cells)  # empty ones included: they take time as well
        while len(cells) > width and not cells[-1]:
            cells.pop()
        if any(cells):
            kept.append((label, cells))
            width = width or len(cells)
        if read > _MOST_CELLS or len(kept) > MOST_ROWS + 1 or len(cells) > _MOST_COLUMNS:
            raise LimitError(
                "the table is too large",
                place=place,
                expected=f"at most {MOST_ROWS} rows, {_MOST_COLUMNS} columns, {_MOST_CELLS} cells",
            )
    return kept


def _columns(
    label: str, header: list[str], loads: Sequence[str], place: Place
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    where = Place(place.file, row=label)
    check_names(header, where, " ".join(header))
    for load in loads:
        if load not in header:
            raise TableError(
                f"there is no column {load} for this load",
                place=where,
                expected=listed(header),
                hint=did_you_mean(load, header),
            )
    relays = tuple(name for name in header if name not in loads)
    fed = tuple(name for name in header if name in loads)
    if not relays or not fed:
        raise TableError(
            "every column is a load" if fed else "no column is a load",
            place=where,
            expected="at least one input relay and one load",
        )
    if len(relays) > MAX_INPUTS:
        raise too_many_inputs("table", len(relays), place)
    return relays, fed


def _csv(path: Path, place: Place, comments: bool) -> Iterator[Line]:
    text = read_text(path, place)
    with io.StringIO(text, newline=None) as stream:  # any kind of line ending
        head = next((line for line in stream if line.strip(" \t\n,;") and line[0] != "#"), "")
        stream.seek(0)
        delimiter = max(",;\t", key=head.count)
        reader = csv.reader(stream, delimiter=delimiter, strict=True)
        try:
            for cells in reader:
                cells = [cell.strip() for cell in cells]
                if comments and cells and cells[0].startswith("#"):
                    continue
                yield f"line {reader.line_num}", [Cell(cell) for cell in cells]
        except csv.Error as error:
            raise TableError(
                f"not a CSV table: {error}",
                place=Place(place.file, row=f"line {reader.line_num}"),
                expected="cells divided by commas, semicolons or tabs",
            ) from None


def _xlsx(path: Path, place: Place) -> Iterator[Line]:
    data = read_bytes(path, place)
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as packed:
            size = sum(entry.file_size for entry in packed.infolist())
        if size > _MOST_UNPACKED:
            raise LimitError(
                "the workbook is too large",
                place=place,
                expected=f"at most {_MOST_UNPACKED >> 20} MiB when unpacked",
            )
        yield from read_first_sheet(data)
    except InputError:
        raise
    except LookupError as error:
        if str(error) != "no sheet":
            raise _no_workbook(error, place) from None
        raise TableError(
            "the workbook has no sheet", place=place, expected="a sheet of cells"
        ) from None
    except Exception as error:  # a damaged workbook raises whatever its many parsers do
        raise _no_workbook(error, place) from None


def _no_workbook(error: Exception, place: Place) -> JobFileError:
    return JobFileError(
        f"not an XLSX workbook ({type(error).__name__})",
        place=place,
        expected="a workbook as spreadsheet programs save it",
    )


def _plain(label: str, cells: list[Cell], place: Place, expected: str) -> list[str]:
    """The cells' text; a formula is refused."""
    for cell in cells:
        if cell.formula:
            formula = f" {shortened(cell.text)}" if cell.text.startswith("=") else ""
            raise TableError(
                f"a cell holds a formula{formula}",
                place=Place(place.file, row=label),
                expected=expected,
                hint="nothing in a table is worked out: paste values in place of formulas",
            )
    return [cell.text for cell in cells]
