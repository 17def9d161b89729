"""Papers for the bench: the list to tick off, each terminal with its wires, and the workbook.

The counts of wires can be compared with the finished panel, terminal by terminal.  Sockets have
pins of their own; where the parts list names them they stand beside the terminals.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from decimal import Decimal
from types import MappingProxyType

from contactlogic.design import Design
from contactlogic.job.model import Job
from contactlogic.network import Network
from contactlogic.purchase.currents import pole_currents
from contactlogic.purchase.fittings import fittings_of
from contactlogic.purchase.parts import plain
from contactlogic.purchase.schedule import Schedule
from contactlogic.report.chain import length_of
from contactlogic.report.fittings import polarity
from contactlogic.report.text import csv_text, markdown, table_lines
from contactlogic.report.wiring import (
    Conductor,
    conductors,
    design_name,
    net_terminals,
    terminal_places,
    wiring_csv,
)
from contactlogic.workbook import Sheet, workbook_bytes

__all__ = [
    "Bought",
    "Point",
    "WireList",
    "bench_files",
    "bought_for",
    "current_lines",
    "points",
    "terminals_csv",
    "tick_list",
    "wire_list",
    "wiring_xlsx",
]

_BOX = "☐"


@dataclass(frozen=True)
class Bought:
    """What the parts bought for a design say of its contacts.

    Args:
        pins: socket pin by relay and terminal mark, both as in the design.
        amps: rating of a pole by relay and number.
    """

    pins: Mapping[str, Mapping[str, str]] = field(default_factory=dict)
    amps: Mapping[tuple[str, int], Decimal] = field(default_factory=dict)


@dataclass(frozen=True)
class WireList:
    """All that the papers of one design's wiring are made from.

    Args:
        design: the design.
        job: what it is for.
        conductors: its wires.
        nets: terminals of every net, by wire number.
        repeaters: repeater -> the relay it follows.
        bought: what the parts bought say of its contacts.
        length: of all wires in steps of the panel; None where a position is not given.
    """

    design: Design
    job: Job
    conductors: tuple[Conductor, ...]
    nets: Mapping[int, tuple[str, ...]]
    repeaters: Mapping[str, str] = field(default_factory=dict)
    bought: Bought = field(default_factory=Bought)
    length: float | None = None


@dataclass(frozen=True)
class Point:
    """One terminal: what it belongs to, what it is for, its net and how many wires are on it.

    `net` is None for a terminal that is left unwired.
    """

    owner: str
    mark: str
    use: str
    net: int | None
    wires: int
    pin: str = ""

    @property
    def terminal(self) -> str:
        return f"{self.owner}:{self.mark}"


def wire_list(
    design: Design,
    job: Job,
    *,
    repeaters: Mapping[str, str] = MappingProxyType({}),
    per_terminal: int = 2,
    bought: Bought | None = None,
) -> WireList:
    """The wires of a design with what is known of its terminals.

    Args:
        repeaters: repeater -> the relay it follows.
        per_terminal: most conductors on a terminal, at least 2.
        bought: what the parts bought say of its contacts, from `bought_for`.
    """
    nets = net_terminals(design, job, repeaters)
    wires = conductors(design, job, repeaters=repeaters, per_terminal=per_terminal)
    length = length_of([(wire.start, wire.end) for wire in wires], terminal_places(nets, job))
    return WireList(design, job, wires, nets, repeaters, bought or Bought(), length)


def bought_for(schedule: Schedule) -> Bought:
    """Pins and ratings of what a schedule buys, by the relays and poles of the design."""
    pins: dict[str, dict[str, str]] = {}
    amps: dict[tuple[str, int], Decimal] = {}
    for unit in schedule.purchase.units if schedule.purchase else ():
        part = unit.part
        if part is None:
            continue
        own = pins.setdefault(unit.relay, {})
        prefix = "" if unit.name == unit.relay else f"{unit.name} "
        for pole, at in unit.poles:
            if part.amps is not None:
                amps[unit.relay, pole] = part.amps
            for digit in "1234":
                if f"{at}{digit}" in part.pins:
                    own[f"{pole}{digit}"] = prefix + part.pins[f"{at}{digit}"]
        for mark in ("A1", "A2"):
            if mark in part.pins:
                pins.setdefault(unit.name, {})[mark] = part.pins[mark]
    return Bought(pins, amps)


def points(wires: WireList) -> tuple[Point, ...]:
    """Every terminal, relay by relay with its unwired ones, then loads, fittings and rails."""
    found: dict[str, Point] = {}
    count: dict[str, int] = {}
    for wire in wires.conductors:
        for end in (wire.start, wire.end):
            count[end] = count.get(end, 0) + 1
    net_of = {terminal: net for net, ends in wires.nets.items() for terminal in ends}
    network = wires.design.network

    def add(owner: str, mark: str, use: str) -> None:
        terminal = f"{owner}:{mark}"
        net = net_of.get(terminal)
        pin = wires.bought.pins.get(owner, {}).get(mark, "")
        found[terminal] = Point(owner, mark, use, net, count.get(terminal, 0), pin)

    for relay in network.relays:
        for mark in ("A1", "A2"):
            if f"{relay}:{mark}" in net_of:
                add(relay, mark, "coil")
        for mark, use in _contact_marks(network, relay, net_of, wires.job):
            add(relay, mark, use)
    kinds = {load.name: load.kind for load in wires.job.loads}
    for terminal in net_of:
        if terminal not in found:
            owner, _, mark = terminal.rpartition(":")
            rail = terminal.startswith("rail:")
            use = "coil" if kinds.get(owner) == "coil" else _use(owner)
            add(*(("rail", terminal[5:], "rail") if rail else (owner, mark, use)))
    for load, net in network.loads.items():
        if net is None and load not in network.relays:
            mark = "A1" if kinds.get(load) == "coil" else "X1"
            add(load, mark, "load")
    return tuple(found.values())


def _contact_marks(
    network: Network, relay: str, net_of: Mapping[str, int], job: Job
) -> Iterator[tuple[str, str]]:
    """Marks of a relay's poles in use; of a changeover relay the unwired ends as well."""
    uses = {"1": "common", "2": "break", "4": "make", "3": "common"}
    for pole in network.poles:
        if pole.relay != relay:
            continue
        for digit in "1234" if relay in job.limits.contacts else "124":
            mark = f"{pole.number}{digit}"
            if f"{relay}:{mark}" in net_of or relay not in job.limits.contacts:
                yield mark, uses[digit]


def _use(owner: str) -> str:
    return owner.rpartition("/")[2] if "/" in owner else "load"


def terminals_csv(wires: WireList) -> str:
    """Columns of, terminal, use, net, wires, pin, design: one line for each terminal."""
    name = design_name(wires.design, wires.job)
    return csv_text(
        ("of", "terminal", "use", "net", "wires", "pin", "design"),
        (
            (p.owner, p.terminal, p.use, "" if p.net is None else p.net, p.wires, p.pin, name)
            for p in points(wires)
        ),
    )


def current_lines(wires: WireList) -> list[str]:
    """Markdown: the largest current of each pole against its rating; nothing without currents."""
    job = wires.job
    if all(load.amps is None for load in job.loads):
        return []
    rows = []
    for found in pole_currents(wires.design.network, job, wires.repeaters):
        rating = wires.bought.amps.get((found.relay, found.number))
        verdict = "not given"
        if rating is not None:
            verdict = "exceeds its rating" if found.amps > rating else "within its rating"
        rows.append(
            (
                markdown(f"{found.relay} {found.number}"),
                f"{plain(found.amps)} A",
                "none" if found.row is None else found.row,
                markdown(", ".join(found.loads)) or "none",
                markdown(", ".join(found.not_given)) or "none",
                "not given" if rating is None else f"{plain(rating)} A",
                verdict,
            )
        )
    return [
        "Of each pole the largest sum, over all rows, of the currents of loads that are on and fed "
        "over some path through it: an upper bound, for how current divides is not known.",
        "",
        *table_lines(
            ("pole", "at most", "first in row", "loads", "current not given", "rating", "verdict"),
            rows,
        ),
    ]


def _shown(wires: WireList, terminal: str) -> str:
    """A terminal with its socket pin, if that is known."""
    owner, _, mark = terminal.rpartition(":")
    pin = wires.bought.pins.get(owner, {}).get(mark)
    return terminal if pin is None else f"{terminal} (pin {pin})"


def tick_list(wires: WireList) -> str:
    """A list to print: every wire and then every terminal's count, each with a box to tick."""
    name = design_name(wires.design, wires.job)
    lines = [f"# Wires to tick off: {markdown(name)}", ""]
    lines += [f"- {said}" for said in _facts(wires)]
    lines += ["", "## Wires", ""]
    lines += table_lines(
        ("done", "wire", "net", "from", "to"),
        [
            (_BOX, w.wire, w.net, markdown(_shown(wires, w.start)), markdown(_shown(wires, w.end)))
            for w in wires.conductors
        ],
    )
    bill = fittings_of(wires.job)
    if bill:
        lines += ["", "## Parts at loads and coils", ""]
        lines += table_lines(
            ("done", "part", "value", "number", "at"),
            [
                (_BOX, b.part, markdown(b.value), len(b.loads), markdown(", ".join(b.loads)))
                for b in bill
            ],
        )
    currents = current_lines(wires)
    if currents:
        lines += ["", "## Current of each pole", "", *currents]
    lines += ["", "## Wires on each terminal", ""]
    lines += table_lines(
        ("counted", "terminal", "use", "net", "wires"),
        [
            (_BOX, markdown(_shown(wires, p.terminal)), p.use, p.net or "none", p.wires)
            for p in points(wires)
        ],
    )
    return "\n".join(lines) + "\n"


def _facts(wires: WireList) -> Iterator[str]:
    ends = 2 * len(wires.conductors)
    yield f"{len(wires.conductors)} wires, {ends} ends, {len(wires.nets)} nets"
    if wires.job.bench.places:
        length = "not given" if wires.length is None else f"{wires.length:g} steps of the panel"
        yield f"length of all wires: {length}"
    said = polarity(wires.job)
    if said is not None:
        yield said


def wiring_xlsx(wires: WireList) -> bytes:
    """Wires, terminals and parts as a workbook of three sheets."""
    name = design_name(wires.design, wires.job)
    rows = tuple(
        (w.wire, w.net, w.start, w.end, _pin(wires, w.start), _pin(wires, w.end), "", name)
        for w in wires.conductors
    )
    header = ("wire", "net", "from", "to", "pin from", "pin to", "done", "design")
    sheets = [
        Sheet("wires", header, rows, (6, 6, 24, 24, 9, 9, 6, 40)),
        Sheet(
            "terminals",
            ("of", "terminal", "use", "net", "wires", "pin", "counted", "design"),
            tuple(
                (p.owner, p.terminal, p.use, p.net or "", p.wires, p.pin, "", name)
                for p in points(wires)
            ),
            (16, 24, 12, 6, 6, 6, 8, 40),
        ),
    ]
    bill = fittings_of(wires.job)
    if bill:
        sheets.append(
            Sheet(
                "parts",
                ("part", "value", "number", "at", "design"),
                tuple((b.part, b.value, len(b.loads), ", ".join(b.loads), name) for b in bill),
                (14, 14, 8, 40, 40),
            )
        )
    return workbook_bytes(sheets, title=name)


def _pin(wires: WireList, terminal: str) -> str:
    owner, _, mark = terminal.rpartition(":")
    return wires.bought.pins.get(owner, {}).get(mark, "")


def bench_files(wires: WireList) -> dict[str, bytes]:
    """The papers of one design's wiring by their names in the folder of its form."""
    return {
        "wiring.csv": wiring_csv(wires.design, wires.job, wires.conductors).encode(),
        "wiring.xlsx": wiring_xlsx(wires),
        "terminals.csv": terminals_csv(wires).encode(),
        "ticklist.md": tick_list(wires).encode(),
    }
