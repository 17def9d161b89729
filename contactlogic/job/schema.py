"""The job file's sections and keys, validated by pydantic; its complaints in our words."""

from __future__ import annotations

import re
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

from contactlogic.errors import JobFileError, Place
from contactlogic.job.model import Isolate, LoadKind, Objective, Suppression
from contactlogic.job.sequence import Memory, Stepping
from contactlogic.job.table import Unlisted
from contactlogic.job.tomlfile import place_of_key, read_toml
from contactlogic.naming import did_you_mean, shortened

if TYPE_CHECKING:
    from pydantic import BaseModel, ValidationError

__all__ = ["read_job_file"]

_KINDS = {
    "table": ("formulas",),
    "formulas": ("table",),
    "sequence": ("timing", "drives"),
    "pattern": (),
    "drives": ("timing", "sequence"),
    "timing": ("sequence", "drives"),
}
"""Sections that say what a job is, and which of the others may stand beside each."""

_EXPECTED = {
    "title": 'text such as "Sluice house"',
    "table": "a section [table]",
    "table.columns": 'text such as "UP DOWN | LAMP"',
    "table.rows": "text with a row such as 0 1 | 1 on each line",
    "table.file": "the name of a .csv or .xlsx file",
    "table.loads": 'a list of names such as ["LAMP", "HORN"]',
    "table.unlisted": '"off" or "free"',
    "formulas": "a section [formulas]",
    "formulas.*": 'switching algebra in quotes, such as "UP DOWN\'" or "1"',
    "sequence": "a section [sequence]",
    "sequence.columns": 'text such as "A B C D | STRIKE"',
    "sequence.rows": "text with a state such as 1 0 0 1 | 1 on each line",
    "sequence.repeat": "true or false",
    "sequence.inputs": 'the columns moved from outside, such as "P"; "" for none',
    "sequence.inputs_return": "true or false",
    "sequence.branches": 'a list such as [{ after = 3, when = "P", goto = 7 }]',
    "sequence.branches.*": '{ after = 3, when = "P", goto = 7 }',
    "sequence.branches.*.after": "a row, counted from 1",
    "sequence.branches.*.when": 'an input such as "P", or "P\'" for its release',
    "sequence.branches.*.goto": "a row, counted from 1",
    "sequence.memory": '"allowed" or "forbidden"',
    "timing": "a section [timing]",
    "timing.slow_release": 'relays, such as "A B"; "" for none',
    "timing.slow_operate": 'relays, such as "A B"; "" for none',
    "drives": "a section [drives]",
    "drives.*": 'switching algebra in quotes, such as "B\' C" or "1"',
    "pattern": "a section [pattern]",
    "pattern.loads": 'text such as "RED AMBER GREEN"',
    "pattern.rows": "text with the loads of a step, such as 1 0 0, on each line",
    "pattern.step": '"slow", "ring" or "pulse"',
    "supply": "a section [supply]",
    "supply.feed": 'a label such as "+24 V"',
    "supply.return": 'a label such as "0 V"',
    "supply.coil_volts": "a number above 0, such as 24",
    "loads": "a section [loads]",
    "loads.*": '{ kind = "lamp", amps = 0.2 }',
    "loads.*.kind": '"lamp", "horn", "valve", "coil", "motor" or "other"',
    "loads.*.amps": "a number above 0",
    "loads.*.fuse": 'a rating such as "2 A" or "T 500 mA"',
    "loads.*.suppression": '"diode", "zener", "varistor", "rc" or "tvs"',
    "coils": "a section [coils]",
    "coils.*": '{ hold = "470 uF", series = "100 ohm", suppression = "diode" }',
    "coils.*.amps": "a number above 0",
    "coils.*.fuse": 'a rating such as "2 A" or "T 500 mA"',
    "coils.*.suppression": '"diode", "zener", "varistor", "rc" or "tvs"',
    "coils.*.hold": 'a capacitor such as "470 uF"',
    "coils.*.series": 'a resistor such as "100 ohm" or "4k7"',
    "panel": "a section [panel]",
    "panel.*": "{ row = 1, column = 2 }",
    "panel.*.row": "a number from -1000 to 1000",
    "panel.*.column": "a number from -1000 to 1000",
    "limits": "a section [limits]",
    "limits.poles": "poles per relay, such as { UP = 2 }",
    "limits.poles.*": "a whole number from 0 to 1000",
    "limits.contacts": 'makes and breaks per relay, such as { START = "1A1B" }',
    "limits.contacts.*": 'makes (A) and breaks (B), such as "1A1B", "2A" or "1B"',
    "limits.isolate": '"stored", "all" or "none"',
    "limits.objective": '"poles" or "contacts"',
    "limits.guided": 'relays with forcibly guided contacts, such as "UP DOWN"; "" for none',
}
"""What belongs at each key; `*` stands for the user's own names."""


def read_job_file(path: Path, shown: str) -> tuple[Any, str]:
    """The validated contents of a job file of any kind, and its text.

    Raises:
        JobFileError: unreadable, not TOML, unknown keys, wrong types, or sections that do not go
            together.
    """
    place = Place(file=shown)
    data, text = read_toml(path, place)
    if not data:
        raise JobFileError(
            "the file is empty",
            place=place,
            expected="a job with [table], [formulas], [sequence], [pattern] or [drives]",
        )
    _check_kind(data, text, place)
    from pydantic import ValidationError

    try:
        return _model().model_validate(data), text
    except ValidationError as error:
        raise _translated(error, data, text, place) from None


def _check_kind(data: dict[str, Any], text: str, place: Place) -> None:
    kinds = [section for section in data if section in _KINDS]
    for section in kinds[1:]:
        first = next((kind for kind in kinds if section not in (kind, *_KINDS[kind])), None)
        if first:
            beside = [f"[{kind}]" for kind in _KINDS[first]]
            raise JobFileError(
                f"[{section}] cannot stand beside [{first}]: they are different kinds of job",
                place=place_of_key(text, [section], place),
                expected=" or ".join(beside) + f" beside [{first}]"
                if beside
                else f"none of these beside [{first}]: its relays and their timing are chosen",
            )
    if kinds == ["timing"]:
        raise JobFileError(
            "[timing] stands alone",
            place=place_of_key(text, ["timing"], place),
            expected="[sequence] or [drives] beside it",
        )


def _translated(
    error: ValidationError, data: dict[str, Any], text: str, place: Place
) -> JobFileError:
    first = error.errors(include_url=False)[0]
    path = [str(part) for part in first["loc"]]
    pattern = _pattern(path)
    section = path[0] if len(path) > 1 else None
    branch = path[2:3] if pattern.startswith("sequence.branches.*") else []  # its number, from 0
    named = [part for part in path if part not in branch]
    where = replace(place_of_key(text, named[:3], place), section=section)
    if first["type"] == "missing":
        return JobFileError(
            f"{f'branch {int(branch[0]) + 1}' if branch else f'[{section}]'} has no {path[-1]}",
            place=where,
            expected=f"{path[-1]} = {_EXPECTED[pattern]}",
        )
    if first["type"] == "extra_forbidden":
        return _unknown_key(path, pattern, isinstance(data.get(path[0]), dict), where)
    within = path[-1].isdigit() and pattern == "table.loads"  # an entry of a list
    key = ".".join(path[1 if section else 0 : -1 if within else None])
    if branch:
        key = " of ".join([*path[3:], f"branch {int(branch[0]) + 1}"])
    expected = _EXPECTED.get(pattern, first["msg"])
    value = first["input"]
    allowed = re.findall(r'"(\w+)"', expected) if first["type"] == "literal_error" else []
    return JobFileError(
        f"{key} cannot {'hold' if within else 'be'} {_value(value)}",
        place=where,
        expected=expected,
        hint=did_you_mean(value, allowed) if isinstance(value, str) else None,
    )


def _unknown_key(path: list[str], pattern: str, is_section: bool, where: Place) -> JobFileError:
    """The refusal of a key that is none, with where it belongs if it is known elsewhere."""
    key = path[-1]
    allowed = _keys_under(_pattern(path[:-1]))
    others = [known for known in _EXPECTED if known.endswith("." + key) and known != pattern]
    belongs = f"{key} belongs in [{others[0].split('.')[0]}]" if others else None
    hint = did_you_mean(key, allowed)
    if hint is None or len(path) == 1:  # a key above all sections has most likely lost its own
        hint = belongs or hint
    what = f"there is no key {shortened(key)}"
    if len(path) == 1 and is_section:
        what = f"there is no section [{shortened(key)}]"
    return JobFileError(what, place=where, expected="one of " + ", ".join(allowed), hint=hint)


def _value(value: Any) -> str:
    """A value of the wrong kind, in the words of TOML."""
    if isinstance(value, dict):
        return "a section or { }"
    if isinstance(value, list):
        return "a list"
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, str):
        return f'"{shortened(value)}"'
    return (
        shortened(str(value)) if not isinstance(value, int) or abs(value) < 10**40 else "so large"
    )


def _pattern(path: list[str]) -> str:
    """The key's place with the user's own names as `*`."""
    parts = list(path)
    if parts[:1] in (["formulas"], ["loads"], ["drives"], ["coils"], ["panel"]) and len(parts) > 1:
        parts[1] = "*"
    if parts[:2] in (["limits", "poles"], ["limits", "contacts"]) and len(parts) > 2:
        parts[2] = "*"
    if parts[:2] == ["sequence", "branches"] and len(parts) > 2:
        parts[2] = "*"
    if parts[:2] == ["table", "loads"]:
        parts = parts[:2]
    return ".".join(parts)


def _keys_under(parent: str) -> list[str]:
    prefix = parent + "." if parent else ""
    inner = [key.removeprefix(prefix) for key in _EXPECTED if key.startswith(prefix)]
    return [key for key in inner if "." not in key and key != "*"]


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
        unlisted: Unlisted | None = None

    class Branch(Strict):
        after: int
        when: str
        goto: int

    class Sequence(Strict):
        columns: str
        rows: str
        repeat: bool = True
        inputs: str = ""
        inputs_return: bool = True
        branches: list[Branch] = Field(default_factory=list)
        memory: Memory = "allowed"

    class Timing(Strict):
        slow_release: str = ""
        slow_operate: str = ""

    class Pattern(Strict):
        loads: str
        rows: str
        step: Stepping

    class Supply(Strict):
        feed: str | None = None
        return_: Annotated[str | None, Field(alias="return")] = None
        coil_volts: Annotated[float, Field(gt=0, allow_inf_nan=False)] | None = None

    class LoadFacts(Strict):
        kind: LoadKind | None = None
        amps: Annotated[float, Field(gt=0, allow_inf_nan=False)] | None = None
        fuse: str | None = None
        suppression: Suppression | None = None

    class CoilFacts(Strict):
        amps: Annotated[float, Field(gt=0, allow_inf_nan=False)] | None = None
        fuse: str | None = None
        suppression: Suppression | None = None
        hold: str | None = None
        series: str | None = None

    class Seat(Strict):
        row: Annotated[float, Field(ge=-1000, le=1000)]
        column: Annotated[float, Field(ge=-1000, le=1000)]

    class Limits(Strict):
        poles: dict[str, Annotated[int, Field(ge=0, le=1000)]] = Field(default_factory=dict)
        contacts: dict[str, Separate] = Field(default_factory=dict)
        isolate: Isolate = "stored"
        objective: Objective = "poles"
        guided: str = ""

    class JobFile(Strict):
        title: str | None = None
        table: Table | None = None
        formulas: dict[str, str] = Field(default_factory=dict)
        sequence: Sequence | None = None
        timing: Timing = Timing()
        drives: dict[str, str] = Field(default_factory=dict)
        pattern: Pattern | None = None
        supply: Supply = Supply()
        loads: dict[str, LoadFacts] = Field(default_factory=dict)
        coils: dict[str, CoilFacts] = Field(default_factory=dict)
        panel: dict[str, Seat] = Field(default_factory=dict)
        limits: Limits = Limits()

    return JobFile
