"""Wanted behaviour written as a job file, a CSV or an XLSX table, and read back the same."""

import csv
import random
import tempfile
from pathlib import Path

import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import relay_columns, several_targets

from contactlogic.job import load_job, load_table_job
from contactlogic.job.model import Job
from contactlogic.truth import Target

Rows = list[list[str]]


@st.composite
def wanted(draw: st.DrawFn) -> tuple[list[str], dict[str, Target], Rows]:
    """Relays, loads, and every row in any order."""
    n = draw(st.integers(1, 5))
    targets = draw(several_targets(n))
    names = draw(relay_columns(n + len(targets)))
    loads = dict(zip(names[n:], targets.values(), strict=True))
    numbers = list(range(2**n))
    random.Random(draw(st.integers(0, 99))).shuffle(numbers)
    rows = []
    for number in numbers:
        row = [str(number // 2**i % 2) for i in range(n)]  # relay i is bit i of the row number
        for target in loads.values():
            free, on = (table // 2**number % 2 for table in (target.free, target.on))
            row.append("-" if free else str(on))
        rows.append(row)
    return list(names[:n]), loads, rows


def by_toml(folder: Path, relays: list[str], loads: list[str], rows: Rows) -> Job:
    n = len(relays)
    lines = [f"{' '.join(row[:n])} | {' '.join(row[n:])}" for row in rows]
    path = folder / "gate.toml"
    path.write_text(
        f'[table]\ncolumns = "{" ".join(relays)} | {" ".join(loads)}"\n'
        'rows = """\n' + "\n".join(lines) + '\n"""\n'
    )
    return load_job(path)


def by_csv(folder: Path, relays: list[str], loads: list[str], rows: Rows) -> Job:
    path = folder / "gate.csv"
    with path.open("w", newline="") as file:
        csv.writer(file).writerows([[*relays, *loads], *rows])
    return load_table_job(path, loads)


def by_xlsx(folder: Path, relays: list[str], loads: list[str], rows: Rows) -> Job:
    book = openpyxl.Workbook()
    book.active.append([*relays, *loads])
    for row in rows:
        book.active.append([cell if cell == "-" else int(cell) for cell in row])
    book.save(folder / "gate.xlsx")
    return load_table_job(folder / "gate.xlsx", loads)


@pytest.mark.parametrize("written", [by_toml, by_csv, by_xlsx])
@given(job=wanted())
@settings(max_examples=40)
def test_what_is_written_is_read(written, job) -> None:
    relays, targets, rows = job
    with tempfile.TemporaryDirectory() as folder:
        read = written(Path(folder), relays, list(targets), rows)
    assert read.relays == tuple(relays)
    assert read.targets == targets
    assert list(read.targets) == list(targets)
    assert read.listed == 2**2 ** len(relays) - 1
    assert read.title == "gate"
