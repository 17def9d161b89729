"""Wiring without hazards: judged by trying every position of every pole."""

from __future__ import annotations

from pathlib import Path

import pytest
from hazard.mixtures import by_trying
from hypothesis import given, settings
from strategies import several_targets
from typer.testing import CliRunner

from contactlogic.check import prove
from contactlogic.cli.app import app
from contactlogic.hazard import HazardPenalty, listed_moves
from contactlogic.hazard.steady import steady_ladder
from contactlogic.hazardfree import wire_hazard_free
from contactlogic.job import load_job
from contactlogic.job.model import Job, Load
from contactlogic.synthesis import Search
from contactlogic.truth import Target


def job_of(targets, listed=None):
    n = next(iter(targets.values())).n
    loads = tuple(Load(name, target) for name, target in targets.items())
    return Job("T", tuple("ABCD"[:n]), loads, (1 << (1 << n)) - 1 if listed is None else listed)


@given(several_targets(3, most=2))
@settings(max_examples=60)
def test_the_ladder_that_the_search_starts_from_is_right_and_has_no_hazard(targets):
    job = job_of(targets)
    moves = listed_moves(job)
    ladder = steady_ladder(job, moves)
    assert prove(ladder, targets, form="ladder").ok
    assert not by_trying(ladder, moves.released, targets)
    assert HazardPenalty(moves, targets)(ladder) == 0


def test_hazards_are_wired_out_and_the_price_in_poles_is_told():
    table = 0b11011000  # A B + A' C, and its opposite: one changeover of A hands over both feeds
    job = job_of({"X": Target(3, table), "Y": Target(3, 0xFF ^ table)})
    result = wire_hazard_free(job, Search("bridge", effort=4, workers=1))
    (design,) = result.designs
    assert not by_trying(design.network, listed_moves(job).released, job.targets)
    poles = len(design.network.poles)
    assert poles > 3
    assert f"{poles} poles, {poles - 3} more than the 3 found with hazards" in design.notes[-1]


def test_moves_that_are_not_listed_cost_nothing():
    job = job_of({"X": Target(3, 0b11011000)}, listed=0b10111111)
    result = wire_hazard_free(job, Search("ladder", effort=2, workers=1))
    (design,) = result.designs
    assert len(design.network.poles) == 3
    assert design.notes[-1] == "no load drops out or flashes while one relay moves"


def wire(*options):
    return CliRunner().invoke(
        app, ["wire", "job.toml", "--effort", "2", "--workers", "1", *options]
    )


@pytest.fixture(autouse=True)
def _folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    Path("job.toml").write_text('[formulas]\nX = "A B + A\' C"\n')


def test_the_option_of_the_command():
    run = wire("--hazard-free", "--json", "--form", "ladder", "--quiet")
    assert run.exit_code == 0
    Path("design.json").write_text(run.output)
    again = CliRunner().invoke(app, ["hazards", "design.json", "job.toml", "--none"])
    assert again.exit_code == 0


def test_options_that_do_not_go_together_and_jobs_they_are_not_for():
    assert wire("--hazard-free", "--fail-off", "X").exit_code == 2
    assert wire("--fail-off", "Y").exit_code == 2
    Path("job.toml").write_text(
        '[sequence]\ncolumns = "A B"\nrows = """\n1 0\n1 1\n0 1\n0 0\n"""\n'
    )
    run = wire("--hazard-free")
    assert run.exit_code == 2
    assert "table or formulas" in run.stderr
    assert load_job("job.toml")
