"""Output folders: written whole or not at all, and never over other people's files.

Every file is first written beside its place (in a new folder beside the wanted one, or in a
working folder inside an existing one), then moved.  When a move fails, what was moved is put
back, so that a reader finds either the old papers or the new ones, never a mixture.
"""

from __future__ import annotations

import contextlib
import json
import os
import shutil
import tempfile
from collections.abc import Iterator, Mapping
from pathlib import Path

from contactlogic.errors import OutputError, Place

__all__ = ["FORMS", "check_folder", "write_folder"]

FORMS = ("ladder", "bridge")
_TOP = ("design.json", "report.md", "report.html")
_DRAWN = tuple(f"{name}.{kind}" for name in ("drawing", "states") for kind in ("svg", "png", "gv"))
_PER_FORM = (
    *_DRAWN,
    "chart.svg",
    "chart.png",
    "wiring.csv",
    "wiring.xlsx",
    "terminals.csv",
    "ticklist.md",
    "schedule.csv",
    "purchase.csv",
    "recovery.json",
)
_OURS = frozenset((*_TOP, *(f"{form}/{name}" for form in FORMS for name in _PER_FORM)))
_SCHEMA = "contactlogic/design/"


def check_folder(folder: Path, *, force: bool = False) -> None:
    """Refuse a folder that must not or cannot be written, before any work is done for it.

    Raises:
        OutputError: `folder` is a file, cannot be reached or written, or holds files that are
            not contactlogic's own output and `force` is not given.
    """
    try:
        if not folder.exists() and not folder.is_symlink():
            parent = next(p for p in (folder.absolute()).parents if p.exists())
            if not parent.is_dir():
                raise _error(folder, f"{parent} is a file, not a folder")
            if not os.access(parent, os.W_OK | os.X_OK):
                raise _error(folder, f"no permission to write in {parent}")
            return
        if not folder.is_dir():
            raise _error(folder, "this is a file, not a folder")
        if not os.access(folder, os.R_OK | os.W_OK | os.X_OK):
            raise _error(folder, "no permission to write in this folder")
        strange = () if force else _strange(folder)
    except OSError as error:
        raise _error(folder, f"cannot be used: {error.strerror or error}") from error
    if strange:
        shown = ", ".join(strange[:3]) + (" ..." if len(strange) > 3 else "")
        raise _error(
            folder,
            f"the folder already holds other files ({shown})",
            hint="choose another folder with --out, or write all the same with --force",
        )


def write_folder(folder: Path, files: Mapping[str, bytes], *, force: bool = False) -> None:
    """Write `files` (path inside the folder -> content) whole or not at all.

    Papers of an earlier run that this run does not replace are taken away, so that papers of two
    designs never lie together.  Other files, met only with `force`, stay as they are.

    Raises:
        OutputError: as `check_folder`, or the writing failed; then nothing has changed.
    """
    check_folder(folder, force=force)
    try:
        if folder.exists():
            _replace(folder.resolve(), files)
        else:
            _create(folder.absolute(), files)
    except OSError as error:
        raise _error(
            folder,
            f"cannot be written: {error.strerror or error}",
            hint="nothing was written; choose another folder with --out",
        ) from error


def _error(folder: Path, what: str, *, hint: str | None = None) -> OutputError:
    hint = hint or "choose another folder with --out"
    return OutputError(what, place=Place(file=str(folder)), hint=hint)


def _entries(folder: Path) -> Iterator[str]:
    """Paths of everything in the folder that is not a plain folder of its own, sorted."""
    for entry in sorted(folder.iterdir()):
        if entry.is_dir() and not entry.is_symlink():
            inner = [f"{entry.name}/{name}" for name in _entries(entry)]
            # an empty folder counts too, unless it is where our own papers go
            yield from inner or ([] if entry.name in FORMS else [f"{entry.name}/"])
        else:
            yield entry.name


def _strange(folder: Path) -> tuple[str, ...]:
    """Entries that are no output of ours; all of them where no design file vouches for them."""
    entries = tuple(_entries(folder))
    if entries and not _is_ours(folder):
        return entries
    return tuple(name for name in entries if name not in _OURS)


def _is_ours(folder: Path) -> bool:
    """Whether the folder's design.json is of our own schema."""
    try:
        data = json.loads((folder / "design.json").read_bytes())
    except (OSError, ValueError, RecursionError):
        return False
    schema = data.get("schema") if isinstance(data, dict) else None
    return isinstance(schema, str) and schema.startswith(_SCHEMA)


def _fill(root: Path, files: Mapping[str, bytes]) -> None:
    for name, content in files.items():
        path = root / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content)


def _create(folder: Path, files: Mapping[str, bytes]) -> None:
    """A folder that does not exist yet: filled beside its place, then renamed."""
    missing = [p for p in folder.parents if not p.exists()]
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        with _working_folder(folder.parent) as work:
            new = work / "new"
            new.mkdir()  # with the usual permissions; those of the working folder are private
            _fill(new, files)
            new.rename(folder)
    except BaseException:
        for parent in missing:  # innermost first
            with contextlib.suppress(OSError):
                parent.rmdir()
        raise


def _replace(folder: Path, files: Mapping[str, bytes]) -> None:
    """A folder that exists: every file moved in, the earlier ones kept until all is in place."""
    earlier = _is_ours(folder)
    stale = [name for name in sorted(_OURS - files.keys()) if earlier and (folder / name).is_file()]
    with _working_folder(folder) as work:
        new, old = work / "new", work / "old"
        _fill(new, files)
        with _undo_on_failure() as undo:
            for parent in sorted({(folder / name).parent for name in files}):
                if not parent.exists():
                    parent.mkdir()
                    undo.callback(parent.rmdir)
            for name in (*stale, *files):
                place = folder / name
                if place.is_dir() and not place.is_symlink():
                    raise IsADirectoryError(None, f"{name} is a folder there", str(place))
                if _there(place):
                    _move(place, old / name)
                    undo.callback(_move, old / name, place)
                if name in files:
                    _move(new / name, place)
                    undo.callback(place.unlink)
    for form in FORMS:  # a form's folder that has lost its last paper
        if earlier and not any(name.startswith(f"{form}/") for name in files):
            with contextlib.suppress(OSError):
                (folder / form).rmdir()


def _there(path: Path) -> bool:
    return path.exists() or path.is_symlink()


def _move(source: Path, target: Path) -> None:
    target.parent.mkdir(parents=True, exist_ok=True)
    os.replace(source, target)


@contextlib.contextmanager
def _working_folder(parent: Path) -> Iterator[Path]:
    work = Path(tempfile.mkdtemp(prefix=".contactlogic-", dir=parent))
    try:
        yield work
    finally:
        shutil.rmtree(work, ignore_errors=True)


@contextlib.contextmanager
def _undo_on_failure() -> Iterator[contextlib.ExitStack]:
    """Run what was registered, last first, unless the block ends well."""
    with contextlib.ExitStack() as undo:
        yield undo
        undo.pop_all()
