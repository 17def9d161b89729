"""The wiring list: one line for each conductor, and the schedule of contacts per relay.

Terminals of one net are chained: the rail first, then the relays in their order, then the loads,
so that `k` terminals take `k - 1` conductors and no terminal carries more than two.  Where the job
says where things sit, the chain is the shortest (`contactlogic.report.chain`).  Marks follow EN
50005 (`contactlogic.terminals`).  A rail's terminal is written `rail:` and its label, which
keeps a label such as `+24 V` from being computed by a spreadsheet program.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

from contactlogic.design import Design
from contactlogic.job.model import Fittings, Job, Position
from contactlogic.report.chain import joined
from contactlogic.report.fittings import Fitted, fitted
from contactlogic.report.text import csv_text, one_line
from contactlogic.terminals import RETURN, load_marks, pole_marks, wire_numbers

__all__ = [
    "Conductor",
    "conductors",
    "design_name",
    "net_terminals",
    "rail_terminals",
    "schedule_csv",
    "terminal_places",
    "wiring_csv",
]


@dataclass(frozen=True)
class Conductor:
    """One piece of wire: its running number, the number of its net, and its two ends."""

    wire: int
    net: int
    start: str
    end: str


def design_name(design: Design, job: Job) -> str:
    """Form, fingerprint and title, as every paper carries them: `ladder 3f9a1c Sluice house`."""
    return one_line(f"{design.form} {design.fingerprint} {job.title}")


def rail_terminals(job: Job) -> tuple[str, str]:
    """Terminals of the two rails, supply first: `rail:+24 V`, `rail:0 V`.

    A rail without a label is `rail:SUPPLY` or `rail:RETURN`; two equal labels are told apart.
    """
    feed = one_line(job.supply.feed or "") or "SUPPLY"
    back = one_line(job.supply.return_ or "") or "RETURN"
    if feed == back:
        feed, back = f"{feed} (feed)", f"{back} (return)"
    return f"rail:{feed}", f"rail:{back}"


def net_terminals(
    design: Design, job: Job, repeaters: Mapping[str, str] = MappingProxyType({})
) -> dict[int, tuple[str, ...]]:
    """Terminals of every net in the order of the panel, by wire number.

    Nets of the contacts come first, then the return rail, then those inside fittings.

    Args:
        repeaters: repeater -> the relay it follows; where that one's coil is wired here, the
            repeater's coil is in parallel.
    """
    network = design.network
    numbers = wire_numbers(network)
    feed, back = rail_terminals(job)
    kinds = {load.name: load.kind for load in job.loads}
    on_net: dict[str, list[str]] = {net: [] for net in numbers}
    on_net[network.supply].append(feed)
    on_net[RETURN].append(back)
    for pole in network.poles:
        marks = pole_marks(pole, job.limits.contacts)
        ends = ((pole.common, marks.common), (pole.make, marks.make), (pole.break_, marks.break_))
        for net, mark in ends:
            if net is not None and mark is not None:
                on_net[net].append(f"{pole.relay}:{mark}")
    inner: list[tuple[str, ...]] = []
    for load, net in network.loads.items():
        fed, returned = load_marks(kinds.get(load))
        coils = [load, *(r for r, of in repeaters.items() if of == load and of in network.relays)]
        parts = job.bench.fittings.get(load, Fittings())
        more = Fitted() if net is None else fitted(load, parts, positive=job.supply.positive)
        if net is not None:
            own = [*more.fed, *(f"{coil}:{fed}" for coil in coils)]
            if more.supply:
                on_net[net] += more.supply
                inner.append(tuple(own))
            else:
                on_net[net] += [*own[len(more.fed) :], *more.fed]
        on_net[RETURN] += [*(f"{coil}:{returned}" for coil in coils), *more.returned]
        inner += more.between
    found = {numbers[net]: tuple(terminals) for net, terminals in on_net.items()}
    return found | dict(enumerate(inner, start=len(found) + 1))


def terminal_places(nets: Mapping[int, Sequence[str]], job: Job) -> dict[str, Position]:
    """Position of each terminal whose relay, load or rail has one; fittings sit at their load."""
    bench = job.bench
    rails = dict(zip(rail_terminals(job), (bench.feed, bench.back), strict=True))
    found = {}
    for terminal in (terminal for terminals in nets.values() for terminal in terminals):
        owner = terminal.rpartition(":")[0].partition("/")[0]
        place = rails[terminal] if terminal in rails else bench.places.get(owner)
        if place is not None:
            found[terminal] = place
    return found


def conductors(
    design: Design,
    job: Job,
    *,
    repeaters: Mapping[str, str] = MappingProxyType({}),
    per_terminal: int = 2,
) -> tuple[Conductor, ...]:
    """Every conductor of the design, nets in the order of their wire numbers.

    Args:
        repeaters: as for `net_terminals`.
        per_terminal: most conductors on a terminal, at least 2.
    """
    nets = net_terminals(design, job, repeaters)
    places = terminal_places(nets, job)
    found: list[Conductor] = []
    for number, terminals in nets.items():
        for start, end in joined(terminals, places, per_terminal=per_terminal):
            found.append(Conductor(len(found) + 1, number, start, end))
    return tuple(found)


def wiring_csv(design: Design, job: Job, wires: Sequence[Conductor] | None = None) -> str:
    """Columns wire, net, from, to, design: one line for each conductor.

    Args:
        wires: from `conductors`, where they are made already.
    """
    name = design_name(design, job)
    made = conductors(design, job) if wires is None else wires
    return csv_text(
        ("wire", "net", "from", "to", "design"),
        ((c.wire, c.net, c.start, c.end, name) for c in made),
    )


def schedule_csv(design: Design, job: Job) -> str:
    """Columns relay, poles, makes, breaks, changeovers, springs, design: one line per relay."""
    name = design_name(design, job)
    return csv_text(
        ("relay", "poles", "makes", "breaks", "changeovers", "springs", "design"),
        (
            (relay, n.poles, n.makes, n.breaks, n.changeovers, n.springs, name)
            for relay, n in design.network.per_relay().items()
        ),
    )
