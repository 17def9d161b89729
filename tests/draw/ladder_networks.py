"""Random networks that keep the ladder definition: trees of series-parallel blocks with taps."""

from __future__ import annotations

import random

import networkx
from hypothesis import strategies as st

from contactlogic.network import Network, Pole

Edge = tuple[str, str, str, bool]  # relay, net, net, make


def two_terminal_series_parallel(pairs: list[tuple[str, str]], start: str, end: str) -> bool:
    """Whether the graph with an edge added between the terminals has no K4 minor."""
    graph = networkx.Graph(pairs)
    graph.add_edge(start, end)
    while True:
        low = next((v for v in sorted(graph) if graph.degree(v) <= 2), None)
        if low is None:
            return graph.number_of_nodes() == 0
        beside = list(graph[low])
        graph.remove_node(low)
        if len(beside) == 2:
            graph.add_edge(*beside)


def random_ladder(seed: int, size: int) -> Network:
    """A random ladder of about `size` contacts."""
    rng = random.Random(seed)
    relays = [
        rng.choice(["K", "UP", "FLOODGATE", "m_1x", "LIMIT_SWITCH_NORTH"]) + str(i)
        for i in range(rng.randint(2, 6))
    ]
    edges: list[Edge] = []
    loads: list[str | None] = []
    fresh = iter(f"n{i}" for i in range(10_000))

    def part(start: str, end: str, contacts: int, block: list[Edge]) -> None:
        if contacts <= 1:
            block.append((rng.choice(relays), start, end, rng.random() < 0.6))
            return
        first = rng.randint(1, contacts - 1)
        if rng.random() < 0.5:
            middle = next(fresh)
            part(start, middle, first, block)
            part(middle, end, contacts - first, block)
        else:
            part(start, end, first, block)
            part(start, end, contacts - first, block)

    open_nets = ["L"]
    while len(edges) < size:
        feed = rng.choice(open_nets[-6:] if rng.random() < 0.7 else ["L"])
        end = next(fresh)
        block: list[Edge] = []
        if rng.random() < 0.2:  # branches side by side with a tap each: out of reach for some
            for _ in range(rng.randint(2, 4)):
                middle = next(fresh)
                part(feed, middle, rng.randint(1, 2), block)
                part(middle, end, rng.randint(1, 2), block)
        else:
            part(feed, end, rng.randint(1, 8), block)
        edges += block
        loads.append(end)
        open_nets.append(end)
        pairs = [(a, b) for _, a, b, _ in block]
        inner = sorted({v for pair in pairs for v in pair} - {feed, end})
        # a net is an exit only if its whole block is series-parallel towards it; a cut net inside
        # this chain is judged within its own block, which is a stricter test here
        for net in inner:
            if rng.random() < 0.4 and _valid_exit(pairs, feed, net):
                if rng.random() < 0.7:
                    loads.append(net)
                    open_nets.append(net)
                else:
                    other = next(fresh)
                    edges.append((rng.choice(relays), net, other, rng.random() < 0.5))
                    loads.append(other)
                    open_nets.append(other)
        if rng.random() < 0.2:
            loads.append(end)
    if rng.random() < 0.2:
        loads.append(None)
    if rng.random() < 0.2:
        loads.append("L")
    rng.shuffle(loads)
    names = {f"{rng.choice(['Y', 'LAMP', 'BELL_TOWER_'])}{i}": net for i, net in enumerate(loads)}
    return Network(tuple(relays), "L", names, _poles(relays, edges, rng))


def _valid_exit(pairs: list[tuple[str, str]], feed: str, net: str) -> bool:
    graph = networkx.Graph(pairs)
    graph.add_edge(feed, net)
    for component in networkx.biconnected_components(graph):
        if feed in component and net in component:
            inside = [(a, b) for a, b in pairs if a in component and b in component]
            return two_terminal_series_parallel(inside, feed, net)
    return False


def _poles(relays: list[str], edges: list[Edge], rng: random.Random) -> tuple[Pole, ...]:
    found = []
    for relay in relays:
        own = [edge for edge in edges if edge[0] == relay]
        number = 0
        while own:
            _, a, b, make = own.pop(0)
            if rng.random() < 0.5:
                a, b = b, a
            number += 1
            other = next((e for e in own if e[3] != make and a in e[1:3]), None)
            second = None
            if other is not None and rng.random() < 0.8:
                own.remove(other)
                second = other[2] if other[1] == a else other[1]
            found.append(Pole(relay, number, a, *((b, second) if make else (second, b))))
    return tuple(found)


@st.composite
def ladder_networks(draw: st.DrawFn) -> Network:
    """Ladders of up to about 30 contacts."""
    return random_ladder(draw(st.integers(0, 2**32)), draw(st.integers(1, 30)))
