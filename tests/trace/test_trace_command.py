"""`contactlogic trace`: what it prints, its exit status, and that bad input writes nothing."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from handmade import SLUICE_TOML
from typer.testing import CliRunner, Result

from contactlogic.cli.app import app

JOB = (
    SLUICE_TOML
    + """\
[supply]
feed = "+24 V"
return = "0 V"
"""
)

WIRES = """\
from,to
rail:+24 V,UP:11
UP:11,FLOOD:11
UP:14,FLOOD:14
FLOOD:14,LAMP:X1
UP:12,DOWN:11
DOWN:14,HORN:X1
rail:0 V,LAMP:X2
LAMP:X2,HORN:X2
"""


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "sluice.toml").write_text(JOB)
    (tmp_path / "wires.csv").write_text(WIRES)
    return tmp_path


def _trace(*arguments: str) -> Result:
    return CliRunner().invoke(app, ["trace", *arguments])


def test_wiring_that_agrees(here: Path) -> None:
    ran = _trace("wires.csv", "sluice.toml")
    assert ran.exit_code == 0, ran.stderr
    lines = ran.stdout.splitlines()
    assert "the wiring agrees with the job" in lines
    assert "LAMP = UP + FLOOD" in lines
    assert "HORN = UP' DOWN" in lines
    assert lines[lines.index("UP DOWN FLOOD | LAMP HORN") + 1] == "0  0    0     | 0    0"
    assert sorted(p.name for p in here.iterdir()) == ["sluice.toml", "wires.csv"]


@pytest.mark.usefixtures("here")
def test_wiring_without_a_job() -> None:
    ran = _trace("wires.csv")
    assert ran.exit_code == 0
    assert "taken as loads: HORN, LAMP" in ran.stdout
    assert "taken as relays: DOWN, FLOOD, UP" in ran.stdout
    assert "no job to compare with" in ran.stdout


def test_wiring_that_differs(here: Path) -> None:
    (here / "wires.csv").write_text(WIRES + "DOWN:12,HORN:X1\n")
    ran = _trace("wires.csv", "sluice.toml")
    assert ran.exit_code == 1
    said = ran.stdout.splitlines()
    assert "the wiring differs from the job" in said
    assert "sneak paths (a load conducts and should not):" in said
    assert "  HORN in row 0 (UP=0 DOWN=0 FLOOD=0) and 1 more by this way" in said
    at = said.index("  HORN in row 0 (UP=0 DOWN=0 FLOOD=0) and 1 more by this way")
    assert said[at + 1] == (
        "    rail:+24 V -> UP:11 -> UP:12 -> DOWN:11 -> DOWN:12 -> HORN:X1 -> HORN:X2 -> LAMP:X2"
        " -> rail:0 V"
    )


@pytest.mark.usefixtures("here")
def test_the_path_of_one_row() -> None:
    ran = _trace("wires.csv", "sluice.toml", "--row", "up=1 DOWN=0")
    assert ran.exit_code == 0
    assert ran.stdout == (
        "row 1 (UP=1 DOWN=0 FLOOD=0)\n"
        "  LAMP: on\n"
        "    rail:+24 V -> UP:11 -> UP:14 -> FLOOD:14 -> LAMP:X1 -> LAMP:X2 -> rail:0 V\n"
        "  HORN: off\n"
    )


@pytest.mark.usefixtures("here")
def test_json() -> None:
    ran = _trace("wires.csv", "sluice.toml", "--json", "--row", "DOWN=1")
    data = json.loads(ran.stdout)
    assert data["schema"] == "contactlogic/trace/1"
    assert data["agrees"] is True
    assert data["loads"]["HORN"]["on"] == [2, 6]
    assert data["loads"]["HORN"]["formula"] == "UP' DOWN"
    assert data["row"]["paths"]["LAMP"] == []
    assert data["row"]["paths"]["HORN"][:3] == ["rail:+24 V", "UP:11", "UP:12"]


def test_names_of_the_list_and_of_the_job(here: Path) -> None:
    (here / "wires.csv").write_text(
        WIRES.replace("rail:+24 V", "bus bar")
        .replace("rail:0 V", "frame")
        .replace("LAMP:X1", "big lamp")
        .replace("LAMP:X2", "big lamp")
    )
    ran = _trace("wires.csv", "sluice.toml")
    assert ran.exit_code == 2
    assert "--feed" in ran.stderr
    options = ("--feed", "bus bar", "--return", "frame")
    ran = _trace("wires.csv", "sluice.toml", *options)
    assert ran.exit_code == 1
    assert '--name "big lamp=LAMP"' in ran.stdout
    ran = _trace("wires.csv", "sluice.toml", *options, "--name", "big lamp=LAMP")
    assert ran.exit_code == 0, ran.stdout


def test_a_sequence_is_traced_coil_by_coil(here: Path) -> None:
    (here / "ring.toml").write_text(
        '[sequence]\ncolumns = "A B | Z"\nrows = """\n1 0 | 0\n1 1 | 1\n0 1 | 0\n0 0 | 1\n"""\n'
        'repeat = true\n[timing]\nslow_release = "A B"\nslow_operate = "A B"\n'
    )
    ran = CliRunner().invoke(app, ["wire", "ring.toml", "--effort", "0", "-q"])
    assert ran.exit_code == 0, ran.stderr
    for form in ("ladder", "bridge"):
        ran = _trace(f"ring/{form}/wiring.csv", "ring.toml", "--json")
        assert ran.exit_code == 0
        data = json.loads(ran.stdout)
        assert data["agrees"] is True
        assert set(data["loads"]) == {"A", "B", "Z"}


def test_drives_are_compared_with_the_wiring(here: Path) -> None:
    (here / "drives.toml").write_text('[drives]\nA = "B\'"\nB = "A"\n')
    wires = "from,to\n+,A:11\nA:11,B:11\nB:12,A:A1\nA:14,B:A1\nA:A2,-\nB:A2,-\n"
    (here / "wires.csv").write_text(wires)
    assert _trace("wires.csv", "drives.toml").exit_code == 0
    (here / "wires.csv").write_text(wires.replace("A:14", "A:12"))
    assert _trace("wires.csv", "drives.toml").exit_code == 1


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("none.csv",), "there is no such file"),
        (("sluice.toml",), "cannot end in .toml"),
        (("wires.csv", "none.toml"), "there is no such file"),
        (("wires.csv", "--row", "UPP=1"), "did you mean UP?"),
        (("wires.csv", "--row", "UP=2"), "UP=2 is no setting"),
        (("wires.csv", "--row", "UP=1 up=0"), "set twice"),
        (("wires.csv", "--feed", "L1"), "no wire goes to L1"),
        (("wires.csv", "--name", "lamp"), "names no two things"),
        (("wires.csv", "--name", "bulb=LAMP"), "no wire goes to bulb"),
    ],
)
def test_bad_input(here: Path, arguments: tuple[str, ...], said: str) -> None:
    ran = _trace(*arguments)
    assert ran.exit_code == 2
    assert said in ran.stderr
    assert "Traceback" not in ran.stderr
    assert ran.stdout == ""
    assert sorted(p.name for p in here.iterdir()) == ["sluice.toml", "wires.csv"]


def test_hostile_names_stay_text(here: Path) -> None:
    odd = '=HYPERLINK(""x"") <b> \\ \x1b[31m'
    (here / "odd.csv").write_text(f'from,to\n+,A:11\nA:14,"{odd}"\n"{odd}",-\n')
    ran = _trace("odd.csv")
    assert ran.exit_code == 2  # it cannot be printed
    assert "\x1b" not in ran.stderr
    plain = odd.replace("\x1b[31m", "")
    (here / "odd.csv").write_text(f'from,to\n+,A:11\nA:14,"{plain}"\n"{plain}",-\n')
    ran = _trace("odd.csv")
    assert ran.exit_code == 0, ran.stderr
    assert '=HYPERLINK("x") <b> \\ = A' in ran.stdout.replace("\\  =", "\\ =")
