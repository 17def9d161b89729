"""A job file's TOML: reading it, and finding the line on which a key stands.

TOML is data: nothing here or behind it evaluates text.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from contactlogic.errors import JobFileError, Place
from contactlogic.job.textfile import read_text
from contactlogic.naming import place_of

__all__ = ["first_line_of", "key_lines", "place_of_key", "read_toml"]

_LOOKED_AT = 500  # characters of a line; a key further on is not looked for


def read_toml(path: Path, place: Place) -> tuple[dict[str, Any], str]:
    """The file's data and its text.

    Raises:
        JobFileError: missing, unreadable or not TOML.
    """
    text = read_text(path, place)
    try:
        return tomllib.loads(text), text
    except RecursionError:
        raise JobFileError(
            "the file is nested too deeply", place=place, expected="sections, keys and values"
        ) from None
    except ValueError as error:  # TOMLDecodeError, or a number of thousands of digits
        raise _not_toml(str(error), text, place) from None


_REASONS = {
    "Cannot overwrite a value": "this key is given twice",
    "Cannot declare": "this section stands twice",
    "Invalid value": "no value begins here",
    "Unclosed array": "a list is not closed with ]",
    "Unclosed inline table": "a { is not closed with }",
    "Illegal character '\\n'": "the line ends inside a string",
    "Unterminated string": "a string is not closed",
    "Expected '=' after a key": "an = was expected after the key",
    "Expected newline or end of document": "nothing was expected here but the end of the line",
    "Exceeds the limit": "a number is too long",
}
"""The reader's reasons in other words; its own stand where none of these fits."""


def _not_toml(message: str, text: str, place: Place) -> JobFileError:
    reason = message.split(" (at ")[0]
    own = next((own for start, own in _REASONS.items() if reason.startswith(start)), None)
    found = re.search(r"\(at line (\d+), column (\d+)\)", message)
    lines = text.split("\n")
    if found and int(found[1]) <= len(lines):
        number, column = int(found[1]), int(found[2]) - 1
        line = lines[number - 1].rstrip("\r")
        place = replace(place, row=f"line {number}", line=line, column=min(column, len(line)))
    elif "(at end of document)" in message:
        place = replace(place, row="end of the file")
    return JobFileError(
        "not a TOML file: " + (own or reason[:1].lower() + reason[1:]),
        place=place,
        expected='lines such as [table], key = "text", key = 2',
        hint="text stands in quotes" if reason == "Invalid value" else None,
    )


def key_lines(text: str) -> dict[tuple[str, ...], int]:
    """Line number of each section and key, by its path, as far as a plain look finds them."""
    found: dict[tuple[str, ...], int] = {}
    section: tuple[str, ...] = ()
    closing = None
    for number, line in enumerate(text.split("\n"), start=1):
        if closing:
            if closing in line:
                closing = None
            continue
        start = line[:_LOOKED_AT].strip()
        heading = re.match(r"\[+([^\[\]]+)\]", start)
        key = re.match(r"([^=#\[{]+)=", start)
        if heading:
            section = _path(heading[1])
            found.setdefault(section, number)
        elif key:
            found.setdefault(section + _path(key[1]), number)
            opened = re.match(r"\s*(\"\"\"|''')", start[key.end() :])
            if opened and line.count(opened[1]) == 1:
                closing = opened[1]
    return found


def _path(key: str) -> tuple[str, ...]:
    return tuple(part.strip().strip("\"'") for part in key.split("."))


def place_of_key(text: str, path: Sequence[str], place: Place) -> Place:
    """`place` with the line and a caret for the key at `path`, or for the nearest thing above it.

    A key inside { } stands on the line of the key that holds it.
    """
    lines = key_lines(text)
    for length in range(len(path), 0, -1):
        number = lines.get(tuple(path[:length]))
        if number is None:
            continue
        line = text.split("\n")[number - 1].rstrip("\r")
        found = place
        for name in reversed(path[length - 1 :]):
            found = place_of(name, line, place)
            if found.column is not None:
                break
        return replace(found, row=f"line {number}")
    return place


def first_line_of(value: str, path: Sequence[str], text: str) -> int | None:
    """Line of the file on which a string of many lines begins, None if it is not found there."""
    number = key_lines(text).get(tuple(path))
    if number is None:
        return None
    inside = value.split("\n")
    if len(inside) == 1:
        return number
    lines = text.replace("\r\n", "\n").split("\n")
    for start in (number, number + 1):  # TOML drops a line end right after the opening quotes
        there = lines[start - 1 : start - 1 + len(inside)]
        if (
            len(there) == len(inside)
            and there[0].endswith(inside[0])
            and there[1:-1] == inside[1:-1]
            and there[-1].startswith(inside[-1])
        ):
            return start
    return None
