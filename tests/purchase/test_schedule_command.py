"""`contactlogic schedule` from the outside: what it prints, writes and refuses."""

from __future__ import annotations

import csv
import io
import json
import os
import shutil
import subprocess
import sys
from decimal import Decimal
from pathlib import Path

import openpyxl
import pytest
from handmade import SLUICE_BOTH, SLUICE_JOB, SLUICE_TOML
from typer.testing import CliRunner, Result

from contactlogic.cli.app import app
from contactlogic.report.designfile import dumps

ROOT = Path(__file__).parents[2]

PARTS = """\
part,poles,form,coil_volts,contact_amps,price,stock
"small, one changeover",1,C,24,6,2.10,20
two changeovers,2,C,24,5,3.40,30
one make,1,A,24,16,1.80,8
12 volts,2,C,12,5,0.10,
"""

JOB = (
    SLUICE_TOML
    + """\
[supply]
coil_volts = 24
[loads]
LAMP = { amps = 5.5 }
HORN = { amps = 0.6 }
"""
)


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with a job, a file of two designs for it and a parts list."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "sluice.toml").write_text(JOB)
    (tmp_path / "design.json").write_text(dumps(SLUICE_BOTH))
    (tmp_path / "parts.csv").write_text(PARTS)
    return tmp_path


def schedule(*arguments: str) -> Result:
    return CliRunner().invoke(app, ["schedule", *arguments])


def rows(path: Path) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(path.read_text(encoding="utf-8"))))


LADDER, BRIDGE = (design.fingerprint for design in SLUICE_BOTH.designs)

SHOWN = f"""\
ladder {LADDER} Sluice house

relay   poles   makes   breaks   changeovers   springs   spare   part
UP          1       0        0             1         3   none    small, one changeover
DOWN        2       1        1             0         4   none    two changeovers
FLOOD       1       1        0             0         2   none    one make

part                    used   spares   bought   price of one   price   in stock
small, one changeover      1        1        2           2.10    4.20         20
two changeovers            1        1        2           3.40    6.80         30
one make                   1        1        2           1.80    3.60          8

total:  14.60 (currency not given), proved least for this design and parts list
coils:  24 V (as asked for)
spares: 100 per cent of each part, rounded up
note: the current of every load is not given and was not compared with contact_amps
"""


@pytest.mark.usefixtures("here")
def test_a_design_file_alone() -> None:
    ran = schedule(
        "design.json", "--parts", "parts.csv", "--spares", "100", "--coil-volts", "24",
        "--form", "ladder",
    )  # fmt: skip
    assert (ran.exit_code, ran.stderr) == (0, "")
    assert ran.stdout == SHOWN


@pytest.mark.usefixtures("here")
def test_without_a_parts_list_contacts_are_counted() -> None:
    ran = schedule("design.json", "--form", "bridge")
    assert ran.exit_code == 0
    assert ran.stdout == (
        f"bridge {BRIDGE} Sluice house\n\n"
        "relay   poles   makes   breaks   changeovers   springs   spare       part\n"
        "UP          1       0        0             1         3   not given\n"
        "DOWN        1       1        0             0         2   not given\n"
        "FLOOD       1       1        0             0         2   not given\n"
    )


@pytest.mark.usefixtures("here")
def test_the_job_gives_currents_and_coils() -> None:
    ran = schedule("design.json", "sluice.toml", "--parts", "parts.csv", "--form", "ladder")
    assert ran.exit_code == 0
    # DOWN's pole 1 carries LAMP's 5.5 A, which two changeovers may not
    assert "coils:  24 V (stated by the job)" in ran.stdout
    down = [line.split() for line in ran.stdout.splitlines() if line.startswith("DOWN")]
    assert [line[0] for line in down] == ["DOWN", "DOWN_2"]
    assert "note: DOWN_2 is a repeater of DOWN" in ran.stdout
    assert "two changeovers" not in ran.stdout
    assert "not compared" not in ran.stdout


@pytest.mark.usefixtures("here")
def test_json_holds_the_same() -> None:
    ran = schedule("design.json", "--parts", "parts.csv", "--coil-volts", "24", "--json")
    data = json.loads(ran.stdout)
    assert data["schema"] == "contactlogic/purchase/1"
    assert [design["form"] for design in data["designs"]] == ["ladder", "bridge"]
    ladder = data["designs"][0]
    assert ladder["fingerprint"] == LADDER
    assert ladder["purchase"]["price"] == "7.30"
    assert ladder["purchase"]["bound"] == {"at_least": "7.30", "proven_minimum": True}
    assert [(line["relay"], line["part"]) for line in ladder["schedule"]] == [
        ("UP", "small, one changeover"),
        ("DOWN", "two changeovers"),
        ("FLOOD", "one make"),
    ]


def test_papers_are_written_and_others_of_the_design_stay(here: Path) -> None:
    (here / "sluice" / "ladder").mkdir(parents=True)
    shutil.copy("design.json", here / "sluice")
    (here / "sluice" / "ladder" / "wiring.csv").write_text("wire\n")
    ran = schedule(
        "sluice/design.json", "--parts", "parts.csv", "--coil-volts", "24", "--out", "sluice"
    )
    assert ran.exit_code == 0
    written = sorted(p.relative_to("sluice").as_posix() for p in Path("sluice").rglob("*.*"))
    assert written == [
        "bridge/purchase.csv",
        "bridge/schedule.csv",
        "design.json",
        "ladder/purchase.csv",
        "ladder/schedule.csv",
        "ladder/wiring.csv",
    ]
    bought = rows(Path("sluice/ladder/purchase.csv"))
    assert [(row["part"], row["bought"], row["price"]) for row in bought] == [
        ("small, one changeover", "1", "2.10"),
        ("two changeovers", "1", "3.40"),
        ("one make", "1", "1.80"),
    ]
    assert {row["design"] for row in bought} == {f"ladder {LADDER} Sluice house"}
    assert [row["part"] for row in rows(Path("sluice/ladder/schedule.csv"))] == [
        "small, one changeover",
        "two changeovers",
        "one make",
    ]


def test_papers_of_another_design_go(here: Path) -> None:
    (here / "out" / "ladder").mkdir(parents=True)
    other = json.loads((here / "design.json").read_text())
    (here / "out" / "design.json").write_text(json.dumps(other | {"title": "Another"}))
    (here / "out" / "ladder" / "wiring.csv").write_text("wire\n")
    assert schedule("design.json", "--out", "out").exit_code == 0
    assert not (here / "out" / "ladder" / "wiring.csv").exists()


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["--parts", "none.csv"], "none.csv: there is no such file"),
        (["--parts", "bad.csv"], "bad.csv, line 2, column price (3):"),
        (["--parts", "parts.csv", "--coil-volts", "48"], "no part has a coil for 48 V (as asked"),
        (["--parts", "short.csv"], "short.csv: FLOOD needs 1 make; the stock that UP, DOWN leave"),
        (["--have", "UPP"], "the design has no relay UPP\n  expected: one of UP, DOWN, FLOOD"),
        (["--have", "UP=2E"], "--have UP=2E is not clear"),
        (["--loads", "LAMP"], "--loads and --unlisted go with a job"),
    ],
)
def test_refusals_write_nothing(here: Path, arguments: list[str], message: str) -> None:
    (here / "bad.csv").write_text("part,form,price\nx,1C,free\n")
    (here / "short.csv").write_text("part,form,price,stock\nx,1C,1,3\n")
    ran = schedule("design.json", "--form", "ladder", "--out", "out", *arguments)
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert message in ran.stderr
    assert not (here / "out").exists()


@pytest.mark.usefixtures("here")
def test_relays_that_are_there_already() -> None:
    ran = schedule(
        "design.json", "--parts", "parts.csv", "--coil-volts", "24", "--form", "ladder",
        "--have", "UP", "--have", "DOWN=1C",
    )  # fmt: skip
    lines = [line.split() for line in ran.stdout.splitlines()[3:7]]
    assert [(line[0], *line[6:]) for line in lines] == [
        ("UP", "not", "given", "there", "already"),
        ("DOWN", "none", "there", "already"),
        ("FLOOD", "none", "one", "make"),
        ("DOWN_2", "none", "DOWN", "one", "make"),
    ]
    assert "total:  3.60" in ran.stdout


BUTTONS = """\
[formulas]
BELL = "START + K1"
LAMP = "START' K1"
[limits]
contacts = { START = "2A1B" }
"""


def test_push_buttons_are_not_bought(here: Path) -> None:
    (here / "bell.toml").write_text(BUTTONS)
    ran = schedule("bell.toml", "--parts", "parts.csv", "--form", "bridge", "--effort", "5")
    assert ran.exit_code == 0, ran.stderr
    (start,) = (line for line in ran.stdout.splitlines() if line.startswith("START"))
    assert start.endswith("1A      separate contacts, not bought")
    assert "note: the coil voltage is not given; the cheapest of the list's was taken" in ran.stdout


PULSE = """\
[sequence]
columns = "P A | LAMP"
rows = \"\"\"
0 0 | 0
1 0 | 0
1 1 | 1
0 1 | 1
\"\"\"
inputs = "P"
[timing]
slow_release = "A"
[supply]
feed = "+24 V DC"
"""


def test_inputs_of_a_sequence_are_not_bought_unless_asked_for(here: Path) -> None:
    (here / "pulse.toml").write_text(PULSE)
    arguments = ("pulse.toml", "--parts", "parts.csv", "--form", "bridge", "--effort", "5")
    ran = schedule(*arguments)
    assert ran.exit_code == 0, ran.stderr
    assert "moved from outside" in ran.stdout
    assert "coils:  24 V (by the label of the supply)" in ran.stdout
    assert "moved from outside" not in schedule(*arguments, "--buy", "P").stdout


HOSTILE = '=HYPERLINK("http://x","<b>\\bold</b>")|*_'


def test_hostile_names_stay_text(here: Path) -> None:
    with (here / "hostile.csv").open("w", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["part", "form", "price"])
        writer.writerow([HOSTILE, "9C", "1"])
    ran = schedule("design.json", "--parts", "hostile.csv", "--out", "out")
    assert ran.exit_code == 0, ran.stderr
    assert HOSTILE in ran.stdout
    for name in ("schedule.csv", "purchase.csv"):
        for cell in (cell for row in rows(here / "out" / "ladder" / name) for cell in row.values()):
            assert not cell.startswith(("=", "+", "-", "@"))
    (row,) = rows(here / "out" / "ladder" / "purchase.csv")
    assert row["part"] == "'" + HOSTILE


def test_hostile_names_in_the_report() -> None:
    from contactlogic.purchase.buy import Order
    from contactlogic.purchase.parts import Contacts, Part, PartsList
    from contactlogic.purchase.schedule import Drawer, schedule_of
    from contactlogic.report.purchase import purchase_markdown

    part = Part(HOSTILE + "\n# heading", Contacts(c=9), None, None, Decimal(1))
    drawer = Drawer(PartsList("parts.csv", (part,)), Order())
    lines = purchase_markdown(schedule_of(SLUICE_BOTH.designs[0], drawer, job=SLUICE_JOB))
    text = "\n".join(lines)
    assert "<b>" not in text.replace("\\<b\\>", "")
    assert not any(line.startswith("#") for line in lines)


def test_the_workbook_gives_the_same_as_the_text(here: Path) -> None:
    book = openpyxl.Workbook()
    for row in csv.reader(io.StringIO(PARTS)):
        numbers = [float(cell) if cell.replace(".", "").isdigit() else cell for cell in row]
        book.active.append([None if cell == "" else cell for cell in numbers])
    book.save(here / "parts.xlsx")
    arguments = ("--coil-volts", "24")
    of_text = schedule("design.json", "--parts", "parts.csv", *arguments)
    of_book = schedule("design.json", "--parts", "parts.xlsx", *arguments)
    assert of_book.exit_code == 0, of_book.stderr
    assert of_book.stdout == of_text.stdout


def test_equal_bytes_under_another_hash_seed(here: Path) -> None:
    tool = Path(sys.executable).with_name("contactlogic")
    shown = set()
    for seed in ("1", "2"):
        command = [str(tool), "schedule", "design.json", "sluice.toml", "--parts", "parts.csv",
                   "--out", f"out{seed}", "--json"]  # fmt: skip
        ran = subprocess.run(
            command, capture_output=True, cwd=here, env=os.environ | {"PYTHONHASHSEED": seed}
        )
        assert ran.returncode == 0, ran.stderr
        papers = [p.read_bytes() for p in sorted((here / f"out{seed}").rglob("*.*"))]
        shown.add((ran.stdout, *papers))
    assert len(shown) == 1


def test_the_example_list_is_read() -> None:
    from contactlogic.purchase.read_parts import read_parts

    found = read_parts(ROOT / "examples" / "parts.csv")
    assert len(found.parts) >= 5
    assert found.passed_over == ()
