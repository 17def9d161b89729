"""A sequence as listed by the user, and what makes it unusable.

States are numbers: column `i` is bit `i`, as for rows of a truth table.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from contactlogic.errors import Place, TableError

__all__ = [
    "Branch",
    "Row",
    "SequenceTable",
    "Timing",
    "check_table",
    "moves_to_make",
    "state_text",
]


@dataclass(frozen=True)
class Timing:
    """Relays, by name, whose coils release or operate slowly.  Everything else is quick."""

    slow_release: tuple[str, ...] = ()
    slow_operate: tuple[str, ...] = ()

    def slow(self, relay: str, operated: bool) -> bool:
        """Whether the next move of `relay` is slow: its release if it is operated now."""
        return relay in (self.slow_release if operated else self.slow_operate)


@dataclass(frozen=True)
class Branch:
    """While row `after` waits, the move that makes `when` true leads to row `goto`.

    Rows are counted from 1.  `when` is an input column, followed by `'` for its release.
    """

    after: int
    when: str
    goto: int


@dataclass(frozen=True)
class Row:
    """One listed state: a 0 or 1 for each column, and 0, 1 or None (free) for each load."""

    columns: tuple[int, ...]
    loads: tuple[int | None, ...] = ()

    @property
    def state(self) -> int:
        return sum(value << i for i, value in enumerate(self.columns))


@dataclass(frozen=True)
class SequenceTable:
    """A sequence as listed by the user (design.md section 5).

    Args:
        columns: relays and inputs in column order; the bit order of every state number.
        loads: load names.
        rows: the listed states, in order.
        inputs: the columns that are moved from outside.
        inputs_return: whether the operator goes on operating the inputs.
    """

    columns: tuple[str, ...]
    loads: tuple[str, ...]
    rows: tuple[Row, ...]
    repeat: bool = True
    inputs: tuple[str, ...] = ()
    inputs_return: bool = True
    branches: tuple[Branch, ...] = ()
    memory: Literal["allowed", "forbidden"] = "allowed"
    timing: Timing = field(default_factory=Timing)
    file: str | None = None

    def place(self, row: int | None = None) -> Place:
        """Where a row stands, for messages."""
        return Place(self.file, "sequence", None if row is None else f"row {row}")


def state_text(state: int, n: int) -> str:
    """A state as the contract writes it: one digit for each column, in column order."""
    return "".join(str(state >> i & 1) for i in range(n))


def moves_to_make(table: SequenceTable, here: int, there: int) -> tuple[int, ...]:
    """Columns that differ between two states, in the order in which they move by default."""

    def turn(column: int) -> tuple[int, int]:
        name = table.columns[column]
        if name in table.inputs:
            return 0, column
        return (1 if table.timing.slow(name, bool(here >> column & 1)) else 2), column

    changed = [i for i in range(len(table.columns)) if (here ^ there) >> i & 1]
    return tuple(sorted(changed, key=turn))


def check_table(table: SequenceTable) -> None:
    """Refuse a sequence whose names, inputs or branches do not fit together.

    Raises:
        TableError: what is wrong, and in which row.
    """
    known = set(table.columns)
    named = (
        ("inputs", table.inputs),
        ("slow_release", table.timing.slow_release),
        ("slow_operate", table.timing.slow_operate),
        ("branches", tuple(branch.when.removesuffix("'") for branch in table.branches)),
    )
    for key, names in named:
        for name in names:
            if name not in known:
                raise TableError(
                    f"{key} names {name}, which is no column of the sequence",
                    place=table.place(),
                    expected="one of " + " ".join(table.columns),
                )
    for name in (*table.timing.slow_release, *table.timing.slow_operate):
        if name in table.inputs:
            raise TableError(
                f"{name} is moved from outside, so it cannot be slow",
                place=table.place(),
                hint="take it out of [timing] or out of inputs",
            )
    if len(table.rows) < 2:
        raise TableError("a sequence needs at least two rows", place=table.place())
    _check_branches(table)


def _check_branches(table: SequenceTable) -> None:
    count = len(table.rows)
    first: dict[int, set[str]] = {}
    for branch in table.branches:
        if not (1 <= branch.after <= count and 1 <= branch.goto <= count):
            raise TableError(
                f"a branch goes from row {branch.after} to row {branch.goto}, but there are "
                f"rows 1 to {count}",
                place=table.place(),
            )
        name = branch.when.removesuffix("'")
        if name not in table.inputs:
            raise TableError(
                f"the branch after row {branch.after} waits for {name}, which is no input",
                place=table.place(branch.after),
                expected="one of inputs = " + (" ".join(table.inputs) or "(none)"),
            )
        others = first.setdefault(branch.after, set())
        if branch.after < count or table.repeat:
            there = branch.after % count + 1
            here = table.rows[branch.after - 1].state
            moves = moves_to_make(table, here, table.rows[there - 1].state)
            if moves:
                others.add(table.columns[moves[0]])
        if name in others:
            raise TableError(
                f"after row {branch.after} the same move of {name} leads to two rows",
                place=table.place(branch.after),
                hint="let another input take the branch",
            )
        if others - set(table.inputs):
            raise TableError(
                f"row {branch.after} does not wait: {min(others)} moves by itself, so the branch "
                "is never taken",
                place=table.place(branch.after),
                hint="branch from a row that is left by an input",
            )
        others.add(name)
