"""Longest runs and rows as built, against path enumeration by networkx."""

from __future__ import annotations

import networkx as nx
from handmade import SLUICE_DESIGN, SLUICE_FACTS, SLUICE_JOB
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.design import Bound, Design
from contactlogic.network import Network, Pole
from contactlogic.report.facts import (
    Run,
    constant,
    free_cells,
    free_on,
    longest_runs,
    on_at_rest,
)


def _design(network: Network) -> Design:
    return Design("ladder", network, Bound(0, False), 1 << len(network.relays))


def _oracle(network: Network, load: str) -> int:
    """Every simple path of the multigraph; the longest whose contacts agree with each other."""
    target = network.loads[load]
    if target is None or target == network.supply:
        return 0
    graph = nx.MultiGraph()
    graph.add_nodes_from(network.nets())
    for pole in network.poles:
        if pole.make is not None:
            graph.add_edge(pole.common, pole.make, literal=(pole.relay, 1))
        if pole.break_ is not None:
            graph.add_edge(pole.common, pole.break_, literal=(pole.relay, 0))
    best = 0
    for path in nx.all_simple_edge_paths(graph, network.supply, target):
        literals = {graph.edges[edge]["literal"] for edge in path}
        if len({relay for relay, _ in literals}) == len(literals):
            best = max(best, len(path))
    return best


@st.composite
def networks(draw: st.DrawFn) -> Network:
    """Any wiring of up to seven poles over six nets: bridges, loops and dead ends included."""
    relays = ("A", "B", "C", "D")
    nets = ["L", "n1", "n2", "n3", "n4", "n5"]
    net = st.sampled_from(nets)
    poles: list[Pole] = []
    for relay in relays:
        for number in range(1, draw(st.integers(0, 2)) + 1):
            common, make = draw(net), draw(st.none() | net)
            break_ = draw(net) if make is None else draw(st.none() | net)
            poles.append(Pole(relay, number, common, make, break_))
    loads = {name: draw(st.none() | net) for name in ("X", "Y")}
    return Network(relays, "L", loads, tuple(poles))


@given(networks())
@settings(max_examples=300, deadline=None)
def test_longest_run_is_the_longest_consistent_simple_path(network: Network) -> None:
    runs = longest_runs(network)
    assert runs == {load: Run(_oracle(network, load)) for load in network.loads}


def test_longest_run_of_a_parity_chain() -> None:
    """Odd parity of n relays as the chain of 2(n-1) changeovers: every path has n contacts."""
    n = 12
    relays = tuple(f"K{i}" for i in range(n))
    poles = [Pole("K0", 1, "L", "o0", "e0")]
    for i in range(1, n - 1):
        poles += [
            Pole(f"K{i}", 1, f"o{i - 1}", f"e{i}", f"o{i}"),
            Pole(f"K{i}", 2, f"e{i - 1}", f"o{i}", f"e{i}"),
        ]
    poles.append(Pole(f"K{n - 1}", 1, "z", f"e{n - 2}", f"o{n - 2}"))
    network = Network(relays, "L", {"ODD": "z"}, tuple(poles))
    assert longest_runs(network) == {"ODD": Run(n)}


def test_a_run_out_of_work_says_so() -> None:
    run = longest_runs(SLUICE_DESIGN.network, work=1)["LAMP"]
    assert not run.exact
    assert str(run).startswith("at least ")


def test_constant_loads_have_no_contacts_in_series() -> None:
    network = Network(("A",), "L", {"ON": "L", "OFF": None}, ())
    assert longest_runs(network) == {"ON": Run(0), "OFF": Run(0)}


def test_constants_are_named() -> None:
    assert constant(0, 2) == "never on"
    assert constant(0b1111, 2) == "always on"
    assert constant(0b0111, 2) is None


def test_rest_and_free_cells_of_the_sluice() -> None:
    tables = dict(SLUICE_FACTS.tables)
    assert tables == {"LAMP": 0b1111_0010, "HORN": 0b0100_0100}
    assert on_at_rest(tables) == ()
    assert on_at_rest({"A": 0b01, "B": 0b10}) == ("A",)
    assert free_cells(SLUICE_JOB) == 3
    assert free_on(SLUICE_JOB, tables) == {6: {"HORN": "free"}}
    assert free_on(SLUICE_JOB, {"LAMP": 0b1000, "HORN": 0b1000}) == {
        3: {"LAMP": "unlisted", "HORN": "unlisted"}
    }
