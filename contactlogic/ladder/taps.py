"""Feeding a load from a net that is there already.

A load's own contacts are taken out; then every net of what is left is tried as its start: the net
itself, or the least tree over at most four relays from there to the load.  New contacts end at the
load alone, so nothing can flow back through them and no other load changes; the load's paths must
still be series-parallel (a joint in the middle of a parallel group may break that), which is
tested, as are isolation and pole budgets by the caller's `accepts`.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from itertools import count

from contactlogic.ladder.build import Edge, lay, pair
from contactlogic.ladder.cases import least_small, needed
from contactlogic.ladder.recognise import load_tree, path_contacts
from contactlogic.ladder.small import RELAYS
from contactlogic.ladder.tree import Tree
from contactlogic.network import Contact, Network, conduction
from contactlogic.truth import Target

__all__ = ["tap_loads"]


def tap_loads(
    network: Network,
    targets: Mapping[str, Target],
    accepts: Callable[[Network], bool],
    separate: Collection[str],
) -> Network:
    """The network with loads tapped from existing nets wherever that costs less (section 4)."""
    improved = True
    while improved:
        improved = False
        for load in network.loads:
            better = _tap(network, load, targets[load], accepts, separate)
            if better is not None:
                network, improved = better, True
    return network


def _tap(
    network: Network,
    load: str,
    target: Target,
    accepts: Callable[[Network], bool],
    separate: Collection[str],
) -> Network | None:
    net = network.loads[load]
    if net is None or net == network.supply:
        return None
    kept = _without(network, load)
    own = sum(1 for _ in network.contacts()) - len(kept)
    if not own:
        return None
    rest = Network(
        network.relays,
        network.supply,
        {name: at for name, at in network.loads.items() if name != load},
        pair(kept, network.relays, separate),
    )
    best: Network | None = None
    best_cost = network.cost()
    taken = set(network.nets())
    for start, rows in conduction(rest).items():
        if target.on & ~rows:
            continue  # must be on where this net is dead
        inner = Target(target.n, target.on, target.free | (target.off & ~rows))
        trees: list[Tree | None] = [None]
        if inner.off:
            relays = needed(inner)
            if relays is None or len(relays) > RELAYS:
                continue
            trees = list(least_small(inner, relays, limit=4) or ())
        for tree in trees:
            edges = list(kept)
            end = start
            if tree is not None:
                nets = (name for k in count(1) if (name := f"n{k}") not in taken)
                end = next(nets)
                edges += lay(tree, start, end, network.relays, nets)
            loads = {name: end if name == load else at for name, at in network.loads.items()}
            poles = pair(edges, network.relays, separate)
            candidate = Network(network.relays, network.supply, loads, poles)
            cost = candidate.cost()
            if cost < best_cost and load_tree(candidate, load) is not None and accepts(candidate):
                best, best_cost = candidate, cost
    return best


def _without(network: Network, load: str) -> list[Edge]:
    """Contacts that other loads' paths use."""
    used: set[Contact] = set()
    every = list(network.contacts())
    for name, net in network.loads.items():
        if name != load and net is not None and net != network.supply:
            used.update(path_contacts(every, network.supply, net))
    return [Edge(c.relay, c.make, c.common, c.throw) for c in every if c in used]
