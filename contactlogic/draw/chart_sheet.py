"""A sequence chart as pictures, drawn with matplotlib's own canvas objects, no global state.

A column is a state of the list, wide where it lasts, narrow and ruled where it is only passed.
A relay has a bar while it is operated and a thin line above it while its coil is fed.  Long
sequences wrap into bands.  Parts carry ids ("bar-2-5-7": line 2, steps 5 to 6).  The same chart
gives the same bytes.
"""

from __future__ import annotations

import io
import warnings
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import accumulate, groupby, pairwise
from typing import TYPE_CHECKING, Any

from contactlogic.draw.chart import Chart, Column, Line
from contactlogic.draw.sheet import plain, short_names, shorten

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

__all__ = ["pictures"]

_NAMES = 104.0  # width of the column of names
_EDGE = 30.0
_DWELL, _PASS = 46.0, 26.0  # widths of columns
_BROADEST = 1.5  # short sequences are drawn wider by at most this
_ROOM = 700.0  # width of the columns of one band: A4 turned on its side
_LEAST = 610.0  # width of a sheet: the legend needs as much
_COIL, _CONTACT = 0.24, 0.64  # middle of the coil line and of the bar, by the height of a row
_BAR = 0.36  # height of a bar, by that of a row
_GAP = 9.0  # between groups of rows
_TITLE, _LEGEND = 34.0, 58.0
_HEAD = 20.0  # row numbers above a band
_CHAR = 5.0  # width of a digit of a state text
_INK, _FAINT, _SOFT, _RULE = "#000000", "#444444", "#8a8a8a", "#d0d0d0"
_PNG_DPI = 120
_SETTINGS: Mapping[Any, Any] = {
    "font.family": ["DejaVu Sans"],  # comes with matplotlib, so it is the same everywhere
    "svg.fonttype": "path",
    "svg.hashsalt": "contactlogic",
    "hatch.linewidth": 0.6,
    "text.usetex": False,
    "path.simplify": False,
}


def pictures(chart: Chart, *, title: str, fingerprint: str) -> dict[str, bytes]:
    """The chart as "svg" and "png".

    Args:
        title: any text; shown on one line and shortened where it is too long.
        fingerprint: tells this design from others.
    """
    import matplotlib
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    drawn = {}
    with matplotlib.rc_context(dict(_SETTINGS)), warnings.catch_warnings():
        warnings.simplefilter("ignore")  # a title may hold letters that the font has not
        figure = _Sheet(chart, title, fingerprint).figure()
        for kind, canvas, facts in (
            ("svg", FigureCanvasSVG, {"Date": None, "Creator": None}),
            ("png", FigureCanvasAgg, {"Software": None}),
        ):
            buffer = io.BytesIO()
            canvas(figure)
            figure.savefig(buffer, format=kind, dpi=_PNG_DPI, metadata=facts)
            drawn[kind] = buffer.getvalue()
    return drawn


# Placing ------------------------------------------------------------------------------------


@dataclass(frozen=True)
class _Band:
    """Steps `start` to `stop`, and the edges of their columns."""

    start: int
    stop: int
    edges: tuple[float, ...]

    def left(self, step: int) -> float:
        return self.edges[step - self.start]

    def middle(self, step: int) -> float:
        return (self.left(step) + self.left(step + 1)) / 2


def _bands(columns: Sequence[Column]) -> list[_Band]:
    """Columns shared out to bands of about equal width, none wider than the sheet has room."""
    widths = [_DWELL if column.lasts else _PASS for column in columns]
    parts: list[list[float]] = []
    count = 0
    while not parts or max(map(sum, parts)) > _ROOM:
        count += 1
        share = sum(widths) / count  # so that the last band is not a stump
        parts = [[]]
        for width in widths:
            if parts[-1] and sum(parts[-1]) + width / 2 > share and len(parts) < count:
                parts.append([])
            parts[-1].append(width)
    stretch = min(_BROADEST, _ROOM / max(map(sum, parts)))
    bands = []
    start = 0
    for part in parts:
        edges = tuple(accumulate((width * stretch for width in part), initial=_EDGE + _NAMES))
        bands.append(_Band(start, start + len(part), edges))
        start += len(part)
    return bands


def _tops(lines: Sequence[Line], row: float) -> list[float]:
    """Top of each row below the top of the rows; a gap stands before each new group."""
    tops = []
    y = 0.0
    for k, line in enumerate(lines):
        if k and line.group != lines[k - 1].group:
            y += _GAP
        tops.append(y)
        y += row
    return tops


def _stretches(flags: Sequence[bool], start: int) -> list[tuple[int, int]]:
    """Stretches of true flags as (first, one after the last), counted from `start`."""
    found = []
    for flag, group in groupby(enumerate(flags, start), lambda pair: pair[1]):
        places = [place for place, _ in group]
        if flag:
            found.append((places[0], places[-1] + 1))
    return found


# Drawing ------------------------------------------------------------------------------------


class _Sheet:
    def __init__(self, chart: Chart, title: str, fingerprint: str) -> None:
        self.chart, self.title, self.fingerprint = chart, title, fingerprint
        lines = chart.lines
        self.row = 25.0 if len(lines) <= 10 else 20.0 if len(lines) <= 16 else 16.0
        self.bands = _bands(chart.columns)
        self.tops = _tops(lines, self.row)
        self.tall = self.tops[-1] + self.row
        narrowest = min(b - a for band in self.bands for a, b in pairwise(band.edges))
        self.upright = len(chart.names) * _CHAR > narrowest - 4
        self.moves_at = len(chart.names) * _CHAR + 13 if self.upright else 20.0
        self.moved = short_names(chart.names, narrowest - 10, 6.5)
        self.names = short_names((line.name for line in lines), _NAMES - 34, 8.5)
        self.ways = max(1, *(len(column.onward) for column in chart.columns))
        self.pitch = _HEAD + self.tall + self.moves_at + 9 * self.ways + 10
        self.width = max(_LEAST, max(band.edges[-1] for band in self.bands) + _EDGE)
        self.height = _TITLE + self.pitch * len(self.bands) + _LEGEND

    def figure(self) -> Figure:
        from matplotlib.figure import Figure

        figure = Figure(figsize=(self.width / 72, self.height / 72), facecolor="white")
        axes = figure.add_axes((0, 0, 1, 1))
        axes.set_axis_off()
        axes.set_xlim(0, self.width)
        axes.set_ylim(self.height, 0)
        pen = _Brush(axes)
        pen.text(_EDGE, 20, shorten(self.title, self.width - 2 * _EDGE, 13), 12, bold=True)
        for number, band in enumerate(self.bands):
            self._draw_band(pen, band, _TITLE + number * self.pitch + _HEAD)
        self._draw_legend(pen, self.height - _LEGEND + 12)
        count = len(self.chart.columns)
        facts = [plain(self.title), plain(self.fingerprint), f"{count} states in the expanded list"]
        foot = shorten("  |  ".join(facts), self.width - 2 * _EDGE, 7)
        pen.text(_EDGE, self.height - 13, foot, 6.5)
        return figure

    def _draw_band(self, pen: _Brush, band: _Band, top: float) -> None:
        first, last = band.edges[0], band.edges[-1]
        bottom = top + self.tall
        for step in range(band.start, band.stop):
            self._draw_column(pen, band, step, top)
        pen.line((last, last), (top - 3, bottom), 0.5, _SOFT)
        for y, text in ((top - 8, "row"), (bottom + 9, "state"), (bottom + self.moves_at, "next")):
            pen.text(first - 7, y, text, 7, align="right", colour=_FAINT)
        for number, (line, y) in enumerate(zip(self.chart.lines, self.tops, strict=True)):
            pen.text(first - 7, top + y + self.row / 2, self.names[line.name], 8.5, align="right")
            pen.line((first, last), (top + y + self.row,) * 2, 0.4, _RULE)
            self._draw_line(pen, band, number, top + y)
        for group, pairs in groupby(
            zip(self.chart.lines, self.tops, strict=True), lambda pair: pair[0].group
        ):
            rows = [top + y for _, y in pairs]
            low = rows[-1] + self.row
            pen.text(_EDGE, (rows[0] + low) / 2, group, 6, align="center", colour=_FAINT, turn=True)
            pen.line((_EDGE + 7,) * 2, (rows[0] + 2, low - 2), 0.8, _SOFT)
        pen.line((first, last), (top, top), 0.5, _SOFT)
        pen.line((first, last), (bottom, bottom), 0.5, _SOFT)

    def _draw_column(self, pen: _Brush, band: _Band, step: int, top: float) -> None:
        column = self.chart.columns[step]
        left, right, x = band.left(step), band.left(step + 1), band.middle(step)
        bottom = top + self.tall
        if not column.lasts:
            pen.passing(left, top, right - left, self.tall, f"passing-{step}")
        if column.row is not None:
            pen.text(x, top - 8, str(column.row), 8.5, bold=True, align="center")
        weight, colour = (1.8, _INK) if column.apart else (0.5, _SOFT)
        pen.line((left, left), (top - 3, bottom), weight, colour)
        middle = bottom + (5 + len(column.state) * _CHAR / 2 if self.upright else 9)
        pen.text(x, middle, column.state, 7, align="center", turn=self.upright)
        texts = [
            self.moved[name] + ("↑" if operates else "↓") + (f" →{row}" if row else "")
            for name, operates, row in column.onward
        ]
        for way, text in enumerate(texts or ["end"]):
            pen.text(x, bottom + self.moves_at + 9 * way, text, 6.5, align="center")

    def _draw_line(self, pen: _Brush, band: _Band, number: int, top: float) -> None:
        line = self.chart.lines[number]
        cells = line.cells[band.start : band.stop]
        coil = top + _COIL * self.row
        bare = line.group in ("inputs", "loads")  # without a coil
        contact = top + (0.5 if bare else _CONTACT) * self.row
        kind = "load" if line.group == "loads" else "bar"
        for start, stop in _stretches([cell.on == 1 for cell in cells], band.start):
            pen.bar(
                (band.left(start), band.left(stop)),
                contact,
                _BAR * self.row,
                f"{kind}-{number}-{start}-{stop}",
            )
        for start, stop in _stretches([cell.fed == 1 for cell in cells], band.start):
            ends = (
                start == 0 or line.cells[start - 1].fed != 1,
                stop == len(line.cells) or line.cells[stop].fed != 1,
            )
            pen.coil(
                (band.left(start), band.left(stop)), coil, ends, f"coil-{number}-{start}-{stop}"
            )
        for step, cell in enumerate(cells, start=band.start):
            if cell.free:
                y = contact if bare else coil
                pen.ring(band.middle(step), y, f"free-{number}-{step}")

    def _draw_legend(self, pen: _Brush, y: float) -> None:
        x = _EDGE
        lines = self.chart.lines
        wired = ", drawn as wired" if self.chart.wired else ""
        for kind, wide, text, wanted in (
            ("bar", 26, "operated: makes closed", True),
            ("coil", 26, "coil fed", True),
            ("load", 26, "load on", any(line.group == "loads" for line in lines)),
            ("free", 8, "may be either" + wired, any(c.free for n in lines for c in n.cells)),
            ("passing", 16, "passed, does not last", any(not c.lasts for c in self.chart.columns)),
        ):
            if not wanted:
                continue
            if kind in ("bar", "load"):
                pen.bar((x, x + wide), y, 9, f"{kind}-key")
            elif kind == "coil":
                pen.coil((x, x + wide), y, (True, True), "coil-key")
            elif kind == "free":
                pen.ring(x + wide / 2, y, "free-key")
            else:
                pen.passing(x, y - 6, wide, 12, "passing-key")
            pen.text(x + wide + 5, y, text, 7)
            x += wide + 19 + 4.1 * len(text)
        order = " ".join(shorten(name, 60, 7) for name in self.chart.names)
        text = f"digits of a state: {order};  ↑ operates, ↓ releases, → goes on with row"
        pen.text(_EDGE, y + 15, shorten(text, self.width - 2 * _EDGE, 7.5), 7)


class _Brush:
    """Shapes and text in points, y down."""

    def __init__(self, axes: Axes) -> None:
        self.axes = axes

    def text(
        self,
        x: float,
        y: float,
        text: str,
        size: float,
        *,
        bold: bool = False,
        align: str = "left",
        colour: str = _INK,
        turn: bool = False,
    ) -> None:
        self.axes.text(
            x,
            y,
            text,
            size=size,
            weight="bold" if bold else "normal",
            ha=align,
            va="center",
            rotation=90 if turn else 0,
            color=colour,
            parse_math=False,
        )

    def line(
        self,
        x: Sequence[float],
        y: Sequence[float],
        weight: float,
        colour: str = _INK,
        order: float = 1.5,
        name: str | None = None,
    ) -> None:
        self.axes.plot(x, y, lw=weight, color=colour, solid_capstyle="butt", zorder=order, gid=name)

    def _box(self, x: float, y: float, wide: float, tall: float, **style: Any) -> None:
        from matplotlib.patches import Rectangle

        self.axes.add_patch(Rectangle((x, y), wide, tall, **style))

    def passing(self, x: float, y: float, wide: float, tall: float, name: str) -> None:
        """The ruled ground of a state that is only passed."""
        style = {"facecolor": "#f1f1f1", "edgecolor": "#c4c4c4", "hatch": "\\\\\\\\", "lw": 0}
        self._box(x, y, wide, tall, gid=name, **style)

    def bar(self, x: tuple[float, float], y: float, tall: float, name: str) -> None:
        """A relay that is operated, or (hatched) a load that is on."""
        style: dict[str, Any] = {"facecolor": "#2b2b2b", "edgecolor": _INK, "lw": 0.8}
        if name.startswith("load"):
            style = {"facecolor": "white", "edgecolor": _INK, "lw": 0.9, "hatch": "//////"}
        self._box(x[0], y - tall / 2, x[1] - x[0], tall, zorder=3, gid=name, **style)

    def coil(self, x: tuple[float, float], y: float, ends: tuple[bool, bool], name: str) -> None:
        """A coil that is fed, with small strokes where feeding begins and ends."""
        self.line(x, (y, y), 1.5, order=3, name=name)
        for at, is_end in zip(x, ends, strict=True):
            if is_end:
                self.line((at, at), (y - 2.4, y + 2.4), 1.1, order=3)

    def ring(self, x: float, y: float, name: str) -> None:
        """A cell whose value may be either."""
        self.axes.plot([x], [y], "o", ms=4.2, mfc="white", mec=_INK, mew=0.8, zorder=5, gid=name)
