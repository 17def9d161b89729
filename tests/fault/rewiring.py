"""Faulty panels by rewiring: terminals and wires as a graph, one row at a time."""

from __future__ import annotations

from itertools import pairwise, product

import networkx as nx


def contact_closed(panel, contact, row, fault, stuck=()):
    """Whether a contact conducts; `stuck` are other contacts of a guided relay held closed."""
    relay = contact.pole.relay
    operated = bool(row >> panel.inputs.index(panel.follows[relay]) & 1)
    closed = operated == contact.make
    if fault is None or fault.relay != relay:
        return closed
    if fault.kind == "coil dead":
        return not contact.make
    mine = fault.pole == contact.pole.number
    if fault.kind in ("never makes", "never breaks"):
        return closed and not (mine and contact.make == (fault.kind == "never makes"))
    on_make = fault.kind == "welded make"
    if mine and contact.make == on_make:
        return True
    if relay in panel.guided:
        if contact.make != on_make:
            return False  # IEC 61810-3: while a make is welded no break closes, and conversely
        return closed or (contact.pole, contact.make) in stuck
    return closed and not mine  # the spring of a welded changeover never reaches the other throw


def ways(panel, fault):
    """Sets of other contacts of the welded kind that may be stuck closed too."""
    if fault is None or not fault.kind.startswith("welded") or fault.relay not in panel.guided:
        return [()]
    others = [
        (c.pole, c.make)
        for c in panel.contacts
        if c.pole.relay == fault.relay
        and c.make == (fault.kind == "welded make")
        and c.pole.number != fault.pole
    ]
    return [
        tuple(o for o, take in zip(others, taken, strict=True) if take)
        for taken in product((False, True), repeat=len(others))
    ]


def wires_of(panel, fault):
    """Pairs of terminals joined by wire after the fault."""
    pairs = {wire.number: (wire.start, wire.end) for wire in panel.wires}
    if fault is not None and fault.kind in ("wire off", "return off"):
        del pairs[fault.wires[0]]
    if fault is not None and fault.kind == "wires swapped":
        mine, theirs = fault.ends
        one, two = fault.wires
        pairs[one] = tuple(theirs if end == mine else end for end in pairs[one])
        pairs[two] = tuple(mine if end == theirs else end for end in pairs[two])
    return list(pairs.values())


def state(panel, row, fault=None, stuck=()):
    """{load: "on", "off" or "series"}, or "short" where the rails are joined."""
    graph = nx.Graph()
    graph.add_nodes_from([panel.feed, panel.back])
    graph.add_nodes_from(end for pair in panel.loads.values() for end in pair)
    graph.add_edges_from(wires_of(panel, fault))
    graph.add_edges_from(
        (c.common, c.throw) for c in panel.contacts if contact_closed(panel, c, row, fault, stuck)
    )
    part = {}
    for k, piece in enumerate(nx.connected_components(graph)):
        part.update(dict.fromkeys(piece, k))
    feed, back = part[panel.feed], part[panel.back]
    if feed == back:
        return "short"
    found = {}
    for load, (one, two) in panel.loads.items():
        if {part[one], part[two]} == {feed, back}:
            found[load] = "on"
        else:
            # fed in series iff it lies on some path from rail to rail
            network = nx.MultiGraph()
            network.add_nodes_from([feed, back])
            network.add_edges_from((part[a], part[b]) for a, b in panel.loads.values())
            paths = nx.all_simple_paths(network, feed, back)
            ends = {part[one], part[two]}
            on_path = len(ends) == 2 and any(
                ends == {a, b} for path in paths for a, b in pairwise(path)
            )
            found[load] = "series" if on_path else "off"
    return found
