"""A network by numbers, as the window search cuts and mends it.

Net 0 is the supply.  All rows are handled at once as the bits of integers, as in `truth`.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass

from contactlogic.network import Network, Pole
from contactlogic.search.encoding import Ends
from contactlogic.truth import all_rows, literal

__all__ = ["SUPPLY", "Mesh", "from_network", "joins", "live_rows", "spread", "to_network", "trim"]

SUPPLY = 0

Joins = dict[int, list[tuple[int, int]]]
"""By net: other nets, and the rows in which a contact joins them."""


@dataclass(frozen=True)
class Mesh:
    """Poles between numbered nets, and the net of each load (None: never on)."""

    poles: tuple[Ends, ...]
    feeds: tuple[int | None, ...]

    def nets(self) -> set[int]:
        """Every net in use, supply and load nets included."""
        nets = {SUPPLY} | {feed for feed in self.feeds if feed is not None}
        for pole in self.poles:
            nets.add(pole.common)
            nets.update(net for net in (pole.make, pole.break_) if net is not None)
        return nets


def from_network(network: Network) -> Mesh:
    """The mesh of a network; relays and loads are numbered in their order there."""
    number = {net: k for k, net in enumerate(network.nets())}
    relay = {name: k for k, name in enumerate(network.relays)}

    def at(net: str | None) -> int | None:
        return None if net is None else number[net]

    return Mesh(
        tuple(
            Ends(relay[p.relay], number[p.common], at(p.make), at(p.break_)) for p in network.poles
        ),
        tuple(at(net) for net in network.loads.values()),
    )


def to_network(mesh: Mesh, relays: Sequence[str], loads: Sequence[str]) -> Network:
    """The network of a mesh, nets renamed in order of appearance, the supply `L`."""
    names = {SUPPLY: "L"}

    def name(net: int | None) -> str | None:
        return None if net is None else names.setdefault(net, f"n{len(names)}")

    poles: list[Pole] = []
    count = dict.fromkeys(relays, 0)
    for ends in sorted(mesh.poles, key=lambda e: e.relay):
        relay = relays[ends.relay]
        count[relay] += 1
        common = name(ends.common)
        assert common is not None
        poles.append(Pole(relay, count[relay], common, name(ends.make), name(ends.break_)))
    fed = {load: name(net) for load, net in zip(loads, mesh.feeds, strict=True)}
    return Network(tuple(relays), "L", fed, tuple(poles))


def live_rows(poles: Iterable[Ends], n: int, source: int = SUPPLY) -> Mapping[int, int]:
    """Rows in which each net is joined to `source`, as truth tables; nets never reached are 0."""
    return spread(joins(poles, n, [source]), {source: all_rows(n)})


def joins(poles: Iterable[Ends], n: int, nets: Iterable[int] = ()) -> Joins:
    """For each net, of `nets` and those of the poles, the nets beside it and the rows they join."""
    beside: Joins = {net: [] for net in nets}
    for pole in poles:
        for net, make in ((pole.make, True), (pole.break_, False)):
            if net is not None:
                closed = literal(n, pole.relay, make)
                beside.setdefault(pole.common, []).append((net, closed))
                beside.setdefault(net, []).append((pole.common, closed))
    return beside


def spread(beside: Joins, start: Mapping[int, int]) -> dict[int, int]:
    """Rows in which each net is joined to a start, in that start's rows."""
    live = dict.fromkeys(beside, 0)
    live.update(start)
    waiting = list(start)
    while waiting:
        net = waiting.pop()
        here = live[net]
        for other, closed in beside[net]:
            more = here & closed & ~live[other]
            if more:
                live[other] |= more
                waiting.append(other)
    return live


def trim(mesh: Mesh) -> Mesh:
    """The mesh without contacts that lead nowhere (dead ends, both ends on one net)."""
    kept = {SUPPLY, *(feed for feed in mesh.feeds if feed is not None)}
    poles = list(mesh.poles)
    while True:
        touched: dict[int, int] = {}
        for pole in poles:
            for net in {pole.common, pole.make, pole.break_}:
                if net is not None:
                    touched[net] = touched.get(net, 0) + 1
        trimmed = [_trim(pole, touched, kept) for pole in poles]
        fresh = [pole for pole in trimmed if pole is not None]
        if fresh == poles:
            return Mesh(tuple(poles), mesh.feeds)
        poles = fresh


def _trim(pole: Ends, touched: Mapping[int, int], kept: Collection[int]) -> Ends | None:
    def wired(net: int | None) -> int | None:
        if net is None or net == pole.common or (touched[net] == 1 and net not in kept):
            return None
        return net

    make, break_ = wired(pole.make), wired(pole.break_)
    if make is None and break_ is None:
        return None
    if touched[pole.common] == 1 and pole.common not in kept and None in (make, break_):
        return None
    return Ends(pole.relay, pole.common, make, break_)
