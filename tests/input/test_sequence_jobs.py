"""Sequence, pattern and drives jobs as values."""

from __future__ import annotations

from pathlib import Path

from input.refused_jobs import drives, pattern, sequence

from contactlogic.formula import parse
from contactlogic.job import load_job
from contactlogic.job.model import DrivesJob, LoadFacts, PatternJob, SequenceJob, Supply
from contactlogic.job.sequence import Branch, Timing


def read(folder: Path, text: str) -> object:
    path = folder / "ring.toml"
    path.write_text(text, encoding="utf-8")
    return load_job(path)


def test_a_sequence(tmp_path: Path) -> None:
    job = read(
        tmp_path,
        sequence(
            more='[timing]\nslow_release = "A, B"\nslow_operate = "C"\n'
            '[supply]\nfeed = "+24 V"\n[loads]\nSTRIKE = { kind = "horn" }\nA = { amps = 0.1 }\n'
            "[limits]\npoles = { A = 2 }\n"
        ),
    )
    assert isinstance(job, SequenceJob)
    table = job.table
    assert job.title == "ring"
    assert table.columns == ("A", "B", "C", "D")
    assert table.loads == ("STRIKE",)
    assert [row.columns for row in table.rows] == [
        (1, 1, 0, 0),
        (0, 1, 1, 0),
        (0, 0, 1, 1),
        (1, 0, 0, 1),
    ]
    assert [row.loads for row in table.rows] == [(0,), (1,), (0,), (1,)]
    assert table.repeat
    assert table.inputs == ()
    assert table.inputs_return
    assert table.memory == "allowed"
    assert table.timing == Timing(("A", "B"), ("C",))
    assert job.supply == Supply("+24 V")
    assert job.facts == {"STRIKE": LoadFacts("horn"), "A": LoadFacts(None, 0.1)}
    assert job.limits.poles == {"A": 2}
    assert job.isolated == {"A", "B", "C"}


def test_a_sequence_with_everything_else(tmp_path: Path) -> None:
    job = read(
        tmp_path,
        sequence(
            "0 0 0\n1 0 0\n1 0 1  # the lamp of Q\n0 1 0\n0 1 1",
            "P Q A",
            'repeat = false\ninputs = "P, Q"\ninputs_return = false\nmemory = "forbidden"\n'
            'branches = [{ after = 1, when = "Q", goto = 4 }]\n[limits]\nisolate = "all"\n',
        ),
    )
    assert isinstance(job, SequenceJob)
    assert job.table.loads == ()
    assert job.table.rows[2].label == "row 3, line 6"
    assert job.table.rows[2].text == "1 0 1"
    assert job.table.inputs == ("P", "Q")
    assert (job.table.repeat, job.table.inputs_return) == (False, False)
    assert job.table.memory == "forbidden"
    assert job.table.branches == (Branch(1, "Q", 4),)
    assert job.isolated == {"A"}


def test_a_pattern(tmp_path: Path) -> None:
    job = read(tmp_path, 'title = "Crossing"\n' + pattern("1 0 0\n1 - 0\n0 0 1"))
    assert isinstance(job, PatternJob)
    assert job.title == "Crossing"
    assert job.pattern.loads == ("RED", "AMBER", "GREEN")
    assert job.pattern.rows == ((1, 0, 0), (1, None, 0), (0, 0, 1))
    assert job.pattern.step == "ring"


def test_drives_stand_in_key_order_and_inputs_as_they_appear(tmp_path: Path) -> None:
    timing = '[timing]\nslow_release = "B"\n'
    job = read(tmp_path, drives(timing, B="A Z + 2oo3(A, B, Y)", A="Y'"))
    assert isinstance(job, DrivesJob)
    assert job.columns == ("B", "A", "Z", "Y")
    assert job.inputs == ("Z", "Y")
    assert job.drives == {"B": parse("A Z + 2oo3(A, B, Y)"), "A": parse("Y'")}
    assert job.formulas == {"B": "A Z + 2oo3(A, B, Y)", "A": "Y'"}
    assert job.timing == Timing(("B",))
    assert job.table is None


def test_drives_may_be_meant_for_a_sequence(tmp_path: Path) -> None:
    ring = drives(D="C B'", C="B A'", B="A D'", A="D C'")
    job = read(tmp_path, sequence(more='[timing]\nslow_release = "A"\n') + ring)
    assert isinstance(job, DrivesJob)
    assert job.columns == ("A", "B", "C", "D")
    assert job.table is not None
    assert job.table.memory == "forbidden"
    assert job.timing == Timing(("A",))
