"""`contactlogic hazards` from the outside, and its texts with hostile names."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from typer.testing import CliRunner

from contactlogic.cli.app import app
from contactlogic.design import Bound, Design, Result
from contactlogic.hazard import pairs_within, study_hazards
from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole
from contactlogic.report.designfile import dumps
from contactlogic.report.hazards import hazards_markdown, hazards_text
from contactlogic.truth import Target

JOB = '[formulas]\nLAMP = "A B + A\' C"\n'
TABLE = Target(3, 0b11011000)  # A B + A' C over A, B, C

NETWORK = Network(
    ("A", "B", "C"),
    "L",
    {"LAMP": "x"},
    (
        Pole("A", 1, "x", "b", "c"),
        Pole("B", 1, "b", "L"),
        Pole("C", 1, "c", "L"),
    ),
)


@pytest.fixture(autouse=True)
def _folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    Path("job.toml").write_text(JOB)
    job = Job("T", ("A", "B", "C"), (Load("LAMP", TABLE),), 0xFF)
    result = Result(job, (Design("ladder", NETWORK, Bound(3, True), 8),), job.relays)
    Path("design.json").write_text(dumps(result))


def hazards(*arguments):
    return CliRunner().invoke(app, ["hazards", *arguments])


def test_a_drop_out_is_named_with_pole_move_and_cure():
    run = hazards("design.json", "job.toml")
    assert run.exit_code == 0
    assert "LAMP drops out while A moves (1 move, B=1 C=1): A pole 1 open" in run.output
    assert "cured by form D (make before break) on A pole 1" in run.output


@pytest.mark.parametrize("arguments", [("design.json", "job.toml"), ("design.json",)])
def test_where_none_is_wanted_one_is_enough_for_status_1(arguments):
    assert hazards(*arguments, "--none", "--quiet").exit_code == 1
    assert not hazards(*arguments, "--none", "--quiet").output


def test_json_lists_rows_poles_and_cure():
    run = hazards("design.json", "--json")
    (design,) = json.loads(run.output)["designs"]
    (entry,) = design["hazards"]
    assert entry["rows"] == ["011"]
    assert entry["poles"] == [{"relay": "A", "pole": 1, "position": "open"}]
    assert entry["cure"]["form_d"] == [["A", 1]]


def test_a_job_alone_is_wired_first():
    run = hazards("job.toml", "--form", "ladder")
    assert run.exit_code == 0
    assert run.output.startswith("ladder ")


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("job.toml", "design.json"), "is no design file"),
        (("design.json", "--form", "bridge"), "no bridge"),
        (("design.json", "--loads", "LAMP"), "bare table"),
        (("nothing.json",), "nothing.json"),
    ],
)
def test_what_cannot_be_used_is_refused_with_status_2(arguments, said):
    run = hazards(*arguments)
    assert run.exit_code == 2
    assert said in run.stderr


def test_a_design_that_is_not_as_wanted_is_refused():
    Path("job.toml").write_text('[formulas]\nLAMP = "A B C"\n')
    run = hazards("design.json", "job.toml")
    assert run.exit_code == 2
    assert "not as the job wants it" in run.stderr


def test_the_moves_of_a_sequence_are_its_steps():
    Path("job.toml").write_text(
        '[sequence]\ncolumns = "A B | STRIKE"\n'
        'rows = """\n1 0 | 1\n1 1 | 1\n0 1 | 0\n0 0 | 0\n"""\n'
    )
    run = hazards("job.toml", "--form", "bridge", "--json")
    (design,) = json.loads(run.output)["designs"]
    assert design["moves"] == 4


def test_hostile_names_become_no_markup():
    name = "<b>|`*_x\x1b[31m\n# "
    network = Network(("A", "B", "C"), "L", {name: "x"}, NETWORK.poles)
    job = Job("", network.relays, (Load(name, TABLE),), 0xFF)
    study = study_hazards(network, job, pairs_within(network.relays, 0xFF))
    assert "\x1b" not in hazards_text(study)
    page = hazards_markdown(study)
    assert "\x1b" not in page
    assert "<b>" not in page.replace("\\<b\\>", "")
    (row,) = [line for line in page.splitlines() if "drops out" in line]
    assert row.replace("\\|", "").count("|") == 8
