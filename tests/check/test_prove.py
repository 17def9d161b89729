"""The proof against networkx and sympy on random networks, and after one change."""

from __future__ import annotations

from dataclasses import replace

import networkx as nx
from hypothesis import given, settings
from hypothesis import strategies as st
from oracles import behaviour, closed_graph, discharges, path_tables, rows
from strategies import networks, targets

from contactlogic.check import prove
from contactlogic.network import Network, Pole
from contactlogic.terminals import pole_marks
from contactlogic.truth import Target


def wanted_of(network: Network) -> dict[str, Target]:
    """Targets that the network keeps to, by the oracle."""
    n = len(network.relays)
    return {load: Target(n, table) for load, table in behaviour(network).items()}


def walk(network: Network, path: tuple[str, ...], start: str, end: str, state: dict[str, int]):
    """Assert that the terminals lead from net to net over contacts closed in `state`."""
    ends = {}
    for pole in network.poles:
        marks = pole_marks(pole)
        throw, mark = (pole.make, marks.make) if state[pole.relay] else (pole.break_, marks.break_)
        if throw is not None:
            a, b = f"{pole.relay}:{marks.common}", f"{pole.relay}:{mark}"
            ends[a, b] = (pole.common, throw)
            ends[b, a] = (throw, pole.common)
    here = start
    steps = path[1:-1]
    for pair in zip(steps[::2], steps[1::2], strict=True):
        assert ends[pair][0] == here
        here = ends[pair][1]
    assert here == end


@given(networks())
def test_as_built_is_what_networkx_finds(network):
    proof = prove(network, wanted_of(network), form="bridge")
    assert proof.as_built == behaviour(network) == path_tables(network)
    assert proof.rows == 2 ** len(network.relays)
    assert not proof.wrong


@given(networks(), st.data())
def test_first_wrong_row_of_each_load_with_a_shortest_path(network, data):
    n = len(network.relays)
    wanted = {load: data.draw(targets(n)) for load in network.loads}
    proof = prove(network, wanted, form="bridge")
    real = behaviour(network)
    expected = []
    for load, target in wanted.items():
        for number, state in rows(network.relays):
            want, got, free = (t >> number & 1 for t in (target.on, real[load], target.free))
            if not free and want != got:
                expected.append((load, number, state, want, got))
                break
    assert [(w.load, w.row, w.settings, w.wanted, w.got) for w in proof.wrong] == expected
    for wrong in proof.wrong:
        if not wrong.got:
            assert wrong.path == ()
            continue
        net = network.loads[wrong.load]
        graph = closed_graph(network, wrong.settings)
        shortest = nx.shortest_path_length(graph, network.supply, net)
        assert wrong.path[0] == "supply"
        assert wrong.path[-1] == wrong.load
        assert len(wrong.path) == 2 + 2 * shortest
        walk(network, wrong.path, network.supply, net, wrong.settings)


@given(networks(loads=3, nets=6), st.data())
def test_backfeeds_are_what_networkx_finds(network, data):
    isolated = data.draw(st.sets(st.sampled_from(sorted(network.loads))))
    proof = prove(network, wanted_of(network), form="bridge", isolated=isolated)
    found = discharges(network, sorted(isolated))
    pairs = {frozenset((load, other)) for load, other, _ in found}
    assert {frozenset((b.load, b.other)) for b in proof.backfeeds} == pairs
    assert len(proof.backfeeds) == len(pairs)
    for b in proof.backfeeds:
        assert b.row == min(r for load, other, r in found if (load, other) == (b.load, b.other))
        assert (b.path[0], b.path[-1]) == (b.load, b.other)
        walk(network, b.path, network.loads[b.load], network.loads[b.other], b.settings)


def changed(network: Network, data: st.DataObject) -> Network:
    """One change of one pole: throws swapped, an end moved, dropped, or another relay."""
    place = data.draw(st.integers(0, len(network.poles) - 1))
    pole = network.poles[place]
    net = st.sampled_from(network.nets())
    kind = data.draw(st.sampled_from(["swap", "common", "make", "break", "drop", "relay"]))
    new: tuple[Pole, ...]
    match kind:
        case "swap":
            new = (replace(pole, make=pole.break_, break_=pole.make),)
        case "common":
            new = (replace(pole, common=data.draw(net)),)
        case "make":
            new = (replace(pole, make=data.draw(net)),)
        case "break":
            new = (replace(pole, break_=data.draw(net)),)
        case "relay":
            other = data.draw(st.sampled_from(network.relays))
            new = (replace(pole, relay=other, number=99),)
        case _:
            new = ()
    return replace(network, poles=network.poles[:place] + new + network.poles[place + 1 :])


@settings(max_examples=200)
@given(networks().filter(lambda network: network.poles), st.data())
def test_a_changed_pole_is_found_exactly_when_it_matters(network, data):
    wanted = wanted_of(network)
    mutant = changed(network, data)
    real = behaviour(mutant)
    differ = [load for load in wanted if real[load] != wanted[load].on]
    assert [w.load for w in prove(mutant, wanted, form="bridge").wrong] == differ
