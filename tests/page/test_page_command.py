"""`contactlogic page` and `wire --page` from the outside."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import handmade
import pytest
from page.pages import RING, RING_JOB
from typer.testing import CliRunner
from typer.testing import Result as Done

from contactlogic.cli.app import app
from contactlogic.design import Bound, Design, Result
from contactlogic.job import load_job
from contactlogic.report.designfile import dumps
from contactlogic.sequencer import as_table_job

JOB = '[formulas]\nLAMP = "UP DOWN\' + FLOOD"\nHORN = "UP\' DOWN"\n'
_RUN = "from contactlogic.cli import main; main()"
PARTS = "part,poles,form,coil_volts,contact_amps,price\n<b>=1+1,2,C,24 V DC,6,2.50\n"


@pytest.fixture(autouse=True)
def _here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("job.toml").write_text(JOB)
    Path("parts.csv").write_text(PARTS)
    network = handmade.SLUICE_NETWORK
    design = Design("ladder", network, Bound(3, False), 8)
    wanted = replace(handmade.SLUICE_JOB, relays=network.relays)
    Path("design.json").write_text(dumps(Result(wanted, (design,), network.relays)))


def run(*arguments: str) -> Done:
    return CliRunner().invoke(app, ["page", *arguments])


def test_a_design_and_its_job_with_everything() -> None:
    done = run("design.json", "job.toml", "--parts", "parts.csv", "--out", "all.html")
    assert done.exit_code == 0, done.output
    assert done.stdout == "written: all.html\n"
    text = Path("all.html").read_text()
    for heading in (
        "Live drawing",
        "Wires to tick off",
        "Hazards",
        "Single faults",
        "Purchase",
        "1. Dead",
    ):
        assert f">{heading}</h" in text, heading
    assert "&lt;b&gt;=1+1" in text
    assert "☐" in text
    assert "&amp;#" not in text
    assert "<b>" not in text


def test_the_page_of_a_design_without_a_job_is_named_after_it() -> None:
    assert run("design.json").exit_code == 0
    assert "Live drawing" in Path("design.html").read_text()


def test_a_job_is_wired_first() -> None:
    done = run("job.toml", "--effort", "0", "--form", "ladder")
    assert done.exit_code == 0, done.output
    assert "Single faults" in Path("job.html").read_text()


def test_a_sequencer_wired_already_is_shown_with_its_proof() -> None:
    Path("ring.toml").write_text(RING_JOB)
    wanted = as_table_job(load_job("ring.toml"))
    design = Design("bridge", RING, Bound(4, False), 16)
    Path("ring.json").write_text(dumps(Result(wanted, (design,), RING.relays)))
    done = run("ring.json", "ring.toml")
    assert done.exit_code == 0, done.output
    text = Path("ring.html").read_text()
    assert "Recovery from every power-on state" in text
    assert text.count('src="data:image/svg+xml;base64,') == 2
    assert "1: 1100, dwells, then NORTH releases, row 1" in text


def test_wire_writes_the_page_on_request_and_takes_it_away_again() -> None:
    ask = ["wire", "job.toml", "--effort", "0", "--form", "ladder", "--out", "papers"]
    assert CliRunner().invoke(app, [*ask, "--page"]).exit_code == 0
    text = Path("papers/report.html").read_text()
    assert "Live drawing" in text
    assert CliRunner().invoke(app, ask).exit_code == 0, "its own folder is written again"
    assert not Path("papers/report.html").exists(), "papers of two runs never lie together"


def test_other_files_are_never_written_over() -> None:
    Path("mine.html").write_text("<p>mine</p>")
    done = run("design.json", "--out", "mine.html")
    assert done.exit_code == 2
    assert "no page of contactlogic's" in done.stderr
    assert Path("mine.html").read_text() == "<p>mine</p>"
    assert run("design.json", "--out", "mine.html", "--force").exit_code == 0
    assert run("design.json", "--out", "mine.html").exit_code == 0, "now it is one of ours"


@pytest.mark.parametrize(
    ("out", "said"),
    [("no/where.html", "there is no folder no"), (".", "this is a folder")],
)
def test_places_that_cannot_be_written_are_told_before_any_work(out: str, said: str) -> None:
    done = run("missing.json", "--out", out)
    assert done.exit_code == 2
    assert said in done.stderr


def test_a_design_that_is_not_as_the_job_wants_it_gives_no_page() -> None:
    Path("job.toml").write_text(JOB.replace('HORN = "UP\' DOWN"', 'HORN = "UP DOWN"'))
    done = run("design.json", "job.toml")
    assert done.exit_code == 2
    assert not Path("design.html").exists()


def test_the_page_is_the_same_whatever_the_hashes() -> None:
    texts = []
    for seed in ("1", "2"):
        subprocess.run(
            [sys.executable, "-c", _RUN, "page", "design.json", "job.toml", "-q"],
            env=os.environ | {"PYTHONHASHSEED": seed},
            check=True,
        )
        texts.append(Path("design.html").read_bytes())
    assert texts[0] == texts[1]
