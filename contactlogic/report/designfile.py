"""The result contract `design.json`, written and read (schema `contactlogic/design/1`).

Keys, their order and their meaning are those of design.md section 6; other programs read these
files, and files of other programs are read here.  Shapes are validated by pydantic; what ties
entries to each other (relays, poles used twice, counts) is checked here, so that every message
says where: `designs[0].contacts[3].make`.
"""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from contactlogic.design import Bound, Design, Form, Result
from contactlogic.errors import DesignFileError, Place
from contactlogic.network import Network, Pole, PoleCount

if TYPE_CHECKING:
    from pydantic import BaseModel, ValidationError

__all__ = ["SCHEMA", "DesignFile", "design_json", "dumps", "read_design"]

SCHEMA = "contactlogic/design/1"


@dataclass(frozen=True)
class DesignFile:
    """What a design file holds.  Counts are recomputed from its contacts and agree with it."""

    title: str
    relays: tuple[str, ...]
    repeaters: Mapping[str, str]
    designs: tuple[Design, ...]


def design_json(result: Result) -> dict[str, object]:
    """The contract's JSON object, keys in its order."""
    return {
        "schema": SCHEMA,
        "title": result.job.title,
        "relays": list(result.relays),
        "repeaters": dict(result.repeaters),
        "designs": [_design(design) for design in result.designs],
    }


def dumps(result: Result) -> str:
    """`design_json` as text: ASCII, so that any terminal can take it, with a newline at the end."""
    return json.dumps(design_json(result), indent=1) + "\n"


def _design(design: Design) -> dict[str, object]:
    network = design.network
    return {
        "form": design.form,
        "fingerprint": design.fingerprint,
        "supply": network.supply,
        "loads": dict(network.loads),
        "contacts": [
            {
                "relay": pole.relay,
                "pole": pole.number,
                "common": pole.common,
                "make": pole.make,
                "break": pole.break_,
            }
            for pole in network.poles
        ],
        "changeovers": len(network.poles),
        "per_relay": {relay: _count(count) for relay, count in network.per_relay().items()},
        "bound": {
            "at_least": design.bound.at_least,
            "proven_minimum": design.bound.proven_minimum,
        },
        "verified_rows": design.verified_rows,
    }


def _count(count: PoleCount) -> dict[str, int]:
    return {
        "poles": count.poles,
        "makes": count.makes,
        "breaks": count.breaks,
        "changeovers": count.changeovers,
    }


def read_design(source: str | Path) -> DesignFile:
    """Read a design file.

    Args:
        source: a path, or the text itself (anything that begins with `{`).

    Contacts may stand in any order and pole numbers may leave gaps; keys that the contract does
    not know are ignored.  Where the file's fingerprint is not that of its contacts, the design's
    notes say so.

    Raises:
        DesignFileError: unreadable, not JSON, or not keeping the contract; says where and what
            was expected.
    """
    if isinstance(source, str) and source.lstrip("\ufeff \t\r\n").startswith("{"):
        return _Reader(None).read(source)
    path = Path(source)
    try:
        text = path.read_text(encoding="utf-8-sig")
    except OSError as error:
        reason = error.strerror or "cannot be read"
        raise DesignFileError(reason, place=Place(file=str(path))) from error
    except ValueError as error:  # not UTF-8, or a path with a null character
        raise DesignFileError(
            "not a text file", place=Place(file=str(path)), expected="JSON in UTF-8"
        ) from error
    return _Reader(str(path)).read(text)


class _Repeated(Exception):
    """A key that stands twice in one object."""


def _object(pairs: list[tuple[str, object]]) -> dict[str, object]:
    found: dict[str, object] = {}
    for key, value in pairs:
        if key in found:
            raise _Repeated(key)
        found[key] = value
    return found


class _Reader:
    """One reading of one file; `file` is its name in messages."""

    def __init__(self, file: str | None) -> None:
        self.file = file

    def fail(
        self, where: str, what: str, expected: str | None = None, hint: str | None = None
    ) -> DesignFileError:
        place = Place(file=self.file, row=where or None)
        return DesignFileError(what, place=place, expected=expected, hint=hint)

    def read(self, text: str) -> DesignFile:
        model = self.validated(self.parsed(text))
        relays, repeaters = tuple(model.relays), dict(model.repeaters)
        for i, relay in enumerate(relays):
            if relay in relays[:i]:
                raise self.fail(f"relays[{i}]", f"{relay} is named twice")
        for repeater, followed in repeaters.items():
            where = f"repeaters.{repeater}"
            self.known(where, repeater, relays)
            self.known(where, followed, relays)
            if followed in repeaters:
                raise self.fail(where, f"follows {followed}, itself a repeater", "a relay")
        designs = tuple(
            self.design(f"designs[{i}]", entry, relays) for i, entry in enumerate(model.designs)
        )
        return DesignFile(model.title, relays, repeaters, designs)

    def parsed(self, text: str) -> object:
        try:
            return json.loads(text.removeprefix("\ufeff"), object_pairs_hook=_object)
        except json.JSONDecodeError as error:
            lines = text.splitlines()
            place = Place(
                file=self.file,
                row=f"line {error.lineno}",
                line=lines[error.lineno - 1] if error.lineno <= len(lines) else None,
                column=error.colno - 1,
            )
            raise DesignFileError(f"not JSON: {error.msg}", place=place) from error
        except _Repeated as error:
            raise self.fail("", f"key {error} stands twice in one object") from error
        except (ValueError, RecursionError) as error:  # thousands of digits or of brackets
            raise self.fail("", "not JSON that can be read", f"an object {SCHEMA}") from error

    def validated(self, data: object) -> Any:
        from pydantic import ValidationError

        if not isinstance(data, dict):
            raise self.fail("", "not a design file", "an object { }")
        if "schema" in data and data["schema"] != SCHEMA:
            raise self.fail("schema", f"is {_shown(data['schema'])}", f'"{SCHEMA}"')
        try:
            return _model().model_validate(data)
        except ValidationError as error:
            raise self.translated(error) from error

    def translated(self, error: ValidationError) -> DesignFileError:
        """The first of pydantic's complaints, in the words of this project."""
        first, *more = error.errors(include_url=False)
        missing = first["type"] == "missing"
        return self.fail(
            _dotted(first["loc"]),
            "is missing" if missing else f"is {_shown(first['input'])}",
            _expected(first["loc"]),
            f"({len(more)} more like this)" if more else None,
        )

    def known(self, where: str, relay: str, relays: Sequence[str]) -> None:
        if relay not in relays:
            close = get_close_matches(relay, relays, 1)
            hint = f"did you mean {close[0]}?" if close else None
            raise self.fail(where, f"there is no relay {relay}", "one of `relays`", hint)

    def design(self, where: str, entry: Any, relays: tuple[str, ...]) -> Design:
        poles = self.poles(f"{where}.contacts", entry.contacts, relays)
        network = Network(relays, entry.supply, dict(entry.loads), poles)
        self.counts(where, entry, network)
        form: Form = entry.form
        design = Design(
            form,
            network,
            Bound(entry.bound.at_least, entry.bound.proven_minimum),
            entry.verified_rows,
        )
        if entry.fingerprint == design.fingerprint:
            return design
        note = (
            f"the file gives the fingerprint {entry.fingerprint}; computed from its contacts it is "
            f"{design.fingerprint}"
        )
        return Design(form, network, design.bound, design.verified_rows, notes=(note,))

    def poles(self, where: str, entries: Sequence[Any], relays: Sequence[str]) -> tuple[Pole, ...]:
        first: dict[tuple[str, int], int] = {}
        poles = []
        for i, entry in enumerate(entries):
            here = f"{where}[{i}]"
            self.known(f"{here}.relay", entry.relay, relays)
            if entry.make is None and entry.break_ is None:
                raise self.fail(here, "has only its common wired", "a net at make or break")
            before = first.setdefault((entry.relay, entry.pole), i)
            if before != i:
                raise self.fail(
                    here,
                    f"{entry.relay} pole {entry.pole} is already used by contacts[{before}]",
                    "each pole of a relay once",
                )
            poles.append(Pole(entry.relay, entry.pole, entry.common, entry.make, entry.break_))
        order = {relay: i for i, relay in enumerate(relays)}
        return tuple(sorted(poles, key=lambda pole: (order[pole.relay], pole.number)))

    def counts(self, where: str, entry: Any, network: Network) -> None:
        """The file's own counts against its contacts; a relay without contacts may be left out."""
        used = len(network.poles)
        if entry.changeovers != used:
            raise self.fail(
                f"{where}.changeovers", f"is {entry.changeovers}", f"{used}, as in contacts"
            )
        real = network.per_relay()
        for relay in entry.per_relay:
            self.known(f"{where}.per_relay.{relay}", relay, network.relays)
        for relay, count in real.items():
            here = f"{where}.per_relay.{relay}"
            if relay not in entry.per_relay:
                if count.poles:
                    raise self.fail(here, "is missing", f"counts, since {relay} has contacts")
                continue
            for key, value in _count(count).items():
                told = getattr(entry.per_relay[relay], key)
                if told != value:
                    raise self.fail(f"{here}.{key}", f"is {told}", f"{value}, as in contacts")
        if entry.bound.at_least > used:
            raise self.fail(
                f"{where}.bound.at_least",
                f"is {entry.bound.at_least}",
                f"at most {used}, since so many poles do",
            )


_NAMED = ("repeaters", "loads", "per_relay")
"""Objects whose keys are names that the user gave."""

_EXPECTED = {
    "schema": f'"{SCHEMA}"',
    "title": "a text",
    "relays": "a list of relay names",
    "relays[]": "a relay name",
    "repeaters": "an object: repeater to the relay it follows",
    "repeaters{}": "a relay name",
    "designs": "a list of designs",
    "designs[]": "a design, an object",
    "form": '"ladder" or "bridge"',
    "fingerprint": "a text",
    "supply": "the name of a net",
    "loads": "an object: load to the name of its net, or null",
    "loads{}": "the name of a net, or null",
    "contacts": "a list of contacts",
    "contacts[]": "a contact, an object",
    "relay": "a relay name",
    "pole": "a whole number from 1",
    "common": "the name of a net",
    "make": "the name of a net, or null",
    "break": "the name of a net, or null",
    "changeovers": "a whole number",
    "per_relay": "an object: relay to its counts",
    "per_relay{}": "an object with poles, makes, breaks and changeovers",
    "poles": "a whole number",
    "makes": "a whole number",
    "breaks": "a whole number",
    "bound": "an object with at_least and proven_minimum",
    "at_least": "a whole number",
    "proven_minimum": "true or false",
    "verified_rows": "a whole number",
}
"""What belongs at each key of the contract; `[]` in its lists, `{}` under the user's names."""


def _expected(loc: tuple[int | str, ...]) -> str:
    place = ""
    for part in loc:
        if place in _NAMED:
            place += "{}"
        else:
            place = f"{place}[]" if isinstance(part, int) else str(part)
    return "a name" if place == "[key]" else _EXPECTED[place]


def _dotted(loc: tuple[int | str, ...]) -> str:
    text = ""
    for part in loc:
        if isinstance(part, int):
            text += f"[{part}]"
        elif part != "[key]":  # pydantic's mark for "the key, not the value"
            text += f".{part}" if text else part
    return text


def _shown(value: object) -> str:
    text = json.dumps(value, default=str)
    return text if len(text) <= 40 else text[:37] + "..."


@cache
def _model() -> type[BaseModel]:
    """The contract as pydantic models, made when first needed: pydantic is slow to load."""
    from typing import Annotated

    from pydantic import BaseModel, ConfigDict, Field

    name = Annotated[str, Field(min_length=1)]
    count = Annotated[int, Field(ge=0)]

    class Strict(BaseModel):
        model_config = ConfigDict(strict=True, extra="ignore")

    class Contact(Strict):
        relay: name
        pole: Annotated[int, Field(ge=1)]
        common: name
        make: name | None
        break_: Annotated[name | None, Field(alias="break")]

    class Counts(Strict):
        poles: count
        makes: count
        breaks: count
        changeovers: count

    class Least(Strict):
        at_least: count
        proven_minimum: bool

    class Entry(Strict):
        form: Literal["ladder", "bridge"]
        fingerprint: str
        supply: name
        loads: dict[name, name | None]
        contacts: list[Contact]
        changeovers: count
        per_relay: dict[name, Counts]
        bound: Least
        verified_rows: count

    class File(Strict):
        title: str
        relays: list[name]
        repeaters: dict[name, name]
        designs: list[Entry]
        schema_: Annotated[str, Field(alias="schema")]

    return File
