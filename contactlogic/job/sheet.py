"""Truth tables kept in CSV and XLSX files: a header of names, then cells 0, 1 or -."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from pathlib import Path

from contactlogic.errors import JobFileError, Place, TableError
from contactlogic.job.names import check_names, did_you_mean
from contactlogic.job.table import Grid, GridRow
from contactlogic.job.textfile import read_bytes, read_text

__all__ = ["SUFFIXES", "read_sheet"]

SUFFIXES = (".csv", ".xlsx")
_MOST_COLUMNS = 200
_MOST_ROWS = 1_000_000


def read_sheet(path: Path, loads: Sequence[str], shown: str) -> Grid:
    """The table of a CSV or XLSX file.

    Args:
        path: the file.
        loads: the columns that are loads; all others are input relays, in the file's order.
        shown: the file's name for messages.
    """
    place = Place(file=shown)
    suffix = path.suffix.lower()
    if suffix not in SUFFIXES:
        raise JobFileError(
            f"a table file cannot be {suffix or 'without ending'}",
            place=place,
            expected="a file ending in .csv or .xlsx",
        )
    lines = _csv(path, place) if suffix == ".csv" else _xlsx(path, place)
    lines = [(label, cells) for label, cells in lines if any(cells)]
    if not lines:
        raise TableError("the table is empty", place=place, expected="a header of names, then rows")
    header_label, header = lines[0]
    check_names(header, Place(file=shown, row=header_label), " ".join(header))
    for load in loads:
        if load not in header:
            raise TableError(
                f"there is no column {load}",
                place=place,
                expected="one of " + ", ".join(header[:12]),
                hint=did_you_mean(load, header),
            )
    relays = tuple(name for name in header if name not in loads)
    fed = tuple(name for name in header if name in loads)
    if not relays or not fed:
        raise TableError(
            "every column is a load" if fed else "no column is a load",
            place=place,
            expected="input relays and at least one load",
        )
    order = [header.index(name) for name in (*relays, *fed)]
    rows = []
    for label, cells in lines[1:]:
        if len(cells) != len(header):
            raise TableError(
                f"the row has {len(cells)} cells",
                place=Place(file=shown, row=label, line=" ".join(cells)),
                expected=f"{len(header)}, one for each column",
            )
        chosen = tuple(cells[k] for k in order)
        starts = tuple(sum(len(c) + 1 for c in chosen[:k]) for k in range(len(chosen)))
        rows.append(GridRow(chosen, label, " ".join(chosen), starts))
    return Grid(relays, fed, tuple(rows), place)


def _csv(path: Path, place: Place) -> list[tuple[str, list[str]]]:
    text = read_text(path, place)
    first = text.split("\n", 1)[0]
    delimiter = max(",;\t", key=first.count)
    reader = csv.reader(io.StringIO(text), delimiter=delimiter, strict=True)
    lines = []
    try:
        for cells in reader:
            lines.append((f"line {reader.line_num}", [cell.strip() for cell in cells]))
            if len(lines) > _MOST_ROWS or len(cells) > _MOST_COLUMNS:
                raise _too_large(place)
    except csv.Error as error:
        raise TableError(
            f"not a CSV table: {error}", place=Place(place.file, row=f"line {reader.line_num}")
        ) from None
    return lines


def _xlsx(path: Path, place: Place) -> list[tuple[str, list[str]]]:
    import openpyxl

    data = read_bytes(path, place)
    try:
        book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=False)
    except Exception as error:  # openpyxl raises whatever its parsers do
        raise JobFileError(
            f"not an XLSX workbook ({type(error).__name__})",
            place=place,
            expected="a workbook as spreadsheets save it",
        ) from None
    sheet = book.worksheets[0]
    lines = []
    for number, row in enumerate(sheet.iter_rows(values_only=True), start=1):
        label = f"sheet {sheet.title}, row {number}"
        cells = [_cell(value, Place(place.file, row=label)) for value in row]
        while cells and not cells[-1]:
            cells.pop()
        lines.append((label, cells))
        if len(lines) > _MOST_ROWS or len(cells) > _MOST_COLUMNS:
            raise _too_large(place)
    book.close()
    return lines


def _cell(value: object, place: Place) -> str:
    if value is None:
        return ""
    if isinstance(value, (bool, int)):
        return str(int(value))
    if isinstance(value, float) and value.is_integer():
        return str(int(value))
    text = str(value).strip()
    if text.startswith("="):
        raise TableError(
            f"the cell holds the formula {text[:40]}",
            place=place,
            expected="0, 1, - or a name",
            hint="nothing in a table is worked out: paste the values",
        )
    return text


def _too_large(place: Place) -> TableError:
    return TableError(
        "the table is too large",
        place=place,
        expected=f"at most {_MOST_ROWS} rows and {_MOST_COLUMNS} columns",
    )
