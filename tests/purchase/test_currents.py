"""Largest currents through poles, against paths walked row by row."""

from __future__ import annotations

from decimal import Decimal
from itertools import product

import networkx as nx
import pytest
from hypothesis import given
from hypothesis import strategies as st
from strategies import networks

from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole
from contactlogic.purchase import currents
from contactlogic.purchase.currents import pole_currents
from contactlogic.truth import Target


def job_of(network: Network, amps: dict[str, float | None]) -> Job:
    n = len(network.relays)
    loads = tuple(Load(name, Target(n, 0), amps=amps.get(name)) for name in network.loads)
    return Job("test", network.relays, loads, 0)


def by_rows(network: Network, amps: dict[str, float | None]) -> dict[tuple[str, int], Decimal]:
    """Row by row: closed contacts as a multigraph, every simple path from supply to load."""
    most = {(pole.relay, pole.number): Decimal(0) for pole in network.poles}
    for setting in product((0, 1), repeat=len(network.relays)):
        position = dict(zip(network.relays, setting, strict=True))
        graph = nx.MultiGraph()
        graph.add_nodes_from(network.nets())
        for pole in network.poles:
            throw = pole.make if position[pole.relay] else pole.break_
            if throw is not None and throw != pole.common:
                graph.add_edge(pole.common, throw, key=(pole.relay, pole.number))
        total = dict.fromkeys(most, Decimal(0))
        for load, net in network.loads.items():
            if net is None or net == network.supply or amps[load] is None:
                continue
            through = set()
            for path in nx.all_simple_edge_paths(graph, network.supply, net):
                through.update(key for _, _, key in path)
            for key in through:
                total[key] += Decimal(str(amps[load]))
        for key, value in total.items():
            most[key] = max(most[key], value)
    return most


@given(
    networks(relays=3, poles=6, nets=5, loads=3),
    st.lists(st.sampled_from([None, 0.1, 0.2, 1.5]), min_size=3, max_size=3),
)
def test_currents_are_those_of_all_paths(network: Network, given: list[float | None]) -> None:
    amps = dict(zip(("X", "Y", "Z"), given, strict=True))
    found = {(c.relay, c.number): c.amps for c in pole_currents(network, job_of(network, amps))}
    assert found == by_rows(network, amps)


@given(networks(relays=3, poles=6, nets=5, loads=3))
def test_cut_short_they_are_never_too_small(network: Network) -> None:
    amps = {"X": 0.1, "Y": 0.2, "Z": 1.5}
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(currents, "_MOST_STEPS", 0)
        found = pole_currents(network, job_of(network, amps))
    right = by_rows(network, amps)
    assert all(c.amps >= right[c.relay, c.number] and not c.exact for c in found)


FORK = Network(
    ("A", "B"),
    "L",
    {"X": "n1", "Y": "n2", "Z": "n2"},
    (Pole("A", 1, "L", "n1", "n2"), Pole("B", 1, "n1", "n2")),
)


def test_the_row_and_the_loads_are_named() -> None:
    first, second = pole_currents(FORK, job_of(FORK, {"X": 0.1, "Y": 0.2}))
    assert (first.amps, first.row, first.loads) == (Decimal("0.3"), 2, ("X", "Y"))
    assert first.not_given == ("Z",)
    assert (second.amps, second.row, second.loads) == (Decimal("0.2"), 3, ("Y",))


def test_without_stated_currents_nothing_is_said() -> None:
    first, second = pole_currents(FORK, job_of(FORK, {}))
    assert (first.amps, first.row, first.loads) == (Decimal(0), None, ())
    assert second.not_given == ("X", "Y", "Z")


def test_a_repeater_follows_its_relay() -> None:
    network = Network(
        ("A", "B", "A_2"),
        "L",
        {"X": "n1", "Y": "n2"},
        (Pole("A", 1, "L", "n1"), Pole("B", 1, "L", "n1"), Pole("A_2", 1, "n1", None, "n2")),
    )
    job = Job("test", ("A", "B"), tuple(Load(n, Target(2, 0), amps=1) for n in "XY"), 0)
    found = pole_currents(network, job, {"A_2": "A"})
    # A makes while its repeater breaks no more: Y is fed over B alone
    assert [c.amps for c in found] == [1, 2, 1]
