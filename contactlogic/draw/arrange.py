"""Layout of a ladder: a network of ladder form to a sheet with everything at its place.

Pure geometry.  All rungs stand between one pair of rails as long as the sheet stays readable on
A4; a longer ladder is split between rungs into panels side by side, each with its own pair of
rails, where that lets the sheet be printed larger.
"""

from __future__ import annotations

from itertools import pairwise

from contactlogic.draw.grid import Grid, RungRow, lay_out
from contactlogic.draw.panel import Lettering, Panel, SheetFacts
from contactlogic.draw.rungs import rungs_of
from contactlogic.draw.sheet import Line, Pen, Sheet
from contactlogic.draw.table import RELEASED, draw_footer, draw_table, table_rows
from contactlogic.network import Network

__all__ = ["SheetFacts", "arrange"]

_LANDSCAPE, _PORTRAIT = 620.0, 470.0  # least width between the rails, by the shape of the sheet
_TALL = 560.0
_A4 = (538.0, 785.0)  # inside the margins of a printer
_READABLE = 0.85  # a single panel printed at this scale or larger is not split
_MOST_PANELS = 4


def arrange(network: Network, facts: SheetFacts) -> Sheet:
    """Lay out the whole sheet.

    Raises:
        NotALadder: the network does not keep the ladder definition.
    """
    grid = lay_out(rungs_of(network))
    lettering = Lettering(network, facts, grid)
    panels = _panels(lettering, grid)
    bottom = max(panel.rail_bottom for panel in panels)
    pen = Pen()
    for panel in panels:
        panel.rail_bottom = bottom
        panel.draw(pen)
    left, right = panels[0].left_rail, panels[-1].right_rail
    rows = table_rows(network, lettering.stands_in, facts.separate)
    y = draw_table(pen, rows, left, right, bottom + 30) + 14
    pen.lines.append(Line((left, y), (right, y), "rule", 0.5, colour="#888888"))
    poles = len(network.poles)
    notes = (
        f"ladder {facts.fingerprint}",
        "1 pole" if poles == 1 else f"{poles} poles",
        RELEASED,
    )
    draw_footer(pen, facts.title, notes, left, right, y + 13)
    return pen.sheet(round(panels[-1].right, 2), round(y + 34, 2), facts.title)


def _panels(lettering: Lettering, grid: Grid) -> list[Panel]:
    """One panel, or as many as print largest."""
    rows = len(grid.rows)
    airy = 12.0 if rows <= 6 else 6.0 if rows <= 12 else 0.0
    single = Panel(lettering, (0, rows), airy=airy)
    room = _PORTRAIT if single.rail_bottom > _TALL else _LANDSCAPE
    best = [Panel(lettering, (0, rows), room=room, airy=airy)]
    if _scale(best) >= _READABLE:
        return best
    starts = [i for i, row in enumerate(grid.rows) if isinstance(row, RungRow) and not row.tapped]
    for count in range(2, min(_MOST_PANELS, len(starts)) + 1):
        tried: list[Panel] = []
        for part in _split([*starts, rows], count):
            left = tried[-1].right if tried else 0.0
            tried.append(Panel(lettering, part, left))
        if _scale(tried) > _scale(best):
            best = tried
    return best


def _scale(panels: list[Panel]) -> float:
    """How large the sheet can be printed on A4, 1 being full size.

    The table is left out: it is the last thing read on a small print.
    """
    size = sorted((panels[-1].right, max(panel.rail_bottom for panel in panels)))
    return min(1.0, _A4[0] / size[0], _A4[1] / size[1])


def _split(borders: list[int], count: int) -> list[tuple[int, int]]:
    """Rows cut at some of `borders` into `count` runs whose longest is as short as possible."""
    limit = max(b - a for a, b in pairwise(borders))
    while True:
        cuts = [borders[0]]
        for before, after in pairwise(borders):
            if after - cuts[-1] > limit:
                cuts.append(before)
        if len(cuts) <= count:
            return list(zip(cuts, [*cuts[1:], borders[-1]], strict=True))
        limit += 1
