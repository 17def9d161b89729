"""Cubes and two-level covers as values, with their truth tables and their text.

A *cube* is a set of contacts of different relays, one contact a relay.  A *cover* reads its cubes
as two-level switching algebra: a sum of products ("sop") or a product of sums ("pos").

A "pos" cover is found by minimising the complement, and its cubes are stored as they are read
there: each is a product of contacts that is closed only where the load is off, so it stands for
the *sum of the opposite contacts*.  `Cover.groups` spells out the contacts as they stand in the
text, whichever kind the cover is; who factors or draws a cover reads that.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from contactlogic.truth import all_rows

__all__ = ["Cover", "Cube", "Group", "Kind"]

Kind = Literal["sop", "pos"]

Group = tuple[tuple[int, bool], ...]
"""Contacts as (relay number, True for a make), ascending: one product, or one sum."""


@dataclass(frozen=True, order=True)
class Cube:
    """Contacts in series: bit i of `care` if relay i appears, bit i of `value` if as a make."""

    care: int
    value: int

    def __post_init__(self) -> None:
        if self.care < 0 or self.value & ~self.care:
            raise ValueError("a cube's value has a bit outside its care")

    @property
    def literals(self) -> int:
        """Number of contacts."""
        return self.care.bit_count()

    def table(self, n: int) -> int:
        """Truth table over `n` inputs: the rows in which every contact is closed."""
        if self.care >> n:
            raise ValueError(f"cube has a relay beyond the {n} inputs")
        table = 1
        for i in range(n):  # doubles the table input by input, so linear in its size
            if not self.care >> i & 1:
                table |= table << (1 << i)
            elif self.value >> i & 1:
                table <<= 1 << i
        return table

    def contacts(self) -> Group:
        """The contacts as (relay number, True for a make), in relay order."""
        return tuple(
            (i, bool(self.value >> i & 1))
            for i in range(self.care.bit_length())
            if self.care >> i & 1
        )

    def to_text(self, relays: Sequence[str]) -> str:
        """Contacts in series, `A B'`; the cube without contacts is `1`."""
        return " ".join(_contact(relays, *contact) for contact in self.contacts()) or "1"


@dataclass(frozen=True)
class Cover:
    """A two-level cover of a load over `n` inputs.

    Args:
        kind: "sop", sum of the cubes; "pos", product of sums, each cube the complement's (see the
            module's docstring).
        cubes: sorted by number of contacts, then by the contacts.
        n: number of input relays.
        proved: whether no cover of this kind has fewer literals, or as many and fewer terms.
    """

    kind: Kind
    cubes: tuple[Cube, ...]
    n: int
    proved: bool

    @property
    def literals(self) -> int:
        """Contacts in all cubes together."""
        return sum(cube.literals for cube in self.cubes)

    @property
    def terms(self) -> int:
        """Number of cubes."""
        return len(self.cubes)

    @property
    def groups(self) -> tuple[Group, ...]:
        """Contacts as they stand in the text: products of a "sop", sums of a "pos".

        A constant has no groups ("0" of a sop, "1" of a pos) or one empty group (the opposite).
        """
        flip = self.kind == "pos"
        return tuple(tuple((i, make ^ flip) for i, make in c.contacts()) for c in self.cubes)

    def table(self) -> int:
        """Truth table of the load that is wired so."""
        union = 0
        for cube in self.cubes:
            union |= cube.table(self.n)
        return union if self.kind == "sop" else all_rows(self.n) & ~union

    def to_text(self, relays: Sequence[str]) -> str:
        """Switching algebra: `A B' + C`, or `(A + B') C`; constants `0` and `1`."""
        if not all(self.groups):  # one cube without contacts decides alone
            return "1" if self.kind == "sop" else "0"
        if not self.cubes:
            return "0" if self.kind == "sop" else "1"
        texts = [[_contact(relays, *contact) for contact in group] for group in self.groups]
        if self.kind == "sop":
            return " + ".join(" ".join(text) for text in texts)
        if len(texts) == 1:
            return " + ".join(texts[0])
        return " ".join(f"({' + '.join(text)})" if len(text) > 1 else text[0] for text in texts)


def _contact(relays: Sequence[str], relay: int, make: bool) -> str:
    return relays[relay] + ("" if make else "'")
