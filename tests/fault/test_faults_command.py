"""`contactlogic faults` from the outside, and its texts with hostile names."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest
from fault.panels import wired
from strategies import numbered
from typer.testing import CliRunner

from contactlogic.cli.app import app
from contactlogic.design import Bound, Design, Result
from contactlogic.fault import study_faults
from contactlogic.job import load_job
from contactlogic.job.model import Fittings
from contactlogic.network import Network, Pole
from contactlogic.report.designfile import dumps
from contactlogic.report.faults import faults_markdown, faults_text
from contactlogic.report.panels import panel_of_design

JOB = '[formulas]\nLAMP = "A B\'"\nHORN = "A"\n'
NETWORK = Network(
    ("A", "B"),
    "L",
    {"LAMP": "x", "HORN": "h"},
    (Pole("A", 1, "L", "h"), Pole("B", 1, "h", None, "x")),
)


def write(job=JOB, network=NETWORK, repeaters=None):
    Path("job.toml").write_text(job)
    wanted = load_job("job.toml")
    design = Design("ladder", network, Bound(2, False), 4)
    result = Result(wanted, (design,), network.relays, repeaters or {})
    Path("design.json").write_text(dumps(result))
    return design, wanted


@pytest.fixture(autouse=True)
def _folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    write()


def faults(*arguments):
    return CliRunner().invoke(app, ["faults", *arguments])


def test_what_turns_a_load_on_comes_first_with_row_and_terminals():
    run = faults("design.json", "job.toml")
    assert run.exit_code == 0
    lines = run.output.splitlines()
    first = lines.index("turn a load on wrongly:")
    assert "  coil of B dead: LAMP on in A=1 B=1" in lines[first:]
    assert first < lines.index("only turn a load off:")
    assert any("A pole 1 welded on make (A:11 to A:14)" in line for line in lines[first:])


def test_a_load_that_no_open_fault_may_turn_on_decides_the_status():
    guilty = faults("design.json", "job.toml", "--fail-off", "LAMP")
    assert guilty.exit_code == 1
    assert "open fault turns LAMP on: coil of B dead" in guilty.output
    innocent = faults("design.json", "job.toml", "--fail-off", "HORN")
    assert innocent.exit_code == 0
    assert "no single open fault turns HORN on" in innocent.output
    assert faults("design.json", "job.toml", "--fail-off", "HRON").exit_code == 2


def test_json_lists_each_fault_with_its_rows():
    run = faults("design.json", "--json")
    (design,) = json.loads(run.output)["designs"]
    dead = next(f for f in design["faults"] if f["kind"] == "coil dead" and f["relay"] == "B")
    assert dead["turns_on"] == {"LAMP": ["11"]}
    assert dead["open"] is True
    assert design["loads"]["LAMP"]["turned_on_by_open_faults"] == 1


def test_guided_relays_are_those_of_the_job():
    job = '[formulas]\nLAMP = "A"\nHORN = "A\'"\n[limits]\nguided = "A"\n'
    network = Network(
        ("A",),
        "L",
        {"LAMP": "x", "HORN": "h"},
        (Pole("A", 1, "L", "x"), Pole("A", 2, "L", None, "h")),
    )
    write(job, network)
    guided = faults("design.json", "job.toml").output
    welded = next(line for line in guided.splitlines() if "A pole 1 welded on make" in line)
    assert "HORN off in A=0" in welded  # while the make is welded the break stays open
    write(job.replace('guided = "A"', ""), network)
    plain = faults("design.json", "job.toml").output
    welded = next(line for line in plain.splitlines() if "A pole 1 welded on make" in line)
    assert "HORN" not in welded


def test_fuses_and_series_resistors_conduct_and_their_wires_can_be_off():
    design, job = write()
    fitted = {"LAMP": Fittings(fuse="1 A"), "HORN": Fittings(series="10 ohm")}
    job = replace(job, bench=replace(job.bench, fittings=fitted))
    panel = panel_of_design(design, job)
    study = study_faults(panel, job.targets)
    assert ("LAMP/fuse:1", "LAMP/fuse:2") in panel.links
    for part, load in (("LAMP/fuse", "LAMP"), ("HORN/series", "HORN")):
        off = [e for e in study.effects if f"{part}:2" in e.fault.ends]
        assert [list(e.turns_off) for e in off] == [[load]]


def test_a_repeater_s_coil_in_parallel_is_a_load_of_its_own():
    sequence = (
        '[sequence]\ncolumns = "P A | STRIKE"\ninputs = "P"\n'
        'rows = """\n0 0 | 0\n1 0 | 0\n1 1 | 1\n0 1 | 0\n"""\n'
    )
    Path("job.toml").write_text(sequence)
    from contactlogic.sequencer import as_table_job

    job = as_table_job(load_job("job.toml"))
    network = Network(
        ("P", "A", "A2"),
        "L",
        {"A": "a", "STRIKE": "s"},
        (Pole("P", 1, "L", "a"), Pole("A2", 1, "a", "s")),
    )
    panel = panel_of_design(Design("ladder", network, Bound(2, False), 4), job, {"A2": "A"})
    assert panel.loads["A2"] == ("A2:A1", "A2:A2")
    assert any(wire.start == "A:A1" and wire.end == "A2:A1" for wire in panel.wires)


def test_hostile_names_become_no_markup():
    name = "<b>|`*_x\x1b[31m\n# "
    network = Network(("A",), "L", {name: "x"}, numbered(("A",), [("A", "L", "x", None)]))
    panel, job = wired(network)
    study = study_faults(panel, job.targets)
    assert "\x1b" not in faults_text(study)
    page = faults_markdown(study)
    assert "\x1b" not in page
    assert "<b>" not in page.replace("\\<b\\>", "")
    for row in (line for line in page.splitlines() if line.startswith("| A pole")):
        assert row.replace("\\|", "").count("|") == 3
