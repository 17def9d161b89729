"""The sequence chart: relays, coils and loads against the steps of an expanded list.

Each relay shows two things: its position, and whether its coil is fed.  They differ wherever the
relay is about to move, and wherever a slow release outlasts its feed.  What is shown is worked
out here; `chart_sheet` draws it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from contactlogic.job.sequence import state_text
from contactlogic.sequence.steps import Expansion, Step

__all__ = ["Cell", "Chart", "Column", "Group", "Line", "chart_of", "sequence_chart"]

Group = Literal["inputs", "relays", "memory", "loads"]


@dataclass(frozen=True)
class Cell:
    """What one line shows in one step.

    Args:
        on: position of a relay or input, or whether a load is on; None where that is free.
        fed: whether the coil is fed; None where that is free, or where there is no coil.
        free: whether the coil or load may be either here, however it is drawn.
    """

    on: int | None
    fed: int | None = None
    free: bool = False


@dataclass(frozen=True)
class Line:
    """One line of the chart: a relay, an input or a load."""

    name: str
    group: Group
    cells: tuple[Cell, ...]


@dataclass(frozen=True)
class Column:
    """One step of the expanded list.

    Args:
        state: the state as text.
        row: number of the listed row, None for an inserted state.
        lasts: whether it is dwelt in, not only passed.
        apart: whether the step before leads elsewhere.
        onward: for each way out the column that moves, whether it operates, and the listed row
            it goes on with if that is not the next step.
    """

    state: str
    row: int | None
    lasts: bool
    apart: bool
    onward: tuple[tuple[str, bool, int | None], ...]


@dataclass(frozen=True)
class Chart:
    """All of a chart; `wired` if coils or loads are drawn as built, not only as wanted."""

    names: tuple[str, ...]
    lines: tuple[Line, ...]
    columns: tuple[Column, ...]
    wired: bool


def sequence_chart(
    expansion: Expansion,
    drives: Mapping[str, int] | None = None,
    loads: Mapping[str, int] | None = None,
    *,
    title: str,
    fingerprint: str,
) -> dict[str, bytes]:
    """The chart of a sequence as pictures: "svg" and "png".

    Args:
        expansion: the expanded list.
        drives: truth table of each coil as wired (bit `s`: fed in state `s`); without it, or for
            a relay that is not in it, coils are drawn as wanted.
        loads: the same for loads.
        title: any text; shown on one line and shortened where it is too long.
        fingerprint: tells this design from others.
    """
    from contactlogic.draw.chart_sheet import pictures

    return pictures(chart_of(expansion, drives, loads), title=title, fingerprint=fingerprint)


def chart_of(
    expansion: Expansion,
    drives: Mapping[str, int] | None = None,
    loads: Mapping[str, int] | None = None,
) -> Chart:
    """What the chart shows.  Parameters as for `sequence_chart`."""
    lines = _relay_lines(expansion, drives or {}) + _load_lines(expansion, loads or {})
    columns = tuple(_column(expansion, index) for index in range(len(expansion.steps)))
    return Chart(expansion.columns, tuple(lines), columns, bool(drives) or bool(loads))


def _relay_lines(expansion: Expansion, drives: Mapping[str, int]) -> list[Line]:
    lines = []
    for i, name in enumerate(expansion.columns):
        cells = []
        for step in expansion.steps:
            now = step.state >> i & 1
            if name in expansion.inputs:
                cells.append(Cell(now))
                continue
            wanted = _wanted_drive(expansion, step, i)
            fed = drives[name] >> step.state & 1 if name in drives else wanted
            cells.append(Cell(now, fed, wanted is None))
        group: Group = "inputs" if name in expansion.inputs else "relays"
        if name in expansion.memory:
            group = "memory"
        lines.append(Line(name, group, tuple(cells)))
    order = ("inputs", "relays", "memory")
    return sorted(lines, key=lambda line: order.index(line.group))


def _wanted_drive(expansion: Expansion, step: Step, column: int) -> int | None:
    """What the coil of a relay must do in one step (design.md section 7), None where free."""
    now = step.state >> column & 1
    if column in step.movers:
        return 1 - now
    if expansion.quick(step) and expansion.timing.slow(expansion.columns[column], bool(now)):
        return None
    return now


def _load_lines(expansion: Expansion, loads: Mapping[str, int]) -> list[Line]:
    lines = []
    for k, name in enumerate(expansion.loads):
        cells = []
        for step in expansion.steps:
            wanted = step.loads[k]
            value = loads[name] >> step.state & 1 if name in loads else wanted
            cells.append(Cell(value, None, wanted is None))
        lines.append(Line(name, "loads", tuple(cells)))
    return lines


def _column(expansion: Expansion, index: int) -> Column:
    step = expansion.steps[index]
    before = expansion.steps[index - 1].leaving if index else ((0, 0),)
    onward = tuple(
        (
            expansion.columns[mover],
            not step.state >> mover & 1,
            None if there == index + 1 else expansion.steps[there].row,
        )
        for mover, there in step.leaving
    )
    return Column(
        state_text(step.state, len(expansion.columns)),
        None if step.inserted else step.row,
        expansion.dwells(step),
        all(there != index for _, there in before),
        onward,
    )
