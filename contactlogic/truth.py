"""Truth tables as Python integers, and what a load must do in each row.

Bit order, once and for all (nothing else in the package shifts by variable index): input relay
`i` (0-based) is bit `i` of the row number, and a truth table is an int whose bit `row` is the
value in that row.  With `n` inputs a table has `2**n` bits.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cache

__all__ = [
    "MAX_INPUTS",
    "Target",
    "all_rows",
    "cofactor",
    "depends_on",
    "literal",
    "rows_of",
    "settings",
    "support",
    "table_of",
    "variable",
]

MAX_INPUTS = 16
"""Most input relays of a table or formula job: every one of the 2**16 rows is proved."""


def all_rows(n: int) -> int:
    """The table that is 1 in each of the `2**n` rows."""
    return (1 << (1 << n)) - 1


@cache
def variable(n: int, i: int) -> int:
    """Table of input `i` of `n`: the rows in which relay `i` is operated."""
    block = ((1 << (1 << i)) - 1) << (1 << i)  # rows 2**i .. 2**(i+1)-1
    width = 2 << i
    while width < 1 << n:  # doubling keeps this linear in the size of the table
        block |= block << width
        width *= 2
    return block


def literal(n: int, i: int, make: bool) -> int:
    """Rows in which a make (or else a break) contact of relay `i` is closed."""
    return variable(n, i) if make else all_rows(n) & ~variable(n, i)


def cofactor(table: int, n: int, i: int, value: int) -> int:
    """`table` with input `i` held at `value`; still over `n` inputs, no longer depending on `i`."""
    step = 1 << i
    if value:
        half = table & variable(n, i)
        return half | half >> step
    half = table & ~variable(n, i)
    return half | half << step


def depends_on(table: int, n: int, i: int) -> bool:
    """Whether `table` changes anywhere when input `i` does."""
    return bool(((table >> (1 << i)) ^ table) & ~variable(n, i) & all_rows(n))


def support(table: int, n: int) -> tuple[int, ...]:
    """Inputs that `table` depends on, ascending."""
    return tuple(i for i in range(n) if depends_on(table, n, i))


def rows_of(table: int) -> Iterator[int]:
    """Row numbers in which `table` is 1, ascending."""
    while table:
        low = table & -table
        yield low.bit_length() - 1
        table ^= low


def table_of(n: int, rows: Iterable[int]) -> int:
    """The table over `n` inputs that is 1 in the given rows alone."""
    packed = bytearray(max(1, 1 << n >> 3))
    for row in rows:
        packed[row >> 3] |= 1 << (row & 7)
    return int.from_bytes(packed, "little")


def settings(row: int, n: int) -> tuple[int, ...]:
    """Relay values (0 released, 1 operated) of a row number, in relay order."""
    return tuple((row >> i) & 1 for i in range(n))


@dataclass(frozen=True)
class Target:
    """Wanted behaviour of one load over `2**n` rows: must be on in `on`, may be either in `free`.

    `on` and `free` are truth tables and never overlap; everything else must be off.
    """

    n: int
    on: int
    free: int = 0

    def __post_init__(self) -> None:
        full = all_rows(self.n)
        if self.on & self.free or (self.on | self.free) & ~full:
            raise ValueError("on and free rows overlap or lie outside the table")

    @property
    def off(self) -> int:
        """Rows in which the load must be off."""
        return all_rows(self.n) & ~(self.on | self.free)

    def accepts(self, table: int) -> bool:
        """Whether a load that behaves as `table` is as wanted in every row that is not free."""
        return not (table ^ self.on) & all_rows(self.n) & ~self.free

    def needs(self, i: int) -> bool:
        """Whether two rows that differ only in relay `i` want opposite things.

        If so every correct network has a contact of relay `i`.
        """
        step = 1 << i
        low = all_rows(self.n) & ~variable(self.n, i)
        return bool((self.on & low) & (self.off >> step) | (self.off & low) & (self.on >> step))
