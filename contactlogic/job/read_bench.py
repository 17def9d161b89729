"""Sections [coils] and [panel], and what [loads] states of fuses and suppression."""

from __future__ import annotations

import re
from collections.abc import Callable, Collection, Mapping
from dataclasses import replace
from typing import Any

from contactlogic.errors import JobFileError, Place
from contactlogic.job.model import Bench, Fittings, LoadFacts, Position
from contactlogic.job.sections import check_known, read_facts
from contactlogic.job.tomlfile import place_of_key
from contactlogic.job.values import amperes, farads, ohms
from contactlogic.naming import shortened

__all__ = ["read_bench"]

_VALUES: Mapping[str, tuple[Callable[[str], str], str]] = {
    "fuse": (amperes, 'a rating such as "2 A" or "T 500 mA"'),
    "hold": (farads, 'a capacitor such as "470 uF" or "4u7"'),
    "series": (ohms, 'a resistor such as "100 ohm" or "4k7"'),
}
_RAILS = ("feed", "return")


def read_bench(
    data: Any,
    loads: Collection[str],
    relays: Collection[str],
    coils: Collection[str] | None,
    text: str,
    place: Place,
) -> tuple[dict[str, LoadFacts], Bench]:
    """What the job states of loads and coils, and where things sit.

    Args:
        loads: names that [loads] may hold.
        relays: other names that [panel] may hold, beside those of repeaters.
        coils: names that [coils] may hold; None where relays are chosen later.

    Raises:
        JobFileError: a name that is none, a value that cannot be read, or a thing stated twice.
    """
    facts = read_facts(data.loads, loads, text, place)
    if coils is not None:
        check_known(data.coils, coils, "coil", ["coils"], text, place)
    fittings: dict[str, Fittings] = {}
    for section in ("loads", "coils"):
        for name, stated in getattr(data, section).items():
            where = replace(place_of_key(text, [section, name], place), section=section)
            if section == "coils" and name in data.loads:
                raise JobFileError(
                    f"{name} stands both in [loads] and in [coils]",
                    place=where,
                    expected="each load or coil in one of them",
                )
            found = _fittings(stated, section, name, text, place)
            if found != Fittings():
                fittings[name] = found
            if section == "coils":
                facts[name] = LoadFacts("coil", stated.amps)
    names = {*loads, *relays, *(coils or ())}
    known = [*dict.fromkeys((*relays, *(coils or ()), *loads)), *_RAILS]
    chosen = coils is None  # relays that are not there yet may have a place too
    if not chosen:
        there = [n for n in data.panel if not _is_repeater(n, relays)]
        check_known(there, known, "relay or load", ["panel"], text, place)
    seats = {name: Position(seat.row, seat.column) for name, seat in data.panel.items()}
    rails = [None if rail in names else seats.pop(rail, None) for rail in _RAILS]
    return facts, Bench(fittings, seats, *rails)


def _is_repeater(name: str, relays: Collection[str]) -> bool:
    """Whether a name is one that a repeater of a relay is given: UP_2."""
    found = re.fullmatch("(.+)_[0-9]+", name)
    return found is not None and found[1] in relays


def _fittings(stated: Any, section: str, name: str, text: str, place: Place) -> Fittings:
    values = {}
    for key, (read, expected) in _VALUES.items():
        written = getattr(stated, key, None)
        if written is None:
            continue
        try:
            values[key] = read(written)
        except ValueError as error:
            raise JobFileError(
                f'{key} cannot be "{shortened(written)}": {error}',
                place=replace(place_of_key(text, [section, name, key], place), section=section),
                expected=expected,
            ) from None
    return Fittings(suppression=stated.suppression, **values)
