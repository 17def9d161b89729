"""Wires as they are drawn: from loose orthogonal segments to stretches, corners and junctions.

Segments of one net are split where they meet, doubles are dropped, and the rest is followed from
node to node.  A node is a point where three or more wires meet, or a free end.  What lies between
two nodes is one stretch and carries its net's number once.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

from contactlogic.draw.sheet import Point

__all__ = ["Segment", "Wire", "connect"]


@dataclass(frozen=True)
class Segment:
    """A horizontal or vertical piece of wire of a net."""

    net: str
    start: Point
    end: Point


@dataclass(frozen=True)
class Wire:
    """A stretch of wire of one net between two nodes, with its corners."""

    net: str
    points: tuple[Point, ...]

    def pieces(self) -> tuple[tuple[Point, Point], ...]:
        """Straight pieces, end to end."""
        return tuple(pairwise(self.points))


def connect(
    segments: Iterable[Segment],
) -> tuple[tuple[Wire, ...], tuple[tuple[str, Point], ...]]:
    """Stretches of all nets, nets in order of first appearance; junctions, each with its net."""
    by_net: dict[str, list[tuple[Point, Point]]] = {}
    for segment in segments:
        if segment.start != segment.end:
            pair = (min(segment.start, segment.end), max(segment.start, segment.end))
            by_net.setdefault(segment.net, []).append(pair)
    wires: list[Wire] = []
    junctions: list[tuple[str, Point]] = []
    for net, pairs in by_net.items():
        beside = _graph(pairs)
        points = sorted(point for point, others in beside.items() if len(others) > 2)
        junctions += [(net, point) for point in points]
        wires += [Wire(net, _straightened(path)) for path in _paths(beside)]
    return tuple(wires), tuple(junctions)


def _graph(pairs: list[tuple[Point, Point]]) -> dict[Point, list[Point]]:
    """Points of one net, each with its neighbours along the wires."""
    points = sorted({point for pair in pairs for point in pair})
    beside: dict[Point, list[Point]] = {point: [] for point in points}
    for start, end in pairs:
        on = [p for p in points if _lies_on(p, start, end)]
        for a, b in pairwise(on):
            if b not in beside[a]:
                beside[a].append(b)
                beside[b].append(a)
    return beside


def _lies_on(point: Point, start: Point, end: Point) -> bool:
    return start[0] <= point[0] <= end[0] and start[1] <= point[1] <= end[1]


def _paths(beside: dict[Point, list[Point]]) -> list[list[Point]]:
    paths: list[list[Point]] = []
    walked: set[tuple[Point, Point]] = set()
    for node, others in beside.items():
        if len(others) == 2:
            continue
        for first in others:
            if (node, first) in walked:
                continue
            path = [node, first]
            while len(beside[path[-1]]) == 2:
                here, before = path[-1], path[-2]
                path.append(next(p for p in beside[here] if p != before))
            walked.add((path[-1], path[-2]))
            paths.append(path)
    return paths


def _straightened(path: list[Point]) -> tuple[Point, ...]:
    """Drop points in the middle of a straight line."""
    kept = [path[0]]
    for before, here, after in zip(path, path[1:], path[2:], strict=False):
        if not (before[0] == here[0] == after[0] or before[1] == here[1] == after[1]):
            kept.append(here)
    return (*kept, path[-1])
