"""Rows to targets, against a walk over every setting."""

from __future__ import annotations

from itertools import product
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from strategies import relay_columns

from contactlogic.errors import JobError, Place, TableError
from contactlogic.job import load_job
from contactlogic.job.table import Grid, GridRow, read_columns, read_rows, targets_of

LOADS = ("X", "Y")


@st.composite
def grids(draw: st.DrawFn) -> tuple[tuple[str, ...], list[tuple[str, ...]]]:
    """Relay names and rows of cells for two loads; rows may overlap, contradict or be missing."""
    n = draw(st.integers(1, 4))
    relays = draw(relay_columns(n).filter(lambda names: not {"X", "Y"} & {*map(str.upper, names)}))
    cell = st.sampled_from("01-")
    rows = draw(st.lists(st.tuples(*[cell] * (n + 2)), min_size=1, max_size=8))
    return relays, rows


def wanted(n: int, rows: list[tuple[str, ...]]) -> dict[tuple[int, ...], tuple[set[str], ...]]:
    """All that rows say of each load in each setting, by matching cell after cell."""
    said = {}
    for setting in product((0, 1), repeat=n):
        matching = [
            row
            for row in rows
            if all(cell == "-" or int(cell) == bit for cell, bit in zip(row, setting, strict=False))
        ]
        said[setting] = tuple({row[n + k] for row in matching} for k in range(2))
    return said


@given(grids(), st.sampled_from([None, "off", "free"]))
def test_targets_are_what_the_rows_say(
    given_grid: tuple[tuple[str, ...], list[tuple[str, ...]]], unlisted: str | None
) -> None:
    relays, rows = given_grid
    n = len(relays)
    place = Place("job.toml", "table")
    text = "\n".join(" ".join(row[:n]) + " | " + " ".join(row[n:]) for row in rows)
    grid = Grid(relays, LOADS, read_rows(text, n, 2, place), place)
    said = wanted(n, rows)
    contradict = any({"0", "1"} <= values for both in said.values() for values in both)
    missing = any(not both[0] for both in said.values())
    if contradict or (missing and unlisted is None):
        with pytest.raises(TableError, match="here, but" if contradict else "missing"):
            targets_of(grid, unlisted)
        return
    targets, listed = targets_of(grid, unlisted)
    assert list(targets) == list(LOADS)
    for setting, both in said.items():
        number = sum(2**i for i in range(n) if setting[i])  # relay i is bit i
        assert bool(listed >> number & 1) == bool(both[0])
        for load, values in zip(LOADS, both, strict=True):
            on, free = targets[load].on >> number & 1, targets[load].free >> number & 1
            if not values:
                assert (on, free) == (0, unlisted == "free")
            else:
                fixed = values - {"-"}  # a fixed value holds against a free one
                assert (on, free) == (int("1" in fixed), int(not fixed))


def test_bit_order_of_a_table(tmp_path: Path) -> None:
    # the first column is bit 0 of the row number: UP alone is row 1, DOWN alone row 2
    path = tmp_path / "job.toml"
    path.write_text(
        '[table]\ncolumns = "UP DOWN | LAMP HORN"\nrows = """\n0 0 | 0 -\n1 0 | 1 0\n'
        '0 1 | 0 1\n1 1 | 0 -\n"""\n'
    )
    job = load_job(path)
    assert job.relays == ("UP", "DOWN")
    assert job.targets["LAMP"].on == 0b0010
    assert (job.targets["HORN"].on, job.targets["HORN"].free) == (0b0100, 0b1001)
    assert job.listed == 0b1111


@pytest.mark.parametrize(
    "rows",
    [
        "0 0 | 0\n1 - | 1\n0 1 | -",
        "  0 0 0\n\n1 - 1   # a comment | with a bar\n# 0 0 | 1\n0 1 -\n",
        "0,0|0\n1,-,1\n0 ,1, | -",
        "0\t0\t|\t0\n1\t-\t|\t1\n0\t1\t|\t-",
        "0 0 | 0\r\n1 - | 1\r\n0 1 | -\r\n",
    ],
    ids=["plain", "comments", "commas", "tabs", "line ends"],
)
def test_ways_of_writing_rows(rows: str) -> None:
    cells = [row.cells for row in read_rows(rows, 2, 1, Place())]
    assert cells == [("0", "0", "0"), ("1", "-", "1"), ("0", "1", "-")]


def test_columns() -> None:
    assert read_columns("UP, DOWN|LAMP ,HORN", Place()) == (("UP", "DOWN"), ("LAMP", "HORN"))


def test_rows_are_counted_and_found_in_the_file(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    texts = {
        '# a job\n\n[table]\ncolumns = "A | X"\nrows = """\n# rows\n0 | 0\n\n0 | 1\n"""\n': 9,
        "[table]\nrows = '''0 | 0\n0 | 1'''\ncolumns = 'A | X'": 3,
        'table.columns = "A | X"\r\ntable.rows = """\r\n0 | 0\r\n0 | 1"""\r\n': 4,
    }
    for text, line in texts.items():
        path.write_bytes(text.encode())
        with pytest.raises(JobError) as caught:
            load_job(path)
        assert caught.value.place.row == f"row 2, line {line}", text
    # rows written with escapes stand on no line of their own
    path.write_text('[table]\ncolumns = "A | X"\nrows = "0 | 0\\n0 | 1"\n')
    with pytest.raises(JobError) as caught:
        load_job(path)
    assert caught.value.place.row == "row 2"


def test_a_full_table_of_sixteen_inputs(tmp_path: Path) -> None:
    lines = []
    for number in range(1 << 16):
        bits = [number >> i & 1 for i in range(16)]
        wants = [number.bit_count() % 2, number % 3 == 0, *[bits[i] for i in range(6)]]
        lines.append(" ".join(map(str, bits)) + " | " + " ".join(str(int(w)) for w in wants))
    path = tmp_path / "job.toml"
    columns = " ".join(f"K{i}" for i in range(16)) + " | " + " ".join(f"L{i}" for i in range(8))
    path.write_text(f'[table]\ncolumns = "{columns}"\nrows = """\n' + "\n".join(lines) + '\n"""\n')
    job = load_job(path)
    assert job.listed == (1 << (1 << 16)) - 1
    for number in range(0, 1 << 16, 97):
        assert job.targets["L0"].on >> number & 1 == number.bit_count() % 2
        assert job.targets["L1"].on >> number & 1 == (number % 3 == 0)
        assert job.targets["L7"].on >> number & 1 == number >> 5 & 1


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=60)
@given(st.text("01-|, #\n\tx", max_size=40))
def test_any_rows_are_read_or_refused(rows: str) -> None:
    refusal = None
    try:
        read = read_rows(rows, 2, 1, Place())
        if read:
            targets_of(Grid(("A", "B"), ("X",), read, Place()), "free")
    except JobError as error:
        refusal = str(error)
    assert refusal is None or "expected" in refusal


def test_a_caret_stands_under_a_sheets_cells_of_any_shape() -> None:
    row = GridRow(("", "a b", "1"), "row 1", " a b 1", of_sheet=True)
    assert [row.place(k, Place()).column for k in range(3)] == [0, 1, 5]
