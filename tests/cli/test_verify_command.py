"""`contactlogic verify`: what it says of right designs, of wrong ones and of other files."""

from __future__ import annotations

import copy
import json
from pathlib import Path
from typing import Any

import pytest
from handmade import SLUICE_BOTH, SLUICE_TOML
from typer.testing import CliRunner, Result

from contactlogic.cli.app import app
from contactlogic.report.designfile import dumps

LADDER, BRIDGE = (design.fingerprint for design in SLUICE_BOTH.designs)


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with a job and a file of two designs for it, neither from a search."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "sluice.toml").write_text(SLUICE_TOML)
    (tmp_path / "design.json").write_text(dumps(SLUICE_BOTH))
    return tmp_path


def _verify(*arguments: str) -> Result:
    return CliRunner().invoke(app, ["verify", *arguments])


def _changed(change: dict[str, Any], *, design: int = 0, contact: int = 0) -> None:
    """Write design.json anew with one contact changed."""
    data = json.loads(dumps(SLUICE_BOTH))
    data["designs"][design]["contacts"][contact] |= change
    Path("design.json").write_text(json.dumps(_recounted(data)))


def _recounted(data: dict[str, Any]) -> dict[str, Any]:
    """Counts that agree with the contacts again, as another program would write them."""
    data = copy.deepcopy(data)
    for design in data["designs"]:
        counts = {
            relay: {"poles": 0, "makes": 0, "breaks": 0, "changeovers": 0}
            for relay in data["relays"]
        }
        for contact in design["contacts"]:
            make, break_ = contact["make"] is not None, contact["break"] is not None
            kind = "changeovers" if make and break_ else "makes" if make else "breaks"
            for key in ("poles", kind):
                counts[contact["relay"]][key] += 1
        design["per_relay"] = counts
        design["changeovers"] = len(design["contacts"])
    return data


@pytest.mark.usefixtures("here")
def test_right_designs() -> None:
    ran = _verify("design.json", "sluice.toml")
    assert (ran.exit_code, ran.stderr) == (0, "")
    assert ran.stdout == (
        f"ladder {LADDER}, 4 poles: right in all 8 rows\n"
        f"bridge {BRIDGE}, 3 poles: right in all 8 rows\n"
    )


@pytest.mark.usefixtures("here")
def test_the_first_wrong_row_and_the_path_that_feeds_it() -> None:
    """FLOOD's make moved from the lamp's net to the horn's."""
    _changed({"make": "n4", "break": None, "common": "L"}, contact=3)
    ran = _verify("design.json", "sluice.toml")
    assert ran.exit_code == 1
    said = ran.stdout.splitlines()
    assert said[0].endswith(" 4 poles: wrong")
    assert "  wrong: LAMP is off in row 4 (UP=0 DOWN=0 FLOOD=1), wanted on" in said
    assert "    no path to the supply" in said
    assert "  wrong: HORN is on in row 4 (UP=0 DOWN=0 FLOOD=1), wanted off" in said
    assert "    supply -> FLOOD:11 -> FLOOD:14 -> HORN" in said
    assert said[-1] == f"bridge {BRIDGE}, 3 poles: right in all 8 rows"
    assert "  note: " in ran.stdout  # the fingerprint is not that of these contacts
    assert ran.stderr == ""


@pytest.mark.usefixtures("here")
def test_a_sneak_path_is_followed_through_the_other_load() -> None:
    """A make of FLOOD between lamp and horn feeds the horn by way of the lamp's net."""
    data = json.loads(dumps(SLUICE_BOTH))
    bridge = data["designs"][1]
    bridge["contacts"].append(
        {"relay": "FLOOD", "pole": 2, "common": "n1", "make": "n3", "break": None}
    )
    Path("design.json").write_text(json.dumps(_recounted(data)))
    ran = _verify("design.json", "sluice.toml")
    assert ran.exit_code == 1
    assert "wrong: HORN is on in row 4 (UP=0 DOWN=0 FLOOD=1), wanted off\n" in ran.stdout
    assert "supply -> FLOOD:11 -> FLOOD:14 -> FLOOD:21 -> FLOOD:24 -> HORN\n" in ran.stdout


@pytest.mark.usefixtures("here")
def test_budgets_are_judged() -> None:
    job = Path("sluice.toml")
    job.write_text(SLUICE_TOML + "[limits]\npoles = { DOWN = 1 }\n")
    ran = _verify("design.json", "sluice.toml")
    assert ran.exit_code == 1
    assert "DOWN" in ran.stdout.splitlines()[1]
    assert f"bridge {BRIDGE}, 3 poles: right in all 8 rows" in ran.stdout


@pytest.mark.usefixtures("here")
def test_a_bound_above_what_is_used_is_refused() -> None:
    data = json.loads(dumps(SLUICE_BOTH))
    data["designs"][1]["bound"] = {"at_least": 4, "proven_minimum": False}
    Path("design.json").write_text(json.dumps(data))
    ran = _verify("design.json", "sluice.toml")
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert ran.stderr == (
        "contactlogic: design.json, designs[1].bound.at_least: is 4\n"
        "  expected: at most 3, since so many poles do\n"
    )


@pytest.mark.usefixtures("here")
def test_a_design_for_another_job() -> None:
    Path("other.toml").write_text('[formulas]\nLIFT = "UP KEY"\n')
    ran = _verify("design.json", "other.toml")
    assert ran.exit_code == 1
    assert "LIFT" in ran.stdout
    assert "Traceback" not in ran.stdout + ran.stderr


@pytest.mark.parametrize(
    "text",
    ["", "{", "[]", "null", '{"schema": "contactlogic/design/1"}', '{"schema": "other/1"}', "\0"],
)
def test_what_is_no_design_file(here: Path, text: str) -> None:
    (here / "design.json").write_text(text)
    ran = _verify("design.json", "sluice.toml")
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert ran.stderr.startswith("contactlogic: design.json")
    assert 1 <= len(ran.stderr.splitlines()) <= 8
    assert "Traceback" not in ran.stderr


@pytest.mark.usefixtures("here")
def test_a_file_without_designs_proves_nothing() -> None:
    data = json.loads(dumps(SLUICE_BOTH)) | {"designs": []}
    Path("design.json").write_text(json.dumps(data))
    ran = _verify("design.json", "sluice.toml")
    assert ran.exit_code == 2
    assert "holds no design" in ran.stderr


@pytest.mark.usefixtures("here")
def test_missing_files_and_jobs_that_cannot_be_read() -> None:
    for arguments in (
        ("nowhere.json", "sluice.toml"),
        ("design.json", "nowhere.toml"),
        ("sluice.toml", "sluice.toml"),
        ("design.json", "design.json"),
        ("design.json", "sluice.toml", "--loads", "LAMP"),
    ):
        ran = _verify(*arguments)
        assert ran.exit_code == 2, arguments
        assert "Traceback" not in ran.stderr
