"""Drives jobs from job files: the drives that someone has wired, to be checked.

Relay order: the sequence's columns if there is one; else the drives in the order of their keys,
then what else the formulas name, as it first appears.  What no drive moves is an input.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from contactlogic.errors import FormulaError, JobFileError, Place, TableError
from contactlogic.formula import Expression, names, parse
from contactlogic.job.model import DrivesJob
from contactlogic.job.read_bench import read_bench
from contactlogic.job.read_sequence import (
    MOST_COLUMNS,
    sequence_table,
    timing_of,
    timing_places,
    too_many_columns,
)
from contactlogic.job.sections import (
    formula_places,
    read_limits,
    supply_of,
    title_of,
)
from contactlogic.job.sequence import SequenceTable, Timing
from contactlogic.naming import check_names, did_you_mean, listed, place_of, slip_of

__all__ = ["read_drives_job"]


def read_drives_job(data: Any, text: str, file: Path, place: Place) -> DrivesJob:
    """The job of a file with [drives], and with the [sequence] they are meant for if it has one."""
    places = formula_places("drives", data.drives, text, place)
    drives = {name: parse(given, place=places[name]) for name, given in data.drives.items()}
    if data.sequence is None:
        table = None
        timing = timing_of(data.timing, text, place)
        columns = _columns(drives, data.drives, places)
        _check_timing(timing, drives, columns, timing_places(data.timing, text, place), data)
    else:
        # The drives are what they are: no relay can be added to them.
        table = replace(sequence_table(data, text, place), memory="forbidden")
        timing, columns = table.timing, table.columns
        _check_drives(table, drives, data.drives, places)
    named = (*drives, *(table.loads if table else ()))
    facts, bench = read_bench(data, named, columns, tuple(drives), text, place)
    return DrivesJob(
        title_of(data, file),
        columns,
        drives,
        dict(data.drives),
        timing,
        table,
        supply_of(data),
        facts,
        read_limits(data.limits, columns, "relay", text, place),
        place.file,
        bench,
    )


def _columns(
    drives: Mapping[str, Expression], formulas: Mapping[str, str], places: Mapping[str, Place]
) -> tuple[str, ...]:
    spelt: dict[str, str] = {}
    for name in drives:
        other = spelt.setdefault(name.upper(), name)
        if other != name:
            check_names([other, name], places[name])
    columns = dict.fromkeys(drives)
    for relay, expression in drives.items():
        for name in names(expression):
            if name in columns:
                continue
            where = place_of(name, formulas[relay], places[relay])
            other = spelt.setdefault(name.upper(), name)
            if other != name:
                raise FormulaError(
                    f"{other} and {name} differ only in case",
                    place=where,
                    expected="each relay and input spelt in one way",
                    hint=f"did you mean {other}?",
                )
            meant = slip_of(name, drives)
            if meant:
                raise FormulaError(
                    f"{name} has no drive",
                    place=where,
                    expected=listed(drives) + ", or an input with a name not so alike",
                    hint=f"did you mean {meant}? If {name} is a relay, give it a drive",
                )
            columns[name] = None
            if len(columns) > MOST_COLUMNS:
                every = {name for part in drives.values() for name in names(part)}
                raise too_many_columns(
                    len(every.union(drives)), replace(where, row=None, line=None, column=None)
                )
    return tuple(columns)


def _check_timing(
    timing: Timing,
    drives: Mapping[str, Expression],
    columns: Sequence[str],
    places: Mapping[str, Place],
    data: Any,
) -> None:
    for key, slow in (("slow_release", timing.slow_release), ("slow_operate", timing.slow_operate)):
        for name in slow:
            if name in drives:
                continue
            what = (
                f"{name} is moved from outside, so it cannot be slow"
                if name in columns
                else f"{key} names {name}, which has no drive"
            )
            raise TableError(
                what,
                place=place_of(name, getattr(data.timing, key), places[key]),
                expected=listed(drives),
                hint=did_you_mean(name, drives),
            )


def _check_drives(
    table: SequenceTable,
    drives: Mapping[str, Expression],
    formulas: Mapping[str, str],
    places: Mapping[str, Place],
) -> None:
    """Exactly the relays of the sequence have drives, and these name its columns alone."""
    for relay, expression in drives.items():
        if relay in table.inputs:
            raise JobFileError(
                f"{relay} is moved from outside and cannot have a drive",
                place=places[relay],
                hint=f"take {relay} out of inputs, or its drive out",
            )
        if relay not in table.columns:
            raise JobFileError(
                f"{relay} has a drive but is no column of the sequence",
                place=places[relay],
                expected=listed(table.columns),
                hint=did_you_mean(relay, table.columns),
            )
        for name in names(expression):
            if name not in table.columns:
                raise FormulaError(
                    f"{name} is no column of the sequence",
                    place=place_of(name, formulas[relay], places[relay]),
                    expected=listed(table.columns),
                    hint=did_you_mean(name, table.columns),
                )
    for name in table.columns:
        if name not in table.inputs and name not in drives:
            raise JobFileError(
                f"{name} is a relay of the sequence but has no drive",
                place=replace(table.place(), section="drives"),
                expected="a drive for each column that is not among inputs",
                hint=f"if {name} is moved from outside, add it to inputs",
            )
