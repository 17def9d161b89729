"""Rows in columns and folded lines, as plain text for the screen."""

from __future__ import annotations

import io
import textwrap
from collections.abc import Collection, Sequence

__all__ = ["fold", "in_columns"]

_UNFOLDED = 1_000_000  # columns; more than any line has


def fold(line: str, width: int | None) -> list[str]:
    """A line as lines of at most `width` characters, None to fold nothing."""
    if width is None or len(line) <= width:
        return [line]
    return textwrap.wrap(line, width, subsequent_indent="  ")


def in_columns(
    header: Sequence[str],
    rows: Sequence[Sequence[str]],
    *,
    width: int | None,
    figures: bool = False,
    text: Collection[int] = (0,),
) -> list[str]:
    """Rows in columns, folded to `width`; with `figures` all columns but those of `text` are
    set to the right.
    """
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    table = Table(box=None, pad_edge=False, padding=(0, 3, 0, 0), header_style=None)
    for i, name in enumerate(header):
        right = figures and i not in text
        table.add_column(name, justify="right" if right else "left", overflow="fold")
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    out = io.StringIO()
    console = Console(
        file=out,
        width=width or _UNFOLDED,
        color_system=None,
        force_terminal=False,
        legacy_windows=False,
    )
    console.print(table)
    return [line.rstrip() for line in out.getvalue().splitlines()]
