"""Faults of a wiring that need no rows: poles, budgets, loads, idle contacts."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Iterator, Mapping

from contactlogic.check.proof import NotSeriesParallel
from contactlogic.check.seriesparallel import between, core
from contactlogic.check.wiring import Edge, Wiring
from contactlogic.job.model import SeparateContacts
from contactlogic.network import Network

__all__ = ["bridges", "faults"]


def faults(
    network: Network,
    wiring: Wiring,
    *,
    wanted: Collection[str],
    known: Collection[str],
    as_built: Mapping[str, int],
    pole_limits: Mapping[str, int],
    separate: Mapping[str, SeparateContacts],
) -> Iterator[str]:
    """One sentence for each fault, in the order of the wiring.

    Args:
        wanted: loads that the job asks for.
        known: relays that may have contacts.
        as_built: truth table of every load of the network.
        pole_limits: most poles of a relay.
        separate: relays whose makes and breaks never pair.
    """
    yield from _pole_faults(network, known, separate)
    yield from _budget_faults(network, pole_limits, separate)
    yield from _load_faults(network, wiring, wanted, as_built)
    yield from _idle_contacts(network, wiring)


def _pole_faults(
    network: Network, known: Collection[str], separate: Mapping[str, SeparateContacts]
) -> Iterator[str]:
    for name, times in Counter(network.relays).items():
        if times > 1:
            yield f"relay {name} is named {times} times"
    used: set[tuple[str, int]] = set()
    for pole in network.poles:
        name = f"{pole.relay} pole {pole.number}"
        if pole.relay not in known:
            yield f"{name}: there is no relay {pole.relay} in the job"
        elif pole.relay not in network.relays:
            yield f"{name}: relay {pole.relay} is not listed in the design"
        if pole.number < 1:
            yield f"{name}: poles are numbered from 1"
        if (pole.relay, pole.number) in used:
            yield f"{name} is used twice"
        used.add((pole.relay, pole.number))
        if pole.make is None and pole.break_ is None:
            yield f"{name} has only its common wired"
        if pole.make is not None and pole.break_ is not None and pole.relay in separate:
            yield f"{name}: {pole.relay} has separate makes and breaks, no changeover"


def _budget_faults(
    network: Network, pole_limits: Mapping[str, int], separate: Mapping[str, SeparateContacts]
) -> Iterator[str]:
    poles = Counter(pole.relay for pole in network.poles)
    makes = Counter(pole.relay for pole in network.poles if pole.make is not None)
    breaks = Counter(pole.relay for pole in network.poles if pole.break_ is not None)
    for relay in poles:
        budgets = [(poles[relay], pole_limits.get(relay), "poles")]
        if relay in separate:
            budgets.append((makes[relay], separate[relay].makes, "makes"))
            budgets.append((breaks[relay], separate[relay].breaks, "breaks"))
        for used, budget, what in budgets:
            if budget is not None and used > budget:
                yield f"{relay} uses {used} {what}, its budget is {budget}"


def _load_faults(
    network: Network, wiring: Wiring, wanted: Collection[str], as_built: Mapping[str, int]
) -> Iterator[str]:
    for load in wanted:
        if load not in network.loads:
            yield f"load {load} is missing"
    for load, net in network.loads.items():
        if load not in wanted:
            yield f"there is no load {load} in the job"
        # The contract writes constant loads as no net and as the supply, so that a reader can
        # tell them at sight (design.md section 6).
        if net is not None and net != network.supply:
            if net not in wiring.at:
                yield f"no contact reaches {load} at net {net}"
            elif not as_built[load]:
                yield f"{load} is never on, so it belongs on no net instead of {net}"
            elif as_built[load] == wiring.full:
                yield f"{load} is always on, so it belongs on the supply instead of {net}"


def _fed_nets(network: Network) -> tuple[str, ...]:
    """Nets of loads, each once."""
    nets = dict.fromkeys(network.loads.values())
    return tuple(net for net in nets if net is not None)


def _idle_contacts(network: Network, wiring: Wiring) -> Iterator[str]:
    """Contacts on no simple path from the supply to a load: dead ends, loops, islands."""
    ends = tuple((edge.common, edge.throw) for edge in wiring.edges)
    blocks = [between(ends, network.supply, net) for net in _fed_nets(network)]
    for edge in wiring.edges:
        if not any(_inside(edge, block) for block in blocks):
            yield f"contact {edge.name} is on no way from the supply to a load"


def _inside(edge: Edge, block: Collection[str]) -> bool:
    return edge.common != edge.throw and edge.common in block and edge.throw in block


def bridges(network: Network, wiring: Wiring) -> Iterator[NotSeriesParallel]:
    """Loads that break the definition of a ladder (design.md section 2)."""
    ends = tuple((edge.common, edge.throw) for edge in wiring.edges)
    cores = {net: core(ends, network.supply, net) for net in _fed_nets(network)}
    for load, net in network.loads.items():
        left = cores.get(net, ()) if net is not None else ()
        if left:
            single = tuple(edge.name for edge in wiring.edges if _inside(edge, left))
            yield NotSeriesParallel(load, left, single)
