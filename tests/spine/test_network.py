"""Networks: conduction against networkx, counts by hand, invariants."""

from __future__ import annotations

from dataclasses import replace

import networkx as nx
import pytest
from hypothesis import given
from hypothesis import strategies as st
from oracles import closed_graph, discharges, rows
from strategies import networks

from contactlogic.network import Network, Pole, PoleCount, back_feeds, conduction

PAIR = Network(
    ("UP", "DOWN"),
    "L",
    {"LAMP": "n1", "HORN": None},
    (
        Pole("UP", 1, "L", "n2", "n3"),
        Pole("DOWN", 1, "n1", "n3"),
        Pole("DOWN", 2, "n1", None, "n2"),
    ),
)


@given(networks(), st.data())
def test_conduction_is_what_networkx_finds(network, data):
    source = data.draw(st.sampled_from(network.nets()))
    found = conduction(network, source)
    expected = dict.fromkeys(network.nets(), 0)
    for number, state in rows(network.relays):
        graph = closed_graph(network, state)
        for net in nx.node_connected_component(graph, source) if source in graph else {source}:
            expected[net] |= 1 << number
    assert found == expected
    assert conduction(network) == conduction(network, network.supply)


@given(networks(loads=3), st.data())
def test_back_feeds_are_what_networkx_finds(network, data):
    isolated = data.draw(st.sets(st.sampled_from(sorted(network.loads))))
    expected = {row for _, _, row in discharges(network, sorted(isolated))}
    assert back_feeds(network, isolated) == sum(1 << row for row in expected)


def test_counts_and_cost():
    assert PAIR.per_relay() == {
        "UP": PoleCount(changeovers=1),
        "DOWN": PoleCount(makes=1, breaks=1),
    }
    both = PoleCount(makes=1, breaks=2, changeovers=3)
    assert (both.poles, both.contacts, both.springs) == (6, 9, 15)
    assert PAIR.nets() == ("L", "n2", "n3", "n1")
    assert PAIR.cost() == (3, 2, 7, 4)
    assert [(c.relay, c.make, c.common, c.throw) for c in PAIR.contacts()] == [
        ("UP", True, "L", "n2"),
        ("UP", False, "L", "n3"),
        ("DOWN", True, "n1", "n3"),
        ("DOWN", False, "n1", "n2"),
    ]


@given(networks())
def test_networks_of_the_shared_strategy_are_consistent(network):
    network.assert_consistent()


def test_pole_numbers_may_leave_gaps_but_rise():
    gap = replace(PAIR, poles=(PAIR.poles[0], replace(PAIR.poles[1], number=3)))
    gap.assert_consistent()


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"relays": ("UP", "DOWN", "UP")}, "named twice"),
        ({"relays": ("UP",)}, "unknown relay DOWN"),
        ({"poles": PAIR.poles[::-1]}, "sequence|not sorted"),
        ({"poles": (PAIR.poles[1], PAIR.poles[0])}, "not sorted by relay"),
        ({"poles": (PAIR.poles[2], PAIR.poles[1])}, "pole 1 is out of sequence"),
        ({"poles": (PAIR.poles[1], PAIR.poles[1])}, "pole 1 is out of sequence"),
        ({"poles": (Pole("UP", 0, "L", "n1"),)}, "pole 0 is out of sequence"),
        ({"poles": (Pole("UP", 1, "L"),)}, "only a common"),
    ],
)
def test_what_breaks_the_invariants_is_named(change, message):
    with pytest.raises(ValueError, match=message):
        replace(PAIR, **change).assert_consistent()
