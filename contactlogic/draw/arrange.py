"""Layout of a ladder: a network of ladder form to a sheet with everything at its place.

Pure geometry.  Rows and columns come from `grid`; here they get their sizes (columns as wide as
their longest relay name, borders wide enough for the numbers on both sides of a joint), and then
symbols, wires, numbers, names, references and the table are drawn.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field

from contactlogic.draw import symbols
from contactlogic.draw.grid import Cell, Grid, RungRow, lay_out
from contactlogic.draw.rungs import rungs_of
from contactlogic.draw.sheet import GREY, Line, Pen, Point, Sheet, short_names, shorten, text_width
from contactlogic.draw.table import draw_footer, draw_table, table_rows
from contactlogic.draw.wires import Segment, Wire, connect
from contactlogic.job.model import LoadKind, Supply
from contactlogic.network import Network
from contactlogic.terminals import RETURN, load_marks, pole_marks, wire_numbers

__all__ = ["Drawing", "PlacedContact", "PlacedLoad", "SheetFacts", "arrange"]

_NAME, _NUMBER, _MARK, _NOTE = 12.0, 8.5, 8.0, 8.0
_NAME_ROOM = 130.0
_NAME_RISE, _LABEL_RISE, _NOTE_DROP = 28.0, 6.5, 20.0
_ABOVE = 36.0
_WIDE, _NARROW = 620.0, 470.0  # between the rails, for a landscape and a portrait sheet of A4


@dataclass(frozen=True)
class SheetFacts:
    """What the sheet says beside the network itself."""

    title: str
    fingerprint: str
    supply: Supply = Supply()  # noqa: RUF009 - frozen
    kinds: Mapping[str, LoadKind | None] = field(default_factory=dict)
    separate: Collection[str] = ()


@dataclass(frozen=True)
class PlacedContact:
    """A contact on the sheet and where its two terminals are."""

    cell: Cell
    common: Point
    throw: Point


@dataclass(frozen=True)
class PlacedLoad:
    """A load on the sheet, its rung, and where its two terminals are."""

    load: str
    rung: int
    fed: Point
    returned: Point


@dataclass(frozen=True)
class Drawing:
    """The sheet, and the same as placed elements for whoever wants to read it back."""

    sheet: Sheet
    contacts: tuple[PlacedContact, ...]
    loads: tuple[PlacedLoad, ...]
    wires: tuple[Wire, ...]
    rails: tuple[Line, Line]
    references: Mapping[str, Point]


def arrange(network: Network, facts: SheetFacts) -> Drawing:
    """Lay out the whole sheet.

    Raises:
        NotALadder: the network does not keep the ladder definition.
    """
    return _Layout(network, facts, lay_out(rungs_of(network))).draw()


class _Layout:
    """Sizes of one drawing, worked out in order, then drawn."""

    def __init__(self, network: Network, facts: SheetFacts, grid: Grid) -> None:
        self.network, self.facts, self.grid = network, facts, grid
        self.pen = Pen()
        self.numbers = wire_numbers(network)
        self.number_room = max(text_width(str(n), _NUMBER) for n in self.numbers.values()) + 13
        self.names = short_names([*network.relays, *network.loads], _NAME_ROOM, _NAME, bold=True)
        self.stands_in = {
            (c.leaf.contact.relay, c.leaf.contact.pole.number, c.leaf.contact.make): c.rung
            for c in grid.cells
        }
        longest = max((pole.number for pole in network.poles), default=1)
        self.mark_room = 7 + text_width(f"{longest}1", _MARK)
        self._size_rows()
        self._size_columns()

    # sizes

    def _size_rows(self) -> None:
        """The y of every row: more room below a row with notes, and above a rung."""
        rows = self.grid.rows
        below = [12.0] * len(rows)
        for cell in self.grid.cells:
            if self._note(cell):
                below[cell.row] = 25.0
        for i, row in enumerate(rows):
            if isinstance(row, RungRow) and self.facts.kinds.get(row.rung.load) == "valve":
                below[i] = max(below[i], 22.0)
        airy = 12.0 if len(rows) <= 6 else 6.0 if len(rows) <= 12 else 0.0
        self.rail_top = 46.0
        y = self.rail_top + 6
        self.y: list[float] = []
        for i, row in enumerate(rows):
            if i:
                y += below[i - 1] + airy + (14.0 if isinstance(row, RungRow) else 4.0)
            y += _ABOVE
            self.y.append(round(y, 2))
        self.rail_bottom = y + (below[-1] if below else 0) + 22

    def _size_columns(self) -> None:
        """The x of every border, column, load and rail."""
        grid = self.grid
        columns = grid.columns
        box = [2 * (symbols.CONTACT_HALF + self.mark_room)] * columns
        for cell in grid.cells:
            name = text_width(self.names[cell.leaf.contact.relay], _NAME, bold=True)
            note = text_width(self._note(cell), _NOTE)
            box[cell.column] = max(box[cell.column], name + 6, note + 6)
        joints = {down.border for down in grid.down}
        left = [self.number_room / (1 if b in joints else 2) for b in range(columns + 1)]
        right = list(left)
        left[0] = right[0] = self.number_room
        for net, sent in grid.sent.items():
            note = text_width(self._sent_label(net), _NUMBER) + 10
            right[sent.border] = max(right[sent.border], note)
            left[0] = max(left[0], text_width(f"from rung {len(grid.rows)}", _NOTE) + 18)
        load_box = 2 * (symbols.LOAD_HALF + 6 + text_width("X1", _MARK))
        for load in self.network.loads:
            load_box = max(load_box, text_width(self.names[load], _NAME, bold=True) + 6)
        tail = load_box + self.number_room
        natural = sum(box) + sum(left) + sum(right) + tail
        tall = self.rail_bottom > 560
        spare = max(0.0, (_NARROW if tall else _WIDE) - natural)
        ease = min(28.0, spare / (2 * columns + 4))
        feed, back = self._rail_labels()
        self.margin = max(56.0, text_width(feed, _NAME, True) / 2 + 10)
        self.left_rail = self.margin
        x = self.margin
        self.border: list[float] = []
        self.column: list[float] = []
        for b in range(columns + 1):
            x += left[b] + ease
            self.border.append(round(x, 2))
            x += right[b] + ease
            if b < columns:
                self.column.append(round(x + box[b] / 2, 2))
                x += box[b]
        rest = spare - ease * 2 * (columns + 1)
        x += 0.6 * rest
        self.load_x = round(x + load_box / 2, 2)
        self.right_rail = round(x + load_box + self.number_room + 0.4 * rest, 2)
        self.width = self.right_rail + max(40.0, text_width(back, _NAME, True) / 2 + 10)

    def _rail_labels(self) -> tuple[str, str]:
        supply = self.facts.supply
        feed = shorten(supply.feed or "", 130, _NAME, bold=True) or "supply"
        back = shorten(supply.return_ or "", 130, _NAME, bold=True) or "return"
        return feed, back

    def _note(self, cell: Cell) -> str:
        """Where the other half of a changeover stands, empty for a single make or break."""
        contact = cell.leaf.contact
        other = self.stands_in.get((contact.relay, contact.pole.number, not contact.make))
        if other is None:
            return ""
        return f"{'break' if contact.make else 'make'}: rung {other}"

    # drawing

    def draw(self) -> Drawing:
        contacts = tuple(self._contact(cell) for cell in self.grid.cells)
        loads = tuple(
            self._load(row, self.y[i])
            for i, row in enumerate(self.grid.rows)
            if isinstance(row, RungRow)
        )
        wires, junctions = connect(self._segments(contacts, loads))
        for wire in wires:
            for start, end in wire.pieces():
                self.pen.lines.append(Line(start, end, "wire", net=wire.net))
            self._wire_number(wire, contacts, loads)
        for point in junctions:
            symbols.junction(self.pen, point)
        references = self._references()
        rails = self._rails()
        bottom = self._foot()
        sheet = self.pen.sheet(round(self.width, 2), round(bottom, 2), self.facts.title)
        return Drawing(sheet, contacts, loads, wires, rails, references)

    def _contact(self, cell: Cell) -> PlacedContact:
        contact, x, y = cell.leaf.contact, self.column[cell.column], self.y[cell.row]
        hinge_left = contact.common == cell.leaf.left
        symbols.contact(self.pen, x, y, make=contact.make, hinge_left=hinge_left)
        marks = pole_marks(contact.pole, self.facts.separate)
        throw_mark = (marks.make if contact.make else marks.break_) or ""
        side = 1 if hinge_left else -1
        for mark, way, gap in ((marks.common, -side, 2.5), (throw_mark, side, 6.0)):
            offset = symbols.CONTACT_HALF + gap + text_width(mark, _MARK) / 2
            self.pen.text((x + way * offset, y - _LABEL_RISE), mark, _MARK)
        self.pen.text((x, y - _NAME_RISE), self.names[contact.relay], _NAME, bold=True)
        self.pen.text((x, y + _NOTE_DROP), self._note(cell), _NOTE, colour=GREY)
        ends = ((x - side * symbols.CONTACT_HALF, y), (x + side * symbols.CONTACT_HALF, y))
        return PlacedContact(cell, *ends)

    def _load(self, row: RungRow, y: float) -> PlacedLoad:
        name, x = row.rung.load, self.load_x
        kind = self.facts.kinds.get(name)
        symbols.load(self.pen, x, y, kind)
        for mark, way in zip(load_marks(kind), (-1, 1), strict=True):
            offset = symbols.LOAD_HALF + 3 + text_width(mark, _MARK) / 2
            self.pen.text((x + way * offset, y - _LABEL_RISE), mark, _MARK)
        self.pen.text((x, y - _NAME_RISE), self.names[name], _NAME, bold=True)
        self.pen.text((self.left_rail - 28, y), str(row.number), 11, colour=GREY)
        if row.rung.net is None:
            note = "never on: left unwired"
            at = x - symbols.LOAD_HALF - 24 - text_width(note, _NOTE) / 2
            self.pen.text((at, y), note, _NOTE, colour=GREY)
        half = symbols.LOAD_HALF
        return PlacedLoad(name, row.number, (x - half, y), (x + half, y))

    def _segments(
        self, contacts: tuple[PlacedContact, ...], loads: tuple[PlacedLoad, ...]
    ) -> list[Segment]:
        grid, found = self.grid, []
        for i, row in enumerate(grid.rows):
            if isinstance(row, RungRow) and row.rung.net is not None and not row.tapped:
                first = self.left_rail if not row.rung.reference else self.border[0] - 8
                start = (first, self.y[i])
                found.append(Segment(row.rung.start, start, (self.border[0], self.y[i])))
        for placed in contacts:
            leaf, y = placed.cell.leaf, self.y[placed.cell.row]
            near, far = sorted((placed.common, placed.throw))
            column = placed.cell.column
            found.append(Segment(leaf.left, (self.border[column], y), near))
            found.append(Segment(leaf.right, far, (self.border[column + 1], y)))
        for across in grid.across:
            y = self.y[across.row]
            end = self.load_x - symbols.LOAD_HALF if across.end is None else self.border[across.end]
            found.append(Segment(across.net, (self.border[across.start], y), (end, y)))
        for down in grid.down:
            x = self.border[down.border]
            found.append(Segment(down.net, (x, self.y[down.top]), (x, self.y[down.bottom])))
        for load in loads:
            found.append(Segment(RETURN, load.returned, (self.right_rail, load.returned[1])))
        return found

    def _wire_number(
        self, wire: Wire, contacts: tuple[PlacedContact, ...], loads: tuple[PlacedLoad, ...]
    ) -> None:
        """The number on the longest horizontal piece, clear of terminal marks."""
        room = {p: self.mark_room for c in contacts for p in (c.common, c.throw)}
        room |= {p: 4 + text_width("X1", _MARK) for c in loads for p in (c.fed, c.returned)}
        text = str(self.numbers[wire.net])
        best = (0.0, 0.0, 0.0)
        for piece in wire.pieces():
            near, far = sorted(piece)
            if near[1] == far[1]:
                start, end = near[0] + room.get(near, 0), far[0] - room.get(far, 0)
                best = max(best, (end - start, (start + end) / 2, near[1]))
                if self._leaves_right(wire.net, near, far):
                    text = self._sent_label(wire.net)
        if best[0]:
            at = (round(best[1], 2), best[2] - _LABEL_RISE)
        else:
            (x, top), (_, bottom) = wire.points[0], wire.points[-1]
            at = (x + 4 + text_width(text, _NUMBER) / 2, (top + bottom) / 2)
        self.pen.text(at, text, _NUMBER, colour=GREY, slant=True)

    def _sent_label(self, net: str) -> str:
        return f"{self.numbers[net]} to rung {self.grid.sent[net].to}"

    def _leaves_right(self, net: str, near: Point, far: Point) -> bool:
        """Whether a piece of wire starts at (or passes) the joint that goes on elsewhere."""
        sent = self.grid.sent.get(net)
        if sent is None:
            return False
        return near[1] == self.y[sent.row] and near[0] <= self.border[sent.border] < far[0]

    def _references(self) -> dict[str, Point]:
        found: dict[str, Point] = {}
        for i, row in enumerate(self.grid.rows):
            if not isinstance(row, RungRow) or not row.rung.reference:
                continue
            net, y = row.rung.start, self.y[i]
            at = (round(self.border[0] - 8, 2), y)
            symbols.open_terminal(self.pen, (at[0] - 2.6, y))
            x = (self.left_rail + at[0] - 4) / 2
            source = self.grid.sent[net].rung
            self.pen.text((x, y - 5.5), f"wire {self.numbers[net]}", _NOTE)
            self.pen.text((x, y + 5.5), f"from rung {source}", _NOTE)
            found[net] = at
        return found

    def _rails(self) -> tuple[Line, Line]:
        feed, back = self._rail_labels()
        drawn = []
        for x, label, net, way in (
            (self.left_rail, feed, self.network.supply, 1),
            (self.right_rail, back, RETURN, -1),
        ):
            line = Line((x, self.rail_top), (x, self.rail_bottom), "rail", 2.8, net=net)
            self.pen.lines.append(line)
            self.pen.text((x, self.rail_top - 12), label, _NAME, bold=True)
            number = str(self.numbers[net])
            at = (x + way * (5 + text_width(number, _NUMBER) / 2), self.rail_top + 6)
            self.pen.text(at, number, _NUMBER, colour=GREY, slant=True)
            drawn.append(line)
        return drawn[0], drawn[1]

    def _foot(self) -> float:
        """Table, rule and footer; returns the height of the sheet."""
        left, right = self.left_rail, self.right_rail
        rows = table_rows(self.network, self.stands_in, self.facts.separate)
        y = self.rail_bottom + 30
        if rows:
            y = draw_table(self.pen, rows, left, right, y)
        y += 14
        self.pen.lines.append(Line((left, y), (right, y), "rule", 0.5, colour="#888888"))
        poles = len(self.network.poles)
        facts = (
            f"ladder {self.facts.fingerprint}",
            f"{poles} pole" + ("" if poles == 1 else "s"),
            "drawn with all relays released",
        )
        draw_footer(self.pen, self.facts.title, facts, left, right, y + 13)
        return y + 34
