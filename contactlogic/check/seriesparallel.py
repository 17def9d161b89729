"""Whether contacts between two nets form a series-parallel graph.

The edges on simple paths between two nets s and t are those of the biconnected block that holds
the edge s-t once that edge is added; the block is found by depth-first search with low points
(Hopcroft and Tarjan 1973).  The block is series-parallel between s and t iff replacing parallel
edges by one, and two edges in series by one, ends in a single edge (Duffin 1965; Valdes, Tarjan
and Lawler 1982).
"""

from __future__ import annotations

from collections.abc import Iterable

__all__ = ["between", "core"]

Graph = dict[str, dict[str, None]]
"""Neighbours of each net, in order of first appearance.  Parallel edges are one: that they are
is the parallel step, and it changes no block of more than one edge."""


def _graph(edges: Iterable[tuple[str, str]]) -> Graph:
    graph: Graph = {}
    for a, b in edges:
        graph.setdefault(a, {})
        graph.setdefault(b, {})
        if a != b:  # an edge from a net to itself lies on no simple path
            graph[a][b] = graph[b][a] = None
    return graph


def between(edges: Iterable[tuple[str, str]], s: str, t: str) -> frozenset[str]:
    """Nets on simple paths from `s` to `t`; empty if there is no path.

    An edge lies on a simple path from `s` to `t` iff both its ends are in here and differ.
    """
    graph = _graph(edges)
    if s == t or s not in graph or t not in graph:
        return frozenset()
    direct = t in graph[s]
    graph[s] = {t: None} | graph[s]
    graph[t] = graph[t] | {s: None}
    order = {s: 0, t: 1}
    low = {s: 0, t: 0}
    parent = {s: s, t: s}
    stack = [(t, iter(graph[t]))]  # s-t is taken as the first tree edge
    while stack:
        net, rest = stack[-1]
        for other in rest:
            if other not in order:
                order[other] = low[other] = len(order)
                parent[other] = net
                stack.append((other, iter(graph[other])))
                break
            low[net] = min(low[net], order[other])
        else:
            stack.pop()
            low[parent[net]] = min(low[parent[net]], low[net])
    # A net stays in its parent's block unless nothing below it reaches above the parent.
    block = {s, t}
    for net in order:  # parents come before children
        above = parent[net]
        if net not in block and above in block and low[net] < order[above]:
            block.add(net)
    return frozenset(block) if direct or len(block) > 2 else frozenset()


def core(edges: Iterable[tuple[str, str]], s: str, t: str) -> tuple[str, ...]:
    """Nets left when no series or parallel step remains; empty if series-parallel.

    Only edges on simple paths from `s` to `t` count.  What is left, if anything, holds a bridge:
    a contact that current can pass either way (Duffin 1965).
    """
    edges = tuple(edges)
    inside = between(edges, s, t)
    graph = _graph((a, b) for a, b in edges if a in inside and b in inside)
    waiting = [net for net in graph if net not in (s, t)]
    while waiting:
        net = waiting.pop()
        if net not in graph or len(graph[net]) != 2:
            continue
        a, b = graph.pop(net)
        for here, there in ((a, b), (b, a)):
            del graph[here][net]
            graph[here][there] = None
            if here not in (s, t):
                waiting.append(here)
    return tuple(graph) if len(graph) > 2 else ()
