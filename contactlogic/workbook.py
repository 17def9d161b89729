"""Workbooks (XLSX) as plain cells of text: the one module that meets the spreadsheet library.

What a cell's formula would give is never worked out: a formula is only told apart from text.
"""

from __future__ import annotations

import io
import warnings
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

__all__ = ["Cell", "read_first_sheet"]


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
