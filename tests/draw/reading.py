"""Reads a drawing back from its DOT text, as an eye would: lines that touch, marks that are near.

Shares no code with the package: it knows only where a wireman looks for a contact's name and
marks, a load's terminals and a wire's number.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from itertools import combinations

Point = tuple[float, float]
Box = tuple[float, float, float, float]

_NODE = re.compile(r"^\t(\w+) \[(.*)\]$")
_EDGE = re.compile(r"^\t(\w+) -- (\w+) \[(.*)\]$")
_ATTRIBUTE = re.compile(r'(\w+)=("(?:[^"\\]|\\.)*"|[^\s\]]+)')


@dataclass
class Label:
    at: Point
    text: str
    size: float
    bold: bool
    slant: bool

    def box(self) -> Box:
        """A generous estimate: capitals and digits of a sans-serif face."""
        each = sum(0.3 if c in " .,:;|/'il1" else 0.62 for c in self.text)
        half = each * self.size * (1.08 if self.bold else 0.95) / 2
        x, y = self.at
        return (x - half, y - 0.4 * self.size, x + half, y + 0.4 * self.size)


@dataclass
class Reading:
    """Lines by kind, circles and labels of a drawing; y up."""

    lines: list[tuple[str, Point, Point, float]] = field(default_factory=list)
    circles: list[tuple[Point, float, bool]] = field(default_factory=list)
    labels: list[Label] = field(default_factory=list)
    size: Point = (0, 0)

    def of(self, *kinds: str) -> list[tuple[Point, Point]]:
        return [(a, b) for kind, a, b, _ in self.lines if kind in kinds]


def read(dot: str) -> Reading:
    found, points = Reading(), {}
    for line in dot.splitlines():
        edge = _EDGE.match(line)
        if edge:
            values = _attributes(edge[3])
            ends = (points[edge[1]], points[edge[2]])
            found.lines.append((values["class"], *ends, float(values["penwidth"])))
            continue
        node = _NODE.match(line)
        if not node or node[1] in ("graph", "node", "edge"):
            continue
        values = _attributes(node[2])
        x, y = (float(v) for v in values["pos"].split(","))
        if node[1].startswith("p"):
            points[node[1]] = (x, y)
        elif node[1].startswith("c"):
            found.circles.append(((x, y), 36 * float(values["width"]), values["style"] == "filled"))
        else:
            font = values.get("fontname", "")
            found.labels.append(
                Label(
                    (x, y), values["label"], float(values["fontsize"]),
                    "Bold" in font, "Oblique" in font,
                )
            )  # fmt: skip
    found.size = (points["p2"][0], points["p1"][1])  # the sheet's corners come first
    return found


def _attributes(text: str) -> dict[str, str]:
    values = {}
    for name, value in _ATTRIBUTE.findall(text):
        if value.startswith('"'):
            value = value[1:-1].replace('\\"', '"').replace("\\\\", "\\")
        values[name] = value.replace("&amp;", "&")
    return values


def touches(point: Point, line: tuple[Point, Point]) -> bool:
    (ax, ay), (bx, by) = line
    if ax == bx:
        return point[0] == ax and min(ay, by) <= point[1] <= max(ay, by)
    return point[1] == ay and min(ax, bx) <= point[0] <= max(ax, bx)


def groups(lines: list[tuple[Point, Point]]) -> list[int]:
    """A group number for each line: lines are in one group if an end of one lies on the other."""
    parent = list(range(len(lines)))

    def root(i: int) -> int:
        while parent[i] != i:
            i = parent[i]
        return i

    for i, j in combinations(range(len(lines)), 2):
        one, other = lines[i], lines[j]
        if any(touches(p, other) for p in one) or any(touches(p, one) for p in other):
            parent[root(j)] = root(i)
    return [root(i) for i in range(len(lines))]


def crosses(one: tuple[Point, Point], other: tuple[Point, Point]) -> bool:
    """Whether a horizontal and a vertical line meet at all, or two parallel ones overlap."""
    a = (*map(min, *one), *map(max, *one))
    b = (*map(min, *other), *map(max, *other))
    return a[0] <= b[2] and b[0] <= a[2] and a[1] <= b[3] and b[1] <= a[3]


def overlap(a: Box, b: Box) -> bool:
    return a[0] < b[2] and b[0] < a[2] and a[1] < b[3] and b[1] < a[3]


@dataclass(frozen=True)
class ReadContact:
    """Relay, terminal marks and the wire numbers at them."""

    relay: str
    common: tuple[str, str]
    throw: tuple[str, str]
    make: bool


@dataclass
class Netlist:
    contacts: list[ReadContact]
    fed: dict[str, str | None]  # load -> wire number
    rails: list[tuple[str, str | None]]  # label and wire number
    unnumbered: list[tuple[Point, ...]]
    mixed: list[int]


class Reader:
    """Recovers what is connected to what from the lines alone."""

    def __init__(self, drawing: Reading) -> None:
        self.drawing = drawing
        self.wires = drawing.of("wire", "rail")
        self.group = groups(self.wires)
        self.numbers: dict[int, set[str]] = {}
        numbers = [label for label in drawing.labels if label.slant]
        self.label_of: dict[int, list[int]] = {}
        for label in numbers:
            for i, (a, b) in enumerate(self.wires):
                if self._is_at(label, a, b):
                    number = label.text.split(" ")[0]
                    self.numbers.setdefault(self.group[i], set()).add(number)
                    self.label_of.setdefault(i, []).append(int(number))

    @staticmethod
    def _is_at(label: Label, a: Point, b: Point) -> bool:
        x, y = label.at
        left, _, right, _ = label.box()
        if a[1] == b[1]:
            return 0 < y - a[1] < 9 and min(a[0], b[0]) <= x <= max(a[0], b[0])
        near = abs(left - a[0]) < 9 or abs(right - a[0]) < 9
        return near and min(a[1], b[1]) < y < max(a[1], b[1])

    def number_at(self, point: Point) -> str | None:
        here = {self.group[i] for i, line in enumerate(self.wires) if touches(point, line)}
        if not here:
            return None
        (group,) = here
        (number,) = self.numbers[group]
        return number

    def netlist(self) -> Netlist:
        mixed = [g for g, numbers in self.numbers.items() if len(numbers) != 1]
        return Netlist(self.contacts(), self.fed(), self.rails(), self.unnumbered(), mixed)

    def contacts(self) -> list[ReadContact]:
        labels = self.drawing.labels
        ends = {p for line in self.wires for p in line}
        contacts = []
        for kind, a, b, weight in self.drawing.lines:
            if kind != "symbol" or abs(weight - 1.7) > 0.01:
                continue
            hinge, tip = (a, b) if a in ends else (b, a)
            side = 1 if tip[0] > hinge[0] else -1
            throw = min(
                (p for p in ends if p[1] == hinge[1] and 20 < side * (p[0] - hinge[0]) < 30),
                key=lambda p: abs(p[0] - hinge[0]),
            )
            middle = (hinge[0] + throw[0]) / 2
            (name,) = [
                t.text for t in labels
                if t.bold and abs(t.at[0] - middle) < 0.5 and 20 < t.at[1] - hinge[1] < 36
            ]  # fmt: skip
            marks = [self._mark(p, p[0] - middle) for p in (hinge, throw)]
            numbers = [self.number_at(p) or "?" for p in (hinge, throw)]
            contacts.append(
                ReadContact(name, (marks[0], numbers[0]), (marks[1], numbers[1]), tip[1] < hinge[1])
            )
        return contacts

    def fed(self) -> dict[str, str | None]:
        labels = self.drawing.labels
        ends = {p for line in self.wires for p in line}
        fed = {}
        for label in labels:
            if label.text in ("X1", "A1") and not label.bold:
                x, y = label.at
                (name,) = [
                    t.text for t in labels
                    if t.bold and t.text != 'M' and 15 < t.at[0] - x < 40 and 15 < t.at[1] - y < 30
                ]  # fmt: skip
                close = [p for p in ends if 0 < y - p[1] < 10 and 0 < p[0] - x < 12]
                fed[name] = self.number_at(close[0]) if close else None
        return fed

    def rails(self) -> list[tuple[str, str | None]]:
        return [
            (t.text, self.number_at(rail[0]))
            for rail in self.drawing.of("rail")
            for t in self.drawing.labels
            if t.at[0] == rail[0][0] and 0 < t.at[1] - max(rail[0][1], rail[1][1]) < 20
        ]

    def _mark(self, terminal: Point, outwards: float) -> str:
        side = 1 if outwards > 0 else -1
        near = [
            t for t in self.drawing.labels
            if not t.bold and not t.slant and t.text.isdigit()
            and 0 < t.at[1] - terminal[1] < 10 and 0 < side * (t.at[0] - terminal[0]) < 18
        ]  # fmt: skip
        (mark,) = near
        return mark.text

    def unnumbered(self) -> list[tuple[Point, ...]]:
        """Stretches between nodes (junctions, terminals) without a number."""
        wires = [i for i, _ in enumerate(self.wires)]
        at: dict[Point, list[int]] = {}
        for i in wires:
            for point in self.wires[i]:
                at.setdefault(point, []).append(i)
        missing, seen = [], set()
        for i in wires:
            if i in seen:
                continue
            chain, waiting = set(), [i]
            while waiting:
                j = waiting.pop()
                if j in chain:
                    continue
                chain.add(j)
                for point in self.wires[j]:
                    if len(at[point]) == 2:
                        waiting += at[point]
            seen |= chain
            if not any(self.label_of.get(j) for j in chain):
                missing.append(tuple(p for j in sorted(chain) for p in self.wires[j]))
        return missing
