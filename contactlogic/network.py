"""Contact networks: poles between nets, and what conducts in which row.

A network is an undirected graph on nets.  In a row a pole joins its common to its make if its
relay is operated, otherwise to its break (design.md section 3).  `conduction` is what the
synthesisers use; the proof in `check` has a conduction of its own and shares nothing with it.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass, replace

from contactlogic.truth import literal

__all__ = ["Contact", "Network", "Pole", "PoleCount", "back_feeds", "conduction", "folded"]


@dataclass(frozen=True)
class Pole:
    """One changeover contact set.  At least one of `make` and `break_` is wired."""

    relay: str
    number: int
    common: str
    make: str | None = None
    break_: str | None = None


@dataclass(frozen=True)
class Contact:
    """One make or break contact as an edge between two nets; `pole` is what it belongs to."""

    relay: str
    make: bool
    common: str
    throw: str
    pole: Pole


@dataclass(frozen=True)
class PoleCount:
    """Use of one relay: poles used on the make only, on the break only, on both."""

    makes: int = 0
    breaks: int = 0
    changeovers: int = 0

    @property
    def poles(self) -> int:
        return self.makes + self.breaks + self.changeovers

    @property
    def contacts(self) -> int:
        return self.makes + self.breaks + 2 * self.changeovers

    @property
    def springs(self) -> int:
        """Contact springs: 2 for a make or break, 3 for a changeover (design.md section 4)."""
        return 2 * (self.makes + self.breaks) + 3 * self.changeovers


@dataclass(frozen=True)
class Network:
    """Poles between nets, and the net each load is fed from.

    Args:
        relays: relay names in bit order.
        supply: net of the supply rail.
        loads: load name to its net; None if never on, the supply if always on.  Order is kept.
        poles: the poles in use, sorted by relay order, then number (from 1, each once per relay;
            a design file may leave gaps).
    """

    relays: tuple[str, ...]
    supply: str
    loads: Mapping[str, str | None]
    poles: tuple[Pole, ...]

    def assert_consistent(self) -> None:
        """Raise ValueError where the network breaks its own invariants."""
        seen: dict[str, int] = dict.fromkeys(self.relays, 0)
        if len(seen) != len(self.relays):
            raise ValueError("a relay is named twice")
        order = {name: i for i, name in enumerate(self.relays)}
        last = -1
        for pole in self.poles:
            if pole.relay not in seen:
                raise ValueError(f"pole of an unknown relay {pole.relay}")
            if order[pole.relay] < last:
                raise ValueError("poles are not sorted by relay")
            last = order[pole.relay]
            if pole.number <= seen[pole.relay]:
                raise ValueError(f"{pole.relay}: pole {pole.number} is out of sequence")
            seen[pole.relay] = pole.number
            if pole.make is None and pole.break_ is None:
                raise ValueError(f"{pole.relay} pole {pole.number} has only a common")

    def contacts(self) -> Iterator[Contact]:
        """Every make and break as an edge, in pole order, make first."""
        for pole in self.poles:
            if pole.make is not None:
                yield Contact(pole.relay, True, pole.common, pole.make, pole)
            if pole.break_ is not None:
                yield Contact(pole.relay, False, pole.common, pole.break_, pole)

    def nets(self) -> tuple[str, ...]:
        """Supply first, then every other net in order of first appearance."""
        found: dict[str, None] = {self.supply: None}
        for pole in self.poles:
            for net in (pole.common, pole.make, pole.break_):
                if net is not None:
                    found.setdefault(net)
        for net in self.loads.values():
            if net is not None:
                found.setdefault(net)
        return tuple(found)

    def per_relay(self) -> dict[str, PoleCount]:
        """Pole use of every relay, unused relays included, in relay order."""
        tally = {name: [0, 0, 0] for name in self.relays}
        for pole in self.poles:
            kind = 2 if pole.make is not None and pole.break_ is not None else (pole.make is None)
            tally[pole.relay][int(kind)] += 1
        return {name: PoleCount(*counts) for name, counts in tally.items()}

    def cost(self) -> tuple[int, int, int, int]:
        """Poles, poles on the busiest relay, springs, nets: the order of section 4."""
        counts = self.per_relay().values()
        return (
            len(self.poles),
            max((c.poles for c in counts), default=0),
            sum(c.springs for c in counts),
            len(self.nets()),
        )


def conduction(network: Network, source: str | None = None) -> dict[str, int]:
    """Rows in which each net is joined to `source` (default: the supply), as truth tables.

    All rows at once: a net's table is the union over its closed contacts of the neighbour's
    table, iterated to the fixed point from the source.
    """
    n = len(network.relays)
    place = {name: i for i, name in enumerate(network.relays)}
    start = network.supply if source is None else source
    touching: dict[str, list[tuple[str, int]]] = {net: [] for net in network.nets()}
    touching.setdefault(start, [])
    for contact in network.contacts():
        closed = literal(n, place[contact.relay], contact.make)
        touching[contact.common].append((contact.throw, closed))
        touching[contact.throw].append((contact.common, closed))
    joined = dict.fromkeys(touching, 0)
    joined[start] = (1 << (1 << n)) - 1
    waiting = [start]
    while waiting:
        net = waiting.pop()
        here = joined[net]
        for other, closed in touching[net]:
            more = here & closed & ~joined[other]
            if more:
                joined[other] |= more
                waiting.append(other)
    return joined


def back_feeds(network: Network, isolated: Collection[str]) -> int:
    """Rows in which an isolated load that is off is joined to the net of another that is off.

    Over all settings, listed or not (section 3); loads on one net are not told apart.
    """
    live = conduction(network)
    nets = {net for net in network.loads.values() if net is not None}
    rows = 0
    for load in sorted(isolated):
        net = network.loads[load]
        if net is None:
            continue
        joined = conduction(network, net)
        for other in nets - {net}:
            rows |= joined[other] & ~live[net]
    return rows


def folded(network: Network, repeaters: Mapping[str, str]) -> Network:
    """The same wiring with each repeater's poles counted as poles of the relay it follows.

    A repeater adds no rows: what a network does is read off its folded form.
    """
    if not repeaters:
        return network
    relays = tuple(name for name in network.relays if name not in repeaters)
    order = {name: i for i, name in enumerate(relays)}
    moved = [replace(pole, relay=repeaters.get(pole.relay, pole.relay)) for pole in network.poles]
    moved.sort(key=lambda pole: order[pole.relay])  # stable: a relay's own poles come first
    count = dict.fromkeys(relays, 0)
    poles = []
    for pole in moved:
        count[pole.relay] += 1
        poles.append(replace(pole, number=count[pole.relay]))
    return Network(relays, network.supply, network.loads, tuple(poles))
