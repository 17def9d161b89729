"""Sequences of relay states: expansion of the listed states to one-relay steps.

Definitions are those of design.md section 7.  Two listed states that differ in several columns
are joined by steps of one relay each: input moves first, then slow moves, then quick ones, each
in column order (another order may be given per transition, see `memory`).  States are numbers:
column `i` is bit `i`, as for rows of a truth table.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from contactlogic.errors import TableError
from contactlogic.job.sequence import (
    Branch,
    SequenceTable,
    Timing,
    check_table,
    moves_to_make,
)

__all__ = ["Ambiguity", "Expansion", "Step", "ambiguities", "clash", "expand"]


@dataclass(frozen=True)
class Step:
    """One state of the expanded list and how it is left.

    Args:
        state: the state number.
        row: the listed row (counted from 1) that this is, or the row it follows if `inserted`.
        loads: wanted value of each load, None where free.
        leaving: (column that moves, index of the step it leads to); several only where the
            sequence waits for one of several inputs, none where it ends.
        original: what the state was before memory relays were added to it.
    """

    state: int
    row: int
    inserted: bool
    loads: tuple[int | None, ...]
    leaving: tuple[tuple[int, int], ...]

    @property
    def movers(self) -> tuple[int, ...]:
        return tuple(sorted(column for column, _ in self.leaving))


@dataclass(frozen=True)
class Expansion:
    """The expanded list: every state passed, one relay moving at a time.

    `memory` names the relays that the tool added; they are the last columns.  `notes` says in
    plain sentences what was done beyond the listed rows.
    """

    columns: tuple[str, ...]
    loads: tuple[str, ...]
    steps: tuple[Step, ...]
    inputs: tuple[str, ...]
    inputs_return: bool
    repeat: bool
    timing: Timing
    memory: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()

    @property
    def relays(self) -> tuple[str, ...]:
        """Columns that have a coil."""
        return tuple(name for name in self.columns if name not in self.inputs)

    def waits(self, step: Step) -> bool:
        """Whether the step is left by an input, so that nothing moves until then."""
        return any(self.columns[mover] in self.inputs for mover in step.movers)

    def quick(self, step: Step) -> bool:
        """Whether the step is left by a quick move of a relay."""
        return bool(step.movers) and not self.waits(step) and not self.dwells(step)

    def dwells(self, step: Step) -> bool:
        """Whether the state lasts: left by a slow move, by an input, or never."""
        if not step.movers or self.waits(step):
            return True
        mover = step.movers[0]
        return self.timing.slow(self.columns[mover], bool(step.state >> mover & 1))


def expand(
    table: SequenceTable, orders: Mapping[tuple[int, int], tuple[int, ...]] | None = None
) -> Expansion:
    """The expanded list of a sequence.

    Args:
        orders: order of moves for chosen transitions, by (row left, row reached), counted from 1.

    Raises:
        TableError: rows that differ by nothing, unknown names, branches that cannot be taken.
    """
    check_table(table)
    orders = orders or {}
    count = len(table.rows)
    links: list[tuple[int, int, tuple[int, ...]]] = []  # row left, row reached, moves
    for here in range(1, count if not table.repeat else count + 1):
        there = here % count + 1
        links.append((here, there, _moves(table, here, there, orders)))
    for branch in table.branches:
        links.append((branch.after, branch.goto, _branch_moves(table, branch, orders)))

    inserted: list[tuple[int, Step]] = []  # link and step, for placing after the link's row
    leaving: dict[int, list[tuple[int, tuple[int, int]]]] = {}
    for number, (here, there, moves) in enumerate(links):
        leaving.setdefault(here, []).append((moves[0], (number, 1)))
        state = table.rows[here - 1].state
        kept = tuple(
            before if before == after else None
            for before, after in zip(
                table.rows[here - 1].loads, table.rows[there - 1].loads, strict=True
            )
        )
        for move in moves[:-1]:
            state ^= 1 << move
            inserted.append((number, Step(state, here, True, kept, ())))
    # Numbering: each row, then the states of its main transition; branches come at the end.
    index: dict[tuple[int, int], int] = {}  # (link, how many moves made) -> step
    rows: dict[int, int] = {}
    order: list[Step] = []
    main = count if table.repeat else count - 1
    for here in range(1, count + 1):
        rows[here] = len(order)
        row = table.rows[here - 1]
        order.append(Step(row.state, here, False, row.loads, ()))
        if here <= main:
            _append(order, index, inserted, here - 1)
    for number in range(main, len(links)):
        _append(order, index, inserted, number)
    for number, (_, there, moves) in enumerate(links):
        index[number, len(moves)] = rows[there]
    done = []
    for position, step in enumerate(order):
        if not step.inserted:
            ways_out = tuple((mover, index[key]) for mover, key in leaving.get(step.row, ()))
        else:
            number, made = next(key for key, place in index.items() if place == position)
            ways_out = ((links[number][2][made], index[number, made + 1]),)
        done.append(Step(step.state, step.row, step.inserted, step.loads, ways_out))
    return Expansion(
        table.columns,
        table.loads,
        tuple(done),
        table.inputs,
        table.inputs_return,
        table.repeat,
        table.timing,
    )


def _append(
    order: list[Step],
    index: dict[tuple[int, int], int],
    inserted: list[tuple[int, Step]],
    link: int,
) -> None:
    for made, step in enumerate((s for number, s in inserted if number == link), start=1):
        index[link, made] = len(order)
        order.append(step)


def _moves(
    table: SequenceTable, here: int, there: int, orders: Mapping[tuple[int, int], tuple[int, ...]]
) -> tuple[int, ...]:
    before, after = table.rows[here - 1].state, table.rows[there - 1].state
    if before == after:
        back = there < here
        raise TableError(
            f"rows {here} and {there} differ by no relay, so there is no step between them",
            place=table.place(here),
            expected="each row to change at least one relay or input",
            hint="leave out the last row: the sequence repeats by itself" if back else None,
        )
    moves = moves_to_make(table, before, after)
    return orders.get((here, there), moves)


def _branch_moves(
    table: SequenceTable, branch: Branch, orders: Mapping[tuple[int, int], tuple[int, ...]]
) -> tuple[int, ...]:
    """Moves from a waiting row to the branch's goal: the branch's own input goes first."""
    name, value = (branch.when[:-1], 0) if branch.when.endswith("'") else (branch.when, 1)
    column = table.columns.index(name)
    here, there = table.rows[branch.after - 1], table.rows[branch.goto - 1]
    if here.columns[column] == value or there.columns[column] != value:
        word = "operated" if value else "released"
        raise TableError(
            f"the branch after row {branch.after} is taken when {name} becomes {word}, but row "
            f"{branch.after} has {name} = {here.columns[column]} and row {branch.goto} has "
            f"{name} = {there.columns[column]}",
            place=table.place(branch.after),
            expected=f"{name} = {1 - value} in row {branch.after}, {value} in row {branch.goto}",
        )
    moves = moves_to_make(table, here.state, there.state)
    first = (column, *(move for move in moves if move != column))
    return orders.get((branch.after, branch.goto), first)


@dataclass(frozen=True)
class Ambiguity:
    """One state that occurs at several `steps` (indices) which want different things there."""

    state: int
    steps: tuple[int, ...]
    why: str


def clash(columns: tuple[str, ...], loads: tuple[str, ...], one: Step, two: Step) -> str | None:
    """Why two steps in the same state cannot be told apart by the wiring; None if they agree."""
    if one.movers != two.movers:
        names = [" or ".join(columns[m] for m in s.movers) or "nothing" for s in (one, two)]
        return f"{names[0]} moves next the one time, {names[1]} the other"
    for name, a, b in zip(loads, one.loads, two.loads, strict=True):
        if a is not None and b is not None and a != b:
            return (
                f"{name} is {'on' if a else 'off'} the one time, {'on' if b else 'off'} the other"
            )
    return None


def ambiguities(expansion: Expansion) -> tuple[Ambiguity, ...]:
    """States that occur again with different movers or wants, in order of first appearance."""
    places: dict[int, list[int]] = {}
    for index, step in enumerate(expansion.steps):
        places.setdefault(step.state, []).append(index)
    found = []
    for state, indices in places.items():
        why = None
        for k, index in enumerate(indices):
            for other in indices[:k]:
                why = why or clash(
                    expansion.columns,
                    expansion.loads,
                    expansion.steps[other],
                    expansion.steps[index],
                )
        if why:
            found.append(Ambiguity(state, tuple(indices), why))
    return tuple(found)
