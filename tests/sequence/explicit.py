"""Power-on recovery by listing every state and move: a slow oracle that shares no code."""

from __future__ import annotations

from itertools import combinations

import networkx as nx


def pool(state, fed, slow, inputs, waiting):
    """Columns that may move in a state.  `fed[i][state]` is column i's drive, None for inputs."""
    pending = [i for i in range(len(fed)) if i not in inputs and fed[i][state] != state >> i & 1]
    quick = [i for i in pending if (i, state >> i & 1) not in slow]
    if pending:
        return quick or pending
    return sorted(waiting[state]) if state in waiting else sorted(inputs)


def graph(n, fed, slow=(), inputs=(), waiting=None, together=False):
    """Every state with its moves; `slow` holds (column, position it leaves)."""
    moves = nx.DiGraph()
    for state in range(2**n):
        moves.add_node(state)
        free = pool(state, fed, set(slow), inputs, waiting or {})
        sizes = range(1, len(free) + 1) if together and not set(free) & set(inputs) else [1]
        for size in sizes:
            for group in combinations(free, size):
                moves.add_edge(state, state ^ sum(1 << i for i in group))
    return moves


def traps(moves):
    parts = nx.condensation(moves)
    return {frozenset(parts.nodes[c]["members"]) for c in parts if not parts.out_degree(c)}


def is_fair(moves, n, component):
    """Whether no column may move in every state of a component without ever moving in it."""
    for i in range(n):
        able = [any((a ^ b) >> i & 1 for b in moves[a]) for a in component]
        inside = any((a ^ b) >> i & 1 for a in component for b in moves[a] if b in component)
        if all(able) and not inside:
            return False
    return True


def fair_loops(moves, n, legal):
    rest = moves.subgraph(set(moves) - set(legal))
    return [
        c for c in nx.strongly_connected_components(rest) if len(c) > 1 and is_fair(moves, n, c)
    ]


def verdict(moves, n, legal):
    if traps(moves) != {frozenset(legal)}:
        return "sticks"
    return "hunts" if fair_loops(moves, n, legal) else "recovers"


def longest(moves, legal):
    """Most moves before a run enters the legal states; None if it can put that off for ever."""
    rest = moves.subgraph(set(moves) - set(legal))
    if not nx.is_directed_acyclic_graph(rest):
        return None
    return nx.dag_longest_path_length(rest) + 1 if len(rest) else 0
