"""`contactlogic wire` from the outside: what it prints, writes and returns."""

from __future__ import annotations

import csv
import json
import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from handmade import SLUICE_JOB, SLUICE_RESULT
from typer.testing import CliRunner

import contactlogic.draw
import contactlogic.job
import contactlogic.report.folder
import contactlogic.synthesis
from contactlogic.cli.app import app
from contactlogic.errors import ProofFailed, RendererMissing

STAIRS = """\
title = "Stairs"
[table]
columns = "LOW HIGH | LAMP"
rows = \"\"\"
0 0 | 0
1 0 | 1
0 1 | 1
1 1 | 0
\"\"\"
"""

PAPERS = [
    "design.json",
    "ladder/drawing.png",
    "ladder/drawing.svg",
    "ladder/schedule.csv",
    "ladder/wiring.csv",
    "report.md",
]


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty current folder with one job in it."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "stairs.toml").write_text(STAIRS)
    return tmp_path


def _command(*arguments: str, cwd: Path, **env: str) -> subprocess.CompletedProcess[str]:
    tool = Path(sys.executable).with_name("contactlogic")
    return subprocess.run(
        [str(tool), *arguments],
        capture_output=True,
        text=True,
        cwd=cwd,
        env=os.environ | env,
        check=False,
    )


def _files(root: Path) -> list[str]:
    return sorted(str(p.relative_to(root)) for p in root.rglob("*") if p.is_file())


def test_a_job_in_all(here: Path) -> None:
    done = _command("wire", "stairs.toml", cwd=here)
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    data = json.loads((here / "stairs" / "design.json").read_text())
    mark = f"ladder {data['designs'][0]['fingerprint']}"
    lines = done.stdout.splitlines()
    assert lines[0] == "no load is on with every relay released"
    assert lines[1] == f"{mark} Stairs"
    assert "poles:       2" in lines
    assert "proved: all 4 rows as wanted, none free" in lines
    assert lines[-1] == (
        "written to stairs: design.json, report.md, ladder/drawing.png, ladder/drawing.svg, "
        "ladder/schedule.csv, ladder/wiring.csv"
    )
    assert _files(here / "stairs") == PAPERS
    assert (here / "stairs/ladder/drawing.png").read_bytes().startswith(b"\x89PNG")
    for name in ("report.md", "ladder/drawing.svg", "ladder/wiring.csv", "ladder/schedule.csv"):
        text = (here / "stairs" / name).read_text()
        assert data["designs"][0]["fingerprint"] in text
        assert "Stairs" in text


def test_json_is_alone_on_standard_output_and_no_file_is_written(here: Path) -> None:
    done = _command("wire", "stairs.toml", "--json", cwd=here)
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    assert json.loads(done.stdout)["schema"] == "contactlogic/design/1"
    assert _files(here) == ["stairs.toml"]
    again = _command("wire", "stairs.toml", "--json", "--out", "there", cwd=here)
    assert again.stdout == done.stdout
    assert "--out is not used" in again.stderr
    assert _files(here) == ["stairs.toml"]


def test_design_file_and_json_output_are_the_same(here: Path) -> None:
    printed = _command("wire", "stairs.toml", "--json", cwd=here).stdout
    assert _command("wire", "stairs.toml", "-q", cwd=here).stdout == ""
    assert (here / "stairs/design.json").read_text() == printed


def test_same_bytes_under_another_hash_seed(here: Path) -> None:
    job = str(Path(__file__).parents[2] / "examples" / "ferry.toml")
    for seed in ("1", "77"):
        done = _command("wire", job, "--out", f"out{seed}", "-q", cwd=here, PYTHONHASHSEED=seed)
        assert done.returncode == 0, done.stderr
    one, two = (here / f"out{seed}" for seed in ("1", "77"))
    assert _files(one) == PAPERS
    for name in PAPERS:
        assert (one / name).read_bytes() == (two / name).read_bytes(), name


def test_bare_tables_name_their_loads(here: Path) -> None:
    (here / "gate.csv").write_text("UP,DOWN,LAMP,HORN\n1,0,1,0\n0,1,0,1\n")
    done = _command(
        "wire", "gate.csv", "--loads", "LAMP, HORN", "--unlisted", "off", "--json", cwd=here
    )
    assert done.returncode == 0, done.stderr
    data = json.loads(done.stdout)
    assert data["relays"] == ["UP", "DOWN"]
    assert list(data["designs"][0]["loads"]) == ["LAMP", "HORN"]


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (
            ("gate.csv",),
            "contactlogic: gate.csv: which columns of this table are loads is not said\n"
            "  expected: their names after --loads\n"
            "  contactlogic wire gate.csv --loads LAMP,HORN\n",
        ),
        (
            ("stairs.toml", "--loads", "LAMP"),
            "contactlogic: stairs.toml: --loads is for a bare table (.csv or .xlsx)\n"
            "  a job file says this itself, in its [table]\n",
        ),
        (
            ("gate.csv", "--loads", "LAMP", "--unlisted", "on"),
            "contactlogic: --unlisted on is not known\n  expected: off or free\n",
        ),
    ],
)
def test_options_that_do_not_fit_the_job(
    here: Path, arguments: tuple[str, ...], message: str
) -> None:
    (here / "gate.csv").write_text("UP,LAMP\n0,0\n1,1\n")
    ran = CliRunner().invoke(app, ["wire", *arguments])
    assert (ran.exit_code, ran.stderr, ran.stdout) == (2, message, "")
    assert _files(here) == ["gate.csv", "stairs.toml"]


BAD_JOBS = {
    "empty": "",
    "not TOML": "[table\n",
    "illegal cell": "[table]\ncolumns = 'A | Z'\nrows = '2 | 1'\n",
    "unbalanced": "[formulas]\nZ = 'A (B'\n",
    "missing rows": "[table]\ncolumns = 'A | Z'\nrows = '0 | 1'\n",
    "unknown key": "[tabel]\ncolumns = 'A | Z'\nrows = '0 | 1'\n",
    "too many inputs": "[formulas]\nZ = '" + " ".join(f"K{i}" for i in range(17)) + "'\n",
    "budget": '[formulas]\nZ = "A B + A\' C"\n[limits]\npoles = { A = 0 }\n',
}


@pytest.mark.parametrize("text", BAD_JOBS.values(), ids=BAD_JOBS.keys())
def test_bad_jobs_end_in_2_with_a_short_message_and_no_file(here: Path, text: str) -> None:
    (here / "bad.toml").write_text(text)
    ran = CliRunner().invoke(app, ["wire", "bad.toml"])
    assert ran.exit_code == 2
    assert ran.stdout == ""
    assert ran.stderr.startswith("contactlogic: bad.toml")
    assert 1 <= len(ran.stderr.splitlines()) <= 8
    assert "Traceback" not in ran.stderr
    assert _files(here) == ["bad.toml", "stairs.toml"]


def test_a_missing_job_and_a_folder_in_its_place(here: Path) -> None:
    (here / "folder.toml").mkdir()
    for arguments in (["nowhere.toml"], ["folder.toml"], ["nowhere.csv", "--loads", "Z"]):
        ran = CliRunner().invoke(app, ["wire", *arguments])
        assert ran.exit_code == 2
        assert arguments[0] in ran.stderr
        assert "Traceback" not in ran.stderr


def test_usage_errors_end_in_2(here: Path) -> None:
    for arguments in (["wire"], ["wire", "stairs.toml", "--wat"], ["wire", "x", "--seed", "y"]):
        assert CliRunner().invoke(app, arguments).exit_code == 2
    assert _files(here) == ["stairs.toml"]


def test_other_files_are_kept_unless_forced(here: Path) -> None:
    (here / "stairs").mkdir()
    (here / "stairs" / "notes.txt").write_text("mine")
    ran = CliRunner().invoke(app, ["wire", "stairs.toml"])
    assert ran.exit_code == 2
    assert "already holds other files (notes.txt)" in ran.stderr
    assert _files(here / "stairs") == ["notes.txt"]
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--force"])
    assert ran.exit_code == 0
    assert _files(here / "stairs") == sorted([*PAPERS, "notes.txt"])


def test_a_second_run_needs_no_force(here: Path) -> None:
    for _ in range(2):
        assert CliRunner().invoke(app, ["wire", "stairs.toml"]).exit_code == 0
    assert _files(here / "stairs") == PAPERS


@pytest.mark.usefixtures("here")
def test_verbose_tells_how_each_cover_was_found() -> None:
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--verbose"])
    assert ran.exit_code == 0
    assert "proved least" in ran.stdout
    assert "4 literals, 2 terms" in ran.stdout


@pytest.fixture
def by_hand(here: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The command with a job and a result made by hand in place of the search."""
    monkeypatch.setattr(contactlogic.job, "load_job", lambda _path: SLUICE_JOB)
    monkeypatch.setattr("contactlogic.synthesis.wire", lambda _job, **_options: SLUICE_RESULT)
    return here


def test_screen_text(by_hand: Path) -> None:
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--out", "papers"])
    golden = Path(__file__).parents[1] / "report" / "golden" / "summary.txt"
    assert ran.exit_code == 0, ran.stderr
    assert ran.stdout == golden.read_text() + (
        "written to papers: design.json, report.md, ladder/drawing.png, ladder/drawing.svg, "
        "ladder/schedule.csv, ladder/wiring.csv\n"
    )
    with (by_hand / "papers/ladder/wiring.csv").open(newline="") as file:
        assert next(csv.reader(file)) == ["wire", "net", "from", "to", "design"]


def test_without_a_renderer_the_text_of_the_drawing_is_written(
    by_hand: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def render(*_: object, **__: object) -> None:
        raise RendererMissing("no renderer found")

    monkeypatch.setattr(contactlogic.draw, "render", render)
    ran = CliRunner().invoke(app, ["wire", "stairs.toml"])
    assert ran.exit_code == 0
    assert "drawing.gv was written instead: no renderer found\n" in ran.stdout
    assert _files(by_hand / "stairs") == [
        "design.json",
        "ladder/drawing.gv",
        "ladder/schedule.csv",
        "ladder/wiring.csv",
        "report.md",
    ]
    assert "graph" in (by_hand / "stairs/ladder/drawing.gv").read_text()


@pytest.mark.parametrize(
    ("error", "status", "message"),
    [
        (
            ProofFailed("row 3: LAMP is on, off was wanted"),
            3,
            "contactlogic: internal fault, no design is given out: "
            "ProofFailed: row 3: LAMP is on, off was wanted\n"
            "  please keep stairs.toml and report this; "
            "it is contactlogic's fault, not the job's\n",
        ),
        (
            ZeroDivisionError("x"),
            3,
            "contactlogic: internal fault, no design is given out: ZeroDivisionError: x\n"
            "  please keep stairs.toml and report this; "
            "it is contactlogic's fault, not the job's\n",
        ),
        (KeyboardInterrupt(), 130, "contactlogic: stopped\n"),
    ],
)
@pytest.mark.parametrize("option", [[], ["--json"]])
def test_faults_print_no_design(
    by_hand: Path,
    monkeypatch: pytest.MonkeyPatch,
    error: BaseException,
    status: int,
    message: str,
    option: list[str],
) -> None:
    def wire(*_: object, **__: object) -> None:
        raise error

    monkeypatch.setattr("contactlogic.synthesis.wire", wire)
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", *option])
    assert (ran.exit_code, ran.stderr, ran.stdout) == (status, message, "")
    assert _files(by_hand) == ["stairs.toml"]


def test_a_failure_in_mid_write_leaves_nothing(
    by_hand: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = Path.write_bytes

    def write_bytes(self: Path, content: bytes) -> int:
        if self.name == "schedule.csv":
            raise OSError(28, "No space left on device")
        return real(self, content)

    monkeypatch.setattr(Path, "write_bytes", write_bytes)
    ran = CliRunner().invoke(app, ["wire", "stairs.toml"])
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert ran.stderr == (
        "contactlogic: stairs: cannot be written: No space left on device\n"
        "  nothing was written; choose another folder with --out\n"
    )
    assert sorted(p.name for p in by_hand.iterdir()) == ["stairs.toml"]


def test_ctrl_c_ends_in_130_and_leaves_nothing(here: Path) -> None:
    """Random rows of 8 inputs and 4 loads keep the search busy far longer than the wait."""
    rng = random.Random(5)
    rows = "\n".join(
        " ".join(str(row >> i & 1) for i in range(8)) + " | " + " ".join(rng.choices("01", k=4))
        for row in range(256)
    )
    names = " ".join(f"K{i}" for i in range(8))
    (here / "long.toml").write_text(
        f'[table]\ncolumns = "{names} | L0 L1 L2 L3"\nrows = """\n{rows}\n"""\n'
    )
    tool = Path(sys.executable).with_name("contactlogic")
    with subprocess.Popen(
        [str(tool), "wire", "long.toml"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        cwd=here,
    ) as process:
        time.sleep(3)
        process.send_signal(signal.SIGINT)
        said, complaint = process.communicate()
    assert (process.returncode, said, complaint) == (130, "", "contactlogic: stopped\n")
    assert _files(here) == ["long.toml", "stairs.toml"]


def test_a_closed_pipe_is_no_fault(here: Path) -> None:
    tool = Path(sys.executable).with_name("contactlogic")
    with subprocess.Popen(
        [str(tool), "wire", "stairs.toml", "--json"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=here,
    ) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        process.stdout.close()
        said = process.stderr.read()
        assert process.wait() == 0
    assert said == b""


def test_titles_that_the_terminal_cannot_show(here: Path) -> None:
    (here / "stairs.toml").write_text(STAIRS.replace("Stairs", "Schütz 水門"), encoding="utf-8")
    done = _command("wire", "stairs.toml", cwd=here, PYTHONIOENCODING="ascii")
    assert done.returncode == 0, done.stderr
    assert "Sch\\xfctz" in done.stdout


def test_help_and_version(here: Path) -> None:
    assert "wire" in _command("--help", cwd=here).stdout
    assert "JOB" in _command("wire", "--help", cwd=here).stdout
    assert _command("--version", cwd=here).stdout.startswith("contactlogic ")


def test_help_imports_nothing_heavy(here: Path) -> None:
    """The figure itself is shown by tests/bench; here only what would spoil it."""
    code = (
        "import sys\n"
        "sys.argv = ['contactlogic', '--help']\n"
        "from contactlogic.cli import main\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        "heavy = {'ortools', 'pysat', 'networkx', 'sympy', 'pyeda', 'openpyxl', 'pydantic',"
        " 'rich', 'numpy', 'lark'}\n"
        "print('heavy:', sorted(heavy & set(sys.modules)))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=here, check=True
    )
    assert done.stdout.splitlines()[-1] == "heavy: []"
