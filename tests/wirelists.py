"""An independent reading of wiring lists: every simple way through a graph of terminals.

Shares no code with `contactlogic.trace`: networkx joins wires and closed contacts of one row and
lists every simple path from rail to rail through a load.
"""

from __future__ import annotations

import csv
import io

import networkx as nx


def wires_of(text: str) -> list[tuple[str, str]]:
    return [(row["from"], row["to"]) for row in csv.DictReader(io.StringIO(text))]


def closed_pairs(wires: list[tuple[str, str]], setting: dict[str, int]) -> list[tuple[str, str]]:
    """Contacts closed in a row: a pole's 1 to its 4 when operated, to its 2 when released."""
    terminals = {end for wire in wires for end in wire}
    pairs = []
    for terminal in sorted(terminals):
        relay, _, mark = terminal.partition(":")
        if relay not in setting or mark in ("A1", "A2"):
            continue
        pole, digit = mark[:-1], mark[-1]
        for common in ("1", "3"):
            partner = f"{relay}:{pole}{common}"
            if digit in "24" and partner in terminals:
                has_three = f"{relay}:{pole}3" in terminals
                if (digit == "4") and has_three != (common == "3"):
                    continue
                if digit == "2" and common == "3":
                    continue
                if setting[relay] == (digit == "4"):
                    pairs.append((partner, terminal))
    return pairs


def load_is_on(
    wires: list[tuple[str, str]],
    setting: dict[str, int],
    load: tuple[str, str],
    rails: tuple[str, str],
) -> bool:
    """Whether any simple path leads from the feed to one end and from the other to the return."""
    graph = nx.Graph(wires)
    graph.add_nodes_from((*rails, *load))
    graph.add_edges_from(closed_pairs(wires, setting))
    for first, second in (load, load[::-1]):
        there = rails[0] == first or next(nx.all_simple_paths(graph, rails[0], first), None)
        back = rails[1] == second or next(nx.all_simple_paths(graph, second, rails[1]), None)
        if there and back:
            return True
    return False
