"""Contacts in transit by the definition: every position of every pole, one row at a time."""

from __future__ import annotations

from itertools import product

import networkx as nx


def joined(network, row, position, one, two, inputs=None, repeaters=None):
    """Whether two nets are joined; `position` gives "make", "break", "open" or "both" by pole."""
    inputs = inputs or network.relays
    graph = nx.Graph()
    graph.add_nodes_from([one, two])
    for pole in network.poles:
        relay = (repeaters or {}).get(pole.relay, pole.relay)
        at = position.get((pole.relay, pole.number))
        if at is None:
            at = "make" if row >> inputs.index(relay) & 1 else "break"
        if at in ("make", "both") and pole.make is not None:
            graph.add_edge(pole.common, pole.make)
        if at in ("break", "both") and pole.break_ is not None:
            graph.add_edge(pole.common, pole.break_)
    return nx.has_path(graph, one, two)


def fed(network, row, position, net, **more):
    return joined(network, row, position, network.supply, net, **more)


def positions_of(network, mover, joining=(), repeaters=None):
    """Every way the mover's poles can be: a dictionary for each."""
    own = [
        (p.relay, p.number)
        for p in network.poles
        if (repeaters or {}).get(p.relay, p.relay) == mover
    ]
    ways = [
        ("make", "break", "both") if name in joining else ("make", "break", "open") for name in own
    ]
    return [dict(zip(own, way, strict=True)) for way in product(*ways)]


def by_trying(network, released, targets, joining=(), inputs=None, repeaters=None):
    """{(mover, load, kind): rows with the mover released} by the definition."""
    inputs = inputs or network.relays
    found = {}
    for i, mover in enumerate(inputs):
        for row in range(2 ** len(inputs)):
            if not released[mover] >> row & 1:
                continue
            for load, net in network.loads.items():
                if net is None or load not in targets:
                    continue
                ends = [row, row | 1 << i]
                state = [fed(network, r, {}, net, inputs=inputs, repeaters=repeaters) for r in ends]
                between = [
                    fed(network, row, p, net, inputs=inputs, repeaters=repeaters)
                    for p in positions_of(network, mover, joining, repeaters)
                ]
                target = targets[load]
                if all(state) and all(target.on >> r & 1 for r in ends) and not all(between):
                    found.setdefault((mover, load, "drop-out"), set()).add(row)
                if not any(state) and all(target.off >> r & 1 for r in ends) and any(between):
                    found.setdefault((mover, load, "flash"), set()).add(row)
    return found
