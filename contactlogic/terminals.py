"""Terminal marks and wire numbers: one numbering for drawing, wiring list and report.

Marks follow EN 50005: pole `p` of a changeover relay has common p1, break p2, make p4; a separate
make contact has p3/p4, a separate break p1/p2; a coil has A1/A2.  X1/X2 for any other load is
common practice.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass

from contactlogic.job.model import LoadKind
from contactlogic.network import Network, Pole

__all__ = ["RETURN", "PoleMarks", "load_marks", "pole_marks", "wire_numbers"]

RETURN = "return"
"""Key of the return rail in `wire_numbers` (it is no net of the contact network)."""


@dataclass(frozen=True)
class PoleMarks:
    """Terminal marks of one pole ("11", "12", "14"); None for an end that is not wired."""

    common: str
    make: str | None
    break_: str | None


def pole_marks(pole: Pole, separate: Collection[str] = ()) -> PoleMarks:
    """Marks of a pole; `separate` names relays with separate makes and breaks."""
    common = "3" if pole.relay in separate and pole.make is not None else "1"
    return PoleMarks(
        common=f"{pole.number}{common}",
        make=None if pole.make is None else f"{pole.number}4",
        break_=None if pole.break_ is None else f"{pole.number}2",
    )


def load_marks(kind: LoadKind | None) -> tuple[str, str]:
    """Marks of a load's two terminals, fed end first."""
    return ("A1", "A2") if kind == "coil" else ("X1", "X2")


def wire_numbers(network: Network) -> dict[str, int]:
    """One number for each net: supply 1, then nets in order of appearance, the return rail last."""
    numbers = {net: i for i, net in enumerate(network.nets(), start=1)}
    if RETURN in numbers:
        raise ValueError(f"a net may not be named {RETURN!r}")
    return numbers | {RETURN: len(numbers) + 1}
