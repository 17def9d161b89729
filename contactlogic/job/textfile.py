"""Reading a user's file whole, with every way that can fail said in one manner."""

from __future__ import annotations

from pathlib import Path

from contactlogic.errors import JobFileError, LimitError, Place

__all__ = ["read_bytes", "read_text"]

_MOST_MEBIBYTES = 16  # a full table of 16 inputs and 8 loads is a quarter of this


def read_bytes(path: Path, place: Place) -> bytes:
    """The file's bytes.

    Raises:
        JobFileError: missing, a folder or unreadable.
        LimitError: too large.
    """
    try:
        if path.is_dir():
            raise JobFileError("this is a folder", place=place, expected="a file")
        with path.open("rb") as file:
            data = file.read((_MOST_MEBIBYTES << 20) + 1)
    except FileNotFoundError:
        raise JobFileError(
            "there is no such file", place=place, hint="check the name and the folder"
        ) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise JobFileError(
            f"the file cannot be read: {reason}", place=place, expected="a file you may read"
        ) from None
    if len(data) > _MOST_MEBIBYTES << 20:
        raise LimitError(
            "the file is too large", place=place, expected=f"at most {_MOST_MEBIBYTES} MiB"
        )
    return data


def read_text(path: Path, place: Place) -> str:
    """The file's text in UTF-8, a byte-order mark dropped."""
    data = read_bytes(path, place)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise JobFileError(
            f"the file is not UTF-8 text (line {line})",
            place=place,
            expected="text in UTF-8",
            hint="save it again as UTF-8",
        ) from None
