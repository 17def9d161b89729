"""A sheet of lines, circles and text at fixed positions: what every drawing is made of.

Nothing here knows about ladders.  What is drawn may be tagged with the net, relay or load that it
belongs to: pictures on paper ignore that, a live drawing goes by it.  Units are points (1/72
inch), x to the right, y DOWN from the top left corner of the sheet.  Text is centred on its
position.  Widths of text are estimated from the published advance widths of Helvetica, since the
layout must know them before any renderer runs.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from itertools import pairwise
from typing import Literal

__all__ = [
    "BLACK",
    "GREY",
    "Circle",
    "Line",
    "LineKind",
    "Pen",
    "Point",
    "Sheet",
    "Spot",
    "Tag",
    "Text",
    "plain",
    "short_names",
    "shorten",
    "text_width",
    "wrap",
]

Point = tuple[float, float]
LineKind = Literal["wire", "rail", "symbol", "rule"]

BLACK = "#000000"
GREY = "#444444"

# Advance widths of the characters 32 to 126, thousandths of the type size (Helvetica).
_ADVANCE = (
    278, 278, 355, 556, 556, 889, 667, 191, 333, 333, 389, 584, 278, 333, 278, 278,
    556, 556, 556, 556, 556, 556, 556, 556, 556, 556, 278, 278, 584, 584, 584, 556,
    1015, 667, 667, 722, 722, 667, 611, 778, 722, 278, 500, 667, 556, 833, 722, 778,
    667, 778, 722, 667, 611, 722, 667, 944, 667, 667, 611, 278, 278, 278, 469, 556,
    333, 556, 556, 500, 556, 556, 278, 556, 556, 222, 222, 500, 222, 833, 556, 556,
    556, 556, 333, 500, 278, 556, 500, 722, 500, 500, 500, 334, 260, 334, 584,
)  # fmt: skip
_BOLD = 1.09  # Helvetica-Bold is at most about this much wider over whole words


@dataclass(frozen=True)
class Tag:
    """What a mark on a sheet belongs to.

    Args:
        net: the net that it is part of.
        relay: the relay whose contact it shows.
        load: the load whose symbol it is part of.
        operated: of a blade, where its end lies while its relay is operated; it turns about its
            start.
    """

    net: str | None = None
    relay: str | None = None
    load: str | None = None
    operated: Point | None = None


_NO_TAG = Tag()


@dataclass(frozen=True)
class Spot:
    """The centre of a symbol, on the line of its wire."""

    at: Point
    tag: Tag


@dataclass(frozen=True)
class Line:
    """A straight line; `kind` becomes its class in the picture."""

    start: Point
    end: Point
    kind: LineKind = "symbol"
    weight: float = 1.1
    colour: str = BLACK
    tag: Tag = _NO_TAG


@dataclass(frozen=True)
class Circle:
    """A circle; filled ones are junction dots."""

    centre: Point
    radius: float
    filled: bool = False
    tag: Tag = _NO_TAG


@dataclass(frozen=True)
class Text:
    """One line of text, centred on `at`."""

    at: Point
    text: str
    size: float = 8.0
    bold: bool = False
    slant: bool = False
    colour: str = BLACK
    tag: Tag = _NO_TAG

    @property
    def width(self) -> float:
        """Estimated width."""
        return text_width(self.text, self.size, self.bold)


@dataclass(frozen=True)
class Sheet:
    """A whole drawing: its size and everything on it, in drawing order."""

    width: float
    height: float
    title: str
    lines: tuple[Line, ...] = ()
    circles: tuple[Circle, ...] = ()
    texts: tuple[Text, ...] = ()
    spots: tuple[Spot, ...] = ()


@dataclass
class Pen:
    """Collects lines, circles and text while a drawing is laid out."""

    lines: list[Line] = field(default_factory=list)
    circles: list[Circle] = field(default_factory=list)
    texts: list[Text] = field(default_factory=list)
    spots: list[Spot] = field(default_factory=list)
    tag: Tag = _NO_TAG

    @contextmanager
    def tagged(self, tag: Tag) -> Iterator[None]:
        """Tag all that is put through the methods of the pen meanwhile."""
        before, self.tag = self.tag, tag
        try:
            yield
        finally:
            self.tag = before

    def spot(self, at: Point) -> None:
        """Remember where a symbol stands."""
        self.spots.append(Spot(at, self.tag))

    def path(self, points: Sequence[Point], kind: LineKind = "symbol", weight: float = 1.1) -> None:
        """Straight lines from each point to the next."""
        for start, end in pairwise(points):
            self.lines.append(Line(start, end, kind, weight, tag=self.tag))

    def blade(self, hinge: Point, released: Point, operated: Point, weight: float) -> None:
        """A contact's blade, drawn released."""
        tag = replace(self.tag, operated=operated)
        self.lines.append(Line(hinge, released, weight=weight, tag=tag))

    def circle(self, centre: Point, radius: float, *, filled: bool = False) -> None:
        """A circle."""
        self.circles.append(Circle(centre, radius, filled, self.tag))

    def text(
        self,
        at: Point,
        text: str,
        size: float = 8.0,
        *,
        bold: bool = False,
        slant: bool = False,
        colour: str = BLACK,
    ) -> None:
        """Put a line of text, if there is any."""
        if text:
            self.texts.append(Text(at, text, size, bold, slant, colour, self.tag))

    def sheet(self, width: float, height: float, title: str) -> Sheet:
        """The finished sheet."""
        return Sheet(
            width,
            height,
            title,
            tuple(self.lines),
            tuple(self.circles),
            tuple(self.texts),
            tuple(self.spots),
        )


def text_width(text: str, size: float, bold: bool = False) -> float:
    """Estimated width of `text` in points."""
    total = 0
    for char in text:
        code = ord(char)
        if 32 <= code <= 126:
            total += _ADVANCE[code - 32]
        elif unicodedata.combining(char):
            continue
        else:
            total += 1000 if unicodedata.east_asian_width(char) in "WF" else 700
    return total * size / 1000 * (_BOLD if bold else 1.0)


def plain(text: str) -> str:
    """`text` on one line, without control characters: what can stand on a drawing."""
    visible = (
        " " if unicodedata.category(char) in ("Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp") else char
        for char in text
    )
    return " ".join("".join(visible).split())


def shorten(text: str, width: float, size: float, bold: bool = False, tail: int = 0) -> str:
    """`text` on one line, cut with an ellipsis so that it is at most `width` points wide.

    `tail` characters at its end are kept: names often differ only there.
    """
    text = plain(text)
    if text_width(text, size, bold) <= width:
        return text
    end = text[len(text) - tail :] if tail else ""
    head = text[: len(text) - tail]
    while head and text_width(head + "…" + end, size, bold) > width:
        head = head[:-1]
    return head.rstrip() + "…" + end


def short_names(
    names: Iterable[str], width: float, size: float, bold: bool = False
) -> dict[str, str]:
    """Each name shortened to `width` points, and still different from every other one."""
    shown: dict[str, str] = {}
    taken: set[str] = set()
    for name in names:
        if name in shown:
            continue
        text = shorten(name, width, size, bold, tail=4)
        mark = 2
        while text in taken:
            ending = f" ({mark})"
            text = shorten(name, width - text_width(ending, size, bold), size, bold) + ending
            mark += 1
        taken.add(text)
        shown[name] = text
    return shown


def wrap(parts: Sequence[str], separator: str, width: float, size: float) -> list[str]:
    """Join parts into lines of at most `width` points, breaking only after a separator."""
    lines: list[str] = []
    line = ""
    for i, part in enumerate(parts):
        piece = part + (separator if i + 1 < len(parts) else "")
        if line and text_width(line + piece.rstrip(), size) > width:
            lines.append(line.rstrip())
            line = ""
        line += piece
    if line:
        lines.append(line.rstrip())
    return lines
