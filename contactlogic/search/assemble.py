"""From numbered poles to a named network: checked, tidied, named."""

from __future__ import annotations

from collections.abc import Sequence

from contactlogic.errors import ProofFailed
from contactlogic.ladder.build import Edge, pair
from contactlogic.network import Network
from contactlogic.search.encoding import Ends
from contactlogic.search.mesh import SUPPLY, Mesh, to_network
from contactlogic.search.problem import Grouping, Problem, rows_of_grouping
from contactlogic.search.rows import Rows, merged

__all__ = ["assemble", "tidy"]


def tidy(rows: Rows, poles: Sequence[Ends]) -> tuple[Ends, ...]:
    """The same poles without contacts whose loss changes nothing that is asked for."""
    kept = list(poles)
    for i, pole in enumerate(kept):
        for bare in (pole._replace(make=None), pole._replace(break_=None)):
            if bare != kept[i] and not rows.wrong([*kept[:i], bare, *kept[i + 1 :]]):
                kept[i] = bare
                break
    return tuple(pole for pole in kept if pole.make is not None or pole.break_ is not None)


def assemble(problem: Problem, way: Grouping, poles: Sequence[Ends]) -> Network:
    """Tidy the poles, name everything, and pair single contacts as far as their nets allow.

    Raises:
        ProofFailed: the poles do not do what the problem asks.
    """
    rows = Rows(merged(rows_of_grouping(problem, way)), problem.n)
    if rows.wrong(poles):
        raise ProofFailed("the exact search read poles off that do not do what was asked")
    feeds: dict[str, int | None] = dict.fromkeys(problem.targets)
    feeds |= dict.fromkeys(way.always, SUPPLY)
    for net, group in enumerate(way.groups, start=1):
        feeds |= dict.fromkeys(group, net)
    mesh = Mesh(tidy(rows, poles), tuple(feeds.values()))
    network = to_network(mesh, problem.relays, list(feeds))
    if problem.objective == "contacts":
        edges = [Edge(c.relay, c.make, c.common, c.throw) for c in network.contacts()]
        paired = pair(edges, problem.relays, frozenset(problem.separate))
        network = Network(problem.relays, network.supply, network.loads, paired)
    return network
