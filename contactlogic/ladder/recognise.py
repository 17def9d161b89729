"""Reading the series-parallel structure back out of a network.

A contact lies on a simple path from the supply to a load's net exactly if it is in the same
biconnected component as an edge added between the two (Tarjan 1972).  Those contacts are then
reduced, parallel pairs and series joints one at a time, to a single edge; that succeeds exactly
for two-terminal series-parallel graphs (Duffin 1965).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from contactlogic.ladder.tree import Leaf, Series, Tree, parallel, series
from contactlogic.network import Contact, Network

__all__ = ["expression", "formulas", "load_tree", "path_contacts", "series_parallel"]


def path_contacts(contacts: Iterable[Contact], supply: str, net: str) -> list[Contact]:
    """Contacts that lie on some simple path from `supply` to `net`, in the order given."""
    import networkx

    every = list(contacts)
    graph = networkx.Graph()
    graph.add_edges_from((c.common, c.throw) for c in every if c.common != c.throw)
    graph.add_edge(supply, net)
    for component in networkx.biconnected_component_edges(graph):
        block = {frozenset(edge) for edge in component}
        if frozenset((supply, net)) in block:
            return [c for c in every if frozenset((c.common, c.throw)) in block]
    return []


def load_tree(network: Network, load: str) -> Tree | bool | None:
    """A load's contacts as a tree from the supply, True if always on, False if never on.

    None if its paths are not series-parallel.
    """
    net = network.loads[load]
    if net is None:
        return False
    if net == network.supply:
        return True
    place = {name: i for i, name in enumerate(network.relays)}
    return _reduce(
        path_contacts(network.contacts(), network.supply, net), network.supply, net, place
    )


def series_parallel(network: Network) -> bool:
    """Whether every load's paths are series-parallel: the definition of a ladder."""
    return all(load_tree(network, load) is not None for load in network.loads)


def _reduce(
    contacts: Sequence[Contact], supply: str, net: str, place: Mapping[str, int]
) -> Tree | bool | None:
    edges: dict[int, tuple[str, str, Tree]] = {}
    at: dict[str, set[int]] = {supply: set(), net: set()}
    serial = 0

    def add(near: str, far: str, tree: Tree) -> None:
        """Add an edge, merging it with one that is already in parallel with it."""
        nonlocal serial
        for key in sorted(at.setdefault(near, set()) & at.setdefault(far, set())):
            a, b, other = edges[key]
            both = parallel((other, tree if a == near else _reversed(tree)))
            edges[key] = (a, b, both)
            return
        serial += 1
        edges[serial] = (near, far, tree)
        at[near].add(serial)
        at[far].add(serial)

    def take(key: int) -> tuple[str, str, Tree]:
        near, far, tree = edges.pop(key)
        at[near].discard(key)
        at[far].discard(key)
        return near, far, tree

    for contact in contacts:
        add(contact.common, contact.throw, Leaf(place[contact.relay], contact.make))
    waiting = [n for n in at if n not in (supply, net)]
    while waiting:
        joint = waiting.pop()
        if len(at[joint]) != 2:
            continue
        near, a, first = take(min(at[joint]))
        if near == joint:
            near, first = a, _reversed(first)
        b, far, second = take(min(at[joint]))
        if b != joint:
            far, second = b, _reversed(second)
        add(near, far, series((first, second)))
        waiting += [n for n in (near, far) if n not in (supply, net)]
    if not edges:
        return False
    if len(edges) > 1:
        return None
    near, _, tree = next(iter(edges.values()))
    return tree if near == supply else _reversed(tree)


def _reversed(tree: Tree) -> Tree:
    if isinstance(tree, Leaf):
        return tree
    parts = tuple(_reversed(part) for part in tree.parts)
    return Series(parts[::-1]) if isinstance(tree, Series) else type(tree)(parts)


def formulas(network: Network) -> dict[str, str]:
    """Switching algebra of each load as wired, "0" or "1" where constant.

    Loads that are not series-parallel are left out.
    """
    from contactlogic.formula import to_text

    result = {}
    for load in network.loads:
        tree = load_tree(network, load)
        if tree is not None:
            result[load] = to_text(expression(tree, network.relays))
    return result


def expression(tree: Tree | bool, relays: Sequence[str]) -> Any:
    """A tree as switching algebra; True and False are the constants."""
    from contactlogic import algebra as formula

    if isinstance(tree, bool):
        return formula.Constant(tree)
    if isinstance(tree, Leaf):
        name = formula.Name(relays[tree.relay])
        return name if tree.make else formula.Break(name)
    parts = tuple(expression(part, relays) for part in tree.parts)
    return formula.Series(parts) if isinstance(tree, Series) else formula.Parallel(parts)
