"""Reads a bridge drawing back: hops, changeovers as one symbol, a number on every lead.

Like `reading`, shares no code with the package.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from draw.reading import Label, Point, Reader, Reading

HOP = 4.0


@dataclass(frozen=True)
class ReadPole:
    """Relay, and of each terminal its mark and the number of the wire there."""

    relay: str
    common: tuple[str, str]
    make: tuple[str, str] | None
    break_: tuple[str, str] | None


def flattened(drawing: Reading) -> tuple[Reading, list[Point]]:
    """The drawing with every hop as a straight piece of wire, and the middles of the hops."""
    arcs, rest = [], []
    for line in drawing.lines:
        kind, a, b, _ = line
        slanted = a[0] != b[0] and a[1] != b[1]
        (arcs if kind == "wire" and slanted else rest).append(line)
    feet = sorted(
        {p for _, *ends, _ in arcs for p in ends if sum(p in (a, b) for _, a, b, _ in arcs) == 1},
        key=lambda p: (p[1], p[0]),
    )
    hops = []
    for left, right in zip(feet[::2], feet[1::2], strict=True):
        assert left[1] == right[1]
        assert abs(right[0] - left[0] - 2 * HOP) < 0.02
        hops.append((round((left[0] + right[0]) / 2, 2), left[1]))
        rest.append(("wire", left, right, 1.1))
    # a half circle over each hop: eight pieces, none lower than its feet, the top HOP above
    assert len(arcs) == 8 * len(hops)
    for x, y in hops:
        own = [p for _, *ends, _ in arcs for p in ends if abs(p[0] - x) <= HOP + 0.02]
        assert any(abs(p[1] - y - HOP) < 0.02 and abs(p[0] - x) < 0.02 for p in own)
    return replace(drawing, lines=rest), hops


class BridgeReader(Reader):
    """Recovers poles, loads and rails from the lines alone."""

    def __init__(self, drawing: Reading) -> None:
        flat, self.hops = flattened(drawing)
        super().__init__(flat)
        self.terminals: list[Point] = []

    @staticmethod
    def _is_at(label: Label, a: Point, b: Point) -> bool:
        """A number stands above a level wire, below the foot of an upright one, or by a rail."""
        x, y = label.at
        if a[1] == b[1]:
            return 0 < y - a[1] < 9 and min(a[0], b[0]) <= x <= max(a[0], b[0])
        foot = min(a[1], b[1])
        if 0 < foot - y < 10 and abs(x - a[0]) < 0.5:
            return True
        left, _, right, _ = label.box()
        head = max(a[1], b[1])
        return min(abs(left - a[0]), abs(right - a[0])) < 9 and 0 < head - y < 10

    def poles(self) -> list[ReadPole]:
        ends = {p for line in self.wires for p in line}
        found = []
        for kind, a, b, weight in self.drawing.lines:
            if kind == "symbol" and abs(weight - 1.7) < 0.01:
                steep = abs(a[0] - b[0]) < 12
                found.append(self._tee(a, b, ends) if steep else self._level(a, b, ends))
        return found

    def _level(self, a: Point, b: Point, ends: set[Point]) -> ReadPole:
        """A make, a break, or a changeover that hangs on its common at one side."""
        hinge, tip = (a, b) if a in ends else (b, a)
        side = 1 if tip[0] > hinge[0] else -1
        throw_x = round(hinge[0] + side * 25, 2)
        upper = [p for p in ends if p == (throw_x, hinge[1])]
        lower = [
            p for p in ends
            if p[0] == throw_x and 20 < hinge[1] - p[1] < 28 and self._tick(p)
        ]  # fmt: skip
        name = self._name(((hinge[0] + throw_x) / 2, hinge[1]))
        common = self._terminal(hinge, -side)
        if tip[1] > hinge[1]:
            assert upper
            assert not lower
            return ReadPole(name, common, None, self._terminal(upper[0], side))
        break_ = self._terminal(lower[0], side) if lower else None
        return ReadPole(name, common, self._terminal(upper[0], side), break_)

    def _tick(self, foot: Point) -> bool:
        return any(
            foot in (a, b) and a[0] == b[0] and max(a[1], b[1]) > foot[1]
            for a, b in self.drawing.of("symbol")
        )

    def _tee(self, a: Point, b: Point, ends: set[Point]) -> ReadPole:
        """A changeover with its throws at left and right and its common below."""
        hinge, tip = (a, b) if a[1] < b[1] else (b, a)
        (common,) = [p for p in ends if p[0] == hinge[0] and 0 < hinge[1] - p[1] < 12]
        assert self._tick(common)
        level = {p[1] for p in ends if abs(p[0] - hinge[0]) < 10 and 10 < p[1] - hinge[1] < 20}
        (y,) = level
        side = 1 if tip[0] > hinge[0] else -1
        throws = {s: (round(hinge[0] + s * 8, 2), y) for s in (1, -1)}
        assert set(throws.values()) <= ends
        outwards = next(
            1 if max(w[0][0], w[1][0]) > common[0] else -1 for w in self.wires if common in w
        )
        return ReadPole(
            self._name((hinge[0], y)),
            self._terminal(common, outwards),
            self._terminal(throws[-side], -side),
            self._terminal(throws[side], side),
        )

    def _name(self, middle: Point) -> str:
        (name,) = [
            t.text for t in self.drawing.labels
            if t.bold and abs(t.at[0] - middle[0]) < 0.5 and 20 < t.at[1] - middle[1] < 36
        ]  # fmt: skip
        return name

    def _terminal(self, at: Point, outwards: int) -> tuple[str, str]:
        self.terminals.append(at)
        return self._mark(at, outwards), self.number_at(at) or "?"

    def unnumbered(self) -> list[tuple[Point, ...]]:
        """Terminals of poles without a number over the level wire that comes from them."""
        return [(at,) for at in self.terminals if not self._numbered(at)]

    def _numbered(self, at: Point) -> bool:
        seen, waiting = set(), [at]
        while waiting:
            point = waiting.pop()
            for i, (a, b) in enumerate(self.wires):
                if i not in seen and point in (a, b) and a[1] == b[1]:
                    seen.add(i)
                    waiting.append(b if point == a else a)
        return any(self.label_of.get(i) for i in seen)
