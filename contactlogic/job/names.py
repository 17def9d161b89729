"""Names of relays and loads: one rule, checked in one place."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from difflib import get_close_matches

from contactlogic.errors import JobFileError, Place
from contactlogic.formula import why_not_a_name

__all__ = ["check_names", "did_you_mean"]


def check_names(names: Iterable[str], place: Place, line: str | None = None) -> None:
    """Raise JobFileError at the first name that is none, stands twice, or differs in case only.

    Args:
        names: in the order written.
        place: file and section.
        line: the text they stand in, for the caret.
    """
    seen: dict[str, str] = {}
    for name in names:
        where = _at(place, line, name, again=name.upper() in seen)
        problem = why_not_a_name(name)
        if problem:
            raise JobFileError(
                f"{name!r} is no name for a relay or load: {problem}",
                place=where,
                expected="letters A-Z, digits and _, with at least one letter",
            )
        other = seen.get(name.upper())
        if other == name:
            raise JobFileError(
                f"{name} is named twice", place=where, hint="give each relay and load one name"
            )
        if other is not None:
            raise JobFileError(
                f"{other} and {name} differ only in case",
                place=where,
                hint="nobody can tell them apart on a drawing: rename one",
            )
        seen[name.upper()] = name


def _at(place: Place, line: str | None, name: str, *, again: bool) -> Place:
    if line is None or name not in line:
        return place
    column = line.rfind(name) if again else line.find(name)
    return replace(place, line=line, column=column, width=max(1, len(name)))


def did_you_mean(name: str, known: Iterable[str]) -> str | None:
    """A hint naming the likeliest of `known`, None if none is near."""
    names = list(known)
    same = [other for other in names if other.upper() == name.upper()]
    near = same or get_close_matches(name, names, n=1)
    return f"did you mean {near[0]}?" if near else None
