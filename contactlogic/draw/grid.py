"""Rungs on a grid: each contact in a column and a row, each wire between column borders.

Border `b` is the line to the left of column `b`; joints stand on borders.  A parallel group puts
its branches into rows below each other; a tapped rung is put below everything drawn so far, its
tap being a vertical wire down from the joint.  As taps come right to left, and only from joints
on a rung's lower edge, no vertical ever meets a wire of another net.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from contactlogic.draw.rungs import Leaf, Parallel, Part, Rung, Series

__all__ = ["Across", "Cell", "Down", "Grid", "Row", "RungRow", "Sent", "lay_out"]


@dataclass(frozen=True)
class Cell:
    """A contact in its column and row."""

    leaf: Leaf
    column: int
    row: int
    rung: int


@dataclass(frozen=True)
class Across:
    """A wire of `net` along a row from border `start` to border `end` (None: to the load)."""

    net: str
    row: int
    start: int
    end: int | None


@dataclass(frozen=True)
class Down:
    """A wire of `net` down border `border` from row `top` to row `bottom`."""

    net: str
    border: int
    top: int
    bottom: int


@dataclass(frozen=True)
class Row:
    """A row of the grid: a branch's line, or (as `RungRow`) a rung's own."""


@dataclass(frozen=True)
class RungRow(Row):
    """The line that ends at a load; `tapped` if it is fed by a wire from above."""

    number: int
    rung: Rung
    tapped: bool


@dataclass(frozen=True)
class Sent:
    """A joint out of reach: where it is, its rung, and the rung that goes on from it."""

    border: int
    row: int
    rung: int
    to: int


@dataclass
class Grid:
    """Everything placed; `sent` holds the nets that go on in a rung of their own."""

    cells: list[Cell] = field(default_factory=list)
    across: list[Across] = field(default_factory=list)
    down: list[Down] = field(default_factory=list)
    rows: list[Row] = field(default_factory=list)
    joints: dict[str, tuple[int, int, int]] = field(default_factory=dict)  # border, row, rung
    sent: dict[str, Sent] = field(default_factory=dict)

    @property
    def columns(self) -> int:
        return max((cell.column + 1 for cell in self.cells), default=0)


def lay_out(rungs: tuple[Rung, ...]) -> Grid:
    """Place all rungs, numbered from 1 from top to bottom."""
    grid = Grid()
    for rung in rungs:
        _place_rung(grid, rung, 0, tapped=False)
    return grid


def _place_rung(grid: Grid, rung: Rung, border: int, tapped: bool) -> None:
    row = len(grid.rows)
    number = 1 + sum(1 for r in grid.rows if isinstance(r, RungRow))
    if rung.reference:
        grid.sent[rung.start] = Sent(*grid.joints[rung.start], number)
    height = rung.part.height if rung.part else 1
    grid.rows.append(RungRow(number, rung, tapped))
    grid.rows += [Row()] * (height - 1)
    grid.joints[rung.start] = (border, row, number)
    end = border
    if rung.part is not None:
        _place(grid, rung.part, border, row, number)
        end += rung.part.width
    if rung.net is not None:
        grid.across.append(Across(rung.net, row, end, None))
        if rung.part is not None:
            grid.joints[rung.net] = (end, row, number)
    for tap in rung.taps:
        at, top, _ = grid.joints[tap.start]
        grid.down.append(Down(tap.start, at, top, len(grid.rows)))
        _place_rung(grid, tap, at, tapped=True)
        grid.joints[tap.start] = (at, top, number)


def _place(grid: Grid, part: Part, column: int, row: int, rung: int) -> None:
    if isinstance(part, Leaf):
        grid.cells.append(Cell(part, column, row, rung))
    elif isinstance(part, Series):
        for i, inner in enumerate(part.parts):
            if i:
                grid.joints[inner.left] = (column, row, rung)
            _place(grid, inner, column, row, rung)
            column += inner.width
    else:
        _place_parallel(grid, part, column, row, rung)


def _place_parallel(grid: Grid, part: Parallel, column: int, row: int, rung: int) -> None:
    end = column + part.width
    line = row
    for inner in part.parts:
        _place(grid, inner, column, line, rung)
        if inner.width < part.width:
            grid.across.append(Across(part.right, line, column + inner.width, end))
        last, line = line, line + inner.height
    grid.down.append(Down(part.left, column, row, last))
    grid.down.append(Down(part.right, end, row, last))
