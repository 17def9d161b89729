"""Wiring that no single open fault turns on: judged by rewiring, fault by fault."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from fault.rewiring import state
from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import targets
from typer.testing import CliRunner

from contactlogic.cli.app import app
from contactlogic.errors import LimitError
from contactlogic.failoff import wire_fail_off
from contactlogic.fault import single_faults
from contactlogic.job.model import Job, Limits, Load, SeparateContacts
from contactlogic.report.panels import panel_of_design
from contactlogic.synthesis import Search
from contactlogic.truth import Target, all_rows


def turned_on(result, loads):
    """(load, fault) of open faults after which a load is on that should be off."""
    found = []
    wanted = result.job.targets
    for design in result.designs:
        panel = panel_of_design(design, result.job, result.repeaters)
        for fault in (fault for fault in single_faults(panel) if fault.opens):
            for row in range(1 << len(panel.inputs)):
                bad = state(panel, row, fault)
                found += [
                    (load, fault)
                    for load in loads
                    if wanted[load].off >> row & 1 and bad != "short" and bad[load] == "on"
                ]
    return found


@given(targets(2), targets(2), st.booleans())
@settings(max_examples=8)
def test_no_open_fault_turns_the_named_loads_on(one, two, both):
    job = Job("T", ("A", "B"), (Load("X", one), Load("Y", two)), all_rows(2))
    loads = ("X", "Y") if both else ("X",)
    result = wire_fail_off(job, Search(effort=1, workers=1), loads)
    assert not turned_on(result, loads)


def test_a_break_contact_gets_a_repeater_and_a_make_none():
    job = Job("T", ("A", "B"), (Load("X", Target(2, 0b0010)),), all_rows(2))  # A B'
    result = wire_fail_off(job, Search(effort=2, workers=1), ("X",))
    assert dict(result.repeaters) == {"B_2": "B"}
    assert all(len(design.network.poles) == 3 for design in result.designs)
    plain = Job("T", ("A", "B"), (Load("X", Target(2, 0b1000)),), all_rows(2))  # A B
    assert not wire_fail_off(plain, Search(effort=2, workers=1), ("X",)).repeaters


def test_a_free_cell_is_kept_off_rather_than_a_relay_repeated():
    # on with A alone, off with both; B alone and neither are free: a dead coil of A leads there
    job = Job("T", ("A", "B"), (Load("X", Target(2, 0b1000, 0b0011)),), all_rows(2))
    result = wire_fail_off(job, Search(effort=2, workers=1), ("X",))
    assert not result.repeaters
    assert not turned_on(result, ("X",))


def test_a_push_button_cannot_be_repeated():
    limits = Limits(contacts={"B": SeparateContacts(1, 1)})
    job = Job("T", ("A", "B"), (Load("X", Target(2, 0b0010)),), all_rows(2), limits=limits)
    with pytest.raises(LimitError, match="no coil that can be repeated"):
        wire_fail_off(job, Search(effort=1, workers=1), ("X",))


def test_the_option_of_the_command(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    Path("job.toml").write_text('[formulas]\nX = "A B\'"\n')
    options = ["--effort", "2", "--workers", "1", "--quiet"]
    run = CliRunner().invoke(app, ["wire", "job.toml", "--fail-off", "X", *options])
    assert run.exit_code == 0
    design = json.loads(Path("job/design.json").read_text())
    assert design["repeaters"] == {"B_2": "B"}
    said = Path("job/report.md").read_text()
    assert "no single open fault turns X on" in said
    judged = CliRunner().invoke(app, ["faults", "job/design.json", "job.toml", "--fail-off", "X"])
    assert judged.exit_code == 0
