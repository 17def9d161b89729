"""Output folders: whole or not at all, and never over other files."""

from __future__ import annotations

import json
import os
from pathlib import Path

import pytest

from contactlogic.errors import OutputError
from contactlogic.report import folder as folder_module
from contactlogic.report.folder import check_folder, write_folder

DESIGN = json.dumps({"schema": "contactlogic/design/1"}).encode()
FILES = {
    "design.json": DESIGN,
    "report.md": b"one",
    "ladder/drawing.svg": b"<svg/>",
    "ladder/wiring.csv": b"wire",
}


def _tree(root: Path) -> dict[str, bytes]:
    return {
        str(path.relative_to(root)): path.read_bytes()
        for path in sorted(root.rglob("*"))
        if path.is_file()
    }


def test_a_new_folder_is_made_with_its_parents(tmp_path: Path) -> None:
    write_folder(tmp_path / "a" / "b", FILES)
    assert _tree(tmp_path / "a" / "b") == FILES
    assert [p.name for p in tmp_path.iterdir()] == ["a"]
    assert [p.name for p in (tmp_path / "a").iterdir()] == ["b"]


def test_a_new_folder_has_the_usual_permissions(tmp_path: Path) -> None:
    (tmp_path / "usual").mkdir()
    write_folder(tmp_path / "new", FILES)
    assert (tmp_path / "new").stat().st_mode == (tmp_path / "usual").stat().st_mode


def test_an_empty_folder_is_filled(tmp_path: Path) -> None:
    write_folder(tmp_path, FILES)
    assert _tree(tmp_path) == FILES


def test_our_own_folder_is_written_again_and_stale_papers_go(tmp_path: Path) -> None:
    earlier = FILES | {"bridge/wiring.csv": b"old", "ladder/drawing.gv": b"old"}
    write_folder(tmp_path, earlier)
    again = FILES | {"report.md": b"two"}
    write_folder(tmp_path, again)
    assert _tree(tmp_path) == again
    assert not (tmp_path / "bridge").exists()


def test_other_files_are_refused_and_named(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("mine")
    with pytest.raises(OutputError) as caught:
        write_folder(tmp_path, FILES)
    assert str(caught.value) == (
        f"{tmp_path}: the folder already holds other files (notes.txt)\n"
        "  choose another folder with --out, or write all the same with --force"
    )
    assert _tree(tmp_path) == {"notes.txt": b"mine"}


@pytest.mark.parametrize(
    "files",
    [
        {"design.json": b"{}"},
        {"design.json": b"not json"},
        {"report.md": b"someone's own report"},
        {"design.json": DESIGN, "ladder/own.txt": b""},
        {"design.json": DESIGN, "deep/er/own.txt": b""},
        {"design.json": json.dumps({"schema": "other/1"}).encode()},
        {"design.json": b"[" * 100_000},
    ],
)
def test_a_folder_that_only_looks_like_ours_is_refused(
    tmp_path: Path, files: dict[str, bytes]
) -> None:
    for name, content in files.items():
        (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / name).write_bytes(content)
    with pytest.raises(OutputError, match="other files"):
        check_folder(tmp_path)
    check_folder(tmp_path, force=True)
    assert _tree(tmp_path) == files


def test_force_leaves_other_files_alone(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_bytes(b"mine")
    (tmp_path / "report.md").write_bytes(b"theirs")
    (tmp_path / "bridge").mkdir()
    (tmp_path / "bridge" / "wiring.csv").write_bytes(b"theirs")
    write_folder(tmp_path, FILES, force=True)
    assert _tree(tmp_path) == FILES | {"notes.txt": b"mine", "bridge/wiring.csv": b"theirs"}


def test_a_file_in_the_way_is_refused(tmp_path: Path) -> None:
    (tmp_path / "taken").write_bytes(b"x")
    with pytest.raises(OutputError, match="this is a file, not a folder"):
        check_folder(tmp_path / "taken")
    with pytest.raises(OutputError, match="is a file, not a folder"):
        check_folder(tmp_path / "taken" / "below", force=True)
    assert _tree(tmp_path) == {"taken": b"x"}


def test_a_dangling_link_is_refused(tmp_path: Path) -> None:
    (tmp_path / "link").symlink_to(tmp_path / "nowhere")
    with pytest.raises(OutputError):
        write_folder(tmp_path / "link", FILES)
    assert [p.name for p in tmp_path.iterdir()] == ["link"]


@pytest.mark.skipif(os.geteuid() == 0, reason="the superuser may write anywhere")
def test_an_unwritable_folder_is_refused(tmp_path: Path) -> None:
    tmp_path.chmod(0o500)
    try:
        with pytest.raises(OutputError, match="no permission"):
            check_folder(tmp_path / "new")
        with pytest.raises(OutputError, match="no permission"):
            check_folder(tmp_path)
    finally:
        tmp_path.chmod(0o700)


def _fail_at(monkeypatch: pytest.MonkeyPatch, name: str, error: BaseException) -> None:
    """Let the move of `name` into its place fail, as a full disk would."""
    real = os.replace

    def replace(source: Path, target: Path) -> None:
        if Path(source).parts[-len(Path(name).parts) - 1] == "new" and str(source).endswith(name):
            raise error
        real(source, target)

    monkeypatch.setattr(folder_module.os, "replace", replace)


@pytest.mark.parametrize("name", sorted(FILES))
@pytest.mark.parametrize("error", [OSError(28, "No space left on device"), KeyboardInterrupt()])
def test_a_failure_in_mid_write_puts_the_earlier_papers_back(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str, error: BaseException
) -> None:
    earlier = dict.fromkeys(FILES, b"old") | {"design.json": DESIGN, "bridge/wiring.csv": b"old"}
    write_folder(tmp_path, earlier)
    _fail_at(monkeypatch, name, error)
    wanted = OutputError if isinstance(error, OSError) else KeyboardInterrupt
    with pytest.raises(wanted):
        write_folder(tmp_path, FILES)
    assert _tree(tmp_path) == earlier
    assert sorted(p.name for p in tmp_path.iterdir()) == [
        "bridge",
        "design.json",
        "ladder",
        "report.md",
    ]


@pytest.mark.parametrize("name", sorted(FILES))
def test_a_failure_in_an_empty_folder_leaves_it_empty(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    _fail_at(monkeypatch, name, OSError(28, "No space left on device"))
    with pytest.raises(OutputError, match="No space left on device"):
        write_folder(tmp_path, FILES)
    assert list(tmp_path.iterdir()) == []


def test_a_failure_while_filling_a_new_folder_leaves_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = Path.write_bytes

    def write_bytes(self: Path, content: bytes) -> int:
        if self.name == "wiring.csv":
            raise OSError(28, "No space left on device")
        return real(self, content)

    monkeypatch.setattr(Path, "write_bytes", write_bytes)
    with pytest.raises(OutputError, match="nothing was written"):
        write_folder(tmp_path / "a" / "b", FILES)
    assert list(tmp_path.iterdir()) == []


def test_a_folder_in_place_of_a_file_is_reported(tmp_path: Path) -> None:
    (tmp_path / "report.md").mkdir()
    with pytest.raises(OutputError, match="is a folder"):
        write_folder(tmp_path, FILES, force=True)
    assert _tree(tmp_path) == {}
    assert [p.name for p in tmp_path.iterdir()] == ["report.md"]


def test_the_current_folder_can_be_written(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    write_folder(Path("."), FILES)
    write_folder(Path("."), FILES)
    assert _tree(tmp_path) == FILES
