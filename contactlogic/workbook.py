"""Workbooks (XLSX) as plain cells of text: the one module that meets the spreadsheet libraries.

One library reads, another writes, since it starts in a fifth of the time.  What a cell's formula
would give is never worked out: a formula is only told apart from text.
"""

from __future__ import annotations

import io
import warnings
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

__all__ = ["Cell", "Sheet", "read_first_sheet", "workbook_bytes"]

_NEVER = datetime(1980, 1, 1)  # stands for the time of writing, so that bytes are equal


@dataclass(frozen=True)
class Cell:
    """One cell: its text as a CSV file would hold it, and whether it is a formula."""

    text: str
    formula: bool = False


def read_first_sheet(data: bytes) -> Iterator[tuple[str, list[Cell]]]:
    """Rows of a workbook's first sheet: what the user would call each, and its cells.

    Args:
        data: the file's content.

    Raises:
        LookupError: the workbook has no sheet.
        Exception: a damaged workbook raises whatever the library's parsers do.
    """
    with warnings.catch_warnings():  # of features of workbooks that do not matter here
        warnings.simplefilter("ignore")
        import openpyxl

        book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=False)
        try:
            if not book.worksheets:
                raise LookupError("no sheet")
            sheet = book.worksheets[0]
            sheet.reset_dimensions()  # not every program writes them right
            for number, row in enumerate(sheet.iter_rows(), start=1):
                yield f"sheet {sheet.title}, row {number}", [_cell(cell) for cell in row]
        finally:
            book.close()


def _cell(cell: Any) -> Cell:
    value = cell.value
    if value is None:
        return Cell("")
    if isinstance(value, bool | int) or (isinstance(value, float) and value.is_integer()):
        return Cell(str(int(value)))
    text = value.strip() if isinstance(value, str) else str(value)
    # formulas over several cells are objects
    return Cell(text, cell.data_type == "f" or hasattr(value, "ref"))


@dataclass(frozen=True)
class Sheet:
    """One sheet to write.

    Args:
        title: of at most 31 characters, none of them `[]:*?/` or a backslash.
        header: column headings.
        rows: text and whole numbers; text is kept as text whatever it begins with.
        widths: of the columns, in characters.
    """

    title: str
    header: tuple[str, ...]
    rows: tuple[tuple[str | int, ...], ...]
    widths: tuple[int, ...] = ()


def workbook_bytes(sheets: Sequence[Sheet], *, title: str) -> bytes:
    """An XLSX workbook, the same bytes for the same content.

    Args:
        sheets: first to last.
        title: of the document; as on every paper.
    """
    import xlsxwriter

    out = io.BytesIO()
    book = xlsxwriter.Workbook(
        out, {"strings_to_formulas": False, "strings_to_urls": False, "in_memory": True}
    )
    book.set_properties({"title": _printable(title), "author": "contactlogic", "created": _NEVER})
    heading = book.add_format({"bold": True})
    quoted = book.add_format({"quote_prefix": True})  # as text for good, also once edited
    for made in sheets:
        sheet = book.add_worksheet(made.title)
        for column, name in enumerate(made.header):
            sheet.write_string(0, column, _printable(name), heading)
        for number, row in enumerate(made.rows, start=1):
            for column, value in enumerate(row):
                if isinstance(value, int):
                    sheet.write_number(number, column, value)
                    continue
                text = _printable(value)
                computed = text.startswith(("=", "+", "-", "@"))
                sheet.write_string(number, column, text, quoted if computed else None)
        for column, width in enumerate(made.widths):
            sheet.set_column(column, column, width)
        sheet.freeze_panes(1, 0)
        sheet.repeat_rows(0)
        sheet.fit_to_pages(1, 0)
    book.close()
    return out.getvalue()


def _printable(text: str) -> str:
    """Text that a workbook can hold: no control characters, at most what fits in a cell."""
    return "".join(c for c in text if c.isprintable())[:32_000]
