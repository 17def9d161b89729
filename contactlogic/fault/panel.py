"""A finished panel as a wireman sees it: terminals, wires between them, contacts and loads.

The nets of a design say what is joined; a panel says by which wires.  Each wire is one piece
between two terminals, so taking one off splits its net in two.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

from contactlogic.job.model import Job
from contactlogic.network import Network, Pole
from contactlogic.terminals import load_marks, pole_marks

__all__ = ["Panel", "PanelContact", "Wire", "panel_of"]


@dataclass(frozen=True)
class Wire:
    """One piece of wire: its number in the wiring list and its two terminals (`UP:11`)."""

    number: int
    start: str
    end: str


@dataclass(frozen=True)
class PanelContact:
    """A make or break contact between two terminals; `pole` is what it belongs to."""

    pole: Pole
    make: bool
    common: str
    throw: str


@dataclass(frozen=True)
class Panel:
    """What is wired, terminal by terminal.

    Args:
        inputs: relays in bit order, repeaters left out.
        follows: each relay of the panel to the input whose position it takes.
        feed, back: terminals of the supply and of the return rail.
        wires: in the order of their numbers.
        contacts: in pole order, make first.
        loads: each load's two terminals, fed end first.
        links: terminals joined by a part that conducts (a fuse, a series resistor).
        guided: relays whose contacts are forcibly guided (IEC 61810-3).
    """

    inputs: tuple[str, ...]
    follows: Mapping[str, str]
    feed: str
    back: str
    wires: tuple[Wire, ...]
    contacts: tuple[PanelContact, ...]
    loads: Mapping[str, tuple[str, str]]
    links: tuple[tuple[str, str], ...] = ()
    guided: frozenset[str] = frozenset()


def panel_of(
    network: Network,
    job: Job,
    wires: Sequence[tuple[int, str, str]],
    rails: tuple[str, str],
    repeaters: Mapping[str, str] = MappingProxyType({}),
    *,
    links: Sequence[tuple[str, str]] = (),
    guided: Collection[str] = (),
) -> Panel:
    """The panel of a network.

    Args:
        network: relays of the job, then repeaters.
        job: for the kinds of loads and for relays with separate contacts.
        wires: number and terminals of every wire, as `contactlogic.report.wiring` lists them.
        rails: the terminals of supply and return.
        repeaters: where one follows a relay whose coil is a load of this network, its own coil is
            in parallel, and a load too.
        guided: relays (a repeater counts as one of its own) with forcibly guided contacts.
    """
    contacts = []
    for pole in network.poles:
        marks = pole_marks(pole, job.limits.contacts)
        common = f"{pole.relay}:{marks.common}"
        for make, mark in ((True, marks.make), (False, marks.break_)):
            if mark is not None:
                contacts.append(PanelContact(pole, make, common, f"{pole.relay}:{mark}"))
    kinds = {load.name: load.kind for load in job.loads}
    loads = {}
    for load in network.loads:
        fed, returned = load_marks(kinds.get(load))
        loads[load] = (f"{load}:{fed}", f"{load}:{returned}")
        for coil in (name for name, of in repeaters.items() if of == load):
            if network.loads[load] is not None and coil in network.relays:
                loads[coil] = (f"{coil}:{fed}", f"{coil}:{returned}")
    return Panel(
        tuple(name for name in network.relays if name not in repeaters),
        {name: repeaters.get(name, name) for name in network.relays},
        *rails,
        tuple(Wire(*wire) for wire in wires),
        tuple(contacts),
        loads,
        tuple(links),
        frozenset(guided),
    )
