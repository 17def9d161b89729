"""Least networks of one load on up to four relays, looked up in a shipped table.

The table (`contactlogic/data/catalogue.txt`, made by `catalogue_build`) has a least-pole bridge, a
least-pole ladder and a least-contact bridge for each of the 402 classes of functions, with a proved
bound.  A function is answered with its class leader's network, relays renamed and makes and breaks
swapped; a load with free rows with the cheapest over all its completions, and its bound is the
least bound of them.

One entry a line: leader (four hexadecimal digits, a table over four relays), form, proved bound,
then one word a pole: relay, nets of common, make and break in base 36, `-` where nothing is wired.
Net 0 is the supply and net 1 the load's.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import TYPE_CHECKING, Any, Literal

from contactlogic.search.classes import FUNCTIONS, RELAYS, Turn, classes, turns
from contactlogic.search.encoding import Ends
from contactlogic.search.goal import cost
from contactlogic.search.mesh import SUPPLY, Mesh
from contactlogic.truth import Target, depends_on

if TYPE_CHECKING:
    import numpy

    Array = numpy.ndarray[Any, Any]

__all__ = [
    "FORMS",
    "Entry",
    "Form",
    "bound",
    "entries",
    "from_lines",
    "least_bridge",
    "least_contacts",
    "least_ladder",
    "to_lines",
]

Form = Literal["bridge", "ladder", "contacts"]
FORMS: tuple[Form, ...] = ("bridge", "ladder", "contacts")

_LOAD = 1
_DIGITS = "0123456789abcdefghijklmnopqrstuvwxyz"
_NETS = {"-": None} | {digit: net for net, digit in enumerate(_DIGITS)}
_NAMES = "ABCD"


@dataclass(frozen=True)
class Entry:
    """A network for one load.

    Args:
        mesh: poles by relay number; its one feed is 0 if the load is always on, None if never.
        at_least: poles that every network of this form needs (contacts, in the form "contacts").
        proved: whether the network has no more than that.
    """

    mesh: Mesh
    at_least: int
    proved: bool


def least_bridge(target: Target) -> Entry | None:
    """The network with fewest poles; None if more than four relays matter to the load."""
    return _look_up(target, "bridge")


def least_ladder(target: Target) -> Entry | None:
    """The series-parallel network with fewest poles found; None as for `least_bridge`."""
    return _look_up(target, "ladder")


def least_contacts(target: Target) -> Entry | None:
    """The network with fewest makes and breaks found; None as for `least_bridge`."""
    return _look_up(target, "contacts")


def bound(target: Target, form: Form) -> int | None:
    """Poles (contacts) that every network for one load needs; None as for `least_bridge`."""
    relays = _relays_of(target)
    if len(relays) > RELAYS:
        return None
    on, free = _narrow(target.on, relays), _narrow(target.free, relays)
    return _shelf(form).least(on, free, len(relays))


def contacts_of(mesh: Mesh) -> int:
    """Makes and breaks counted singly."""
    return sum((pole.make is not None) + (pole.break_ is not None) for pole in mesh.poles)


def size(form: Form, mesh: Mesh) -> int:
    """What a form's bound counts."""
    return contacts_of(mesh) if form == "contacts" else len(mesh.poles)


def order(form: Form, mesh: Mesh) -> tuple[int, ...]:
    """What a form minimises, ties included; of ladders the fewest contacts come second."""
    if form == "contacts":
        return (contacts_of(mesh), *cost(mesh))
    return (len(mesh.poles), contacts_of(mesh), *cost(mesh)) if form == "ladder" else cost(mesh)


def _look_up(target: Target, form: Form) -> Entry | None:
    relays = _relays_of(target)
    if len(relays) > RELAYS:
        return None
    shelf = _shelf(form)
    table, at_least = shelf.cheapest(
        _narrow(target.on, relays), _narrow(target.free, relays), len(relays)
    )
    mesh = _turned(shelf.mesh(table), turns()[int(classes().turn[table])], relays)
    return Entry(mesh, at_least, size(form, mesh) == at_least)


def _relays_of(target: Target) -> list[int]:
    return [
        i
        for i in range(target.n)
        if depends_on(target.on, target.n, i) or depends_on(target.free, target.n, i)
    ]


def _narrow(table: int, relays: Sequence[int]) -> int:
    """The table over four relays of a table that depends on `relays` alone, in their order."""
    result = 0
    for row in range(1 << RELAYS):
        source = sum((row >> k & 1) << relay for k, relay in enumerate(relays))
        result |= (table >> source & 1) << row
    return result


def _turned(mesh: Mesh, turn: Turn, relays: Sequence[int]) -> Mesh:
    poles = []
    for relay, common, make, break_ in mesh.poles:
        throws = (break_, make) if turn.flips >> relay & 1 else (make, break_)
        poles.append(Ends(relays[turn.order[relay]], common, *throws))
    return Mesh(tuple(sorted(poles, key=lambda pole: pole.relay)), mesh.feeds)


class _Shelf:
    """All entries of one form, ranked by cost."""

    def __init__(self, form: Form) -> None:
        import numpy

        found = entries()
        leaders = classes().leaders
        self.entries = [found[form, leader] for leader in leaders]
        costs = [order(form, entry.mesh) for entry in self.entries]
        ranks = {each: rank for rank, each in enumerate(sorted(set(costs)))}
        rank = numpy.array([ranks[each] for each in costs], dtype=numpy.int16)
        bound = numpy.array([entry.at_least for entry in self.entries], dtype=numpy.int16)
        self.rank = rank[classes().number]
        self.bound = bound[classes().number]
        self.every = [  # functions of the lowest 0 to 4 relays, over four
            numpy.arange(1 << (1 << k), dtype=numpy.int32)
            * ((FUNCTIONS - 1) // ((1 << (1 << k)) - 1))
            for k in range(RELAYS + 1)
        ]

    def mesh(self, table: int) -> Mesh:
        return self.entries[int(classes().number[table])].mesh

    def cheapest(self, on: int, free: int, relays: int) -> tuple[int, int]:
        """The cheapest completion, the first of equals, and the least bound of all."""
        every = self.every[relays]
        fits = every[every & ~free == on]
        return int(fits[self.rank[fits].argmin()]), int(self.bound[fits].min())

    def least(self, on: int, free: int, relays: int) -> int:
        """The least bound of all completions."""
        if not free:
            return int(self.bound[on])
        every = self.every[relays]
        return int(self.bound[every[every & ~free == on]].min())


@cache
def _shelf(form: Form) -> _Shelf:
    return _Shelf(form)


@cache
def entries() -> dict[tuple[Form, int], Entry]:
    """Every entry by form and class leader."""
    text = (resources.files("contactlogic") / "data" / "catalogue.txt").read_text("ascii")
    return from_lines(text.splitlines())


def from_lines(lines: Iterable[str]) -> dict[tuple[Form, int], Entry]:
    """Entries from the lines of a table; the constants, which take no poles, are added."""
    found: dict[tuple[Form, int], Entry] = {}
    for form in FORMS:
        found[form, 0] = Entry(Mesh((), (None,)), 0, True)
        found[form, FUNCTIONS - 1] = Entry(Mesh((), (SUPPLY,)), 0, True)
    named: dict[str, Form] = {form: form for form in FORMS}
    for line in lines:
        leader, form_name, at_least, *words = line.split()
        form = named[form_name]
        mesh = Mesh(tuple(_pole(word) for word in words), (_LOAD,))
        bound = int(at_least)
        found[form, int(leader, 16)] = Entry(mesh, bound, size(form, mesh) == bound)
    return found


def to_lines(found: dict[tuple[Form, int], Entry]) -> list[str]:
    """The lines of a table, classes in order, forms of a class together."""
    return [
        " ".join(
            [f"{leader:04x}", form, str(entry.at_least), *(_word(p) for p in entry.mesh.poles)]
        )
        for leader in classes().leaders
        for form in FORMS
        if (entry := found.get((form, leader))) is not None and entry.mesh.poles
    ]


def _pole(word: str) -> Ends:
    relay, common, make, break_ = tuple(word)
    return Ends(_NAMES.index(relay), _DIGITS.index(common), _NETS[make], _NETS[break_])


def _word(pole: Ends) -> str:
    nets = ("-" if net is None else _DIGITS[net] for net in pole[1:])
    return _NAMES[pole.relay] + "".join(nets)
