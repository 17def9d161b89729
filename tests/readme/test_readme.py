"""The README's commands and claims, run as they are written."""

from __future__ import annotations

import re
import shlex
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from typer.testing import CliRunner

from contactlogic.cli.app import app
from contactlogic.report.cautions import CAUTIONS

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")


TABLES = README[: README.index("## Sequencers")]
"""What is said of tables and formulas, before sequences are."""


def _blocks(language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```$", README, flags=re.MULTILINE | re.DOTALL)


MAIN, TESTS, *OTHERS = (block.strip() for block in _blocks("sh"))
"""The two commands for a fresh machine."""


def test_the_two_commands_are_single_lines() -> None:
    for command in (MAIN, TESTS):
        assert "\n" not in command
        assert command.startswith("python3 -m venv .venv && .venv/bin/pip install -q ")
    assert README.index(MAIN) < README.index(TESTS) < README.index("## What comes out")


def _wire_arguments(command: str) -> list[str]:
    part = command.rpartition("&&")[2].strip()
    tool, *arguments = shlex.split(part)
    assert tool == ".venv/bin/contactlogic"
    return arguments


def _in_a_copy_of_the_examples(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    shutil.copytree(ROOT / "examples", tmp_path / "examples")
    monkeypatch.chdir(tmp_path)


def test_the_main_command_prints_what_the_readme_shows(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    _in_a_copy_of_the_examples(tmp_path, monkeypatch)
    ran = CliRunner().invoke(app, _wire_arguments(MAIN))
    assert ran.exit_code == 0, ran.stderr
    shown = next(block for block in _blocks("text") if block.startswith(("no load is", "on with")))
    assert ran.stdout == shown, "after a change of the search: python tests/readme/refresh.py"
    for name in re.findall(r"`((?:ladder/)?[a-z]+\.(?:json|md|svg|png|csv))`", TABLES):
        if name != "wiring.csv":  # the short form, in running text
            assert (tmp_path / "ferry" / name).is_file(), name
    command, said = next(b for b in _blocks("text") if b.startswith("$ ")).split("\n", 1)
    ran = CliRunner().invoke(app, shlex.split(command)[2:])
    assert (ran.exit_code, ran.stdout) == (0, said)


def test_the_table_shown_is_the_example() -> None:
    (shown,) = _blocks("csv")
    assert shown == (ROOT / "examples" / "ferry.csv").read_text(encoding="utf-8")


def test_the_pictures_shown_are_of_the_designs_shown() -> None:
    paths = re.findall(r"!\[[^]]*\]\(([^)]*)\)", README)
    marks = re.findall(r"^((?:ladder|bridge) [0-9a-f]{6}) Ferry landing$", README, re.MULTILINE)
    assert len(marks) == 2
    for path, mark in zip(paths, marks, strict=True):
        assert (ROOT / path).stat().st_size < 60_000
        picture = (ROOT / path).read_text(encoding="utf-8").replace("&#160;", " ")
        assert mark in picture
        assert "Ferry landing" in picture


def test_other_files_named_are_there() -> None:
    for path in re.findall(r"(?<!!)\[[^]]*\]\(([^)]*)\)", README):
        assert (ROOT / path).exists(), path


def test_the_bare_table_command_works(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    _in_a_copy_of_the_examples(tmp_path, monkeypatch)
    (command,) = re.findall(r"`contactlogic (wire \S+\.csv [^`]*)`", README)
    ran = CliRunner().invoke(app, [*shlex.split(command), "--effort", "1"])
    assert ran.exit_code == 0, ran.stderr


@pytest.mark.parametrize("path", sorted((ROOT / "examples").glob("*.toml")), ids=lambda p: p.stem)
def test_examples_begin_with_a_comment_and_can_be_wired(
    path: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    assert path.read_text(encoding="utf-8").startswith("# ")
    monkeypatch.chdir(tmp_path)
    if "[drives]" in path.read_text(encoding="utf-8"):  # wired already: judged, and found wanting
        ran = CliRunner().invoke(app, ["recover", str(path)])
        assert ran.exit_code == 1, ran.stderr
        assert ran.stdout.startswith("sticks: ")
        return
    effort = "10" if path.stem == "sidings" else "1"  # a budget takes some search to keep
    ran = CliRunner().invoke(app, ["wire", str(path), "--effort", effort])
    assert ran.exit_code == 0, ran.stderr
    assert "\nproved: all " in ran.stdout


def test_the_examples_named_are_there() -> None:
    named = set(re.findall(r"`([a-z]+\.toml)`", README[: README.index("## The commands")]))
    assert named <= {path.name for path in (ROOT / "examples").glob("*.toml")}
    assert len(named) >= 8


def test_the_python_example_runs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    _in_a_copy_of_the_examples(tmp_path, monkeypatch)
    (code,) = _blocks("python")
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=tmp_path, check=False
    )
    assert done.returncode == 0, done.stderr
    assert re.fullmatch(r"\d+ poles, at least \d+\n", done.stdout)


def test_the_job_file_of_the_readme_can_be_wired(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Every TOML block of the job file section is one that contactlogic reads."""
    monkeypatch.chdir(tmp_path)
    blocks = _blocks("toml")
    section = README[README.index("## Job files") : README.index("## From Python")]
    title, table, from_file, formulas, facts, limits = (b for b in blocks if b in section)
    (tmp_path / "one.toml").write_text(title + table + facts + limits)
    (tmp_path / "two.toml").write_text(title + formulas + facts + limits)
    (tmp_path / "three.toml").write_text(from_file)
    shutil.copy(ROOT / "examples" / "ferry.csv", tmp_path)
    (tmp_path / "four.toml").write_text(next(b for b in blocks if b.startswith("[sequence]")))
    for name in ("one", "two", "three", "four"):
        ran = CliRunner().invoke(app, ["wire", f"{name}.toml", "--effort", "1"])
        assert ran.exit_code == 0, ran.stderr


def test_options_and_exit_statuses_are_those_of_the_command() -> None:
    listed = set(re.findall(r"^\| `(--[a-z-]+)", README, flags=re.MULTILINE))
    offered = set(re.findall(r"--[a-z-]+[a-z]", CliRunner().invoke(app, ["wire", "--help"]).stdout))
    assert listed == {option for option in offered if not option.startswith(("--no-", "--help"))}


def test_the_cautions_are_those_of_the_report() -> None:
    text = " ".join(README[README.index("## Cautions") :].split())
    for caution in CAUTIONS:
        assert f"- {caution}" in text


def _clone(tmp_path: Path) -> Path:
    """The files of this tree that a fresh clone would have."""
    listed = subprocess.run(
        ["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, text=True, check=True
    ).stdout
    clone = tmp_path / "clone"
    for name in filter(None, listed.split("\0")):
        (clone / name).parent.mkdir(parents=True, exist_ok=True)
        shutil.copy2(ROOT / name, clone / name)
    return clone


@pytest.mark.slow
@pytest.mark.parametrize("command", [MAIN, TESTS], ids=["main", "tests"])
def test_the_commands_as_written_in_a_fresh_clone(command: str, tmp_path: Path) -> None:
    """Builds an environment and installs into it: some minutes, and the package index."""
    clone = _clone(tmp_path)
    done = subprocess.run(
        ["bash", "-euo", "pipefail", "-c", command],
        cwd=clone,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout[-3000:] + done.stderr[-3000:]
    if command == MAIN:
        assert (clone / "ferry" / "design.json").is_file()
    else:
        assert re.search(r"\d+ passed", done.stdout)


def test_the_sequencer_commands_do_what_is_said(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    _in_a_copy_of_the_examples(tmp_path, monkeypatch)
    lines = [line for block in OTHERS for line in block.splitlines()]
    assert [line.split()[1] for line in lines] == ["wire", "recover", "recover"]
    status = []
    for line in lines:
        extra = ["--effort", "2"] if " wire " in line else []
        status.append(CliRunner().invoke(app, [*shlex.split(line)[1:], *extra]).exit_code)
    assert status == [0, 0, 1]
    assert (tmp_path / "fountain" / "bridge" / "states.svg").exists()
