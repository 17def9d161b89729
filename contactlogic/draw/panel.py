"""One pair of rails with the rungs between them: sizes first, then everything drawn at its place.

Rows and columns come from `grid`.  Columns are as wide as their longest relay name, borders wide
enough for the wire numbers on both sides of a joint, rows as high as what hangs below them.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field, replace

from contactlogic.draw import fitting_symbols, symbols
from contactlogic.draw.grid import Cell, Grid, RungRow
from contactlogic.draw.sheet import (
    GREY,
    Line,
    Pen,
    Point,
    Tag,
    Text,
    short_names,
    shorten,
    text_width,
)
from contactlogic.draw.wires import Segment, Wire, connect
from contactlogic.job.model import Fittings, LoadKind, Supply
from contactlogic.network import Network
from contactlogic.terminals import RETURN, load_marks, pole_marks, wire_numbers

__all__ = ["Lettering", "Panel", "SheetFacts"]

_NAME_SIZES = (12.0, 10.5, 9.0)  # long names are set smaller before they are shortened
_RAIL, _NUMBER, _MARK, _NOTE, _RUNG = 12.0, 8.5, 8.0, 8.0, 11.0
_NAME_ROOM = 150.0
_NAME_RISE, _LABEL_RISE, _RUNG_LEFT = 28.0, 6.5, 28.0
_NOTE_DROP = {True: 18.0, False: 11.0}  # below the hanging blade of a make; close to a break
_NEVER = "never on: left unwired"
_ABOVE = 36.0
_MARGIN = 56.0
_EASE = 28.0  # most room added on either side of a border where the sheet has some to spare


@dataclass(frozen=True)
class SheetFacts:
    """What the sheet says beside the network itself."""

    title: str
    fingerprint: str
    supply: Supply = Supply()  # noqa: RUF009 - frozen
    kinds: Mapping[str, LoadKind | None] = field(default_factory=dict)
    separate: Collection[str] = ()
    fittings: Mapping[str, Fittings] = field(default_factory=dict)


class Lettering:
    """What is written on a drawing: names, marks, wire numbers and references."""

    def __init__(self, network: Network, facts: SheetFacts, grid: Grid) -> None:
        self.network, self.facts, self.grid = network, facts, grid
        self.numbers = wire_numbers(network)
        self.number_room = 13 + max(text_width(str(n), _NUMBER) for n in self.numbers.values())
        longest = max((pole.number for pole in network.poles), default=1)
        self.mark_room = 7 + text_width(f"{longest}1", _MARK)
        self.stands_in = {
            (c.leaf.contact.relay, c.leaf.contact.pole.number, c.leaf.contact.make): c.rung
            for c in grid.cells
        }
        self.feed = shorten(facts.supply.feed or "", 130, _RAIL, bold=True) or "supply"
        self.back = shorten(facts.supply.return_ or "", 130, _RAIL, bold=True) or "return"
        self._names = short_names(
            [*network.relays, *network.loads], _NAME_ROOM, _NAME_SIZES[-1], bold=True
        )

    def name(self, name: str) -> Text:
        """A relay's or load's name as it is written, not yet in its place."""
        text = self._names[name]
        fitting = (s for s in _NAME_SIZES if text_width(text, s, bold=True) <= 0.8 * _NAME_ROOM)
        return Text((0, 0), text, next(fitting, _NAME_SIZES[-1]), bold=True)

    def note(self, cell: Cell) -> str:
        """Where the other half of a changeover stands, empty for a single make or break."""
        contact = cell.leaf.contact
        other = self.stands_in.get((contact.relay, contact.pole.number, not contact.make))
        if other is None:
            return ""
        return f"{'break' if contact.make else 'make'}: rung {other}"

    def sent(self, net: str) -> str:
        """Number of a wire that goes on in a rung of its own."""
        return f"{self.numbers[net]} to rung {self.grid.sent[net].to}"


@dataclass(frozen=True)
class _PlacedContact:
    cell: Cell
    near: Point
    far: Point


@dataclass(frozen=True)
class _PlacedLoad:
    fed: Point
    returned: Point


class Panel:
    """Rows `first` to `last` (exclusive) of the grid between one pair of rails.

    `left` and `top` are the corner of the space it takes up, `room` the width between the rails
    that it is stretched to if it needs less, `airy` extra height for each row.
    """

    def __init__(
        self,
        lettering: Lettering,
        rows: tuple[int, int],
        left: float = 0,
        *,
        room: float = 0,
        airy: float = 0,
    ) -> None:
        grid = lettering.grid
        self.lettering, self.left, self.room = lettering, left, room
        self.first, last = rows
        self.rows = grid.rows[self.first : last]
        self.cells = [c for c in grid.cells if self.first <= c.row < last]
        self.across = [a for a in grid.across if self.first <= a.row < last]
        self.down = [d for d in grid.down if self.first <= d.top < last]
        self._size_rows(airy)
        self._size_columns()

    def _size_rows(self, airy: float) -> None:
        """The y of every row: more room below a row with notes, and above a rung."""
        kinds = self.lettering.facts.kinds
        below = dict.fromkeys(range(len(self.rows)), 12.0)
        for cell in self.cells:
            if self.lettering.note(cell):
                at = cell.row - self.first
                below[at] = max(below[at], 8.0 + _NOTE_DROP[cell.leaf.contact.make])
        self.rail_top = 46.0
        y = self.rail_top + 6
        self.y: dict[int, float] = {}
        for i, row in enumerate(self.rows):
            rung = isinstance(row, RungRow)
            if i:
                y += below[i - 1] + airy + (14.0 if rung else 4.0)
            if isinstance(row, RungRow) and kinds.get(row.rung.load) == "valve":
                below[i] = max(below[i], 22.0)
            if isinstance(row, RungRow):
                kind = kinds.get(row.rung.load)
                below[i] = max(below[i], fitting_symbols.drop(self._fitted(row), kind))
            y += _ABOVE
            self.y[self.first + i] = round(y, 2)
        self.rail_bottom = round(y + below.get(len(self.rows) - 1, 0.0) + 22, 2)

    def _size_columns(self) -> None:
        """The x of every border, column, load and rail."""
        text = self.lettering
        columns = max((cell.column + 1 for cell in self.cells), default=0)
        box = [2 * (symbols.CONTACT_HALF + text.mark_room)] * columns
        for cell in self.cells:
            name = text.name(cell.leaf.contact.relay).width
            note = text_width(text.note(cell), _NOTE)
            box[cell.column] = max(box[cell.column], name + 6, note + 6)
        joints = {0} | {down.border for down in self.down}
        before = [text.number_room / (1 if b in joints else 2) for b in range(columns + 1)]
        after = list(before)
        for net, sent in text.grid.sent.items():
            if sent.row in self.y:
                after[sent.border] = max(
                    after[sent.border], text_width(text.sent(net), _NUMBER) + 10
                )
        if any(isinstance(row, RungRow) and row.rung.reference for row in self.rows):
            before[0] = max(before[0], text_width(f"from rung {len(text.grid.rows)}", _NOTE) + 24)
        if any(isinstance(row, RungRow) and row.rung.net is None for row in self.rows):
            short = text_width(_NEVER, _NOTE) + 30 - sum(box) - sum(before) - sum(after)
            after[-1] += max(0.0, short)
        load_box = 2 * (symbols.LOAD_HALF + 6 + text_width("X1", _MARK))
        in_line = 0.0
        for row in self.rows:
            if isinstance(row, RungRow):
                load_box = max(load_box, text.name(row.rung.load).width + 6)
                parts = self._fitted(row)
                load_box = max(load_box, fitting_symbols.text_room(parts) + 6)
                in_line = max(in_line, fitting_symbols.in_line_room(parts))
        load_box += 2 * in_line
        natural = sum(box) + sum(before) + sum(after) + load_box + text.number_room
        spare = max(0.0, self.room - natural)
        ease = min(_EASE, spare / (2 * columns + 4))
        self.left_rail = x = self.left + max(
            _MARGIN, text_width(text.feed, _RAIL, bold=True) / 2 + 10
        )
        self.border: list[float] = []
        self.column: list[float] = []
        for b in range(columns + 1):
            x += before[b] + ease
            self.border.append(round(x, 2))
            x += after[b] + ease
            if b < columns:
                self.column.append(round(x + box[b] / 2, 2))
                x += box[b]
        rest = spare - ease * 2 * (columns + 1)
        x += 0.6 * rest + load_box
        self.load_x = round(x - load_box / 2, 2)
        self.right_rail = round(x + text.number_room + 0.4 * rest, 2)
        self.right = self.right_rail + max(
            _MARGIN - 16, text_width(text.back, _RAIL, bold=True) / 2 + 10
        )

    def draw(self, pen: Pen) -> None:
        """Draw rails, rungs and all that is written on them."""
        contacts = [self._contact(pen, cell) for cell in self.cells]
        loads = [
            self._load(pen, row, self.y[self.first + i])
            for i, row in enumerate(self.rows)
            if isinstance(row, RungRow)
        ]
        text = self.lettering
        taken = {p: text.mark_room for c in contacts for p in (c.near, c.far)}
        mark = 4 + text_width("X1", _MARK)
        taken |= {p: mark for load in loads for p in (load.fed, load.returned)}
        wires, junctions = connect(self._segments(contacts, loads))
        for wire in wires:
            for start, end in wire.pieces():
                pen.lines.append(Line(start, end, "wire", tag=Tag(net=wire.net)))
            self._wire_number(pen, wire, taken)
        for net, point in junctions:
            with pen.tagged(Tag(net=net)):
                symbols.junction(pen, point)
        self._references(pen)
        self._rails(pen)

    def _contact(self, pen: Pen, cell: Cell) -> _PlacedContact:
        contact, x, y = cell.leaf.contact, self.column[cell.column], self.y[cell.row]
        hinge_left = contact.common == cell.leaf.left
        tag = Tag(contact.common, contact.relay)
        with pen.tagged(tag):
            symbols.contact(
                pen, x, y, make=contact.make, hinge_left=hinge_left, throw=contact.throw
            )
            pen.spot((x, y))
        marks = pole_marks(contact.pole, self.lettering.facts.separate)
        throw_mark = (marks.make if contact.make else marks.break_) or ""
        side = 1 if hinge_left else -1
        for mark, way, gap in ((marks.common, -side, 2.5), (throw_mark, side, 6.0)):
            offset = symbols.CONTACT_HALF + gap + text_width(mark, _MARK) / 2
            pen.text((x + way * offset, y - _LABEL_RISE), mark, _MARK)
        name = self.lettering.name(contact.relay)
        pen.texts.append(replace(name, at=(x, y - _NAME_RISE), tag=tag))
        pen.text((x, y + _NOTE_DROP[contact.make]), self.lettering.note(cell), _NOTE, colour=GREY)
        half = symbols.CONTACT_HALF
        return _PlacedContact(cell, (x - half, y), (x + half, y))

    def _load(self, pen: Pen, row: RungRow, y: float) -> _PlacedLoad:
        name, x, half = row.rung.load, self.load_x, symbols.LOAD_HALF
        kind = self.lettering.facts.kinds.get(name)
        with pen.tagged(Tag(load=name)):
            symbols.load(pen, x, y, kind)
            pen.spot((x, y))
        for mark, way in zip(load_marks(kind), (-1, 1), strict=True):
            offset = half + 3 + text_width(mark, _MARK) / 2
            pen.text((x + way * offset, y - _LABEL_RISE), mark, _MARK)
        written = self.lettering.name(name)
        pen.texts.append(replace(written, at=(x, y - _NAME_RISE), tag=Tag(load=name)))
        parts, positive = self._fitted(row), self.lettering.facts.supply.positive
        with pen.tagged(Tag(net=row.rung.net)):
            fed = fitting_symbols.in_line(pen, x, y, parts)
        fitting_symbols.across(pen, x, y, parts, kind, positive=positive)
        pen.text((self.left_rail - _RUNG_LEFT, y), str(row.number), _RUNG, colour=GREY)
        if row.rung.net is None:
            at = x - half - 24 - text_width(_NEVER, _NOTE) / 2
            pen.text((at, y), _NEVER, _NOTE, colour=GREY)
        return _PlacedLoad((fed, y), (x + half, y))

    def _fitted(self, row: RungRow) -> Fittings:
        """What is fitted to a load; nothing where it is left unwired."""
        known = self.lettering.facts.fittings.get(row.rung.load, Fittings())
        return Fittings() if row.rung.net is None else known

    def _segments(self, contacts: list[_PlacedContact], loads: list[_PlacedLoad]) -> list[Segment]:
        found: list[Segment] = []
        for row, y in zip(self.rows, self.y.values(), strict=True):
            if isinstance(row, RungRow) and row.rung.net is not None and not row.tapped:
                first = self._open_end(y)[0] if row.rung.reference else self.left_rail
                found.append(Segment(row.rung.start, (first, y), (self.border[0], y)))
        for placed in contacts:
            leaf, column, y = placed.cell.leaf, placed.cell.column, self.y[placed.cell.row]
            found.append(Segment(leaf.left, (self.border[column], y), placed.near))
            found.append(Segment(leaf.right, placed.far, (self.border[column + 1], y)))
        for across in self.across:
            y = self.y[across.row]
            end = self._load_end(across.row) if across.end is None else self.border[across.end]
            found.append(Segment(across.net, (self.border[across.start], y), (end, y)))
        for down in self.down:
            x = self.border[down.border]
            found.append(Segment(down.net, (x, self.y[down.top]), (x, self.y[down.bottom])))
        for load in loads:
            at_rail = (self.right_rail, load.returned[1])
            found.append(Segment(RETURN, load.returned, at_rail))
        return found

    def _load_end(self, row: int) -> float:
        """Where the wire to the load of a row ends."""
        here = self.rows[row - self.first]
        if not isinstance(here, RungRow):
            return self.load_x - symbols.LOAD_HALF
        room = fitting_symbols.in_line_room(self._fitted(here))
        return self.load_x - symbols.LOAD_HALF - room

    def _wire_number(self, pen: Pen, wire: Wire, taken: Mapping[Point, float]) -> None:
        """The number on the longest horizontal piece, clear of terminal marks."""
        text = str(self.lettering.numbers[wire.net])
        best = (0.0, 0.0, 0.0)
        for piece in wire.pieces():
            near, far = sorted(piece)
            if near[1] == far[1]:
                start, end = near[0] + taken.get(near, 0), far[0] - taken.get(far, 0)
                best = max(best, (end - start, (start + end) / 2, near[1]))
                if self._goes_on(wire.net, near, far):
                    text = self.lettering.sent(wire.net)
        if best[0]:
            at = (round(best[1], 2), best[2] - _LABEL_RISE)
        else:
            (x, top), (_, bottom) = wire.points[0], wire.points[-1]
            at = (x + 4 + text_width(text, _NUMBER) / 2, (top + bottom) / 2)
        pen.text(at, text, _NUMBER, colour=GREY, slant=True)

    def _goes_on(self, net: str, near: Point, far: Point) -> bool:
        """Whether a piece starts at (or passes) the joint that goes on in another rung."""
        sent = self.lettering.grid.sent.get(net)
        if sent is None or self.y.get(sent.row) != near[1]:
            return False
        return near[0] <= self.border[sent.border] < far[0]

    def _open_end(self, y: float) -> Point:
        return (round(self.border[0] - 8, 2), y)

    def _references(self, pen: Pen) -> None:
        text = self.lettering
        for row, y in zip(self.rows, self.y.values(), strict=True):
            if isinstance(row, RungRow) and row.rung.reference:
                net, end = row.rung.start, self._open_end(y)
                with pen.tagged(Tag(net=net)):
                    symbols.open_terminal(pen, end)
                x = (self.left_rail + end[0] - 4) / 2
                pen.text((x, y - 5.5), f"wire {text.numbers[net]}", _NOTE)
                pen.text((x, y + 5.5), f"from rung {text.grid.sent[net].rung}", _NOTE)

    def _rails(self, pen: Pen) -> None:
        text = self.lettering
        for x, label, net, way in (
            (self.left_rail, text.feed, text.network.supply, 1),
            (self.right_rail, text.back, RETURN, -1),
        ):
            ends = (x, self.rail_top), (x, self.rail_bottom)
            pen.lines.append(Line(*ends, "rail", 2.8, tag=Tag(net=net)))
            pen.text((x, self.rail_top - 12), label, _RAIL, bold=True)
            number = str(text.numbers[net])
            at = (x + way * (5 + text_width(number, _NUMBER) / 2), self.rail_top + 6)
            pen.text(at, number, _NUMBER, colour=GREY, slant=True)
