"""`contactlogic wire` from the outside: what it prints, writes and returns."""

from __future__ import annotations

import contextlib
import csv
import json
import os
import re
import signal
import subprocess
import sys
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import pytest
from handmade import SLUICE_BOTH, SLUICE_JOB
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

NAMES = (
    *("drawing.png", "drawing.svg", "schedule.csv"),
    *("terminals.csv", "ticklist.md", "wiring.csv", "wiring.xlsx"),
)


def papers(*forms: str) -> list[str]:
    """Every file of a folder with designs of these forms."""
    return sorted(["design.json", "report.md", *(f"{f}/{name}" for f in forms for name in NAMES)])


PAPERS = papers("bridge", "ladder")

WRITTEN = (
    "design.json, report.md, "
    + ", ".join(f"bridge/{name}" for name in NAMES)
    + ", "
    + ", ".join(f"ladder/{name}" for name in NAMES)
)

VOTE = """\
title = "Vote"
[formulas]
MOST = "2oo3(A, B, C)"
"""


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
    lines = done.stdout.splitlines()
    assert lines[:2] == ["no load is on with every relay released", ""]
    assert lines[2] == f"ladder {data['designs'][0]['fingerprint']} Stairs"
    assert f"bridge {data['designs'][1]['fingerprint']} Stairs" in lines
    assert lines.count("poles:       2") == 2
    assert lines.count("proved: all 4 rows as wanted, none free") == 2
    assert lines[-2] == "the bridge saves no pole on the ladder"
    assert lines[-1] == f"written to stairs: {WRITTEN}"
    assert _files(here / "stairs") == PAPERS
    for design in data["designs"]:
        folder = here / "stairs" / design["form"]
        assert (folder / "drawing.png").read_bytes().startswith(b"\x89PNG")
        for name in ("../report.md", "drawing.svg", "wiring.csv", "schedule.csv"):
            text = (folder / name).read_text()
            assert design["fingerprint"] in text
            assert "Stairs" in text


def test_the_keys_of_the_json_contract(here: Path) -> None:
    """Exactly those of the result contract, in its order; other programs read them."""
    (here / "vote.toml").write_text(VOTE + "[limits]\npoles = { A = 1 }\n")
    done = _command("wire", "vote.toml", "--json", "--effort", "5", "--repeaters", cwd=here)
    assert done.returncode == 0, done.stderr
    data = json.loads(done.stdout)
    assert list(data) == ["schema", "title", "relays", "repeaters", "designs"]
    assert (data["schema"], data["title"]) == ("contactlogic/design/1", "Vote")
    assert data["relays"][:3] == ["A", "B", "C"]
    assert [design["form"] for design in data["designs"]] == ["ladder", "bridge"]
    for design in data["designs"]:
        assert list(design) == [
            *("form", "fingerprint", "supply", "loads", "contacts", "changeovers"),
            *("per_relay", "bound", "verified_rows"),
        ]
        for contact in design["contacts"]:
            assert list(contact) == ["relay", "pole", "common", "make", "break"]
        for count in design["per_relay"].values():
            assert list(count) == ["poles", "makes", "breaks", "changeovers"]
        assert list(design["bound"]) == ["at_least", "proven_minimum"]
        assert design["changeovers"] == len(design["contacts"])
        assert design["per_relay"]["A"]["poles"] <= 1
        assert design["verified_rows"] == 8


@pytest.mark.parametrize("form", ["ladder", "bridge"])
def test_one_form_alone_takes_the_other_away(here: Path, form: str) -> None:
    assert CliRunner().invoke(app, ["wire", "stairs.toml"]).exit_code == 0
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--form", form])
    assert ran.exit_code == 0, ran.stderr
    assert _files(here / "stairs") == papers(form)
    (design,) = json.loads((here / "stairs/design.json").read_text())["designs"]
    assert design["form"] == form
    assert "saves" not in ran.stdout


def test_a_folder_never_holds_papers_of_two_jobs(here: Path) -> None:
    (here / "gate.csv").write_text("UP,DOWN,LAMP\n1,0,1\n0,1,0\n")
    for arguments in (["stairs.toml"], ["gate.csv", "--loads", "LAMP", "--unlisted", "off"]):
        ran = CliRunner().invoke(app, ["wire", *arguments, "--out", "papers"])
        assert ran.exit_code == 0, ran.stderr
    assert _files(here / "papers") == PAPERS
    data = json.loads((here / "papers/design.json").read_text())
    marks = {design["form"]: design["fingerprint"] for design in data["designs"]}
    for name in PAPERS:
        if not name.endswith((".json", ".png", ".xlsx")):
            text = (here / "papers" / name).read_text()
            assert "Stairs" not in text, name
            assert marks.get(name.partition("/")[0], marks["ladder"]) in text, name


def test_time_and_effort_exclude_each_other(here: Path) -> None:
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--seconds", "5", "--effort", "5"])
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert ran.stderr == (
        "contactlogic: --seconds and --effort exclude each other\n  give one of them\n"
    )
    assert _files(here) == ["stairs.toml"]


def test_a_budget_for_every_relay_is_refused_or_met_with_repeaters(here: Path) -> None:
    # a vote of 3 takes 4 changeovers, so one of three relays needs a second
    (here / "vote.toml").write_text(VOTE)
    arguments = ["wire", "vote.toml", "--poles-per-relay", "1", "--effort", "5"]
    ran = CliRunner().invoke(app, arguments)
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert re.match(r"contactlogic: vote.toml, \[limits\]: [ABC] may use 1 pole", ran.stderr)
    assert "--repeaters" in ran.stderr
    assert _files(here) == ["stairs.toml", "vote.toml"]
    ran = CliRunner().invoke(app, [*arguments, "--repeaters"])
    assert ran.exit_code == 0, ran.stderr
    data = json.loads((here / "vote/design.json").read_text())
    assert data["repeaters"]
    for name, relay in data["repeaters"].items():
        assert f"note: {name} is a repeater of {relay}: its coil in parallel with" in ran.stdout
    for design in data["designs"]:
        assert max(count["poles"] for count in design["per_relay"].values()) == 1
    ran = CliRunner().invoke(app, ["verify", "vote/design.json", "vote.toml"])
    assert ran.exit_code == 0, ran.stdout


HOSTILE = r"=cmd \"<b>&amp;\\ \u001b[31m {x} %s | `\n#2"  # escapes are TOML's


def test_hostile_titles_change_nothing_but_the_title(here: Path) -> None:
    (here / "stairs.toml").write_text(STAIRS.replace("Stairs", HOSTILE))
    ran = CliRunner().invoke(app, ["wire", "stairs.toml"])
    assert ran.exit_code == 0, ran.stderr
    assert "\x1b" not in ran.stdout
    assert ran.stdout.splitlines()[2].endswith(' =cmd "<b>&amp;\\ [31m {x} %s | ` #2')
    assert _files(here / "stairs") == PAPERS
    title = json.loads((here / "stairs/design.json").read_text())["title"]
    assert title == '=cmd "<b>&amp;\\ \x1b[31m {x} %s | `\n#2'
    for form in ("ladder", "bridge"):
        picture = ElementTree.parse(here / "stairs" / form / "drawing.svg")
        assert '=cmd "<b>&amp;\\' in "".join(picture.getroot().itertext()).replace("\xa0", " ")
        with (here / "stairs" / form / "wiring.csv").open(newline="") as file:
            assert {len(row) for row in csv.reader(file)} == {5}


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
        arguments = ("wire", job, "--out", f"out{seed}", "-q", "--effort", "2")
        done = _command(*arguments, cwd=here, PYTHONHASHSEED=seed)
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
    ran = CliRunner().invoke(app, ["wire", "bad.toml", "--effort", "1"])
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
    monkeypatch.setattr("contactlogic.synthesis.synthesise", lambda _job, _search: SLUICE_BOTH)
    return here


def test_screen_text(by_hand: Path) -> None:
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--out", "papers"])
    golden = Path(__file__).parents[1] / "report" / "golden" / "summary-both.txt"
    assert ran.exit_code == 0, ran.stderr
    assert ran.stdout == golden.read_text() + f"written to papers: {WRITTEN}\n"
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
    wanted = set(PAPERS)
    for form in ("ladder", "bridge"):
        said = f"note: no picture of the {form}, its drawing.gv was written instead: no renderer"
        assert f"{said} found\n" in ran.stdout
        assert "graph" in (by_hand / "stairs" / form / "drawing.gv").read_text()
        wanted -= {f"{form}/drawing.svg", f"{form}/drawing.png"}
        wanted |= {f"{form}/drawing.gv"}
    assert _files(by_hand / "stairs") == sorted(wanted)
    # the next run, with a renderer, replaces the texts by pictures and needs no force
    monkeypatch.undo()
    monkeypatch.chdir(by_hand)
    assert CliRunner().invoke(app, ["wire", "stairs.toml"]).exit_code == 0
    assert _files(by_hand / "stairs") == PAPERS


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

    monkeypatch.setattr("contactlogic.synthesis.synthesise", wire)
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


def test_an_interrupted_search_is_told_and_its_papers_are_written(
    by_hand: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    stopped = replace(SLUICE_BOTH, interrupted=True)
    monkeypatch.setattr("contactlogic.synthesis.synthesise", lambda _job, _search: stopped)
    ran = CliRunner().invoke(app, ["wire", "stairs.toml"])
    assert ran.exit_code == 130
    assert "stopped early: this is the best found so far\n" in ran.stdout
    assert "The search was stopped early." in (by_hand / "stairs/report.md").read_text()
    assert _files(by_hand / "stairs") == PAPERS
    ran = CliRunner().invoke(app, ["wire", "stairs.toml", "--json"])
    assert ran.exit_code == 130
    assert len(json.loads(ran.stdout)["designs"]) == 2
    assert ran.stderr == "contactlogic: stopped early: this is the best found so far\n"


def test_ctrl_c_keeps_the_best_design(here: Path) -> None:
    """A real search, stopped as a terminal stops it: by a signal to the whole process group.

    Its live line, on a terminal made for the purpose, tells that the search is under way.
    """
    job = Path(__file__).parents[2] / "examples" / "tide.toml"
    tool = Path(sys.executable).with_name("contactlogic")
    screen, end = os.openpty()
    with subprocess.Popen(
        [str(tool), "wire", str(job), "--out", "tide", "--seconds", "300"],
        stdout=subprocess.PIPE,
        stderr=end,
        text=True,
        cwd=here,
        env=os.environ | {"COLUMNS": "120", "TERM": "xterm"},
        start_new_session=True,
    ) as process:
        os.close(end)
        seen = b""
        while not re.search(rb"ladder \d+, bridge \d+ poles, at least \d+ proved, \d+ s", seen):
            seen += os.read(screen, 4096)
        os.killpg(process.pid, signal.SIGINT)
        with contextlib.suppress(OSError):  # Linux: the other end is closed
            while os.read(screen, 4096):
                pass
        said, _ = process.communicate()
    os.close(screen)
    assert process.returncode == 130
    assert "stopped early: this is the best found so far" in said
    assert re.search(r"^bound: at least \d+ poles, ", said, flags=re.MULTILINE)
    assert _files(here / "tide") == PAPERS
    ran = CliRunner().invoke(app, ["verify", "tide/design.json", str(job)])
    assert ran.exit_code == 0, ran.stdout


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
