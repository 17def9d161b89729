"""The user's free text made safe for one line, for Markdown and for a spreadsheet cell.

Titles and rail labels may hold any character (`contactlogic.job.model`).  They are shown as they
are as far as the paper allows it: one line, no control characters, nothing that a Markdown reader
or a spreadsheet program would act on.
"""

from __future__ import annotations

import csv
import io
import re
import unicodedata
from collections.abc import Iterable, Sequence

__all__ = ["code", "csv_text", "markdown", "neutral_cell", "one_line", "table_lines"]

_MARKDOWN_SPECIALS = re.compile(r"([\\`*_\[\]<>|#~&$])")
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r", "\n")


def one_line(text: str) -> str:
    """`text` on one line: white space runs become one space, control characters go.

    This also takes out terminal escape sequences and characters that turn the writing direction.
    """
    spaced = re.sub(r"\s+", " ", text).strip()
    return "".join(c for c in spaced if unicodedata.category(c) not in ("Cc", "Cf", "Cs", "Co"))


def markdown(text: str) -> str:
    """`text` on one line with every Markdown special escaped, fit for headings and table cells."""
    return _MARKDOWN_SPECIALS.sub(r"\\\1", one_line(text))


def code(text: str) -> str:
    """`text` as a Markdown code span, for switching algebra (which has no backtick or bar)."""
    return f"`{one_line(text)}`"


def table_lines(header: Sequence[str], rows: Iterable[Sequence[object]]) -> list[str]:
    """A Markdown table; cells are already escaped."""
    return [
        "| " + " | ".join(header) + " |",
        "|" + " --- |" * len(header),
        *("| " + " | ".join(str(cell) for cell in row) + " |" for row in rows),
    ]


def neutral_cell(text: str) -> str:
    """A cell that a spreadsheet program shows as text and never computes.

    A leading `= + - @` or tab gets an apostrophe in front, the usual mark for text.
    """
    return f"'{text}" if text.startswith(_FORMULA_STARTS) else text


def csv_text(header: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """Comma-separated text (RFC 4180 quoting, lines ended by a line feed), cells neutral."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(header)
    for row in rows:
        writer.writerow([neutral_cell(str(cell)) for cell in row])
    return out.getvalue()
