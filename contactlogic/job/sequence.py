"""A sequence or a pattern as listed by the user, and what makes it unusable.

States are numbers: column `i` is bit `i`, as for rows of a truth table.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from contactlogic.errors import Place, TableError
from contactlogic.naming import did_you_mean, listed, place_of

__all__ = [
    "Branch",
    "Memory",
    "Pattern",
    "Row",
    "SequenceTable",
    "Stepping",
    "Timing",
    "check_table",
    "moves_to_make",
    "state_text",
]

Memory = Literal["allowed", "forbidden"]
Stepping = Literal["slow", "ring", "pulse"]


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
    """One listed state: a 0 or 1 for each column, and 0, 1 or None (free) for each load.

    `label` is what the user calls it ("row 3, line 12") and `text` how it is written there.
    """

    columns: tuple[int, ...]
    loads: tuple[int | None, ...] = ()
    label: str | None = field(default=None, compare=False)
    text: str | None = field(default=None, compare=False)

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
        places: where the file says what: by key, with the line for a caret.
    """

    columns: tuple[str, ...]
    loads: tuple[str, ...]
    rows: tuple[Row, ...]
    repeat: bool = True
    inputs: tuple[str, ...] = ()
    inputs_return: bool = True
    branches: tuple[Branch, ...] = ()
    memory: Memory = "allowed"
    timing: Timing = field(default_factory=Timing)
    file: str | None = None
    places: Mapping[str, Place] = field(default_factory=dict, compare=False, repr=False)

    def place(self, row: int | None = None) -> Place:
        """Where a row (counted from 1) stands, for messages."""
        if row is None or not 1 <= row <= len(self.rows):
            return Place(self.file, "sequence")
        written = self.rows[row - 1]
        return Place(self.file, "sequence", written.label or f"row {row}", written.text)

    def place_of(self, key: str, name: str) -> Place:
        """Where a key of the job names a column or anything else, with a caret under it."""
        place = self.places.get(key, self.place())
        return place if place.line is None else place_of(name, place.line, place)


@dataclass(frozen=True)
class Pattern:
    """What each load does in each step, and how the steps follow on each other."""

    loads: tuple[str, ...]
    rows: tuple[tuple[int | None, ...], ...]
    step: Stepping
    file: str | None = None


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
    named = (
        ("inputs", table.inputs),
        ("slow_release", table.timing.slow_release),
        ("slow_operate", table.timing.slow_operate),
    )
    for key, names in named:
        for name in names:
            if name not in table.columns:
                raise TableError(
                    f"{key} names {name}, which is no column of the sequence",
                    place=table.place_of(key, name),
                    expected=listed(table.columns),
                    hint=did_you_mean(name, table.columns),
                )
            if name in table.inputs and key != "inputs":
                raise TableError(
                    f"{name} is moved from outside, so it cannot be slow",
                    place=table.place_of(key, name),
                    hint=f"take it out of {key} or out of inputs",
                )
    if all(name in table.inputs for name in table.columns):
        raise TableError(
            "every column is moved from outside, so there is no relay to drive",
            place=table.places.get("inputs", table.place()),
            expected="at least one column that is not among inputs",
        )
    if len(table.rows) < 2:
        raise TableError(
            "a sequence needs at least two rows",
            place=table.place(),
            expected="a row for each state, in order",
        )
    _check_branches(table)


def _check_branches(table: SequenceTable) -> None:
    count = len(table.rows)
    first: dict[int, set[str]] = {}
    for branch in table.branches:
        for key, row in (("after", branch.after), ("goto", branch.goto)):
            if not 1 <= row <= count:
                raise TableError(
                    f"a branch has {key} = {row}, but there are rows 1 to {count}",
                    place=table.place_of("branches", key),
                    expected="rows counted from 1",
                )
        name = branch.when.removesuffix("'")
        if name not in table.inputs:
            raise TableError(
                f"the branch after row {branch.after} waits for {name}, which is no input",
                place=table.place_of("branches", name),
                expected=listed(table.inputs),
                hint=did_you_mean(name, table.inputs)
                or (f"add {name} to inputs" if name in table.columns else None),
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
                expected="each input to lead to one row",
                hint="let another input take the branch",
            )
        if others - set(table.inputs):
            raise TableError(
                f"row {branch.after} does not wait: {min(others)} moves by itself, so the branch "
                "is never taken",
                place=table.place(branch.after),
                expected="a row that is left by an input",
            )
        others.add(name)
