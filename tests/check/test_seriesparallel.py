"""The recogniser of ladders against two others: paths passed both ways, and K4 minors."""

from __future__ import annotations

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from oracles import confluent, contact_graph, has_k4_minor
from strategies import networks, series_parallel_networks

from contactlogic.check import prove
from contactlogic.check.seriesparallel import between, core
from contactlogic.network import Network, Pole
from contactlogic.truth import Target

NETS = st.sampled_from(("s", "t", "u", "v", "w", "x"))
# Sparse graphs have cut nets and dead ends; about a third of the dense ones hold a bridge.
multigraphs = st.lists(st.tuples(NETS, NETS), max_size=9) | st.lists(
    st.tuples(NETS, NETS), min_size=9, max_size=14
)


def on_simple_paths(edges: list[tuple[str, str]]) -> set[str]:
    graph = nx.MultiGraph(edges)
    if "s" not in graph or "t" not in graph:
        return set()
    return {net for path in nx.all_simple_paths(graph, "s", "t") for net in path}


@settings(max_examples=500)
@given(multigraphs)
def test_nets_between_are_those_on_simple_paths(edges):
    assert between(edges, "s", "t") == on_simple_paths(edges)


@settings(max_examples=500)
@given(multigraphs)
def test_series_parallel_iff_no_edge_is_passed_both_ways(edges):
    assert (core(edges, "s", "t") == ()) == confluent(edges, "s", "t")


@settings(max_examples=150)
@given(multigraphs)
def test_series_parallel_iff_no_k4_minor_with_the_terminals_joined(edges):
    inside = on_simple_paths(edges)
    block = [(a, b) for a, b in edges if a in inside and b in inside]
    assert (core(edges, "s", "t") == ()) == (not has_k4_minor([*block, ("s", "t")]))


@given(series_parallel_networks(contacts=12))
def test_what_series_and_parallel_steps_build_is_series_parallel(network):
    ends = [(pole.common, pole.make or pole.break_) for pole in network.poles]
    assert core(ends, "L", "n1") == ()
    assert between(ends, "L", "n1") == {net for end in ends for net in end}


@given(networks(poles=8, nets=6))
def test_a_proof_names_the_loads_whose_contacts_are_passed_both_ways(network):
    edges = [(a, b) for a, b in contact_graph(network).edges() if a != b]
    bridged = {
        load
        for load, net in network.loads.items()
        if net not in (None, network.supply) and not confluent(edges, network.supply, net)
    }
    wanted = {load: Target(len(network.relays), 0) for load in network.loads}
    ladder = prove(network, wanted, form="ladder")
    assert {found.load for found in ladder.series_parallel} == bridged
    assert prove(network, wanted, form="bridge").series_parallel == ()


# Shannon 1938 fig. 10 (seen): RU + SV + RTV + STU, 5 contacts as a bridge,
# R(U + TV) + S(V + TU) as a ladder.
SHANNON = ("R", "S", "T", "U", "V")
BRIDGE = Network(
    SHANNON,
    "L",
    {"LAMP": "n1"},
    (
        Pole("R", 1, "L", "n2"),
        Pole("S", 1, "L", "n3"),
        Pole("T", 1, "n2", "n3"),
        Pole("U", 1, "n2", "n1"),
        Pole("V", 1, "n3", "n1"),
    ),
)
LADDER = Network(
    SHANNON,
    "L",
    {"LAMP": "n1"},
    (
        Pole("R", 1, "L", "n2"),
        Pole("S", 1, "L", "n4"),
        Pole("T", 1, "n2", "n3"),
        Pole("T", 2, "n4", "n5"),
        Pole("U", 1, "n2", "n1"),
        Pole("U", 2, "n5", "n1"),
        Pole("V", 1, "n3", "n1"),
        Pole("V", 2, "n4", "n1"),
    ),
)
# The function by its formula, row by row: R is bit 0 ... V is bit 4.
WANTED = Target(
    5,
    sum(
        1 << row
        for row in range(32)
        for r, s, t, u, v in [[row >> i & 1 for i in range(5)]]
        if (r and u) or (s and v) or (r and t and v) or (s and t and u)
    ),
)


def test_shannons_bridge_is_right_and_no_ladder():
    assert prove(BRIDGE, {"LAMP": WANTED}, form="bridge").ok
    proof = prove(BRIDGE, {"LAMP": WANTED}, form="ladder")
    assert not proof.ok
    assert proof.explain() == (
        "not a ladder: the contacts of LAMP form a bridge between L, n2, n3, n1, "
        "held by R:11-14, S:11-14, T:11-14, U:11-14, V:11-14"
    )


def test_shannons_ladder_side_is_a_ladder():
    assert prove(LADDER, {"LAMP": WANTED}, form="ladder").ok


@pytest.mark.parametrize("i", range(5))
def test_shannons_bridge_without_any_one_contact_is_series_parallel(i):
    poles = BRIDGE.poles[:i] + BRIDGE.poles[i + 1 :]
    ends = [(pole.common, pole.make) for pole in poles]
    assert core(ends, "L", "n1") == ()
