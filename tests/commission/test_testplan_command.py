"""`contactlogic testplan` from the outside, and its sheet with hostile names."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from fault.panels import wired
from strategies import numbered
from typer.testing import CliRunner

from contactlogic.cli.app import app
from contactlogic.commission import plan_test
from contactlogic.design import Bound, Design, Result
from contactlogic.job import load_job
from contactlogic.network import Network, Pole
from contactlogic.report.commissioning import commissioning_sheet, plan_text
from contactlogic.report.designfile import dumps

NETWORK = Network(("A", "B"), "L", {"LAMP": "x"}, (Pole("A", 1, "L", "h"), Pole("B", 1, "h", "x")))


@pytest.fixture(autouse=True)
def _folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    Path("job.toml").write_text('[formulas]\nLAMP = "A B"\n[supply]\nfeed = "+24 V"\n')
    job = load_job("job.toml")
    result = Result(job, (Design("ladder", NETWORK, Bound(2, True), 4),), job.relays)
    Path("design.json").write_text(dumps(result))


def testplan(*arguments):
    return CliRunner().invoke(app, ["testplan", *arguments])


testplan.__test__ = False


def test_the_rows_are_printed_in_their_order():
    run = testplan("design.json", "job.toml")
    assert run.exit_code == 0
    assert "3 rows (the least there are: proved) and 3 looks" in run.output
    assert run.output.count("look at LAMP") == 3


def test_the_sheet_goes_from_dead_to_indicators_to_loads_with_boxes():
    run = testplan("design.json", "job.toml", "--sheet", "sheet.md", "--quiet")
    assert run.exit_code == 0
    assert not run.output
    sheet = Path("sheet.md").read_text()
    parts = [line for line in sheet.splitlines() if line.startswith("## ")]
    assert [part.split(".")[0] for part in parts[:3]] == ["## 1", "## 2", "## 3"]
    assert [part[6:10] for part in parts[:2]] == ["Dead", "Live"]
    assert "discharged" in sheet.split("## 2.")[0]
    assert "rail to rail" in sheet.split("## 2.")[0]
    assert "| A:11 | 1 | &#9744; |" in sheet  # one wire, from the rail
    assert sheet.count("&#9744;") > 15
    assert "Local codes" in sheet


def test_a_sheet_that_is_there_is_kept_unless_forced():
    Path("sheet.md").write_text("mine")
    run = testplan("design.json", "--sheet", "sheet.md")
    assert run.exit_code == 2
    assert Path("sheet.md").read_text() == "mine"
    assert testplan("design.json", "--sheet", "sheet.md", "--force").exit_code == 0
    assert testplan("design.json", "--sheet", "none/sheet.md").exit_code == 2


def test_json_holds_the_steps():
    (design,) = json.loads(testplan("design.json", "--json").output)["designs"]
    assert design["least_rows"] is True
    assert {step["row"] for step in design["steps"]} == {"11", "01", "10"}
    assert all(step["look_at"] == step["loads"] for step in design["steps"])


def test_hostile_names_become_no_markup():
    name = "<b>|`*_x\x1b[31m\n# "
    network = Network(("A",), "L", {name: "x"}, numbered(("A",), [("A", "L", "x", None)]))
    panel, job = wired(network, title="![](http://x) <script>")
    plan = plan_test(panel, job.listed)
    assert "\x1b" not in plan_text(plan)
    sheet = commissioning_sheet(plan, panel, job, "ladder 123456 <script>")
    assert "\x1b" not in sheet
    assert "<script>" not in sheet.replace("\\<script\\>", "")
    assert "<b>" not in sheet.replace("\\<b\\>", "")
    for row in (line for line in sheet.splitlines() if line.startswith("| 1 | operate")):
        assert row.replace("\\|", "").count("|") in (4, 6)
