"""The wiring list: one line for each conductor, and the schedule of contacts per relay.

Terminals of one net are chained: the rail first, then the relays in their order, then the loads,
so that `k` terminals take `k - 1` conductors and no terminal carries more than two.  Marks follow
EN 50005 (`contactlogic.terminals`).  A rail's terminal is written `rail:` and its label, which
keeps a label such as `+24 V` from being computed by a spreadsheet program.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

from contactlogic.design import Design
from contactlogic.job.model import Job
from contactlogic.report.text import csv_text, one_line
from contactlogic.terminals import RETURN, load_marks, pole_marks, wire_numbers

__all__ = [
    "Conductor",
    "conductors",
    "design_name",
    "rail_terminals",
    "schedule_csv",
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


def conductors(design: Design, job: Job) -> tuple[Conductor, ...]:
    """Every conductor of the design, nets in the order of their wire numbers."""
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
    for load, net in network.loads.items():
        fed, returned = load_marks(kinds.get(load))
        if net is not None:
            on_net[net].append(f"{load}:{fed}")
        on_net[RETURN].append(f"{load}:{returned}")
    found: list[Conductor] = []
    for net, terminals in on_net.items():
        for start, end in pairwise(terminals):
            found.append(Conductor(len(found) + 1, numbers[net], start, end))
    return tuple(found)


def wiring_csv(design: Design, job: Job) -> str:
    """Columns wire, net, from, to, design: one line for each conductor."""
    name = design_name(design, job)
    return csv_text(
        ("wire", "net", "from", "to", "design"),
        ((c.wire, c.net, c.start, c.end, name) for c in conductors(design, job)),
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
