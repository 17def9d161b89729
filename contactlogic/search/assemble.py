"""From numbered poles to a named network: tidied, named, proved."""

from __future__ import annotations

from collections.abc import Sequence

from contactlogic.check import prove
from contactlogic.errors import ProofFailed
from contactlogic.ladder.build import Edge, pair
from contactlogic.network import Network, Pole
from contactlogic.search.encoding import Ends
from contactlogic.search.problem import Grouping, Problem, rows_of_grouping
from contactlogic.search.rows import Rows, merged

__all__ = ["assemble", "tidy"]

_SUPPLY = "L"


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
    """Name nets and poles, pair single contacts as far as their nets allow, and prove the result.

    Raises:
        ProofFailed: the poles do not do what the problem asks.
    """
    poles = tidy(Rows(merged(rows_of_grouping(problem, way)), problem.n), poles)
    poles = sorted(poles, key=lambda pole: pole.relay)
    nets: dict[int, str] = {0: _SUPPLY}
    fed = range(1, way.fixed)
    for net in [*fed, *(end for pole in poles for end in pole[1:] if end is not None)]:
        nets.setdefault(net, f"n{len(nets)}")
    loads: dict[str, str | None] = dict.fromkeys(problem.targets)
    loads |= dict.fromkeys(way.always, _SUPPLY)
    for net, group in zip(fed, way.groups, strict=True):
        loads |= dict.fromkeys(group, nets[net])
    numbers = dict.fromkeys(problem.relays, 0)
    named = []
    for pole in poles:
        relay = problem.relays[pole.relay]
        numbers[relay] += 1
        named.append(
            Pole(
                relay,
                numbers[relay],
                nets[pole.common],
                None if pole.make is None else nets[pole.make],
                None if pole.break_ is None else nets[pole.break_],
            )
        )
    network = Network(problem.relays, _SUPPLY, loads, tuple(named))
    if problem.objective == "contacts":
        edges = [Edge(c.relay, c.make, c.common, c.throw) for c in network.contacts()]
        paired = pair(edges, problem.relays, frozenset(problem.separate))
        network = Network(problem.relays, _SUPPLY, loads, paired)
    proof = prove(
        network,
        problem.targets,
        form="bridge",
        isolated=problem.isolated,
        pole_limits=problem.budgets,
        separate=problem.separate,
    )
    if not proof.ok:
        raise ProofFailed(proof.explain())
    return network
