"""`contactlogic wire --poles-per-relay` on a pattern, whose relays are chosen by the tool."""

from __future__ import annotations

from pathlib import Path

from typer.testing import CliRunner

from contactlogic.cli.app import app

PATTERN = '[pattern]\nloads = "LAMP"\nrows = """\n{}\n"""\nstep = "ring"\n'


def test_the_budget_holds_for_relays_that_are_chosen(tmp_path: Path) -> None:
    job = tmp_path / "ring.toml"
    job.write_text(PATTERN.format("\n".join(str(k % 2) for k in range(11))))
    args = ["wire", str(job), "--effort", "0", "--form", "ladder", "--json"]
    ran = CliRunner().invoke(app, [*args, "--poles-per-relay", "1"])
    assert ran.exit_code != 0
    assert CliRunner().invoke(app, [*args, "--poles-per-relay", "4"]).exit_code == 0
