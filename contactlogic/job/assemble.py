"""Job files and bare tables to jobs.

Sequences and drives are read by `read_sequence` and `read_drives`.  Relay order of table and
formula jobs: table columns, then first appearance in the formulas.  Table rows count as `-` in
relays that the table lacks; formula loads are wanted in all rows.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any, get_args

from contactlogic.errors import FormulaError, JobFileError, Place
from contactlogic.formula import Expression, evaluate, names, parse
from contactlogic.job.model import AnyJob, Job, Load, LoadFacts
from contactlogic.job.read_bench import read_bench
from contactlogic.job.read_drives import read_drives_job
from contactlogic.job.read_sequence import read_pattern_job, read_sequence_job
from contactlogic.job.schema import read_job_file
from contactlogic.job.sections import (
    formula_places,
    read_limits,
    supply_of,
    title_of,
)
from contactlogic.job.sheet import SUFFIXES, read_sheet
from contactlogic.job.table import (
    Grid,
    Unlisted,
    read_columns,
    read_rows,
    targets_of,
    too_many_inputs,
)
from contactlogic.job.tomlfile import first_line_of, place_of_key
from contactlogic.naming import check_names, did_you_mean, listed, place_of, slip_of
from contactlogic.truth import MAX_INPUTS, Target

__all__ = ["load_job", "load_table_job"]


def load_job(path: str | Path) -> AnyJob:
    """Read a job file (TOML; sections in design.md section 5).

    Returns:
        `Job` for [table] and [formulas], `SequenceJob` for [sequence], `PatternJob` for
        [pattern], `DrivesJob` for [drives] (with or without the [sequence] they are meant for).

    Raises:
        JobError: with file, section, row and what was expected.
    """
    shown = str(path)
    place = Place(file=shown)
    file = Path(path)
    if file.suffix.lower() in SUFFIXES:
        raise JobFileError(
            "this is a bare table, not a job file",
            place=place,
            expected="a job file in TOML, or the names of the table's loads beside it",
        )
    data, text = read_job_file(file, shown)
    if data.drives:
        return read_drives_job(data, text, file, place)
    if data.sequence is not None:
        return read_sequence_job(data, text, file, place)
    if data.pattern is not None:
        return read_pattern_job(data, text, file, place)
    return _table_job(data, text, file, place)


def _table_job(data: Any, text: str, file: Path, place: Place) -> Job:
    if data.table is None and not data.formulas:
        raise JobFileError(
            "the job names no load",
            place=place,
            expected="a section [table], [formulas], [sequence], [pattern] or [drives]",
        )
    grid = None if data.table is None else _grid(data.table, text, file, place)
    places = formula_places("formulas", data.formulas, text, place)
    expressions = {
        name: parse(formula, place=places[name]) for name, formula in data.formulas.items()
    }
    relays = _relays(grid, expressions, data.formulas, places)
    narrow, rows = targets_of(grid, data.table.unlisted) if grid else ({}, 1)
    n, own = len(relays), len(grid.relays) if grid else 0
    targets = {
        name: Target(n, _spread(target.on, own, n), _spread(target.free, own, n))
        for name, target in narrow.items()
    }
    for name, expression in expressions.items():
        targets[name] = Target(n, evaluate(expression, relays))
    named = tuple(targets)
    facts, bench = read_bench(data, named, relays, named, text, place)
    loads = []
    for name, target in targets.items():
        known = facts.get(name, LoadFacts())
        loads.append(Load(name, target, known.kind, known.amps, data.formulas.get(name)))
    return Job(
        title_of(data, file),
        relays,
        tuple(loads),
        _spread(rows, own, n),
        supply_of(data),
        read_limits(data.limits, relays, "input relay", text, place),
        place.file,
        bench.stored,
        bench,
    )


def load_table_job(path: str | Path, loads: Sequence[str], unlisted: str | None = None) -> Job:
    """A job from a bare CSV or XLSX table.

    Args:
        path: the table; its header names relays and loads.
        loads: the columns that are loads.
        unlisted: "off" or "free", what loads do in rows that the table leaves out; None if it may
            leave none out.

    Raises:
        JobError: with file, row and what was expected.
    """
    shown = str(path)
    place = Place(file=shown)
    known: Unlisted | None = next((word for word in get_args(Unlisted) if word == unlisted), None)
    if known != unlisted:
        raise JobFileError(
            f'unlisted cannot be "{unlisted}"', place=place, expected='"off" or "free"'
        )
    check_names(loads, place, " ".join(loads))
    if not loads:
        raise JobFileError(
            "which columns are loads is not said", place=place, expected="at least one load"
        )
    grid = read_sheet(Path(path), loads, shown)
    targets, rows = targets_of(grid, known)
    made = tuple(Load(name, target) for name, target in targets.items())
    return Job(Path(path).stem, grid.relays, made, rows, file=shown)


def _grid(table: Any, text: str, job: Path, place: Place) -> Grid:
    """The grid of a [table], from its own rows or from the file it names."""
    where = replace(place, section="table")
    inline = table.columns is not None or table.rows is not None
    if inline and table.file is not None:
        raise JobFileError(
            "the table has both rows and a file",
            place=where,
            expected="columns and rows, or file and loads",
        )
    if table.file is not None:
        if not table.loads:
            raise JobFileError(
                "which columns of the file are loads is not said",
                place=where,
                expected='loads = ["LAMP", "HORN"]',
            )
        check_names(table.loads, where, " ".join(table.loads))
        shown = str(Path(place.file or "").parent / table.file)
        return read_sheet(job.parent / table.file, table.loads, shown)
    for key in ("columns", "rows"):
        if getattr(table, key) is None:
            raise JobFileError(
                f"the table has no {key}",
                place=where,
                expected="columns and rows, or file and loads",
            )
    if table.loads is not None:
        raise JobFileError(
            "loads is for a table in a file",
            place=where,
            expected="loads after the | in columns",
        )
    at = replace(where, row=place_of_key(text, ["table", "columns"], where).row)
    relays, loads = read_columns(table.columns, at)
    check_names((*relays, *loads), at, table.columns)
    first = first_line_of(table.rows, ["table", "rows"], text)
    return Grid(relays, loads, read_rows(table.rows, len(relays), len(loads), where, first), where)


def _relays(
    grid: Grid | None,
    expressions: Mapping[str, Expression],
    formulas: Mapping[str, str],
    places: Mapping[str, Place],
) -> tuple[str, ...]:
    """Relays in order, and that no name stands for two things or looks like another."""
    own, fed = (grid.relays, grid.loads) if grid else ((), ())
    spelt = {name.upper(): name for name in (*own, *fed)}
    for load in expressions:
        if load in fed:
            raise JobFileError(
                f"the load {load} stands both in [table] and in [formulas]",
                place=places[load],
                expected="each load in one of them",
            )
        if load in own:
            raise JobFileError(
                f"{load} is an input relay of the table and cannot be a load as well",
                place=places[load],
                expected="another name for the load",
            )
        other = spelt.setdefault(load.upper(), load)
        if other != load:
            check_names([other, load], places[load])
    relays = dict.fromkeys(own)
    for load, expression in expressions.items():
        for name in names(expression):
            if name in relays:
                continue
            place = place_of(name, formulas[load], places[load])
            if name in fed or name in expressions:
                whose = "its own formula" if name == load else f"the formula of {load}"
                raise FormulaError(
                    f"{name} is a load and cannot be a contact in {whose}",
                    place=place,
                    expected="input relays",
                    hint=did_you_mean(name, relays),
                )
            other = spelt.setdefault(name.upper(), name)
            if other != name:
                raise FormulaError(
                    f"{other} and {name} differ only in case",
                    place=place,
                    expected="each relay and load spelt in one way",
                    hint=f"did you mean {other}?",
                )
            meant = slip_of(name, own)
            if meant:
                raise FormulaError(
                    f"there is no relay {name}",
                    place=place,
                    expected=listed(own) + ", or a relay with a name not so alike",
                    hint=f"did you mean {meant}? If not, give {name} a column in the table",
                )
            relays[name] = None
            if len(relays) > MAX_INPUTS:
                every = {relay for part in expressions.values() for relay in names(part)}
                count = len(every.union(own).difference(expressions, fed))
                raise too_many_inputs(
                    "job", count, replace(place, section=None, row=None, line=None)
                )
    return tuple(relays)


def _spread(table: int, own: int, n: int) -> int:
    """A table over the first `own` of `n` relays as one over all of them."""
    for i in range(own, n):
        table |= table << (1 << i)
    return table
