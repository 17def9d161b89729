"""From the scene of a state graph to boxes, plates and arrows at fixed places.

Units are points, `y` is down; the picture begins at (0, 0).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from contactlogic.draw.sheet import Point, shorten, text_width
from contactlogic.draw.state_arrows import Box, Curve, Labels, bent, cut, route
from contactlogic.draw.state_places import Island, Placed, place_islands

if TYPE_CHECKING:
    from contactlogic.draw.states import Group, Scene

__all__ = ["DIGITS", "PLATE_SIZE", "STATE_SIZE", "Arrow", "Layout", "lay_out"]

STATE_SIZE = 9.0  # type size of state texts
PLATE_SIZE = 8.0  # and of plates
DIGITS = 8  # most digits on one line of a state
_LABEL_SIZE = 7.0
_DOUBLE = 4.0  # by which the outer of two outlines stands out
_ASPECT = 1.3  # wanted width of a picture by its height

Move = tuple[int, int]


@dataclass(frozen=True)
class Arrow:
    """A move: its curve without the arrowhead, the tip, and its label with the place of it.

    A line to or from a stand-in has no movers; a label that found no room has no place.
    """

    move: Move
    curve: Curve
    tip: Point
    label: str = ""
    spot: Point | None = None


@dataclass(frozen=True)
class Layout:
    """Everything of a picture but the texts round it.  Plates stand in the order of groups."""

    boxes: dict[int, Box]
    plates: tuple[Box | None, ...]
    arrows: tuple[Arrow, ...]
    width: float
    height: float


def lay_out(scene: Scene, columns: Sequence[str], plates: Sequence[tuple[str, ...]]) -> Layout:
    """Places for all states and moves of a scene.

    Args:
        plates: the lines on each group's plate; none where it has no plate.
    """
    return _Layouter(scene, columns, plates).layout()


class _Layouter:
    def __init__(
        self, scene: Scene, columns: Sequence[str], plates: Sequence[tuple[str, ...]]
    ) -> None:
        self.scene, self.columns = scene, columns
        self.sizes = [_plate_size(plate) for plate in plates]
        lines = math.ceil(len(columns) / DIGITS)
        digits = "0" * min(len(columns), DIGITS)
        self.half_width = max(30.0, text_width(digits, STATE_SIZE, True) + 11) / 2
        self.half_height = (8 + 10.5 * lines) / 2
        # Places are at least a unit apart, so in one direction by a unit over the root of two:
        # this clears the boxes with their outer outlines.
        self.x_unit = (2 * (self.half_width + _DOUBLE) + 6) * math.sqrt(2) / 1.12
        self.y_unit = (2 * (self.half_height + _DOUBLE) + 6) * math.sqrt(2) / 1.12
        self.y_unit = max(self.y_unit, self.x_unit / 1.4)
        self.double = {
            s for group in scene.groups if group.kind == "trap" for s in group.states if s >= 0
        } | scene.trapped

    def layout(self) -> Layout:
        placed, boxes, plates = self._stand(roomy=False)
        if any(plate and _meet(plate, box) for plate in plates for box in boxes.values()):
            placed, boxes, plates = self._stand(roomy=True)
        arrows = self._arrows(placed, boxes, [plate for plate in plates if plate])
        points = [p for arrow in arrows for p in arrow.curve.samples()]
        for box in [*boxes.values(), *(plate for plate in plates if plate)]:
            points.append((box.x - box.half_width, box.y - box.half_height))
            points.append((box.x + box.half_width, box.y + box.half_height))
        margin = 10.0  # for labels outside the outermost arrows
        x = margin - min(p[0] for p in points)
        y = margin - min(p[1] for p in points)
        return Layout(
            {state: _moved(box, x, y) for state, box in boxes.items()},
            tuple(_moved(plate, x, y) if plate else None for plate in plates),
            tuple(_shifted(arrow, x, y) for arrow in arrows),
            max(p[0] for p in points) + x + margin,
            max(p[1] for p in points) + y + margin,
        )

    def _stand(self, roomy: bool) -> tuple[Placed[int], dict[int, Box], list[Box | None]]:
        """Where states and plates stand."""
        placed = self._place(roomy)
        boxes = {state: self._box(state, at) for state, at in placed.at.items()}
        return placed, boxes, [self._plate(k, placed) for k in range(len(self.sizes))]

    def _place(self, roomy: bool) -> Placed[int]:
        """Positions; `roomy` keeps the corners of single states' plates free too."""
        islands = []
        for group, layers, (wide, tall) in zip(
            self.scene.groups, self.scene.layers, self.sizes, strict=True
        ):
            beside = self._below(group) + tall  # of a single state's plate
            single = len(group.states) == 1
            room = (beside + self.half_height + 8) / self.y_unit
            if single and roomy:
                room = math.hypot((wide / 2 + self.half_width + _DOUBLE + 4) / self.x_unit, room)
            if not single:  # whichever way the ring is turned
                room = math.hypot(
                    (wide / 2 + self.half_width + _DOUBLE + 4) / self.x_unit,
                    (tall / 2 + self.half_height + _DOUBLE + 4) / self.y_unit,
                )
            islands.append(
                Island(
                    group.states,
                    tuple(tuple(layer) for layer in layers),
                    room,
                    wide / 2 / self.x_unit if single else 0.0,
                    beside / self.y_unit if single else 0.0,
                )
            )
        return place_islands(islands, self.scene.moves, aspect=_ASPECT * self.y_unit / self.x_unit)

    def _below(self, group: Group) -> float:
        """From the centre of a single state to the top of its plate."""
        return self.half_height + (_DOUBLE if group.states[0] in self.double else 0) + 4

    def _box(self, state: int, at: Point) -> Box:
        more = _DOUBLE if state in self.double else 0.0
        return Box(
            at[0] * self.x_unit,
            at[1] * self.y_unit,
            self.half_width + more,
            self.half_height + more,
        )

    def _plate(self, number: int, placed: Placed[int]) -> Box | None:
        group, (wide, tall) = self.scene.groups[number], self.sizes[number]
        centre = placed.centres[number]
        if not wide:
            return None
        y = centre[1] * self.y_unit
        if len(group.states) == 1:
            y += self._side(group.states[0], placed) * (self._below(group) + tall / 2)
        return Box(centre[0] * self.x_unit, y, wide / 2, tall / 2)

    def _side(self, state: int, placed: Placed[int]) -> int:
        """Whether the plate of a single state stands below it (1) or above (-1), out of the way."""
        x, y = placed.at[state]
        ends = {end for move in self.scene.moves if state in move for end in move} - {state}
        steep = [
            there[1] > y
            for there in (placed.at[end] for end in sorted(ends))
            if abs(there[1] - y) > abs(there[0] - x) / 2
        ]
        return -1 if sum(steep) * 2 > len(steep) else 1

    # Arrows ---------------------------------------------------------------------------------

    def _arrows(
        self, placed: Placed[int], boxes: dict[int, Box], plates: Sequence[Box]
    ) -> list[Arrow]:
        arcs = self._arcs(placed, boxes)
        known = set(self.scene.moves)
        moves = [*self.scene.moves, *(move for move in arcs if move not in known)]
        curves: list[Curve] = []
        tips: list[Point] = []
        for here, there in moves:
            curve = arcs.get((here, there))
            if curve is None:
                others = [box for state, box in boxes.items() if state not in (here, there)]
                back = (there, here) in known
                curve = route(
                    boxes[here], boxes[there], [*others, *plates, *plates], both_ways=back
                )
            curve, tip = cut(curve, boxes[here], boxes[there])
            curves.append(curve)
            tips.append(tip)
        labels = Labels([*boxes.values(), *plates], curves)
        arrows = []
        for move, curve, tip in zip(moves, curves, tips, strict=True):
            if min(move) < 0:
                arrows.append(Arrow(move, curve, tip))
                continue
            label = "+".join(shorten(name, 40, _LABEL_SIZE) for name in self._movers(move))
            spot = labels.place(curve, text_width(label, _LABEL_SIZE) + 1, _LABEL_SIZE)
            arrows.append(Arrow(move, curve, tip, label, spot))
        return arrows

    def _movers(self, move: Move) -> list[str]:
        return [name for i, name in enumerate(self.columns) if (move[0] ^ move[1]) >> i & 1]

    def _arcs(self, placed: Placed[int], boxes: dict[int, Box]) -> dict[Move, Curve]:
        """Stretches of rings between neighbours, where there is a move or a state left out."""
        known = set(self.scene.moves)
        arcs = {}
        for k, group in enumerate(self.scene.groups):
            ring = group.states
            if len(ring) == 1:
                continue
            for i, here in enumerate(ring):
                there = ring[(i + 1) % len(ring)]
                if (here, there) not in known and min(here, there) >= 0:
                    continue
                angle = 2 * math.pi * (i + 0.5) / len(ring) + placed.turns[k]
                x = (placed.centres[k][0] + placed.rings[k] * math.sin(angle)) * self.x_unit
                y = (placed.centres[k][1] - placed.rings[k] * math.cos(angle)) * self.y_unit
                a, b = boxes[here], boxes[there]
                arcs[here, there] = bent((a.x, a.y), (b.x, b.y), (x, y))
        return arcs


def _plate_size(plate: Sequence[str]) -> tuple[float, float]:
    if not plate:
        return 0.0, 0.0
    wide = max(text_width(line, PLATE_SIZE, True) for line in plate)
    return wide + 12, (PLATE_SIZE + 2) * len(plate) + 5


def _meet(one: Box, other: Box) -> bool:
    """Whether two boxes overlap."""
    return (
        abs(one.x - other.x) < one.half_width + other.half_width
        and abs(one.y - other.y) < one.half_height + other.half_height
    )


def _moved(box: Box, x: float, y: float) -> Box:
    return Box(box.x + x, box.y + y, box.half_width, box.half_height)


def _shifted(arrow: Arrow, x: float, y: float) -> Arrow:
    def there(point: Point) -> Point:
        return point[0] + x, point[1] + y

    a, b, c, d = arrow.curve.points
    return Arrow(
        arrow.move,
        Curve((there(a), there(b), there(c), there(d))),
        there(arrow.tip),
        arrow.label,
        there(arrow.spot) if arrow.spot else None,
    )
