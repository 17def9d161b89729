"""Independent answers to compare with: they share no code with contactlogic.

Conduction is asked of networkx row by row, functions of sympy and pyeda.  Slow and plain on
purpose; keep networks to a handful of relays and poles.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from itertools import product

import networkx as nx


def rows(relays: Sequence[str]) -> Iterator[tuple[int, dict[str, int]]]:
    """Every row number with its relay values; relay i (0-based) is bit i."""
    for number, values in enumerate(product((0, 1), repeat=len(relays))):
        yield number, dict(zip(relays, reversed(values), strict=True))


def closed_graph(network, state: dict[str, int]) -> nx.Graph:
    """Nets joined by the contacts that are closed in one state."""
    graph = nx.Graph()
    graph.add_node(network.supply)
    graph.add_nodes_from(net for net in network.loads.values() if net is not None)
    for pole in network.poles:
        end = pole.make if state[pole.relay] else pole.break_
        if end is not None:
            graph.add_edge(pole.common, end)
    return graph


def behaviour(network) -> dict[str, int]:
    """Truth table of each load as wired, by connected components."""
    found = dict.fromkeys(network.loads, 0)
    for number, state in rows(network.relays):
        live = nx.node_connected_component(closed_graph(network, state), network.supply)
        for load, net in network.loads.items():
            if net is not None and net in live:
                found[load] |= 1 << number
    return found


def discharges(network, isolated: Sequence[str]) -> set[tuple[str, str, int]]:
    """(isolated load, other load, row) wherever both are off and joined over different nets."""
    found = set()
    for number, state in rows(network.relays):
        graph = closed_graph(network, state)
        for load in isolated:
            net = network.loads[load]
            if net is None or nx.has_path(graph, net, network.supply):
                continue
            for other, elsewhere in network.loads.items():
                if elsewhere not in (None, net) and nx.has_path(graph, net, elsewhere):
                    found.add((load, other, number))
    return found


def contact_graph(network) -> nx.MultiGraph:
    """All makes and breaks as edges that carry their `relay` and `make`."""
    graph = nx.MultiGraph()
    graph.add_node(network.supply)
    graph.add_nodes_from(net for net in network.loads.values() if net is not None)
    for pole in network.poles:
        for make, end in ((True, pole.make), (False, pole.break_)):
            if end is not None:
                graph.add_edge(pole.common, end, relay=pole.relay, make=make)
    return graph


def path_tables(network) -> dict[str, int]:
    """Truth table of each load by sympy: or over all simple paths, and along each path."""
    import sympy
    from sympy.logic.boolalg import And, Not, Or

    graph = contact_graph(network)
    symbols = {relay: sympy.Symbol(relay) for relay in network.relays}
    found = {}
    for load, net in network.loads.items():
        if net is None or net == network.supply:
            found[load] = sympy_table(sympy.S.true if net else sympy.S.false, network.relays)
            continue
        ways = []
        for path in nx.all_simple_edge_paths(graph, network.supply, net):
            along = [graph.edges[edge] for edge in path]
            ways.append(
                And(
                    *(symbols[c["relay"]] if c["make"] else Not(symbols[c["relay"]]) for c in along)
                )
            )
        found[load] = sympy_table(Or(*ways), network.relays)
    return found


def table_of(function: Callable[..., object], relays: Sequence[str]) -> int:
    """Truth table of any function of relay values, called with them by name."""
    return sum(bool(function(**state)) << number for number, state in rows(relays))


def sympy_table(expression, relays: Sequence[str]) -> int:
    """Truth table of a sympy expression whose symbols are relay names."""
    import sympy

    symbols = {relay: sympy.Symbol(relay) for relay in relays}
    return table_of(
        lambda **state: expression.subs({symbols[r]: bool(v) for r, v in state.items()}), relays
    )


def pyeda_table(expression, relays: Sequence[str]) -> int:
    """Truth table of a pyeda expression whose variables are relay names."""
    from pyeda.inter import exprvar

    variables = {relay: exprvar(relay) for relay in relays}
    return table_of(
        lambda **state: expression.restrict({variables[r]: v for r, v in state.items()}).is_one(),
        relays,
    )


def confluent(edges: Sequence[tuple[str, str]], s: str, t: str) -> bool:
    """Whether no edge is passed both ways by simple paths from s to t.

    Duffin 1965: this is what being series-parallel between s and t comes to.
    """
    graph = nx.MultiGraph(edges)
    if s not in graph or t not in graph:
        return True
    passed = set()
    for path in nx.all_simple_edge_paths(graph, s, t):
        here = s
        for a, b, key in path:
            there = b if here == a else a
            passed.add((frozenset((a, b)), key, here))
            if (frozenset((a, b)), key, there) in passed:
                return False
            here = there
    return True


def has_k4_minor(edges: Sequence[tuple[str, str]]) -> bool:
    """Whether some run of contractions and deletions leaves four nets joined each to each."""
    seen: set[frozenset[frozenset[str]]] = set()

    def search(graph: nx.Graph) -> bool:
        key = frozenset(frozenset(edge) for edge in graph.edges)
        if key in seen or graph.number_of_edges() < 6:
            return False
        seen.add(key)
        # Deleting nets and edges never has to come before contracting, so contract to four nets.
        if any(graph.subgraph(four).number_of_edges() == 6 for four in _fours(graph)):
            return True
        return any(
            search(nx.contracted_edge(graph, edge, self_loops=False, copy=True))
            for edge in graph.edges
        )

    simple = nx.Graph((a, b) for a, b in edges if a != b)
    return search(simple)


def _fours(graph: nx.Graph):
    from itertools import combinations

    return combinations(sorted(graph.nodes, key=str), 4)
