"""Job files and bare tables to a `Job`.

Relay order: table columns, then first appearance in the formulas.  Table rows count as `-` in
relays that the table lacks; formula loads are wanted in all rows.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from contactlogic.errors import FormulaError, JobFileError, LimitError, Place, TableError
from contactlogic.formula import Expression, evaluate, names, parse
from contactlogic.job.model import Job, Limits, Load, SeparateContacts, Supply
from contactlogic.job.names import check_names, did_you_mean
from contactlogic.job.schema import read_job_file
from contactlogic.job.sheet import read_sheet
from contactlogic.job.table import Grid, Unlisted, read_columns, read_rows, targets_of
from contactlogic.truth import MAX_INPUTS, Target, all_rows

__all__ = ["load_job", "load_table_job"]


def load_job(path: str | Path) -> Job:
    """Read a job file (TOML; sections in design.md section 5).

    Raises:
        JobError: with file, section, row and what was expected.
    """
    shown = str(path)
    file = Path(path)
    data, text = read_job_file(file, shown)
    place = Place(file=shown)
    if data.table is None and not data.formulas:
        raise JobFileError(
            "the job says nothing of any load",
            place=place,
            expected="a section [table] or [formulas]",
        )
    grid = None if data.table is None else _grid(data.table, text, file, place)
    unlisted = None if data.table is None else data.table.unlisted
    expressions = {
        name: parse(formula, place=Place(file=shown, section="formulas", row=name))
        for name, formula in data.formulas.items()
    }
    relays = _relays(grid, expressions, data.formulas, place)
    targets, listed = _targets(grid, unlisted, relays)
    for name, expression in expressions.items():
        where = Place(file=shown, section="formulas", row=name)
        table = evaluate(expression, relays, text=data.formulas[name], place=where)
        targets[name] = Target(len(relays), table)
    _check_known(data.loads, targets, "load", "loads", place)
    loads = tuple(
        Load(
            name,
            target,
            data.loads[name].kind if name in data.loads else None,
            data.loads[name].amps if name in data.loads else None,
            data.formulas.get(name),
        )
        for name, target in targets.items()
    )
    return Job(
        data.title if data.title is not None else file.stem,
        relays,
        loads,
        listed,
        Supply(data.supply.feed, data.supply.return_),
        _limits(data.limits, relays, place),
        shown,
    )


def load_table_job(path: str | Path, loads: Sequence[str], unlisted: Unlisted | None = None) -> Job:
    """A job from a bare CSV or XLSX table.

    Args:
        path: the table; its header names relays and loads.
        loads: the columns that are loads.
        unlisted: what loads do in rows that the table leaves out; None if it may leave none out.
    """
    shown = str(path)
    file = Path(path)
    grid = read_sheet(file, loads, shown)
    targets, listed = targets_of(grid, unlisted)
    made = tuple(Load(name, target) for name, target in targets.items())
    return Job(file.stem, grid.relays, made, listed, file=shown)


def _grid(table: Any, text: str, job: Path, place: Place) -> Grid:
    """The grid of a [table], from its own rows or from the file it names."""
    where = replace(place, section="table")
    inline = table.columns is not None or table.rows is not None
    if inline == (table.file is not None):
        raise JobFileError(
            "[table] has both rows and a file" if inline else "[table] has no rows",
            place=where,
            expected="columns and rows, or file and loads",
        )
    if not inline:
        if not table.loads:
            raise JobFileError(
                "which columns are loads is not said", place=where, expected='loads = ["LAMP"]'
            )
        path = job.parent / table.file
        shown = str(Path(place.file or "").parent / table.file)
        return read_sheet(path, table.loads, shown)
    for key in ("columns", "rows"):
        if getattr(table, key) is None:
            raise JobFileError(f"{key} is missing", place=where, expected="columns and rows")
    if table.loads is not None:
        raise JobFileError(
            "loads belongs to a table in a file",
            place=where,
            hint="in columns the | divides relays from loads",
        )
    relays, loads = read_columns(table.columns, where)
    check_names((*relays, *loads), where, table.columns)
    if len(relays) > MAX_INPUTS:
        raise _too_many(len(relays), where)
    rows = read_rows(table.rows, len(relays), len(loads), where)
    numbers = _line_numbers(text, [row.text for row in rows])
    labelled = tuple(
        replace(row, label=f"{row.label} (line {number})" if number else row.label)
        for row, number in zip(rows, numbers, strict=True)
    )
    return Grid(relays, loads, labelled, where)


def _line_numbers(text: str, rows: Sequence[str]) -> list[int | None]:
    """Line of the job file on which each row stands, None where a plain look does not find it."""
    lines = text.splitlines()
    number = next((k for k, line in enumerate(lines) if re.match(r"\s*\[\s*table\s*\]", line)), 0)
    found: list[int | None] = []
    for row in rows:
        at = next((k for k in range(number, len(lines)) if row.strip() in lines[k]), None)
        found.append(None if at is None else at + 1)
        if at is not None:
            number = at + 1
    return found


def _relays(
    grid: Grid | None,
    expressions: Mapping[str, Expression],
    formulas: Mapping[str, str],
    place: Place,
) -> tuple[str, ...]:
    """Relays in order; loads and relays checked against each other."""
    where = replace(place, section="formulas")
    check_names(expressions, where)
    loads = (grid.loads if grid else ()) + tuple(expressions)
    for name in expressions:
        if grid and name in grid.loads:
            raise JobFileError(
                f"{name} stands in the table and in the formulas", place=where, hint="keep one"
            )
        if grid and name in grid.relays:
            raise JobFileError(
                f"{name} is an input relay of the table and a load of the formulas",
                place=where,
                hint="give one of them another name",
            )
    relays = dict.fromkeys(grid.relays if grid else ())
    for load, expression in expressions.items():
        for name in names(expression):
            if name in loads:
                own = "its own formula" if name == load else f"the formula of {load}"
                at = formulas[load].find(name)
                raise FormulaError(
                    f"{name} is a load and cannot be a contact in {own}",
                    place=replace(where, row=load, line=formulas[load], column=at, width=len(name)),
                    expected="input relays",
                    hint=did_you_mean(name, relays),
                )
            relays.setdefault(name)
    check_names((*relays, *loads), where)
    if len(relays) > MAX_INPUTS:
        raise _too_many(len(relays), place)
    return tuple(relays)


def _too_many(count: int, place: Place) -> LimitError:
    return LimitError(
        f"the job has {count} input relays",
        place=place,
        expected=f"at most {MAX_INPUTS}: every one of the 2^{MAX_INPUTS} rows is proved",
    )


def _targets(
    grid: Grid | None, unlisted: Unlisted | None, relays: Sequence[str]
) -> tuple[dict[str, Target], int]:
    """Table loads over all relays of the job, and the rows that the table lists."""
    n = len(relays)
    if grid is None:
        return {}, all_rows(n)
    if not grid.rows:
        raise TableError("the table has no rows", place=grid.place, expected="at least one row")
    narrow, listed = targets_of(grid, unlisted)

    def spread(table: int) -> int:
        for i in range(len(grid.relays), n):
            table |= table << (1 << i)
        return table

    wide = {name: Target(n, spread(t.on), spread(t.free)) for name, t in narrow.items()}
    return wide, spread(listed)


def _check_known(
    given: Collection[str], known: Collection[str], what: str, section: str, place: Place
) -> None:
    for name in given:
        if name not in known:
            raise JobFileError(
                f"there is no {what} {name}",
                place=replace(place, section=section),
                expected="one of " + ", ".join(list(known)[:12]),
                hint=did_you_mean(name, known),
            )


def _limits(data: Any, relays: Sequence[str], place: Place) -> Limits:
    _check_known(data.poles, relays, "input relay", "limits", place)
    _check_known(data.contacts, relays, "input relay", "limits", place)
    separate = {}
    for name, text in data.contacts.items():
        counts = {form: int(number) for number, form in re.findall(r"(\d+)([AB])", text)}
        separate[name] = SeparateContacts(counts.get("A", 0), counts.get("B", 0))
    return Limits(dict(data.poles), separate, data.isolate, data.objective)
