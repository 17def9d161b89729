"""The table under a drawing, and the footer that tells drawings apart."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass

from contactlogic.draw.sheet import GREY, Pen, short_names, shorten, text_width, wrap
from contactlogic.network import Network, Pole
from contactlogic.terminals import pole_marks

__all__ = ["RELEASED", "TableRow", "draw_footer", "draw_table", "table_rows"]

RELEASED = "drawn with all relays released"
"""The last fact of every footer."""

_SIZE = 9.0
_PITCH = 13.0
_WIDEST = 640.0
_HEADINGS = ("relay", "terminals", "stands in", "poles")


@dataclass(frozen=True)
class TableRow:
    """One relay: its terminals and places pole by pole, and its number of poles."""

    relay: str
    terminals: tuple[str, ...]
    places: tuple[str, ...]
    poles: int


def table_rows(
    network: Network, stands_in: Mapping[tuple[str, int, bool], int], separate: Collection[str]
) -> tuple[TableRow, ...]:
    """One row per relay; `stands_in` maps (relay, pole, is make) to a rung number."""
    rows = []
    for relay in network.relays:
        poles = [pole for pole in network.poles if pole.relay == relay]
        marks = [pole_marks(pole, separate) for pole in poles]
        terminals = tuple(
            " ".join(mark for mark in (m.common, m.break_, m.make) if mark) for m in marks
        )
        places = tuple(_place(pole, stands_in) for pole in poles)
        rows.append(TableRow(relay, terminals, places, len(poles)))
    return tuple(rows)


def _place(pole: Pole, stands_in: Mapping[tuple[str, int, bool], int]) -> str:
    make = stands_in.get((pole.relay, pole.number, True))
    break_ = stands_in.get((pole.relay, pole.number, False))
    if make is not None and break_ is not None:
        if make == break_:
            return f"make and break rung {make} (one changeover)"
        return f"make rung {make}, break rung {break_} (one changeover)"
    return f"make rung {make}" if make is not None else f"break rung {break_}"


def draw_table(
    pen: Pen, rows: tuple[TableRow, ...], left: float, right: float, top: float
) -> float:
    """Draw the table between two x positions from `top` down; returns the y of its lower edge."""
    room = min(right - left, _WIDEST)
    left = (left + right - room) / 2  # on a very wide sheet the columns stay together
    right = left + room
    names = short_names((row.relay for row in rows), 0.28 * room, _SIZE)
    name_wide = max([text_width(text, _SIZE) for text in names.values()] + [40])
    cells = [_cells(row, 0.26 * room, 0.72 * room - name_wide - 120) for row in rows]
    wide = max([text_width(line, _SIZE) for lines, _ in cells for line in lines] + [50])
    place_wide = max([text_width(line, _SIZE) for _, lines in cells for line in lines] + [60])
    gap = (room - name_wide - wide - place_wide - 40) / 4
    at = [left + gap / 2 + name_wide / 2]
    at.append(at[0] + name_wide / 2 + gap + wide / 2)
    at.append(at[1] + wide / 2 + gap + place_wide / 2)
    at.append(right - gap / 2 - 20)
    y = top
    for x, heading in zip(at, _HEADINGS, strict=True):
        pen.text((x, y), heading, _SIZE, bold=True)
    y += 18
    for row, (marks, stands) in zip(rows, cells, strict=True):
        for x, lines in zip(at, ([names[row.relay]], marks, stands, [str(row.poles)]), strict=True):
            for i, line in enumerate(lines):
                pen.text((x, y + i * _PITCH), line, _SIZE)
        y += _PITCH * max(len(marks), len(stands), 1) + 4
    return y


def _cells(row: TableRow, wide: float, place_wide: float) -> tuple[list[str], list[str]]:
    """Lines of the two middle columns: on one line if they fit, else changeovers pole by pole."""
    changeovers = any("(" in place for place in row.places)
    places = wrap(row.places or ("not used",), "; " if changeovers else ", ", place_wide, _SIZE)
    terminals = wrap(row.terminals or ("-",), " / ", wide, _SIZE)
    if changeovers and (len(places) > 1 or len(terminals) > 1):
        return list(row.terminals), list(row.places)
    return terminals, places


def draw_footer(
    pen: Pen, title: str, facts: tuple[str, ...], left: float, right: float, y: float
) -> None:
    """The title (shortened to fit) and the facts on one line."""
    rest = "   |   ".join(facts)
    room = right - left - text_width(rest + "   |   ", _SIZE)
    title = shorten(title, room, _SIZE)
    text = f"{title}   |   {rest}" if title else rest
    pen.text(((left + right) / 2, y), text, _SIZE, colour=GREY)
