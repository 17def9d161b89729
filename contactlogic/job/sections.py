"""Sections that jobs of several kinds share: formulas by name, supply, loads, limits."""

from __future__ import annotations

import re
from collections.abc import Collection, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from contactlogic.errors import JobFileError, LimitError, Place
from contactlogic.job.model import Limits, LoadFacts, SeparateContacts, Supply
from contactlogic.job.table import MOST_LOADS
from contactlogic.job.tomlfile import key_lines, place_of_key
from contactlogic.naming import check_names, did_you_mean, is_name, listed

__all__ = [
    "check_known",
    "formula_places",
    "read_facts",
    "read_limits",
    "split_names",
    "supply_of",
    "title_of",
]

_MOST_FORMULA_CHARACTERS = 200_000  # of all formulas together; some ten seconds of reading


def title_of(data: Any, file: Path) -> str:
    """The job's title, the file's name if it states none."""
    return file.stem if data.title is None else str(data.title)


def supply_of(data: Any) -> Supply:
    return Supply(data.supply.feed, data.supply.return_, data.supply.coil_volts)


def formula_places(
    section: str, formulas: Mapping[str, str], text: str, place: Place
) -> dict[str, Place]:
    """Where each formula stands; their names, number and size are checked on the way."""
    where = replace(place, section=section)
    size = sum(map(len, formulas.values()))
    if len(formulas) > MOST_LOADS or size > _MOST_FORMULA_CHARACTERS:
        raise LimitError(
            f"there are {len(formulas)} {section} with {size} characters in all",
            place=where,
            expected=f"at most {MOST_LOADS} {section} and {_MOST_FORMULA_CHARACTERS} characters",
        )
    lines = key_lines(text)
    places = {}
    for name in formulas:
        number = lines.get((section, name))
        if not is_name(name):
            check_names([name], replace(where, row=f"line {number}" if number else None))
        places[name] = replace(where, row=f"line {number}, {name}" if number else name)
    return places


def read_facts(
    data: Mapping[str, Any], loads: Collection[str], text: str, place: Place
) -> dict[str, LoadFacts]:
    """What a [loads] section states of the loads there are."""
    check_known(data, loads, "load", ["loads"], text, place)
    return {name: LoadFacts(facts.kind, facts.amps) for name, facts in data.items()}


def check_known(
    given: Collection[str],
    known: Collection[str],
    what: str,
    path: list[str],
    text: str,
    place: Place,
) -> None:
    """Refuse a name that is none of those known, with a caret under it."""
    for name in given:
        if name not in known:
            where = replace(place_of_key(text, [*path, name], place), section=path[0])
            raise JobFileError(
                f"there is no {what} {name}",
                place=where,
                expected=listed(known),
                hint=did_you_mean(name, known),
            )


def split_names(text: str) -> tuple[str, ...]:
    """Names divided by spaces or commas."""
    return tuple(text.replace(",", " ").split())


def read_limits(
    data: Any, relays: Sequence[str] | None, what: str, text: str, place: Place
) -> Limits:
    """The [limits] section.

    Args:
        relays: the relays there are, None if they are not chosen yet.
        what: what they are called in a refusal.
    """
    if relays is not None:
        check_known(data.poles, relays, what, ["limits", "poles"], text, place)
        check_known(data.contacts, relays, what, ["limits", "contacts"], text, place)
    guided = tuple(dict.fromkeys(split_names(data.guided)))
    if relays is not None:
        check_known(guided, relays, what, ["limits", "guided"], text, place)
    separate = {}
    for name, form in data.contacts.items():
        counts = {letter: int(number) for number, letter in re.findall("([0-9]+)([AB])", form)}
        separate[name] = SeparateContacts(counts.get("A", 0), counts.get("B", 0))
    return Limits(dict(data.poles), separate, data.isolate, data.objective, guided)
