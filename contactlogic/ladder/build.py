"""From ordered rungs to a network: nets, then makes and breaks paired into poles.

Once every net is fixed, the most pairs of one relay are a maximum matching between its makes and
its breaks, joined where they meet at a net (Hopcroft and Karp 1973, by networkx).
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import count, pairwise

from contactlogic.ladder.plan import Plan
from contactlogic.ladder.tree import Leaf, Series, Tree
from contactlogic.network import Network, Pole

__all__ = ["Edge", "build", "lay", "pair"]

SUPPLY = "L"


@dataclass(frozen=True)
class Edge:
    """One contact between two nets, `near` nearer the supply."""

    relay: str
    make: bool
    near: str
    far: str


def build(
    plan: Plan, relays: Sequence[str], loads: Sequence[str], separate: Collection[str] = ()
) -> Network:
    """The network of a plan, every series wired in the order it stands in.

    Args:
        plan: rungs; relay numbers index `relays`, load numbers index `loads`.
        separate: relays whose makes and breaks are never paired.
    """
    nets = (f"n{k}" for k in count(1))
    names: dict[int, str] = {0: SUPPLY}
    edges: list[Edge] = []
    for branch in plan.branches:
        names[branch.end] = next(nets)
        edges += lay(branch.tree, names[branch.start], names[branch.end], relays, nets)
    fed = {
        load: None if node is None else names[node]
        for load, node in zip(loads, plan.loads, strict=True)
    }
    return Network(tuple(relays), SUPPLY, fed, pair(edges, relays, separate))


def lay(tree: Tree, near: str, far: str, relays: Sequence[str], nets: Iterator[str]) -> list[Edge]:
    """The tree's contacts between two nets, its inner joints named from `nets`."""
    if isinstance(tree, Leaf):
        return [Edge(relays[tree.relay], tree.make, near, far)]
    if isinstance(tree, Series):
        joints = [near, *(next(nets) for _ in tree.parts[1:]), far]
        ends = list(pairwise(joints))
    else:
        ends = [(near, far)] * len(tree.parts)
    return [
        edge
        for part, (left, right) in zip(tree.parts, ends, strict=True)
        for edge in lay(part, left, right, relays, nets)
    ]


def pair(
    edges: Iterable[Edge], relays: Sequence[str], separate: Collection[str] = ()
) -> tuple[Pole, ...]:
    """Poles for the given contacts, as few as their nets allow, numbered in the order given."""
    import networkx

    by_relay: dict[str, list[Edge]] = {relay: [] for relay in relays}
    for edge in edges:
        by_relay[edge.relay].append(edge)
    poles: list[Pole] = []
    for relay, own in by_relay.items():
        partner: dict[int, int] = {}
        if relay not in separate:
            graph = networkx.Graph()
            makes = [k for k, edge in enumerate(own) if edge.make]
            graph.add_nodes_from(makes)
            graph.add_edges_from(
                (k, other)
                for k in makes
                for other, edge in enumerate(own)
                if not edge.make and {edge.near, edge.far} & {own[k].near, own[k].far}
            )
            partner = networkx.bipartite.hopcroft_karp_matching(graph, makes)
        number = 0
        for k, edge in enumerate(own):
            other = partner.get(k)
            if other is not None and other < k:
                continue  # stands with its partner already
            number += 1
            poles.append(_pole(relay, number, edge, None if other is None else own[other]))
    return tuple(poles)


def _pole(relay: str, number: int, first: Edge, second: Edge | None) -> Pole:
    if second is None:
        make, break_ = (first.far, None) if first.make else (None, first.far)
        return Pole(relay, number, first.near, make, break_)
    make_edge, break_edge = (first, second) if first.make else (second, first)
    shared = {make_edge.near, make_edge.far} & {break_edge.near, break_edge.far}
    common = make_edge.near if make_edge.near in shared else make_edge.far
    return Pole(relay, number, common, _other(make_edge, common), _other(break_edge, common))


def _other(edge: Edge, net: str) -> str:
    return edge.far if edge.near == net else edge.near
