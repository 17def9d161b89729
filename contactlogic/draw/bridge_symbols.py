"""Symbol of a changeover contact as one part, in the two ways a bridge drawing needs it.

Style of IEC 60617, drawn released, in the manner of `symbols`: a straight changeover hangs on its
common at one side, its blade resting on the break and swinging UP into line with the make; a tee
has its throws at left and right of one wire and its common below.
"""

from __future__ import annotations

from contactlogic.draw.sheet import Pen, Tag
from contactlogic.draw.symbols import CONTACT_HALF

__all__ = ["DROP", "TEE_HALF", "straight_changeover", "tee_changeover"]

DROP = 24.0  # from a changeover's upper line to its lower one
TEE_HALF = 8.0
_BLADE = 1.7
_OUTLINE = 1.2


def straight_changeover(
    pen: Pen, x: float, y: float, *, hinge_left: bool, throw: str | None = None
) -> None:
    """Common and make on the wire through `y` as in a make contact, the break `DROP` below.

    The common is at `x -+ CONTACT_HALF`, both throws at the other end; `throw` is the break's net.
    """
    side = 1.0 if hinge_left else -1.0
    hinge, tip = x - side * CONTACT_HALF, x + side * CONTACT_HALF
    pen.blade((hinge, y), (tip + side * 4, y + 13), (tip, y), _BLADE)
    with pen.tagged(Tag(throw)):
        pen.path([(tip, y + DROP), (tip, y + 11.5)], weight=_OUTLINE)


def tee_changeover(pen: Pen, x: float, y: float, *, break_right: bool) -> None:
    """Throws at `x -+ TEE_HALF` and `y`, the common's wire coming to `(x, y + DROP)`."""
    side = 1.0 if break_right else -1.0
    hinge = (x, y + DROP - 8)
    pen.path([hinge, (x, y + DROP)])
    pen.blade(hinge, (x + side * 10.5, y - 5), (x - side * 10.5, y - 5), _BLADE)
