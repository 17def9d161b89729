"""Every refusal of a job, to the letter: golden/refusals.txt is what the user reads."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from input.refused_jobs import CSV, SEQUENCES, TOML

from contactlogic.errors import JobError
from contactlogic.job import load_job, load_table_job, sheet, table

GOLDEN = Path(__file__).parent / "golden"


def golden(file: str = "refusals.txt") -> dict[str, str]:
    """Message by case."""
    text = (GOLDEN / file).read_text(encoding="utf-8")
    return {
        name: message.strip("\n")
        for name, message in re.findall(r"^## (.*)\n((?:(?!## ).*\n)*)", text, re.MULTILINE)
    }


@pytest.fixture(autouse=True)
def _in_an_empty_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


@pytest.mark.parametrize("case", TOML)
def test_job_file_is_refused(case: str) -> None:
    Path("job.toml").write_text(TOML[case], encoding="utf-8")
    with pytest.raises(JobError) as caught:
        load_job("job.toml")
    assert str(caught.value) == golden()[f"job.toml: {case}"]


@pytest.mark.parametrize("case", CSV)
def test_bare_table_is_refused(case: str) -> None:
    Path("gate.csv").write_text(CSV[case], encoding="utf-8")
    with pytest.raises(JobError) as caught:
        load_table_job("gate.csv", ["LAMP"])
    assert str(caught.value) == golden()[f"gate.csv: {case}"]


@pytest.mark.parametrize("case", SEQUENCES)
def test_sequence_job_is_refused(case: str) -> None:
    Path("ring.toml").write_text(SEQUENCES[case], encoding="utf-8")
    with pytest.raises(JobError) as caught:
        load_job("ring.toml")
    assert str(caught.value) == golden("sequence_refusals.txt")[case]


def test_golden_text_has_no_case_too_many() -> None:
    cases = [f"job.toml: {case}" for case in TOML] + [f"gate.csv: {case}" for case in CSV]
    assert list(golden()) == cases
    assert list(golden("sequence_refusals.txt")) == list(SEQUENCES)


def test_messages_are_short() -> None:
    for case, message in (golden() | golden("sequence_refusals.txt")).items():
        assert len(message.splitlines()) <= 5, case
        assert max(map(len, message.splitlines())) <= 160, case


def test_missing_file() -> None:
    with pytest.raises(JobError) as caught:
        load_job("gate.toml")
    assert str(caught.value) == (
        "gate.toml: there is no such file\n  check the name and the folder"
    )


def test_folder() -> None:
    Path("gate.toml").mkdir()
    with pytest.raises(JobError) as caught:
        load_job(Path("gate.toml"))
    assert str(caught.value) == "gate.toml: this is a folder\n  expected: a file"


def test_unreadable_file() -> None:
    with pytest.raises(JobError) as caught:
        load_job("gate\0.toml")
    assert "the file cannot be read: embedded null byte" in str(caught.value)


def test_not_utf_8() -> None:
    Path("gate.toml").write_bytes('title = "a"\n# Höhe\n'.encode("latin-1"))
    with pytest.raises(JobError) as caught:
        load_job("gate.toml")
    assert str(caught.value) == (
        "gate.toml: the file is not UTF-8 text (line 2)\n  expected: text in UTF-8\n"
        "  save it again as UTF-8"
    )


def test_too_large_a_file() -> None:
    Path("gate.toml").write_bytes(b"#" * (17 << 20))
    with pytest.raises(JobError) as caught:
        load_job("gate.toml")
    assert str(caught.value) == "gate.toml: the file is too large\n  expected: at most 16 MiB"


def test_bare_table_as_a_job_file() -> None:
    with pytest.raises(JobError) as caught:
        load_job("gate.csv")
    assert str(caught.value) == (
        "gate.csv: this is a bare table, not a job file\n"
        "  expected: a job file in TOML, or the names of the table's loads beside it"
    )


def test_too_many_rows(monkeypatch: pytest.MonkeyPatch) -> None:
    assert table.MOST_ROWS == 2 * 2**16
    for module in (table, sheet):
        monkeypatch.setattr(module, "MOST_ROWS", 100)
    for count in (100, 101):
        Path("job.toml").write_text(
            '[table]\ncolumns = "UP | LAMP"\nrows = """\n' + "- | 0\n" * count + '"""\n'
        )
        Path("gate.csv").write_text("UP,LAMP\n" + "-,0\n" * count)
        if count == 100:
            assert load_job("job.toml").targets == load_table_job("gate.csv", ["LAMP"]).targets
    with pytest.raises(JobError) as caught:
        load_job("job.toml")
    assert str(caught.value) == (
        "job.toml, [table]: the table has more than 100 rows\n  expected: fewer rows"
    )
    with pytest.raises(JobError) as caught:
        load_table_job("gate.csv", ["LAMP"])
    assert str(caught.value) == (
        "gate.csv: the table is too large\n"
        "  expected: at most 100 rows, 1088 columns, 3000000 cells"
    )


@pytest.mark.parametrize(
    ("loads", "unlisted", "message"),
    [
        ([], None, "which columns are loads is not said\n  expected: at least one load"),
        (["LAMP"], "of", 'unlisted cannot be "of"\n  expected: "off" or "free"'),
        (["LAMP", "LAMP"], None, "LAMP is named twice\n    LAMP LAMP\n         ^^^^\n"
         "  expected: each relay and load once"),
    ],
)  # fmt: skip
def test_bare_table_asked_for_wrongly(loads: list[str], unlisted: str, message: str) -> None:
    Path("gate.csv").write_text("UP,LAMP\n0,0\n1,1\n")
    with pytest.raises(JobError) as caught:
        load_table_job("gate.csv", loads, unlisted)
    assert str(caught.value) == f"gate.csv: {message}"
