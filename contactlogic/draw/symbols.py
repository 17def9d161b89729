"""Symbols of contacts and loads, drawn from lines at fixed positions (style of IEC 60617).

Every symbol lies on a horizontal wire through `y`, is centred on `x`, and ends at
`x - half` and `x + half`.  All contacts are drawn released.  Blades swing UP when the relay
operates: an open make hangs below the wire, and a closed break rests under its tick, which it
leaves upwards.
"""

from __future__ import annotations

from math import sqrt

from contactlogic.draw.sheet import Pen, Point, Tag
from contactlogic.job.model import LoadKind

__all__ = ["CONTACT_HALF", "LOAD_HALF", "contact", "junction", "load", "open_terminal"]

CONTACT_HALF = 12.5
LOAD_HALF = 15.0
_BLADE = 1.7
_OUTLINE = 1.2


def contact(
    pen: Pen, x: float, y: float, *, make: bool, hinge_left: bool, throw: str | None = None
) -> None:
    """A make or break contact; the blade hangs on its common terminal, `throw` is the other net."""
    side = 1.0 if hinge_left else -1.0
    hinge, tip = x - side * CONTACT_HALF, x + side * CONTACT_HALF
    if make:
        pen.blade((hinge, y), (tip, y + 11.5), (tip, y), _BLADE)
    else:
        pen.blade((hinge, y), (tip + side * 4, y - 9.5), (tip + side, y - 18.5), _BLADE)
        with pen.tagged(Tag(throw)):
            pen.path([(tip, y), (tip, y - 9.8)], weight=_OUTLINE)


def junction(pen: Pen, at: Point) -> None:
    """The dot where three or more wires meet."""
    pen.circle(at, 2.9, filled=True)


def open_terminal(pen: Pen, at: Point) -> None:
    """A small ring at the left end of a wire that comes from elsewhere on the sheet."""
    pen.circle((at[0] - 2.6, at[1]), 2.6)


def load(pen: Pen, x: float, y: float, kind: LoadKind | None) -> None:
    """A load by its kind; a kind that is not given is drawn as "other", a plain rectangle."""
    r = LOAD_HALF
    if kind == "lamp":
        pen.circle((x, y), r)
        d = r / sqrt(2)
        pen.path([(x - d, y - d), (x + d, y + d)], weight=_OUTLINE)
        pen.path([(x - d, y + d), (x + d, y - d)], weight=_OUTLINE)
    elif kind == "horn":
        body = [(x + r, y - 14.5), (x - 1, y - 7), (x - r, y - 7), (x - r, y + 7), (x - 1, y + 7)]
        pen.path([*body, (x + r, y + 14.5), (x + r, y - 14.5)], weight=_OUTLINE)
    elif kind == "motor":
        pen.circle((x, y), r)
        pen.text((x, y), "M", 13, bold=True)
    elif kind == "coil":
        _rectangle(pen, x, y, r, 8.5)
    elif kind == "valve":
        _rectangle(pen, x, y, r, 7)
        pen.path([(x, y + 7), (x, y + 16)], weight=_OUTLINE)
        bow = [(x, y + 16), (x - 10, y + 10.5), (x - 10, y + 21.5), (x, y + 16)]
        pen.path(bow, weight=_OUTLINE)
        pen.path([(2 * x - px, py) for px, py in bow], weight=_OUTLINE)
    else:
        _rectangle(pen, x, y, r, 5.5)


def _rectangle(pen: Pen, x: float, y: float, half: float, rise: float) -> None:
    pen.path(
        [
            (x - half, y - rise),
            (x + half, y - rise),
            (x + half, y + rise),
            (x - half, y + rise),
            (x - half, y - rise),
        ],
        weight=_OUTLINE,
    )
