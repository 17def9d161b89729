"""Names of relays and loads: the one rule, carets under them, and the likeliest where misspelt.

Names are letters A-Z, digits and `_` with at least one letter; `MooN` is kept for votes; two names
of a job that differ only in case are an error (design.md section 6).
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable
from dataclasses import replace

from contactlogic.errors import JobFileError, Place

__all__ = [
    "check_names",
    "did_you_mean",
    "free_name",
    "is_name",
    "listed",
    "place_of",
    "shortened",
    "slip_of",
    "why_not_a_name",
]

_LONGEST = 100
_VOTE = re.compile(r"[0-9]+oo[0-9]+", re.IGNORECASE)


def is_name(text: str) -> bool:
    """Whether `text` can name a relay or load."""
    return why_not_a_name(text) is None


def why_not_a_name(text: str) -> str | None:
    """What is wrong with a name, in words that follow "... is no name: "; None if it is one."""
    if not text:
        return "it is empty"
    if len(text) > _LONGEST:
        return f"it has {len(text)} characters, {_LONGEST} are the most"
    if not re.fullmatch(r"[A-Za-z0-9_]+", text):
        return "only letters A-Z, digits and _ may stand in one"
    if _VOTE.fullmatch(text):
        return "MooN is kept for votes such as 2oo3(A, B, C)"
    if not re.search("[A-Za-z]", text):
        return "it needs at least one letter"
    return None


def check_names(names: Iterable[str], place: Place, line: str | None = None) -> None:
    """Raise JobFileError at the first name that is none, stands twice, or differs in case only.

    Args:
        names: in the order written.
        place: file and section.
        line: the text they stand in, for the caret.
    """
    seen: dict[str, str] = {}
    for name in names:
        again = name.upper() in seen
        where = place_of(name, line, place, last=again) if line is not None else place
        problem = why_not_a_name(name)
        if problem:
            raise JobFileError(
                f'"{shortened(name)}" is no name for a relay or load: {problem}',
                place=where,
                expected="letters A-Z, digits and _, with at least one letter",
            )
        if seen.get(name.upper()) == name:
            raise JobFileError(
                f"{name} is named twice",
                place=where,
                expected="each relay and load once",
            )
        if again:
            raise JobFileError(
                f"{seen[name.upper()]} and {name} differ only in case",
                place=where,
                expected="names that can be told apart when spoken or in capitals",
                hint="rename one of them",
            )
        seen[name.upper()] = name


def place_of(name: str, line: str, place: Place, *, last: bool = False) -> Place:
    """`place` with a caret under the first (or last) spot where `name` stands in `line`."""
    line = re.sub(r"[\r\n]", " ", line)
    spots = [
        found.start()
        for found in re.finditer(rf"(?<![A-Za-z0-9_]){re.escape(name)}(?![A-Za-z0-9_])", line)
    ]
    if not name or not spots:
        return replace(place, line=line)
    return replace(place, line=line, column=spots[-1 if last else 0], width=len(name))


def did_you_mean(name: str, known: Iterable[str]) -> str | None:
    """A hint naming the likeliest of `known`, None if none is near."""
    from difflib import get_close_matches

    names = list(known)
    same = [other for other in names if other.upper() == name.upper()]
    # the comparison takes time with the square of the length, so only names that can be names
    near = same or (get_close_matches(name, names, n=1) if len(name) <= _LONGEST else [])
    return f"did you mean {near[0]}?" if near else None


def slip_of(name: str, known: Collection[str]) -> str | None:
    """The one of `known` that `name` most likely is with a slip of the pen, None if none is.

    A slip is two neighbouring letters swapped, one letter doubled, added or dropped, or one inner
    letter changed.  Digits never count as slips and last letters never as changed: K1 and K2, or
    DOORL and DOORR, are relays of their own.
    """
    if name in known:
        return None
    return next((other for other in known if _slip(name, other)), None)


def _slip(a: str, b: str) -> bool:
    if abs(len(a) - len(b)) > 1 or re.sub("[^0-9]", "", a) != re.sub("[^0-9]", "", b):
        return False
    start = next((i for i, (x, y) in enumerate(zip(a, b, strict=False)) if x != y), None)
    short, long = sorted((a, b), key=len)
    if start is None:
        start = len(short)
    if len(short) < len(long):
        doubled = start > 0 and long[start] == long[start - 1]
        return short[start:] == long[start + 1 :] and len(short) >= (2 if doubled else 3)
    if a[start : start + 2] == b[start : start + 2][::-1] and a[start + 2 :] == b[start + 2 :]:
        return len(a) >= 3
    inner = 0 < start < len(a) - 1
    return inner and len(a) >= 5 and a[start + 1 :] == b[start + 1 :]


def listed(names: Collection[str]) -> str:
    """The first dozen names in words that follow "expected: "."""
    shown = ", ".join(list(names)[:12]) + (", ..." if len(names) > 12 else "")
    return f"one of {shown}" if len(names) > 1 else shown or "no name, for there is none"


def shortened(text: str) -> str:
    """Text of the user's that fits on a line, with anything unprintable shown as its code."""
    plain = "".join(
        c if c.isprintable() else c.encode("unicode_escape").decode() for c in text[:99]
    )
    return plain if len(plain) <= 40 and len(text) <= 99 else plain[:37] + "..."


def free_name(base: str, taken: Collection[str]) -> str:
    """`base_2`, `base_3`, ...: the first that is not taken, not even in another case."""
    used = {name.upper() for name in taken}
    number = 2
    while f"{base}_{number}".upper() in used:
        number += 1
    return f"{base}_{number}"
