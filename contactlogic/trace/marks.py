"""What each terminal of a list is: a contact of a relay, an end of a load, a rail, a fitting.

Contact marks follow EN 50005 (`UP:11`); whatever is neither contact nor rail is taken as a load,
which is where hand-written names are met: `big lamp`, `HORN +`, `VALVE:1`.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from contactlogic.errors import Place, WiringError
from contactlogic.naming import did_you_mean, listed, shortened, slip_of
from contactlogic.trace.known import Known, Lookup, key, natural
from contactlogic.trace.listing import Wire
from contactlogic.trace.rails import Rails

__all__ = ["FITTINGS", "LINKS", "SECONDS", "Meaning", "load_ends", "meanings"]

Kind = Literal["feed", "return", "contact", "load", "fitting"]

LINKS = ("fuse", "series")
"""Fittings that pass current on: a fuse, a resistor."""

FITTINGS = (*LINKS, "hold", "diode", "zener", "varistor", "rc", "tvs")
"""What may stand behind a load's name and a stroke: `LAMP/fuse:1`."""

SECONDS = ("X2", "A2", "-", "2", "N", "OUT")
"""Marks of a load's returned end."""

_FIRSTS = ("X1", "A1", "+", "1", "L", "IN")
_CONTACT = re.compile(r"[1-9][0-9]{0,2}[1-4]")
_NUMBER = re.compile(r"[0-9]{2,}")
_DIVIDED = re.compile(r"(.*\S)\s*[\s./-]\s*([A-Za-z]?[0-9]+|[+-])")
_SIGNED = re.compile(r"(.*[^\s+-])\s*([+-])")


@dataclass(frozen=True)
class Meaning:
    """One terminal understood.

    Args:
        kind: what it is.
        name: relay, load or rail; of a fitting `LAMP/fuse`.
        mark: "14", "X1"; empty for a load written without one.
        place: where the list names it first.
        order: how many terminals are named before it.
    """

    kind: Kind
    name: str
    mark: str
    place: Place
    order: int = 0

    @property
    def terminal(self) -> str:
        """The terminal as it is printed, one spelling for all: `UP:11`, `LAMP:X1`, `big lamp`."""
        return f"{self.name}:{self.mark}" if self.mark else self.name


def meanings(wires: Sequence[Wire], known: Known, rails: Rails) -> dict[str, Meaning]:
    """The meaning of every terminal, by the key of its text.

    Raises:
        WiringError: a terminal that a relay or load of the job cannot have, or a misspelt name.
    """
    return _Reader(wires, known, rails).read()


class _Reader:
    def __init__(self, wires: Sequence[Wire], known: Known, rails: Rails) -> None:
        self.known, self.rails = known, rails
        self.spelt: dict[str, str] = {}
        self.places: dict[str, Place] = {}
        for wire in wires:
            for end in (wire.start, wire.end):
                k = key(end.terminal)
                self.spelt[k] = min(end.terminal, self.spelt.get(k, end.terminal))
                self.places.setdefault(k, end.place)
        self.order = sorted(self.spelt, key=natural)  # whatever the order of the wires
        self.aliases = {key(written): name for written, name in known.names.items()}
        self.relays = Lookup(known.relays)
        self.loads = Lookup(known.loads)
        unused = self.aliases.keys() - {part for k in self.spelt for part in (k, *_bases(k))}
        if unused:
            name = next(n for n in known.names if key(n) in unused)
            raise WiringError(
                f"no wire goes to {shortened(name)}",
                expected="after --name a name of the list, such as --name 'big lamp=LAMP'",
                hint=did_you_mean(name, sorted(self.spelt.values())),
            )

    def read(self) -> dict[str, Meaning]:
        self._find_relays()
        self._find_loads()
        first = {k: number for number, k in enumerate(self.places)}
        return {k: replace(self._meaning(k), order=first[k]) for k in self.order}

    def _find_relays(self) -> None:
        """Add the relays that the list alone knows: those with marks of contacts."""
        strange: dict[str, str] = {}
        for k in self.order:
            if k in self.rails or ":" not in self.spelt[k]:
                continue
            base, mark = self._halves(self.spelt[k])
            if "/" in base or not _NUMBER.fullmatch(mark) or self.relays.find(base):
                continue
            load = self.loads.find(base)
            if load is not None:
                raise self._error(
                    k, f"{load} is a load and has no contact {mark}", f"{load}:X1 or {load}:X2"
                )
            self._check_slip(k, base, self.known.relays)
            strange[key(base)] = min(base, strange.get(key(base), base))
        for base in self._without_colons():
            strange.setdefault(key(base), base)
        self.relays = Lookup((*self.known.relays, *sorted(strange.values(), key=natural)))

    def _without_colons(self) -> list[str]:
        """Names that relays must have in terminals such as `K1.11`: those with a whole contact."""
        marks: dict[str, set[str]] = {}
        spelt: dict[str, str] = {}
        for k in self.order:
            found = _DIVIDED.fullmatch(self.spelt[k])
            if k in self.rails or ":" in self.spelt[k] or found is None:
                continue
            whole = self.relays.find(self.spelt[k]) or self.loads.find(self.spelt[k])
            if whole is None and _CONTACT.fullmatch(found[2]) and not self.loads.find(found[1]):
                name = key(found[1])
                spelt[name] = min(found[1], spelt.get(name, found[1]))
                marks.setdefault(name, set()).add(found[2])
        pairs = (("1", "2"), ("1", "4"), ("3", "4"))
        return [
            spelt[name]
            for name, there in marks.items()
            if any({mark[:-1] + a, mark[:-1] + b} <= there for mark in there for a, b in pairs)
        ]

    def _find_loads(self) -> None:
        """Add the loads that the list alone knows."""
        strange: dict[str, str] = {}
        for k in self.order:
            if k in self.rails:
                continue
            base, mark = self._divided(self.spelt[k])
            relay = self.relays.find(base)
            if relay is not None and (mark or self.loads.find(base) is None):
                if mark.upper() in ("A1", "A2") and self.loads.find(base) is None:
                    strange.setdefault(key(relay), relay)  # its coil
                continue
            if self.loads.find(base) is None:
                fitted = base.rpartition("/")
                if fitted[2].lower() in FITTINGS and fitted[0]:
                    continue
                self._check_slip(k, base, self.known.loads)
                strange[key(base)] = min(base, strange.get(key(base), base))
        self.loads = Lookup((*self.known.loads, *sorted(strange.values(), key=natural)))

    def _meaning(self, k: str) -> Meaning:
        place = self.places[k]
        if k in self.rails:
            return Meaning("feed" if self.rails[k] else "return", self.spelt[k], "", place)
        base, mark = self._divided(self.spelt[k])
        head, _, tail = base.rpartition("/")
        if head and tail.lower() in FITTINGS and self.loads.find(base) is None:
            whose = self.loads.find(self.aliases.get(key(head), head)) or head
            return Meaning("fitting", f"{whose}/{tail.lower()}", mark.upper(), place)
        relay, load = self.relays.find(base), self.loads.find(base)
        if relay is not None:
            if _CONTACT.fullmatch(mark):
                return Meaning("contact", relay, mark, place)
            if load is None or mark.upper() not in ("A1", "A2", ""):
                what = (
                    f"a relay has no terminal {shortened(mark)}"
                    if mark
                    else (f"which terminal of the relay {relay} is meant is not said")
                )
                raise self._error(
                    k, what, f"{relay}:11, 12 or 14 (21, 22, 24 for its second pole), A1 or A2"
                )
        return Meaning("load", load or base, mark.upper(), place)

    def _halves(self, text: str) -> tuple[str, str]:
        """The name and what stands behind its last colon."""
        if (whole := self.aliases.get(key(text))) is not None:
            return whole, ""
        base, _, mark = text.rpartition(":")
        if not base:
            return text, ""
        base = base.strip()
        return self.aliases.get(key(base), base), mark.strip()

    def _divided(self, text: str) -> tuple[str, str]:
        """Name and mark, also where no colon divides them and the name is a known one."""
        base, mark = self._halves(text)
        if mark or ":" in text:
            return base, mark
        for pattern in (_DIVIDED, _SIGNED):
            found = pattern.fullmatch(base)
            if found is None:
                continue
            name, tail = self.aliases.get(key(found[1]), found[1]), found[2].upper()
            if self.loads.find(base) or self.relays.find(base):
                break  # the whole is a name
            relay = self.relays.find(name) is not None
            if relay and (_NUMBER.fullmatch(tail) or tail in ("A1", "A2")):
                return name, tail
            clear = tail in ("X1", "X2", "A1", "A2", "+", "-")
            if clear or (self.known.job and self.loads.find(name) and tail in ("1", "2")):
                return name, tail
        return base, ""

    def _check_slip(self, k: str, name: str, of_job: Sequence[str]) -> None:
        """Refuse a name that is one of the job's with a slip of the pen."""
        meant = slip_of(name.upper(), {n.upper(): n for n in of_job})
        if meant is not None:
            own = next(n for n in of_job if n.upper() == meant)
            raise self._error(
                k,
                f"the job has no {shortened(name)}",
                listed(of_job),
                f"did you mean {own}?",
            )

    def _error(self, k: str, what: str, expected: str, hint: str | None = None) -> WiringError:
        return WiringError(what, place=self.places[k], expected=expected, hint=hint)


def _bases(k: str) -> Iterable[str]:
    """What may be the name in a terminal's key."""
    yield k.rpartition(":")[0]
    for pattern in (_DIVIDED, _SIGNED):
        found = pattern.fullmatch(k)
        if found:
            yield found[1]


def load_ends(
    terminals: Mapping[str, Meaning],
) -> dict[str, tuple[str | None, str | None, bool]]:
    """Each load's fed and returned terminal as far as marks tell, and whether it is a coil.

    Raises:
        WiringError: more than two terminals on one load.
    """
    marked: dict[str, dict[str, str]] = {}
    places = {}
    for meaning in sorted(terminals.values(), key=lambda m: m.order):
        if meaning.kind == "load":
            marked.setdefault(meaning.name, {})[meaning.mark] = meaning.terminal
            places[meaning.terminal] = meaning.place
    ends: dict[str, tuple[str | None, str | None, bool]] = {}
    for name, by_mark in marked.items():
        marks = sorted((m for m in by_mark if m), key=lambda m: (m in SECONDS, natural(m)))
        if len(marks) > 2 or (len(marks) == 2 and "" in by_mark):
            last = list(by_mark.values())[2]
            raise WiringError(
                f"{name} has more than two terminals: {', '.join(m or 'no mark' for m in by_mark)}",
                place=places[last],
                expected="two terminals for each load",
                hint="write contacts of a relay as UP:11",
            )
        coil = any(m in ("A1", "A2") for m in marks)
        if len(marks) == 2:
            ends[name] = (by_mark[marks[0]], by_mark[marks[1]], coil)
        elif len(marks) == 1:
            ends[name] = (
                (None, by_mark[marks[0]], coil)
                if marks[0] in SECONDS
                else (by_mark[marks[0]], None, coil)
            )
        else:
            ends[name] = (None, None, False)
    return ends
