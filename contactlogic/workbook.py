"""Workbooks (XLSX) as plain cells of text: the one module that meets the spreadsheet library.

What a cell's formula would give is never worked out: a formula is only told apart from text.
"""

from __future__ import annotations

import io
import re
import warnings
import zipfile
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

__all__ = ["Cell", "Sheet", "read_first_sheet", "workbook_bytes"]


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
    import openpyxl
    from openpyxl.styles import Font
    from openpyxl.utils import get_column_letter

    book = openpyxl.Workbook()
    book.remove(book.active)
    for made in sheets:
        sheet = book.create_sheet(made.title)
        for number, row in enumerate((made.header, *made.rows), start=1):
            for column, value in enumerate(row, start=1):
                cell = sheet.cell(number, column)
                if isinstance(value, str):
                    cell.value = _printable(value)
                    cell.data_type = "s"  # as text for good, also when someone edits the cell:
                    cell.quotePrefix = value.startswith(("=", "+", "-", "@"))
                else:
                    cell.value = value
                if number == 1:
                    cell.font = Font(bold=True)
        for column, width in enumerate(made.widths, start=1):
            sheet.column_dimensions[get_column_letter(column)].width = width
        sheet.freeze_panes = "A2"
        sheet.print_title_rows = "1:1"
        sheet.page_setup.fitToHeight = 0
        sheet.sheet_properties.pageSetUpPr.fitToPage = True
    book.properties.title = _printable(title)
    book.properties.creator = "contactlogic"
    out = io.BytesIO()
    book.save(out)
    return _undated(out.getvalue())


def _printable(text: str) -> str:
    """Text that a workbook can hold: no control characters, at most what fits in a cell."""
    return "".join(c for c in text if c.isprintable())[:32_000]


def _undated(data: bytes) -> bytes:
    """The workbook without the times at which it was written."""
    never = "1980-01-01T00:00:00Z"
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(out, "w") as new:
        for entry in old.infolist():
            content = old.read(entry)
            if entry.filename == "docProps/core.xml":
                dated = rb"(<dcterms:(?:created|modified)[^>]*>)[^<]*"
                content = re.sub(dated, rb"\g<1>" + never.encode(), content)
            plain = zipfile.ZipInfo(entry.filename)
            plain.compress_type = zipfile.ZIP_DEFLATED
            new.writestr(plain, content)
    return out.getvalue()
