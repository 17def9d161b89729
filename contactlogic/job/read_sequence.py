"""Sequence and pattern jobs from job files: cells and names to values, with where they stand."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from contactlogic.errors import LimitError, Place, TableError
from contactlogic.job.model import PatternJob, SequenceJob
from contactlogic.job.read_bench import read_bench
from contactlogic.job.sections import read_limits, split_names, supply_of, title_of
from contactlogic.job.sequence import (
    Branch,
    Pattern,
    Row,
    SequenceTable,
    Timing,
    check_table,
)
from contactlogic.job.table import GridRow, no_value, read_rows
from contactlogic.job.tomlfile import first_line_of, key_lines, place_of_key
from contactlogic.naming import check_names

__all__ = [
    "MOST_COLUMNS",
    "read_pattern_job",
    "read_sequence_job",
    "sequence_table",
    "timing_of",
    "timing_places",
    "too_many_columns",
]

MOST_COLUMNS = 64
"""Most relays and inputs of a sequence or of a set of drives."""

_VALUES = {"0": 0, "1": 1, "-": None}


def read_sequence_job(data: Any, text: str, file: Path, place: Place) -> SequenceJob:
    """The job of a file with a [sequence] and no drives."""
    table = sequence_table(data, text, place)
    coils = [name for name in table.columns if name not in table.inputs]
    facts, bench = read_bench(data, (*coils, *table.loads), table.columns, coils, text, place)
    return SequenceJob(
        title_of(data, file),
        table,
        supply_of(data),
        facts,
        read_limits(data.limits, table.columns, "relay", text, place),
        place.file,
        bench,
    )


def read_pattern_job(data: Any, text: str, file: Path, place: Place) -> PatternJob:
    """The job of a file with a [pattern].  Names in its limits are checked once relays exist."""
    given = data.pattern
    where = replace(place, section="pattern")
    at = _place_of_text(text, "pattern", "loads", given.loads, where)
    loads = split_names(given.loads)
    if not loads:
        raise TableError("the pattern names no load", place=at, expected="at least one load")
    check_names(loads, at, given.loads)
    first = first_line_of(given.rows, ["pattern", "rows"], text)
    rows = []
    for row in read_rows(given.rows, 0, len(loads), where, first):
        _check_cells(row, (), loads, where)
        rows.append(tuple(_VALUES[cell] for cell in row.cells))
    if len(rows) < 2:
        raise TableError(
            "a pattern needs at least two steps",
            place=where,
            expected="a row for each step, in order",
        )
    facts, bench = read_bench(data, loads, (), None, text, place)
    return PatternJob(
        title_of(data, file),
        Pattern(loads, tuple(rows), given.step, place.file),
        supply_of(data),
        facts,
        read_limits(data.limits, None, "relay", text, place),
        place.file,
        bench,
    )


def sequence_table(data: Any, text: str, place: Place) -> SequenceTable:
    """The [sequence] of a job file with its [timing], checked as far as names and rows go."""
    given = data.sequence
    where = replace(place, section="sequence")
    columns, loads = _columns(given.columns, text, where)
    first = first_line_of(given.rows, ["sequence", "rows"], text)
    rows = []
    for row in read_rows(given.rows, len(columns), len(loads), where, first):
        _check_cells(row, columns, loads, where)
        values = [_VALUES[cell] for cell in row.cells]
        states = tuple(value for value in values[: len(columns)] if value is not None)
        rows.append(Row(states, tuple(values[len(columns) :]), row.label, row.text))
    inputs_at = _place_of_text(text, "sequence", "inputs", given.inputs, where)
    inputs = split_names(given.inputs)
    check_names(inputs, inputs_at, given.inputs)
    table = SequenceTable(
        columns,
        loads,
        tuple(rows),
        given.repeat,
        inputs,
        given.inputs_return,
        tuple(Branch(b.after, b.when.replace(" ", ""), b.goto) for b in given.branches),
        given.memory,
        timing_of(data.timing, text, place),
        place.file,
        {
            "inputs": inputs_at,
            "branches": replace(
                place_of_key(text, ["sequence", "branches"], where), column=None, width=1
            ),
            **timing_places(data.timing, text, place),
        },
    )
    check_table(table)
    return table


def timing_of(data: Any, text: str, place: Place) -> Timing:
    """The [timing] section; whether its names are relays is not checked here."""
    lists = {}
    for key, where in timing_places(data, text, place).items():
        lists[key] = split_names(getattr(data, key))
        check_names(lists[key], where, getattr(data, key))
    return Timing(**lists)


def timing_places(data: Any, text: str, place: Place) -> dict[str, Place]:
    """Where each key of [timing] stands."""
    where = replace(place, section="timing")
    return {
        key: _place_of_text(text, "timing", key, getattr(data, key), where)
        for key in ("slow_release", "slow_operate")
    }


def too_many_columns(count: int, place: Place) -> LimitError:
    return LimitError(
        f"there are {count} relays and inputs", place=place, expected=f"at most {MOST_COLUMNS}"
    )


def _place_of_text(text: str, section: str, key: str, value: str, where: Place) -> Place:
    """`where` with the line of a key, and its text for a caret."""
    number = key_lines(text).get((section, key))
    return replace(where, row=f"line {number}" if number else None, line=value or None)


def _columns(given: str, text: str, where: Place) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Columns and loads of a line such as "A B C D | STRIKE"; the loads may be left out."""
    at = _place_of_text(text, "sequence", "columns", given, where)
    left, bar, right = given.partition("|")
    if "|" in right:
        raise TableError(
            "columns have more than one |",
            place=replace(at, column=given.index("|", len(left) + 1)),
            expected='relays and inputs, one |, loads: such as "A B C D | STRIKE"',
        )
    columns, loads = split_names(left), split_names(right)
    if not columns:
        raise TableError(
            "columns name no relay",
            place=replace(at, column=len(left) if bar else None),
            expected="at least one relay before the |",
        )
    check_names((*columns, *loads), at, given)
    if len(columns) > MOST_COLUMNS:
        raise too_many_columns(len(columns), at)
    return columns, loads


def _check_cells(row: GridRow, columns: Sequence[str], loads: Sequence[str], place: Place) -> None:
    for at, (cell, name) in enumerate(zip(row.cells, (*columns, *loads), strict=True)):
        if at < len(columns) and cell not in ("0", "1"):
            error = no_value(row, at, name, place, "0 or 1")
            if cell == "-":
                raise TableError(
                    error.what,
                    place=error.place,
                    expected=error.expected,
                    hint="a state of a sequence is definite; list a row for each",
                )
            raise error
        if cell not in _VALUES:
            raise no_value(row, at, name, place)
