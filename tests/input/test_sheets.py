"""Tables in CSV and XLSX files."""

from __future__ import annotations

import io
import zipfile
from datetime import date
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.worksheet.formula import ArrayFormula

from contactlogic.errors import JobError
from contactlogic.job import load_job, load_table_job, sheet
from contactlogic.job.model import Job

ROWS = [["UP", "LAMP", "DOWN", "HORN"], [0, 1, 0, "-"], [1, 0, "-", 1], [0, 0, 1, 0]]


def workbook(path: Path, rows: list[list[Any]]) -> Path:
    book = openpyxl.Workbook()
    book.active.title = "Gate"
    for row in rows:
        book.active.append(row)
    book.save(path)
    return path


def as_read(job: Job) -> tuple[object, ...]:
    return job.relays, [(name, t.on, t.free) for name, t in job.targets.items()], job.listed


EXPECTED = (("UP", "DOWN"), [("LAMP", 0b0001, 0), ("HORN", 0b1010, 0b0001)], 0b1111)


@pytest.mark.parametrize("divider", [",", ";", "\t"])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"], ids=["plain", "marked"])
def test_csv(tmp_path: Path, divider: str, end: str, mark: bytes) -> None:
    path = tmp_path / "gate.csv"
    text = end.join(divider.join(map(str, row)) for row in ROWS)
    path.write_bytes(mark + text.encode() + end.encode())
    job = load_table_job(path, ["HORN", "LAMP"])  # the file's order holds
    assert as_read(job) == EXPECTED
    assert job.title == "gate"
    assert job.file == str(path)


def test_csv_with_all_that_spreadsheets_add(tmp_path: Path) -> None:
    path = tmp_path / "gate.csv"
    path.write_text(
        '\n# the gate, as built\n"UP", LAMP ,"DOWN",HORN,,\n"0",1,0,-,,\n'
        "\n1,0,-,1\n,,,,,\n0,0,1,0,\n"
    )
    assert as_read(load_table_job(path, ["LAMP", "HORN"])) == EXPECTED


def test_xlsx(tmp_path: Path) -> None:
    path = workbook(tmp_path / "gate.xlsx", ROWS)
    assert as_read(load_table_job(path, ["LAMP", "HORN"])) == EXPECTED


def test_xlsx_cells_of_every_kind(tmp_path: Path) -> None:
    rows = [
        [None, None],
        ["UP", "LAMP", "DOWN", "HORN", None],
        [False, True, 0.0, " - "],
        ["1", "0", "-", 1.0],
        [None] * 6,
        [0, 0, 1, 0, None, ""],
    ]
    path = workbook(tmp_path / "gate.xlsx", rows)
    assert as_read(load_table_job(path, ["LAMP", "HORN"])) == EXPECTED


def test_rows_left_out(tmp_path: Path) -> None:
    path = tmp_path / "gate.csv"
    path.write_text("UP,DOWN,LAMP\n1,1,1\n0,0,-\n")
    off, free = (load_table_job(path, ["LAMP"], word) for word in ("off", "free"))
    assert (off.targets["LAMP"].on, off.targets["LAMP"].free) == (0b1000, 0b0001)
    assert (free.targets["LAMP"].on, free.targets["LAMP"].free) == (0b1000, 0b0111)
    assert off.listed == free.listed == 0b1001


def test_job_file_finds_its_table_beside_it(tmp_path: Path, monkeypatch: Any) -> None:
    (tmp_path / "plant").mkdir()
    workbook(tmp_path / "plant" / "gate.XLSX", ROWS)
    (tmp_path / "plant" / "job.toml").write_text(
        '[table]\nfile = "gate.XLSX"\nloads = ["LAMP", "HORN"]\n[formulas]\nBELL = "UP WIND"\n'
    )
    monkeypatch.chdir(tmp_path)
    job = load_job("plant/job.toml")
    assert job.relays == ("UP", "DOWN", "WIND")
    assert list(job.targets) == ["LAMP", "HORN", "BELL"]
    assert job.targets["LAMP"].on == 0b0001_0001
    (tmp_path / "plant" / "gate.XLSX").unlink()
    with pytest.raises(JobError) as caught:
        load_job("plant/job.toml")
    assert str(caught.value).startswith("plant/gate.XLSX: there is no such file\n")


SUM = "=SUM(A1:A2)"
WRONG = {
    "formula": (
        [["UP", "LAMP"], [0, 1], [1, "=A2"]],
        "gate.xlsx, sheet Gate, row 3: a cell holds a formula =A2\n  expected: 0, 1, - or a name\n"
        "  nothing in a table is worked out: paste values in place of formulas",
    ),
    "array formula": (
        [["UP", "LAMP"], [0, ArrayFormula("B2", SUM)]],
        "gate.xlsx, sheet Gate, row 2: a cell holds a formula\n  expected: 0, 1, - or a name\n"
        "  nothing in a table is worked out: paste values in place of formulas",
    ),
    "number between": (
        [["UP", "LAMP"], [0.5, 1]],
        "gate.xlsx, sheet Gate, row 2: 0.5 is no value of UP\n    0.5 1\n    ^^^\n"
        "  expected: 0, 1 or -",
    ),
    "date": (
        [["UP", "LAMP"], [0, date(2020, 1, 2)]],
        "gate.xlsx, sheet Gate, row 2: 2020-01-02 00:00:00 is no value of LAMP\n"
        "    0 2020-01-02 00:00:00\n      ^^^^^^^^^^^^^^^^^^^\n  expected: 0, 1 or -",
    ),
    "empty cell": (
        [["UP", "LAMP"], [0, 1], [1]],
        "gate.xlsx, sheet Gate, row 3: LAMP has no value\n    1 \n      ^\n  expected: 0, 1 or -\n"
        "  write - for both values of an input, or for a load that may be either",
    ),
    "too many cells": (
        [["UP", "LAMP"], [0, 1, 1]],
        "gate.xlsx, sheet Gate, row 2: the row has 3 cells\n    0 1 1\n"
        "  expected: 2, one for each column of the header",
    ),
    "number as a name": (
        [[1, "LAMP"], [0, 1]],
        'gate.xlsx, sheet Gate, row 1: "1" is no name for a relay or load: it needs at least'
        " one letter\n    1 LAMP\n    ^\n"
        "  expected: letters A-Z, digits and _, with at least one letter",
    ),
    "nothing": ([], "gate.xlsx: the table is empty\n  expected: a header of names, then rows"),
}


@pytest.mark.parametrize("case", WRONG)
def test_workbook_is_refused(case: str, tmp_path: Path, monkeypatch: Any) -> None:
    monkeypatch.chdir(tmp_path)
    rows, message = WRONG[case]
    workbook(Path("gate.xlsx"), rows)
    with pytest.raises(JobError) as caught:
        load_table_job("gate.xlsx", ["LAMP"])
    assert str(caught.value) == message


def damaged(change: Any) -> bytes:
    """A workbook whose sheet's text has been changed."""
    made = io.BytesIO()
    workbook(made, ROWS)  # type: ignore[arg-type]
    changed = io.BytesIO()
    with zipfile.ZipFile(made) as old, zipfile.ZipFile(changed, "w", zipfile.ZIP_DEFLATED) as new:
        for entry in old.namelist():
            data = old.read(entry)
            new.writestr(entry, change(data) if "sheet1" in entry else data)
    return changed.getvalue()


@pytest.mark.parametrize(
    ("data", "error"),
    [
        (b"", "BadZipFile"),
        (b"UP,LAMP\n0,1\n", "BadZipFile"),
        (damaged(lambda text: text[:-40]), "ParseError"),
        (damaged(lambda _: b"<a/>" * 3), "ParseError"),
    ],
    ids=["empty", "text", "cut off", "other text"],
)
def test_what_is_no_workbook(data: bytes, error: str, tmp_path: Path, monkeypatch: Any) -> None:
    monkeypatch.chdir(tmp_path)
    Path("gate.xlsx").write_bytes(data)
    with pytest.raises(JobError) as caught:
        load_table_job("gate.xlsx", ["LAMP"])
    assert str(caught.value) == (
        f"gate.xlsx: not an XLSX workbook ({error})\n"
        "  expected: a workbook as spreadsheet programs save it"
    )


def test_a_workbook_that_unpacks_to_far_more(tmp_path: Path, monkeypatch: Any) -> None:
    monkeypatch.setattr(sheet, "_MOST_UNPACKED", 1 << 20)
    path = tmp_path / "gate.xlsx"
    path.write_bytes(damaged(lambda text: text + b" " * (2 << 20)))
    assert path.stat().st_size < 1 << 18
    with pytest.raises(JobError, match="the workbook is too large"):
        load_table_job(path, ["LAMP"])


def test_a_workbook_with_a_cell_far_away(tmp_path: Path) -> None:
    path = tmp_path / "gate.xlsx"
    book = openpyxl.Workbook()
    for row in ROWS:
        book.active.append(row)
    book.active["XFD1048576"] = 1
    book.save(path)
    with pytest.raises(JobError, match="the table is too large"):
        load_table_job(path, ["LAMP", "HORN"])


def test_wide_empty_cells_are_passed_over_up_to_a_limit(tmp_path: Path, monkeypatch: Any) -> None:
    rows = [row + [""] * 500 for row in ROWS]
    path = workbook(tmp_path / "gate.xlsx", rows)
    for row in openpyxl.load_workbook(path).active.iter_rows(min_col=5):
        assert all(cell.value is None for cell in row)
    assert as_read(load_table_job(path, ["LAMP", "HORN"])) == EXPECTED
    monkeypatch.setattr(sheet, "_MOST_CELLS", 10)
    with pytest.raises(JobError, match="the table is too large"):
        load_table_job(path, ["LAMP", "HORN"])
