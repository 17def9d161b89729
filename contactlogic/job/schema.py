"""The job file's sections and keys, validated by pydantic; its complaints in our words.

TOML is data: nothing here or behind it evaluates text.
"""

from __future__ import annotations

import re
import tomllib
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from contactlogic.errors import JobFileError, Place
from contactlogic.job.model import Isolate, LoadKind, Objective
from contactlogic.job.names import did_you_mean
from contactlogic.job.textfile import read_text

if TYPE_CHECKING:
    from pydantic import BaseModel, ValidationError

__all__ = ["read_job_file"]

_OTHER_JOBS = ("sequence", "timing", "drives", "pattern")

_EXPECTED = {
    "title": 'text, such as title = "Sluice house"',
    "table": "a section [table]",
    "table.columns": 'text such as "UP DOWN | LAMP"',
    "table.rows": "text of rows, such as 0 1 | 1 a line",
    "table.file": "the name of a .csv or .xlsx file",
    "table.loads": 'a list of names such as ["LAMP", "HORN"]',
    "table.unlisted": '"off" or "free"',
    "formulas": "a section [formulas]",
    "formulas.*": "switching algebra in quotes",
    "supply": "a section [supply]",
    "supply.feed": 'a label such as "+24 V"',
    "supply.return": 'a label such as "0 V"',
    "loads": "a section [loads]",
    "loads.*": '{ kind = "lamp", amps = 0.2 }',
    "loads.*.kind": '"lamp", "horn", "valve", "coil", "motor" or "other"',
    "loads.*.amps": "a number above 0",
    "limits": "a section [limits]",
    "limits.poles": "a table such as { UP = 2 }",
    "limits.poles.*": "a whole number, 0 or more",
    "limits.contacts": 'a table such as { START = "1A1B" }',
    "limits.contacts.*": 'makes and breaks, such as "1A1B", "2A" or "1B"',
    "limits.isolate": '"stored", "all" or "none"',
    "limits.objective": '"poles" or "contacts"',
}
"""What belongs at each key; `*` stands for the user's own names."""


def read_job_file(path: Path, shown: str) -> tuple[Any, str]:
    """The validated contents of a job file, and its text.

    Raises:
        JobFileError: unreadable, not TOML, unknown keys, wrong types, or another kind of job.
    """
    place = Place(file=shown)
    text = read_text(path, place)
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise _not_toml(error, text, place) from None
    except RecursionError:
        raise JobFileError("the file is nested too deeply", place=place) from None
    if not data:
        raise JobFileError(
            "the file is empty", place=place, expected="a job with [table] or [formulas]"
        )
    for section in _OTHER_JOBS:
        if section in data:
            raise JobFileError(
                f"this is a job with [{section}]",
                place=place,
                expected="[table] or [formulas]: this version wires those",
            )
    from pydantic import ValidationError

    try:
        return _model().model_validate(data), text
    except ValidationError as error:
        raise _translated(error, data, text, place) from None


def _not_toml(error: tomllib.TOMLDecodeError, text: str, place: Place) -> JobFileError:
    message = str(error)
    found = re.search(r"\(at line (\d+), column (\d+)\)", message)
    reason = message.split(" (at ")[0]
    reason = reason[:1].lower() + reason[1:]
    lines = text.splitlines()
    if found and 0 < int(found[1]) <= len(lines):
        number, column = int(found[1]), int(found[2]) - 1
        line = lines[number - 1]
        place = replace(place, row=f"line {number}", line=line, column=min(column, len(line)))
    elif lines:
        place = replace(place, row=f"line {len(lines)}")
    return JobFileError(f"not a TOML file: {reason}", place=place, expected="TOML: key = value")


def _translated(
    error: ValidationError, data: dict[str, Any], text: str, place: Place
) -> JobFileError:
    first = error.errors(include_url=False)[0]
    path = [str(part) for part in first["loc"] if str(part) != "[key]"]
    section = path[0] if len(path) > 1 or isinstance(data.get(path[0]), dict) else None
    key = ".".join(path[1:]) if section else path[0]
    where = replace(_key_place(text, section, path[-1], place), section=section)
    pattern = _pattern(path)
    if first["type"] == "extra_forbidden":
        parent = _pattern(path[:-1])
        allowed = _keys_under(parent)
        what = f"[{path[-1]}] is no section" if pattern == path[-1] else f"unknown key {path[-1]}"
        return JobFileError(
            what,
            place=replace(where, section=section if len(path) > 1 else None),
            expected="one of " + ", ".join(allowed),
            hint=did_you_mean(path[-1], allowed),
        )
    if first["type"] == "missing":
        return JobFileError(f"{key} is missing", place=where, expected=_EXPECTED.get(pattern))
    shown = repr(first["input"])
    shown = shown if len(shown) <= 40 else shown[:37] + "..."
    return JobFileError(
        f"{key} cannot be {shown}", place=where, expected=_EXPECTED.get(pattern, first["msg"])
    )


def _key_place(text: str, section: str | None, key: str, place: Place) -> Place:
    """The line on which a key stands, as far as a plain look at the text finds it."""
    here: str | None = None
    for number, line in enumerate(text.splitlines(), start=1):
        heading = re.match(r"\s*\[\s*([^\[\]]+?)\s*\]", line)
        if heading:
            here = heading[1]
            if key == here:
                return replace(place, row=f"line {number}")
        if here in (section, None) or (section and here and here.startswith(section + ".")):
            found = re.search(rf"(?<![\w.]){re.escape(key)}(?=\s*=)", line)
            if found:
                column = found.start()
                return replace(
                    place, row=f"line {number}", line=line, column=column, width=len(key)
                )
    return place


def _pattern(path: list[str]) -> str:
    """The key's place with the user's own names as `*`."""
    own = {"formulas": 1, "loads": 1}
    parts = list(path)
    if parts and parts[0] in own and len(parts) > 1:
        parts[1] = "*"
    if parts[:2] in (["limits", "poles"], ["limits", "contacts"]) and len(parts) > 2:
        parts[2] = "*"
    if parts[:2] == ["table", "loads"]:
        parts = parts[:2]
    return ".".join(parts)


def _keys_under(parent: str) -> list[str]:
    prefix = parent + "." if parent else ""
    depth = prefix.count(".")
    return [
        key.removeprefix(prefix)
        for key in _EXPECTED
        if key.startswith(prefix) and key.count(".") == depth and not key.endswith("*")
    ]


@cache
def _model() -> type[BaseModel]:
    """The sections as pydantic models, made when first needed: pydantic is slow to load."""
    from typing import Annotated

    from pydantic import BaseModel, ConfigDict, Field

    forms = r"^([0-9]{1,2}A([0-9]{1,2}B)?|[0-9]{1,2}B)$"
    Separate = Annotated[str, Field(pattern=forms)]

    class Strict(BaseModel):
        model_config = ConfigDict(strict=True, extra="forbid")

    class Table(Strict):
        columns: str | None = None
        rows: str | None = None
        file: str | None = None
        loads: list[str] | None = None
        unlisted: Literal["off", "free"] | None = None

    class Supply(Strict):
        feed: str | None = None
        return_: Annotated[str | None, Field(alias="return")] = None

    class LoadFacts(Strict):
        kind: LoadKind | None = None
        amps: Annotated[float, Field(gt=0, allow_inf_nan=False)] | None = None

    class Limits(Strict):
        poles: dict[str, Annotated[int, Field(ge=0, le=1000)]] = Field(default_factory=dict)
        contacts: dict[str, Separate] = Field(default_factory=dict)
        isolate: Isolate = "stored"
        objective: Objective = "poles"

    class JobFile(Strict):
        title: str | None = None
        table: Table | None = None
        formulas: dict[str, str] = Field(default_factory=dict)
        supply: Supply = Supply()
        loads: dict[str, LoadFacts] = Field(default_factory=dict)
        limits: Limits = Limits()

    return JobFile
