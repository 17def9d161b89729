"""A page written as one file: whole or not at all, and never over other people's files."""

from __future__ import annotations

import contextlib
import os
import tempfile
from pathlib import Path

from contactlogic.errors import OutputError, Place

__all__ = ["check_page", "write_page"]

_OURS = b'<meta name="generator" content="contactlogic">'
_HEAD = 1024  # bytes of a page in which its maker stands


def check_page(path: Path, *, force: bool = False) -> None:
    """Refuse a file that must not or cannot be written, before any work is done for it.

    Raises:
        OutputError: `path` is a folder, lies in none, cannot be written, or is a file that is no
            page of contactlogic's and `force` is not given.
    """
    try:
        if path.is_dir():
            raise _error(path, "this is a folder", expected="the name of a file")
        if not path.parent.is_dir():
            raise _error(path, f"there is no folder {path.parent}")
        if not os.access(path.parent, os.W_OK | os.X_OK):
            raise _error(path, f"no permission to write in {path.parent}")
        if (path.exists() or path.is_symlink()) and not force and not _is_ours(path):
            raise _error(
                path,
                "this file is there already and is no page of contactlogic's",
                hint="choose another file with --out, or write all the same with --force",
            )
    except OSError as error:
        raise _error(path, f"cannot be used: {error.strerror or error}") from error


def write_page(path: Path, content: bytes, *, force: bool = False) -> None:
    """Write the page; what was there before is replaced in one step.

    Raises:
        OutputError: as `check_page`, or the writing failed; then nothing has changed.
    """
    check_page(path, force=force)
    made = None
    try:
        umask = os.umask(0)
        os.umask(umask)
        handle, made = tempfile.mkstemp(prefix=".contactlogic-", dir=path.parent)
        with os.fdopen(handle, "wb") as file:
            file.write(content)
        os.chmod(made, 0o666 & ~umask)  # a file made for a moment is private
        os.replace(made, path)
    except OSError as error:
        if made is not None:
            with contextlib.suppress(OSError):
                os.unlink(made)
        raise _error(path, f"cannot be written: {error.strerror or error}") from error


def _is_ours(path: Path) -> bool:
    if not path.is_file():
        return False
    with path.open("rb") as file:
        return _OURS in file.read(_HEAD)


def _error(
    path: Path, what: str, *, expected: str | None = None, hint: str | None = None
) -> OutputError:
    hint = hint or "choose another file with --out"
    return OutputError(what, place=Place(file=str(path)), expected=expected, hint=hint)
