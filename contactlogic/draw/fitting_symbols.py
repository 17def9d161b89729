"""Fittings of a load as symbols: what is in series before it, what lies across it below.

Style of IEC 60617, drawn from lines like `symbols`.  A load with its centre at `x` on a wire
through `y` has its fuse and series resistor on the wire to its left; capacitor and suppression
lie across it on lines of their own below, and under these stand all values.
"""

from __future__ import annotations

from contactlogic.draw import symbols
from contactlogic.draw.sheet import GREY, Pen, Point, shorten, text_width
from contactlogic.job.model import Fittings, LoadKind

__all__ = ["across", "drop", "in_line", "in_line_room", "text_room"]

_SIZE = 7.5
_LINE = 9.5  # from one line of text to the next
_STEP = 17.0  # from one part across the load to the next
_BODY = 20.0  # a fuse or resistor on the wire
_STUB = 20.0  # from the load to the first of them, clear of the mark of the load's terminal
_GAP = 8.0
_SIDE = symbols.LOAD_HALF + 4.0  # where leads leave the wire downwards
_OUTLINE = 1.2
_WIDEST = 150.0


def _bodies(parts: Fittings) -> list[str]:
    """Parts on the wire, from the load outward."""
    found = []
    if parts.series is not None and parts.hold is None:
        found.append("resistor")
    if parts.fuse is not None:
        found.append("fuse")
    return found


def _shunts(parts: Fittings) -> list[str]:
    found = []
    if parts.hold is not None:
        found.append("hold")
    if parts.suppression is not None:
        found.append(parts.suppression)
    return found


def in_line_room(parts: Fittings) -> float:
    """Width taken on the wire before a load."""
    count = len(_bodies(parts))
    return _STUB + count * _BODY + (count - 1) * _GAP if count else 0.0


def text_room(parts: Fittings) -> float:
    """Width of the values under a load."""
    return max((text_width(_shown(said), _SIZE) for said in parts.texts()), default=0.0)


def drop(parts: Fittings, kind: LoadKind | None) -> float:
    """Height taken below the wire of a load; 0 without fittings."""
    lines = len(parts.texts())
    return _first(parts, kind) + _STEP * len(_shunts(parts)) + _LINE * lines if lines else 0.0


def _first(parts: Fittings, kind: LoadKind | None) -> float:
    """From the wire to the first part across the load, or to the first line of text."""
    return (30.0 if kind == "valve" else 25.0) - (0.0 if _shunts(parts) else 2.0)


def _shown(text: str) -> str:
    return shorten(text, _WIDEST, _SIZE)


def in_line(pen: Pen, x: float, y: float, parts: Fittings) -> float:
    """Draw what is in series before a load; returns where the wire to it ends."""
    end = x - symbols.LOAD_HALF
    for i, body in enumerate(_bodies(parts)):
        right = end - (_GAP if i else _STUB)
        left = right - _BODY
        pen.path([(end, y), (right, y)], "wire")
        _box(pen, (left + right) / 2, y, _BODY / 2, 4.5)
        if body == "fuse":  # the wire passes through it
            pen.path([(left, y), (right, y)], "wire")
        end = left
    return round(end, 2)


def across(
    pen: Pen, x: float, y: float, parts: Fittings, kind: LoadKind | None, *, positive: bool
) -> None:
    """Draw what lies across a load, and write the values of all its fittings below.

    Args:
        positive: whether the left end is the positive one.
    """
    height = y + _first(parts, kind)
    shunts = _shunts(parts)
    left, right = x - _SIDE, x + _SIDE
    for i, part in enumerate(shunts):
        at = round(height + _STEP * i, 2)
        inner = _part(pen, part, x, at, parts, positive)
        for start, end in zip((left, *inner[1::2]), (*inner[::2], right), strict=True):
            pen.path([(start, at), (end, at)], "wire")
    if shunts:
        bottom = round(height + _STEP * (len(shunts) - 1), 2)
        for side in (left, right):
            pen.path([(side, y), (side, bottom)], "wire")
            symbols.junction(pen, (side, y))
            for i in range(len(shunts) - 1):
                symbols.junction(pen, (side, round(height + _STEP * i, 2)))
    line = height + _STEP * len(shunts) + (0.0 if not shunts else -2.0)
    for i, said in enumerate(parts.texts()):
        pen.text((x, round(line + _LINE * i, 2)), _shown(said), _SIZE, colour=GREY)


def _part(
    pen: Pen, part: str, x: float, y: float, parts: Fittings, positive: bool
) -> tuple[float, ...]:
    """Draw one part; returns where it begins and ends, for each of its pieces."""
    if part == "hold":
        if parts.series is None:
            _plates(pen, x, y, positive)
            return (x - 2, x + 2)
        _box(pen, x - 9, y, 6, 3.5)
        _plates(pen, x + 8, y, positive)
        return (x - 15, x - 3, x + 6, x + 10)
    if part == "rc":
        _box(pen, x - 9, y, 6, 3.5)
        _plates(pen, x + 8, y, None)
        return (x - 15, x - 3, x + 6, x + 10)
    if part == "varistor":
        _box(pen, x, y, 9, 4)
        pen.path([(x - 10, y + 7), (x - 6, y + 7), (x + 8, y - 7)], weight=_OUTLINE)
        return (x - 9, x + 9)
    if part == "tvs":
        _triangle(pen, x - 10, x, y)
        _triangle(pen, x + 10, x, y)
        pen.path([(x - 2, y - 6), (x, y - 5), (x, y + 5), (x + 2, y + 6)], weight=_OUTLINE)
        return (x - 10, x + 10)
    way = -1.0 if positive else 1.0  # the cathode lies at the positive end
    tip = x + way * 5
    _triangle(pen, x - way * 5, tip, y)
    bar: list[Point] = [(tip, y - 5), (tip, y + 5)]
    if part == "zener":
        bar = [(tip - 2.5, y - 5), *bar, (tip + 2.5, y + 5)]
    pen.path(bar, weight=_OUTLINE)
    return (x - 5, x + 5)


def _box(pen: Pen, x: float, y: float, half: float, rise: float) -> None:
    corners = [(x - half, y - rise), (x + half, y - rise), (x + half, y + rise)]
    pen.path([*corners, (x - half, y + rise), (x - half, y - rise)], weight=_OUTLINE)


def _plates(pen: Pen, x: float, y: float, positive: bool | None) -> None:
    """A capacitor; the sign stands above its positive plate, None for one without polarity."""
    for plate in (x - 2, x + 2):
        pen.path([(plate, y - 5), (plate, y + 5)], weight=1.6)
    if positive is not None:
        pen.text((x - 6.5 if positive else x + 6.5, y - 5), "+", 7)


def _triangle(pen: Pen, base: float, tip: float, y: float) -> None:
    pen.path([(base, y - 5), (base, y + 5), (tip, y), (base, y - 5)], weight=_OUTLINE)
