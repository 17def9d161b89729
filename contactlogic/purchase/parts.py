"""What a parts list holds: relays with their contacts, coils, ratings, prices and stock.

Contact forms are the trade's letters (design.md section 2): A make, B break, C changeover
(break before make), D changeover that makes before it breaks.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from decimal import Decimal
from typing import Literal

__all__ = [
    "FORMS",
    "Coil",
    "Contacts",
    "FormLetter",
    "Part",
    "PartsList",
    "Use",
    "current_kind",
    "plain",
]

FormLetter = Literal["A", "B", "C", "D"]
FORMS: tuple[FormLetter, ...] = ("A", "B", "C", "D")

Use = Literal["make", "break", "changeover"]

SERVES: Mapping[FormLetter, tuple[Use, ...]] = {
    "A": ("make",),
    "B": ("break",),
    "C": ("make", "break", "changeover"),
    # as a changeover it would join all three nets in transit, which the proof does not allow for
    "D": ("make", "break"),
}
"""What a pole of each form can be used for."""


@dataclass(frozen=True)
class Contacts:
    """How many contacts of each form a relay has."""

    a: int = 0
    b: int = 0
    c: int = 0
    d: int = 0

    @property
    def poles(self) -> int:
        return self.a + self.b + self.c + self.d

    def of(self, form: FormLetter) -> int:
        return {"A": self.a, "B": self.b, "C": self.c, "D": self.d}[form]

    @property
    def text(self) -> str:
        """`2C`, `1A1B`; empty for no contact."""
        return "".join(f"{self.of(form)}{form}" for form in FORMS if self.of(form))


@dataclass(frozen=True)
class Coil:
    """Rated voltage of a coil; `kind` None where the list does not say AC or DC."""

    volts: Decimal
    kind: Literal["AC", "DC"] | None = None

    @property
    def text(self) -> str:
        """`24 V`, `24 V DC`."""
        return f"{plain(self.volts)} V" + (f" {self.kind}" if self.kind else "")


@dataclass(frozen=True)
class Part:
    """One kind of relay on offer.

    Args:
        name: as the list has it; may hold any characters.
        contacts: what it has.
        coil: None where not given.
        amps: what each contact may carry, None where not given.
        price: of one, in a currency that is not given.
        stock: how many there are, None where not given (no limit is known then).
        pins: socket pin by terminal mark ("A1", "14"), as far as given.
    """

    name: str
    contacts: Contacts
    coil: Coil | None
    amps: Decimal | None
    price: Decimal
    stock: int | None = None
    pins: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True)
class PartsList:
    """A parts list as read.

    Args:
        file: its name for messages and reports.
        parts: in the list's order; every name once.
        passed_over: columns that contactlogic does not know.
    """

    file: str
    parts: tuple[Part, ...]
    passed_over: tuple[str, ...] = ()


def current_kind(text: str) -> Literal["AC", "DC"] | None:
    """AC or DC as written in any case, None for anything else."""
    kinds: dict[str, Literal["AC", "DC"]] = {"AC": "AC", "DC": "DC"}
    return kinds.get(text.upper())


def plain(number: Decimal) -> str:
    """A number without exponent or trailing zeros: `24`, `0.5`."""
    text = f"{number:f}"
    return text.rstrip("0").rstrip(".") if "." in text else text
