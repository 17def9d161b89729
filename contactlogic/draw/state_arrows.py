"""Arrows between boxes at fixed places: cubic curves that keep clear of other boxes, with labels.

Of a few bends the one that meets the fewest other boxes without a long detour is taken.
Curves are cut at the boxes by de Casteljau's subdivision, so that arrowheads touch them.
Units are points, `y` is down.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from contactlogic.draw.sheet import Point

__all__ = ["Box", "Curve", "Labels", "bent", "cut", "route"]

_BENDS = (0.0, *(side * k / 100 for k in (8, 15, 22, 30, 40, 52, 66) for side in (1, -1)))
_DETOUR = 1 / 110  # what a point of detour counts, against one for a box met
_CLEAR = 3.5  # distance kept from other boxes
_HEAD = 6.5  # length of an arrowhead
_SAMPLES = 20


@dataclass(frozen=True)
class Box:
    """A rectangle by its centre and half its sides."""

    x: float
    y: float
    half_width: float
    half_height: float

    def holds(self, point: Point, margin: float = 0.0) -> bool:
        return (
            abs(point[0] - self.x) <= self.half_width + margin
            and abs(point[1] - self.y) <= self.half_height + margin
        )

    def meets(self, other: Box, margin: float = 0.0) -> bool:
        return (
            abs(other.x - self.x) < self.half_width + other.half_width + margin
            and abs(other.y - self.y) < self.half_height + other.half_height + margin
        )


@dataclass(frozen=True)
class Curve:
    """A cubic Bezier curve."""

    points: tuple[Point, Point, Point, Point]

    def at(self, t: float) -> Point:
        a, b, c, d = self.points
        u = 1 - t
        p, q, r, s = u * u * u, 3 * u * u * t, 3 * u * t * t, t * t * t
        return (
            p * a[0] + q * b[0] + r * c[0] + s * d[0],
            p * a[1] + q * b[1] + r * c[1] + s * d[1],
        )

    def samples(self) -> list[Point]:
        return [self.at(k / _SAMPLES) for k in range(_SAMPLES + 1)]

    def pieces(self, width: float, height: float) -> list[Curve]:
        """The curve in pieces whose control points keep to a sheet (renderers count them in)."""
        outside = any(not (0 <= x <= width and 0 <= y <= height) for x, y in self.points)
        count = 4 if outside else 1
        return [self.part(k / count, (k + 1) / count) for k in range(count)]

    def part(self, start: float, stop: float) -> Curve:
        """The stretch between two parameters."""
        head = _split(self.points, stop)[0]
        return Curve(_split(head, start / stop if stop else 0.0)[1])


Four = tuple[Point, Point, Point, Point]


def _split(points: Four, t: float) -> tuple[Four, Four]:
    def mix(p: Point, q: Point) -> Point:
        return p[0] + (q[0] - p[0]) * t, p[1] + (q[1] - p[1]) * t

    a, b, c, d = points
    ab, bc, cd = mix(a, b), mix(b, c), mix(c, d)
    abc, bcd = mix(ab, bc), mix(bc, cd)
    middle = mix(abc, bcd)
    return (a, ab, abc, middle), (middle, bcd, cd, d)


def bent(start: Point, end: Point, middle: Point) -> Curve:
    """The symmetric curve from `start` to `end` through `middle`."""
    x = (middle[0] - (start[0] + end[0]) / 2) * 4 / 3
    y = (middle[1] - (start[1] + end[1]) / 2) * 4 / 3
    dx, dy = (end[0] - start[0]) / 3, (end[1] - start[1]) / 3
    return Curve(
        (start, (start[0] + dx + x, start[1] + dy + y), (end[0] - dx + x, end[1] - dy + y), end)
    )


def route(start: Box, end: Box, others: Sequence[Box], *, both_ways: bool = False) -> Curve:
    """The curve from centre to centre that meets few of the other boxes and is short.

    Args:
        both_ways: there is an arrow back, so that both must bend.
    """
    a, b = (start.x, start.y), (end.x, end.y)
    dx, dy = b[0] - a[0], b[1] - a[1]
    length = math.hypot(dx, dy)
    best: tuple[float, Curve] | None = None
    for number, bend in enumerate(_BENDS):
        if both_ways and bend <= 0:
            continue
        detour = _DETOUR * 1.5 * bend * bend * length  # a shallow arc is longer by about this
        if best is not None and detour + 0.01 * number >= best[0]:
            continue
        middle = ((a[0] + b[0]) / 2 - dy * bend, (a[1] + b[1]) / 2 + dx * bend)
        curve = bent(a, b, middle)
        cost = detour + 0.01 * number + _hits(curve, others)
        if best is None or cost < best[0]:
            best = cost, curve
    assert best is not None
    return best[1]


def _hits(curve: Curve, boxes: Sequence[Box]) -> int:
    points = curve.samples()
    left, right = min(p[0] for p in points), max(p[0] for p in points)
    top, bottom = min(p[1] for p in points), max(p[1] for p in points)
    field = Box((left + right) / 2, (top + bottom) / 2, (right - left) / 2, (bottom - top) / 2)
    return sum(
        any(box.holds(point, _CLEAR) for point in points)
        for box in boxes
        if box.meets(field, _CLEAR)
    )


def cut(curve: Curve, start: Box, end: Box) -> tuple[Curve, Point]:
    """The part between two boxes, and the tip of the arrow that ends it."""
    out = _crossing(curve, start, False)
    into = _crossing(curve, end, True)
    tip = curve.at(into)
    low, high = out, into
    for _ in range(30):  # where the arrowhead begins
        middle = (low + high) / 2
        if math.dist(curve.at(middle), tip) > _HEAD:
            low = middle
        else:
            high = middle
    return curve.part(out, max(high, out + 1e-3)), tip


def _crossing(curve: Curve, box: Box, entering: bool) -> float:
    """Parameter at which a curve leaves the box it starts in, or enters the one it ends in."""
    low, high = 0.0, 1.0
    for _ in range(40):
        middle = (low + high) / 2
        if box.holds(curve.at(middle), 1.0) != entering:
            low = middle
        else:
            high = middle
    return (low + high) / 2


class Labels:
    """Places for the labels of arrows, kept clear of boxes, of other arrows and of each other."""

    _CELL = 24.0

    def __init__(self, boxes: Sequence[Box], curves: Sequence[Curve]) -> None:
        self._taken: dict[tuple[int, int], list[Box]] = {}
        self._points: dict[tuple[int, int], list[Point]] = {}
        for box in boxes:
            self._take(box)
        for curve in curves:
            for point in curve.samples():
                key = int(point[0] // self._CELL), int(point[1] // self._CELL)
                self._points.setdefault(key, []).append(point)

    def place(self, curve: Curve, width: float, height: float) -> Point | None:
        """Centre of a label beside a curve, None where there is no room."""
        for t in (0.5, 0.42, 0.58, 0.34, 0.66):
            x, y = curve.at(t)
            ahead, behind = curve.at(t + 0.02), curve.at(t - 0.02)
            dx, dy = ahead[0] - behind[0], ahead[1] - behind[1]
            length = math.hypot(dx, dy) or 1.0
            across = -dy / length, dx / length
            away = abs(across[0]) * width / 2 + abs(across[1]) * height / 2 + 1.5
            for side in (-1, 1):
                label = Box(
                    x + side * across[0] * away, y + side * across[1] * away, width / 2, height / 2
                )
                if self._free(label):
                    self._take(label)
                    return label.x, label.y
        return None

    def _keys(self, box: Box, margin: float = 0.0) -> list[tuple[int, int]]:
        left = int((box.x - box.half_width - margin) // self._CELL)
        right = int((box.x + box.half_width + margin) // self._CELL)
        top = int((box.y - box.half_height - margin) // self._CELL)
        bottom = int((box.y + box.half_height + margin) // self._CELL)
        return [(x, y) for x in range(left, right + 1) for y in range(top, bottom + 1)]

    def _take(self, box: Box) -> None:
        for key in self._keys(box):
            self._taken.setdefault(key, []).append(box)

    def _free(self, label: Box) -> bool:
        for key in self._keys(label, 1.0):
            if any(box.meets(label, 1.0) for box in self._taken.get(key, ())):
                return False
            if any(label.holds(point, 0.5) for point in self._points.get(key, ())):
                return False
        return True
