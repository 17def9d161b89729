"""Sheet of a two-directional network: every net a vertical, every pole one symbol on a row.

Pure geometry.  `bridge_order` says which column and row everything takes; here columns and rows
get their sizes and all is drawn.  A lead that passes the vertical of another net does so with a
hop, so that no crossing can be taken for a joint; joints carry dots.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from math import cos, pi, sin

from contactlogic.draw import fitting_symbols, symbols
from contactlogic.draw.bridge_order import (
    Arrangement,
    Part,
    arrange_parts,
    is_straight,
    leads_of,
    parts_of,
)
from contactlogic.draw.bridge_symbols import (
    DROP,
    TEE_HALF,
    straight_changeover,
    tee_changeover,
)
from contactlogic.draw.grid import Grid
from contactlogic.draw.panel import Lettering, SheetFacts
from contactlogic.draw.sheet import GREY, Line, Pen, Point, Sheet, Tag, text_width
from contactlogic.draw.table import RELEASED, TableRow, draw_footer, draw_table
from contactlogic.draw.wires import Segment, connect
from contactlogic.job.model import Fittings
from contactlogic.network import Network, Pole
from contactlogic.terminals import RETURN, load_marks, pole_marks

__all__ = ["arrange_bridge"]

_NUMBER, _MARK, _NOTE, _RAIL, _ROW = 8.5, 8.0, 8.0, 12.0, 11.0
_NAME_RISE, _LABEL_RISE = 29.0, 6.5
_ABOVE = 37.0
_NARROW = 22.0  # between two verticals with no symbol between them
_HOP = 4.0
_NEAR, _LONG = 40.0, 45.0  # a number this near, or a vertical shorter, needs none of its own
_SHORT = 150.0  # a straight wire this short carries one number instead of two
_MARGIN = 56.0
_LEAST_WIDTH, _EASE = 560.0, 28.0
_NEVER = "never on: left unwired"


def arrange_bridge(network: Network, facts: SheetFacts) -> Sheet:
    """Lay out the whole sheet."""
    pen = Pen()
    frame = _Frame(network, facts)
    frame.draw(pen)
    y = draw_table(pen, frame.table(), frame.left_rail, frame.right_rail, frame.rail_bottom + 30)
    y += 14
    left, right = frame.left_rail, frame.right_rail
    pen.lines.append(Line((left, y), (right, y), "rule", 0.5, colour="#888888"))
    poles = len(network.poles)
    notes = (
        f"bridge {facts.fingerprint}",
        "1 pole" if poles == 1 else f"{poles} poles",
        RELEASED,
    )
    draw_footer(pen, facts.title, notes, left, right, y + 13)
    return pen.sheet(round(frame.right, 2), round(y + 34, 2), facts.title)


@dataclass(frozen=True)
class _End:
    """Where a lead leaves its symbol; the number of its wire is written at `label`."""

    net: str
    at: Point
    column: float
    label: float


class _Frame:
    """Everything between the rails."""

    def __init__(self, network: Network, facts: SheetFacts) -> None:
        self.network, self.facts = network, facts
        self.text = Lettering(network, facts, Grid())
        self.nets = network.nets()
        self.parts = parts_of(network)
        self.order: Arrangement = arrange_parts(self.parts, len(self.nets))
        self._size_rows()
        self._size_columns()

    def _named(self) -> Iterator[tuple[str, Part, int, int | None]]:
        """Name, part, row and gap (None for a load) of everything that has a symbol."""
        names = [pole.relay for pole in self.network.poles] + list(self.network.loads)
        yield from zip(names, self.parts, self.order.rows, self.order.gaps, strict=True)

    def _tee(self, part: Part) -> bool:
        return part.changeover and not is_straight(part, self.order.columns)

    def _size_rows(self) -> None:
        rows = max(self.order.rows, default=0) + 1
        below = [14.0] * rows
        for name, part, row, _ in self._named():
            if part.load:
                kind = self.facts.kinds.get(name)
                under = fitting_symbols.drop(self._fitted(name, part), kind)
                need = max(22.0 if kind == "valve" else 16.0, under)
            else:
                need = DROP + 8 if part.changeover else 14.0
            below[row] = max(below[row], need)
        airy = 10.0 if rows <= 6 else 5.0 if rows <= 12 else 0.0
        self.rail_top = 46.0
        y = self.rail_top + 6
        self.y: list[float] = []
        for drop in below:
            y += _ABOVE
            self.y.append(round(y, 2))
            y += drop + airy
        self.rail_bottom = round(y + 14, 2)

    def _size_columns(self) -> None:
        text = self.text
        side = text.mark_room + text.number_room
        wide = [_NARROW] * len(self.nets)
        load_box = 2 * (symbols.LOAD_HALF + 6 + text_width("X1", _MARK))
        in_line = 0.0
        for name, part, _, gap in self._named():
            if gap is None:
                load_box = max(load_box, text.name(name).width + 6)
                parts = self._fitted(name, part)
                load_box = max(load_box, fitting_symbols.text_room(parts) + 6)
                in_line = max(in_line, fitting_symbols.in_line_room(parts))
                note = text_width(_NEVER, _NOTE) + 20 if part.common is None else 0.0
                wide[-1] = max(wide[-1], text.number_room + 8, note)
            else:
                need = max(2 * (symbols.CONTACT_HALF + side), text.name(name).width + 12)
                wide[gap] = max(wide[gap], need)
        load_box += 2 * in_line
        spare = max(0.0, _LEAST_WIDTH - sum(wide) - load_box - text.number_room)
        stretched = [gap for gap, width in enumerate(wide) if width > _NARROW] or [0]
        ease = min(_EASE, spare / (len(stretched) + 1))
        for gap in stretched:
            wide[gap] += ease
        wide[-1] += max(0.0, spare - ease * len(stretched)) / 2
        self.left_rail = max(_MARGIN, text_width(text.feed, _RAIL, bold=True) / 2 + 10)
        self.x = [self.left_rail]
        for width in wide[:-1]:
            self.x.append(round(self.x[-1] + width, 2))
        left = self.x[-1] + wide[-1]
        self.load_x = round(left + load_box / 2, 2)
        self.right_rail = round(left + load_box + text.number_room + ease / 2, 2)
        back = text_width(text.back, _RAIL, bold=True) / 2 + 10
        self.right = self.right_rail + max(_MARGIN - 16, back)

    def table(self) -> tuple[TableRow, ...]:
        """One line per relay: terminals, and in which row each pole stands."""
        rows = []
        placed = list(zip(self.network.poles, self.order.rows, strict=False))
        for relay in self.network.relays:
            own = [(pole, row) for pole, row in placed if pole.relay == relay]
            marks = [pole_marks(pole, self.facts.separate) for pole, _ in own]
            terminals = tuple(
                " ".join(mark for mark in (m.common, m.break_, m.make) if mark) for m in marks
            )
            places = tuple(f"row {row + 1} ({_form(pole)})" for pole, row in own)
            rows.append(TableRow(relay, terminals, places, len(own)))
        return tuple(rows)

    def draw(self, pen: Pen) -> None:
        """Draw rails, nets, poles and loads."""
        ends: list[_End] = []
        poles = iter(self.network.poles)
        for name, part, row, gap in self._named():
            if gap is None:
                ends += self._load(pen, name, part, self.y[row])
            else:
                ends += self._pole(pen, next(poles), part, self.y[row], gap)
        wires, junctions = connect(self._segments(ends))
        uprights = [
            (wire.net, *piece)
            for wire in wires
            for piece in wire.pieces()
            if piece[0][0] == piece[1][0]
        ]
        for wire in wires:
            for piece in wire.pieces():
                _draw_wire(pen, wire.net, piece, uprights)
        for net, point in junctions:
            with pen.tagged(Tag(net=net)):
                symbols.junction(pen, point)
        self._wire_numbers(pen, ends)
        self._rails(pen)
        for row, y in enumerate(self.y, start=1):
            pen.text((self.left_rail - 28, y), str(row), _ROW, colour=GREY)

    def _pole(self, pen: Pen, pole: Pole, part: Part, y: float, gap: int) -> list[_End]:
        column = self.order.columns
        x = round((self.x[gap] + self.x[gap + 1]) / 2, 2)
        marks = pole_marks(pole, self.facts.separate)
        assert part.common is not None
        hinge_left = column[part.common] <= gap
        tee = self._tee(part)
        tag = Tag(pole.common, pole.relay)
        with pen.tagged(tag):
            if tee:
                assert part.break_ is not None
                tee_changeover(pen, x, y, break_right=column[part.break_] > gap)
            elif part.changeover:
                straight_changeover(pen, x, y, hinge_left=hinge_left, throw=pole.break_)
            else:
                make = part.make is not None
                throw = pole.make if make else pole.break_
                symbols.contact(pen, x, y, make=make, hinge_left=hinge_left, throw=throw)
            pen.spot((x, y))
        pen.texts.append(replace(self.text.name(pole.relay), at=(x, y - _NAME_RISE), tag=tag))
        ends = []
        lead_marks = [m for m in (marks.common, marks.make, marks.break_) if m is not None]
        for i, (lead, mark) in enumerate(zip(leads_of(part, column), lead_marks, strict=True)):
            at = self.x[column[lead.net]]
            way = 1 if at > x else -1
            height = y + lead.level * DROP
            if tee:
                half, space = (0.0, 6.0) if i == 0 else (TEE_HALF, 7.0)
            else:
                half, space = symbols.CONTACT_HALF, 2.5 if i == 0 else 6.0
            offset = half + space + text_width(mark, _MARK) / 2
            pen.text((x + way * offset, height - _LABEL_RISE), mark, _MARK)
            edge = self.x[gap + (way > 0)]
            label = edge - way * (self.text.number_room / 2 + 1)
            ends.append(_End(self.nets[lead.net], (x + way * half, height), at, label))
        return ends

    def _load(self, pen: Pen, name: str, part: Part, y: float) -> list[_End]:
        x, half = self.load_x, symbols.LOAD_HALF
        kind = self.facts.kinds.get(name)
        with pen.tagged(Tag(load=name)):
            symbols.load(pen, x, y, kind)
            pen.spot((x, y))
        for mark, way in zip(load_marks(kind), (-1, 1), strict=True):
            offset = half + 3 + text_width(mark, _MARK) / 2
            pen.text((x + way * offset, y - _LABEL_RISE), mark, _MARK)
        written = self.text.name(name)
        pen.texts.append(replace(written, at=(x, y - _NAME_RISE), tag=Tag(load=name)))
        parts = self._fitted(name, part)
        with pen.tagged(Tag(net=part.common if part.common is None else self.nets[part.common])):
            fed = fitting_symbols.in_line(pen, x, y, parts)
        fitting_symbols.across(pen, x, y, parts, kind, positive=self.facts.supply.positive)
        room = half + 8 + text_width("X1", _MARK)
        label = (x + room + self.right_rail) / 2
        ends = [_End(RETURN, (x + half, y), self.right_rail, label)]
        if part.common is None:
            pen.text((x - half - 24 - text_width(_NEVER, _NOTE) / 2, y), _NEVER, _NOTE, colour=GREY)
        else:
            at = self.x[self.order.columns[part.common]]
            label = min(x - room, fed) - self.text.number_room / 2
            ends.append(_End(self.nets[part.common], (fed, y), at, label))
        return ends

    def _fitted(self, name: str, part: Part) -> Fittings:
        """What is fitted to a load; nothing where it is left unwired."""
        return Fittings() if part.common is None else self.facts.fittings.get(name, Fittings())

    def _segments(self, ends: Sequence[_End]) -> list[Segment]:
        found = [Segment(end.net, end.at, (end.column, end.at[1])) for end in ends]
        spans: dict[str, list[float]] = {}
        for end in ends:
            spans.setdefault(end.net, []).append(end.at[1])
        for net, heights in spans.items():
            if net not in (self.network.supply, RETURN):
                x = self.x[self.order.columns[self.nets.index(net)]]
                found.append(Segment(net, (x, min(heights)), (x, max(heights))))
        return found

    def _wire_numbers(self, pen: Pen, ends: Sequence[_End]) -> None:
        """On every lead beside its symbol, and at both ends of a vertical."""
        by_net: dict[str, list[_End]] = {}
        for end in ends:
            by_net.setdefault(end.net, []).append(end)
        for net, own in by_net.items():
            number = str(self.text.numbers[net])
            heights = [end.at[1] for end in own]
            straight = len(own) == 2 and heights[0] == heights[1]
            short = straight and abs(own[0].label - own[1].label) < _SHORT
            if short and net not in (self.network.supply, RETURN):
                self._number(pen, number, (own[0].column, heights[0] - _LABEL_RISE))
                continue
            for end in own:
                self._number(pen, number, (end.label, end.at[1] - _LABEL_RISE))
            if net in (self.network.supply, RETURN):
                continue
            low, high = min(heights), max(heights)
            if high - low < (_LONG if len(own) > 2 else 2 * _LONG):
                continue
            for height, rise in ((low, -8.5), (high, 8.5)):
                near = (abs(e.label - e.column) for e in own if e.at[1] == height)
                if min(near) > _NEAR:
                    self._number(pen, number, (own[0].column, height + rise))

    @staticmethod
    def _number(pen: Pen, number: str, at: Point) -> None:
        pen.text((round(at[0], 2), round(at[1], 2)), number, _NUMBER, colour=GREY, slant=True)

    def _rails(self, pen: Pen) -> None:
        text = self.text
        for x, label, net, way in (
            (self.left_rail, text.feed, self.network.supply, 1),
            (self.right_rail, text.back, RETURN, -1),
        ):
            ends = (x, self.rail_top), (x, self.rail_bottom)
            pen.lines.append(Line(*ends, "rail", 2.8, tag=Tag(net=net)))
            pen.text((x, self.rail_top - 12), label, _RAIL, bold=True)
            number = str(text.numbers[net])
            at = (x + way * (5 + text_width(number, _NUMBER) / 2), self.rail_top + 6)
            pen.text(at, number, _NUMBER, colour=GREY, slant=True)


def _form(pole: Pole) -> str:
    if pole.make is not None and pole.break_ is not None:
        return "changeover"
    return "break" if pole.make is None else "make"


def _draw_wire(
    pen: Pen,
    net: str,
    piece: tuple[Point, Point],
    uprights: Sequence[tuple[str, Point, Point]],
) -> None:
    """A straight piece, with a hop over every vertical of another net."""
    start, end = sorted(piece)
    y = start[1]
    tag = Tag(net=net)
    if y == end[1]:
        passed = {
            top[0]
            for other, top, bottom in uprights
            if other != net
            and start[0] < top[0] < end[0]
            and min(top[1], bottom[1]) <= y <= max(top[1], bottom[1])
        }
        for x in sorted(passed):
            pen.lines.append(Line(start, (round(x - _HOP, 2), y), "wire", tag=tag))
            arc = [
                (round(x - _HOP * cos(pi * k / 8), 2), round(y - _HOP * sin(pi * k / 8), 2))
                for k in range(9)
            ]
            with pen.tagged(tag):
                pen.path(arc, "wire")
            start = (round(x + _HOP, 2), y)
    pen.lines.append(Line(start, end, "wire", tag=tag))
