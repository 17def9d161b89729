"""Arrangement of a two-directional network: which column each net takes, which row each part.

Every net is a vertical line in a column of its own, every pole and every load a part with level
leads to its nets, as in a visibility representation (Tamassia and Tollis, "A unified approach to
visibility representations of planar graphs", 1986).  Parts that have no gap between columns in
common may stand on one row, so that contacts in series follow each other as they do in a ladder.

Columns start in the order of the potentials that the nets would have if every contact were an
equal resistor between the rails; then column order and row order are annealed together
(Kirkpatrick, Gelatt and Vecchi 1983) with a fixed seed.  Crossings count most, then length.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from math import exp
from random import Random
from typing import NamedTuple

from contactlogic.network import Network

__all__ = ["Arrangement", "Lead", "Part", "arrange_parts", "is_straight", "leads_of", "parts_of"]

# What a fault costs: a crossing, a vertical per row, a row, a lead per column, a tee, a gap that
# must be wide enough for symbols, a contact that leads back towards the supply, two neighbouring
# loads out of their order; a point of width beyond a landscape sheet of the same height.
_CROSSING, _DOWN, _ROW, _ALONG = 20.0, 2.0, 5.0, 1.0
_TEE, _GAP, _BACK, _ORDER, _WIDE = 4.0, 1.5, 3.0, 2.5, 0.06
_GAP_SIZE, _COLUMN_SIZE, _ROW_SIZE, _SHAPE = 75.0, 22.0, 62.0, 1.5  # about; width to height
_SEED = 1938
_RUNS, _MOST_RUNS = 4, 9  # small networks are cheap to run again
_CROWDED, _CROWDED_RUNS = 120, 1  # parts and columns too many for a drawing that can be read
_AGAIN, _SAME = 2, 1e-6  # runs that end at the same least cost are enough
_HEAT, _NEARBY = 10.0, 0.7  # first temperature; share of moves that stay within three places
# Steps of a run for each part and column, at most and for each of these; steps times these.
_STEPS, _SMALL_STEPS, _MOST_WORK = 130, 4, 300_000


@dataclass(frozen=True)
class Part:
    """A pole or a load by the nets (numbers) it is joined to; unwired ends are None.

    `common` is the fed end of a load, None if the load is never on.
    """

    common: int | None
    make: int | None = None
    break_: int | None = None
    load: bool = False

    @cached_property
    def nets(self) -> tuple[int, ...]:
        return tuple(net for net in (self.common, self.make, self.break_) if net is not None)

    @cached_property
    def changeover(self) -> bool:
        return self.make is not None and self.break_ is not None


@dataclass(frozen=True)
class Lead:
    """A level line from a symbol to the column of `net`, on the upper (0) or lower (1) line."""

    net: int
    level: int


@dataclass(frozen=True)
class Arrangement:
    """Columns by net number (the supply's is 0), rows and gaps by part, crossings left.

    Gap k lies to the right of column k; the gap of a load is None.
    """

    columns: tuple[int, ...]
    rows: tuple[int, ...]
    gaps: tuple[int | None, ...]
    crossings: int


def parts_of(network: Network) -> tuple[Part, ...]:
    """All poles, then all loads, in the network's order; nets are numbered as in `nets()`.

    Raises:
        ValueError: a contact joins a net to itself; such a one has no place in a drawing.
    """
    for contact in network.contacts():
        if contact.common == contact.throw:
            raise ValueError(
                f"{contact.relay} pole {contact.pole.number} joins net {contact.throw} to itself; "
                "leave that contact out"
            )
    number = {net: k for k, net in enumerate(network.nets())}

    def at(net: str | None) -> int | None:
        return None if net is None else number[net]

    poles = [Part(number[p.common], at(p.make), at(p.break_)) for p in network.poles]
    return (*poles, *(Part(at(net), load=True) for net in network.loads.values()))


def is_straight(part: Part, column: Sequence[int]) -> bool:
    """Whether both throws of a changeover lie on one side of its common."""
    home, ends = column[part.nets[0]], [column[net] for net in part.nets[1:]]
    return min(ends) > home or max(ends) < home


def leads_of(part: Part, column: Sequence[int]) -> tuple[Lead, ...]:
    """Leads of a part: common, make, break as far as they are wired.

    A changeover whose throws lie on one side of its common is drawn straight: common and make on
    the upper line, break on the lower.  Otherwise its throws leave it to left and right on the
    upper line, and the common on the lower one.
    """
    if not part.changeover:
        return tuple(Lead(net, 0) for net in part.nets)
    levels = (0, 0, 1) if is_straight(part, column) else (1, 0, 0)
    return tuple(Lead(net, level) for net, level in zip(part.nets, levels, strict=True))


def home_gap(part: Part, column: Sequence[int]) -> int:
    """The gap in which a pole's symbol crosses least; gap k lies to the right of column k."""
    home, ends = column[part.nets[0]], [column[net] for net in part.nets[1:]]
    low, high = min(ends), max(ends)
    if low > home:
        return low - 1
    if high < home:
        return high
    return min(max(home, low), high - 1)


def arrange_parts(parts: Sequence[Part], nets: int) -> Arrangement:
    """Columns and rows for `parts` on nets 0 (the supply) to `nets - 1`; deterministic.

    No part may join a net to itself.
    """
    random = Random(_SEED)
    size = len(parts) + nets
    steps = min(_STEPS * size, _SMALL_STEPS * size * size, _MOST_WORK // size)
    potential = _potentials(parts, nets)
    found: list[_Layout] = []
    for _ in range(max(_RUNS, _MOST_RUNS - size // 4) if size < _CROWDED else _CROWDED_RUNS):
        found.append(_run(parts, potential, steps, random))
        layout = min(found, key=lambda layout: layout.cost)
        if sum(other.cost < layout.cost + _SAME for other in found) >= _AGAIN:
            break
    gaps = _gaps(parts, layout)
    return Arrangement(tuple(layout.columns.column), tuple(layout.rows), gaps, layout.crossings)


class _Shape(NamedTuple):
    """A part in its columns: gaps taken up, ends as (column, level), columns passed as masks.

    `cost` is that of its leads and ways, `last` and `least` are the gaps that its symbol may
    stand in (-1 for a load).
    """

    first: int
    stop: int
    ends: tuple[tuple[int, int], ...]
    passed: tuple[tuple[int, int], ...]  # level, mask of columns
    cost: float
    last: int = -1
    least: int = -1


def _shape(part: Part, column: Sequence[int], potential: Sequence[float]) -> _Shape:
    if part.common is None:
        return _Shape(len(column) - 1, len(column), (), (), 0)
    home = column[part.common]
    if part.load:
        mask = _between(home, len(column))
        return _Shape(home, len(column), ((home, 0),), ((0, mask),), _ALONG * (len(column) - home))
    at = [column[net] for net in part.nets]
    first, stop = min(at), max(at)
    cost = _ALONG * (stop - first)
    for net in part.nets[1:]:
        rise = potential[net] - potential[part.common]
        if abs(rise) > 1e-6 and (rise > 0) != (column[net] > home):
            cost += _BACK
    ends: tuple[tuple[int, int], ...]
    if not part.changeover:
        ends = ((home, 0), (at[1], 0))
        return _Shape(first, stop, ends, ((0, _between(first, stop)),), cost, stop - 1, first)
    gap = home_gap(part, column)
    upper = lower = 0
    if home in (first, stop) and at.count(home) == 1:
        ends, low = ((home, 0), (at[1], 0), (at[2], 1)), 2
    else:
        ends, low = ((home, 1), (at[1], 0), (at[2], 0)), 0
        cost += _TEE
    for i, k in enumerate(at):
        mask = _between(k, gap + 1) if k <= gap else _between(gap, k)
        if i == low:
            lower = mask
            cost += _ALONG * abs(k - gap)
        else:
            upper |= mask
    return _Shape(first, stop, ends, ((0, upper), (1, lower)), cost, gap, gap)


def _between(low: int, high: int) -> int:
    """Mask of the columns strictly between two."""
    return (1 << high) - (1 << (low + 1)) if high > low + 1 else 0


class _Columns:
    """Nets from left to right, and all that follows from their order alone.

    A part none of whose nets has moved since `before` keeps the shape it had there.
    """

    def __init__(
        self,
        parts: Sequence[Part],
        order: Sequence[int],
        potential: Sequence[float],
        before: _Columns | None = None,
    ) -> None:
        self.order = order
        self.column = [0] * len(order)
        for k, net in enumerate(order):
            self.column[net] = k
        if before is None:
            self.shapes = [_shape(part, self.column, potential) for part in parts]
        else:
            moved = {net for net in order if self.column[net] != before.column[net]}
            self.shapes = [
                known if moved.isdisjoint(part.nets) else _shape(part, self.column, potential)
                for part, known in zip(parts, before.shapes, strict=True)
            ]
        gaps = _wide_gaps(self.shapes)
        self.cost = sum(shape.cost for shape in self.shapes) + _GAP * gaps
        self.size = _GAP_SIZE * gaps + _COLUMN_SIZE * len(order)
        self.passed = [
            (k, level, mask)
            for k, shape in enumerate(self.shapes)
            for level, mask in shape.passed
            if mask
        ]


class _Layout:
    """Columns, parts from top to bottom, and what they cost.

    Each part in turn stands on the highest row that is free at and below all its gaps.
    """

    def __init__(self, parts: Sequence[Part], columns: _Columns, sequence: Sequence[int]) -> None:
        self.columns, self.sequence = columns, sequence
        self._place(parts)

    def _place(self, parts: Sequence[Part]) -> None:
        width = len(self.columns.order)
        shapes = self.columns.shapes
        free = [0] * width
        self.rows = rows = [0] * len(parts)
        top, bottom = [1 << 30] * width, [-1] * width
        for k in self.sequence:
            shape = shapes[k]
            first, stop = shape.first, shape.stop
            row = rows[k] = max(free[first:stop])
            free[first:stop] = [row + 1] * (stop - first)
            for at, level in shape.ends:
                y = 2 * row + level
                if y < top[at]:
                    top[at] = y
                if y > bottom[at]:
                    bottom[at] = y
        height = max(free) if parts else 0
        starts, stops = [0] * (2 * height), [0] * (2 * height)
        down = 0
        for at in range(1, width):
            if bottom[at] > top[at]:
                down += bottom[at] - top[at]
                starts[top[at]] |= 1 << at
                stops[bottom[at]] |= 1 << at
        self.upright: list[int] = []  # columns with a vertical at each line
        running = 0
        for start, stop in zip(starts, stops, strict=True):
            running |= start
            self.upright.append(running)
            running &= ~stop
        crossings = sum(
            (self.upright[2 * rows[k] + level] & mask).bit_count()
            for k, level, mask in self.columns.passed
        )
        loads = [row for part, row in zip(parts, rows, strict=True) if part.load]
        turned = sum(after < row for row, after in pairwise(loads))
        self.crossings = crossings
        self.cost = (
            self.columns.cost
            + _CROSSING * crossings
            + _DOWN * down / 2
            + _ROW * height
            + _ORDER * turned
            + _WIDE * max(0.0, self.columns.size - _SHAPE * _ROW_SIZE * height)
        )


def _wide_gaps(shapes: Sequence[_Shape]) -> int:
    """How many gaps must hold a symbol."""
    reach = sorted((shape.last, shape.least) for shape in shapes if shape.last >= 0)
    count, widest = 0, -1
    for last, least in reach:
        if least > widest:
            count, widest = count + 1, last
    return count


def _gaps(parts: Sequence[Part], layout: _Layout) -> tuple[int | None, ...]:
    """The gap of every pole's symbol (None for a load), as few different ones as possible.

    A symbol may leave the gap where it crosses least for any other that it reaches without a
    further crossing; the least set of gaps is found as for stabbing intervals, by right end.
    """
    reach = {
        k: _reach(part, layout, layout.rows[k]) for k, part in enumerate(parts) if not part.load
    }
    taken: list[int] = []
    gaps: dict[int, int] = {}
    for k in sorted(reach, key=lambda k: (reach[k].stop, k)):
        inside = [gap for gap in taken if gap in reach[k]]
        gaps[k] = inside[-1] if inside else reach[k].stop - 1
        if not inside:
            taken.append(gaps[k])
    return tuple(gaps.get(k) for k in range(len(parts)))


def _reach(part: Part, layout: _Layout, row: int) -> range:
    """Gaps in which a symbol stands equally well."""
    column = layout.columns.column
    at = [column[net] for net in part.nets]
    if not part.changeover:
        return range(min(at), max(at))
    gap = home_gap(part, column)
    upright = layout.upright[2 * row] | layout.upright[2 * row + 1]
    inner = upright | sum(1 << k for k in set(at))
    first = last = gap
    while first > min(at) and not inner >> first & 1:
        first -= 1
    while last + 1 < max(at) and not inner >> (last + 1) & 1:
        last += 1
    return range(first, last + 1)


def _potentials(parts: Sequence[Part], nets: int) -> list[float]:
    """Of every net, 0 at the supply and 1 at the return, every contact an equal resistor."""
    beside: list[list[int]] = [[] for _ in range(nets)]
    fed = [0] * nets
    for part in parts:
        if part.load and part.common is not None:
            fed[part.common] += 1
        for throw in part.nets[1:]:
            beside[part.nets[0]].append(throw)
            beside[throw].append(part.nets[0])
    potential = [0.0] + [0.5] * (nets - 1)
    for _ in range(60):
        for net in range(1, nets):
            total = sum(potential[other] for other in beside[net]) + fed[net]
            potential[net] = total / max(1, len(beside[net]) + fed[net])
    return potential


def _run(parts: Sequence[Part], potential: Sequence[float], steps: int, random: Random) -> _Layout:
    """Anneal from nets by potential and parts at random.

    Moves or exchanges columns and parts, cooling from half a crossing to well below a row.
    """
    order = sorted(range(len(potential)), key=lambda net: (net > 0, potential[net], net))
    sequence = list(range(len(parts)))
    random.shuffle(sequence)
    best = layout = _Layout(parts, _Columns(parts, order, potential), sequence)
    for step in range(steps):
        heat = _HEAT * 0.03 ** (step / steps)
        columns, sequence = layout.columns, list(layout.sequence)
        if len(order) > 2 and random.random() < 0.4:
            order = [0, *_changed(columns.order[1:], random)]
            columns = _Columns(parts, order, potential, columns)
        else:
            sequence = _changed(sequence, random)
        fresh = _Layout(parts, columns, sequence)
        if fresh.cost <= layout.cost or random.random() < exp((layout.cost - fresh.cost) / heat):
            layout = fresh
            if layout.cost < best.cost:
                best = layout
    return best


def _changed(items: Sequence[int], random: Random) -> list[int]:
    """One item moved elsewhere, two exchanged, or a run of them moved together."""
    items = list(items)
    size = len(items)
    if size < 2:
        return items
    i = random.randrange(size)
    near = random.random() < _NEARBY
    j = (i + random.randint(-3, 3)) % size if near else random.randrange(size)
    kind = random.random()
    if kind < 0.45:
        items[i], items[j] = items[j], items[i]
    elif kind < 0.9:
        items.insert(j, items.pop(i))
    else:
        run = items[i : i + random.randint(2, 8)]
        del items[i : i + len(run)]
        items[j:j] = run
    return items
