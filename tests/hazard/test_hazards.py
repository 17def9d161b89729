"""Drop-outs and flashes against trying every position of every pole, and against ternary logic."""

from __future__ import annotations

from itertools import combinations

import networkx as nx
import pytest
from hazard.mixtures import by_trying, fed, joined, positions_of
from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import networks, numbered

from contactlogic.formula import evaluate, parse
from contactlogic.hazard import Moves, cures, hazards, listed_moves, pairs_within, step_moves
from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole, conduction
from contactlogic.truth import Target, all_rows, rows_of


def as_built(network):
    live = conduction(network)
    n = len(network.relays)
    return {load: Target(n, 0 if net is None else live[net]) for load, net in network.loads.items()}


def grouped(found):
    rows = {}
    for hazard in found:
        key = (hazard.mover, hazard.load, hazard.kind)
        assert not rows.setdefault(key, set()) & set(rows_of(hazard.rows)), "moves listed twice"
        rows[key] |= set(rows_of(hazard.rows))
        assert hazard.example == min(rows_of(hazard.rows))
        assert hazard.moves == hazard.rows.bit_count()
    return rows


@st.composite
def judged(draw):
    """A network, moves among some rows, and wants with free cells."""
    network = draw(networks(relays=3, poles=7, nets=5, loads=2))
    n = len(network.relays)
    rows = draw(st.integers(0, all_rows(n)))
    targets = {}
    for load, built in as_built(network).items():
        free = draw(st.integers(0, all_rows(n)))
        targets[load] = Target(n, built.on & ~free, free)
    return network, pairs_within(network.relays, rows), targets


@given(judged())
@settings(max_examples=150)
def test_hazards_agree_with_trying_every_position(case):
    network, moves, targets = case
    found = hazards(network, moves, targets)
    assert grouped(found) == by_trying(network, moves.released, targets)


@given(networks(relays=2, poles=7, nets=5, loads=2))
@settings(max_examples=150)
def test_the_poles_named_bring_the_hazard_about_and_no_fewer_do(network):
    moves = pairs_within(network.relays, all_rows(len(network.relays)))
    for hazard in hazards(network, moves, as_built(network)):
        net = network.loads[hazard.load]
        every = positions_of(network, hazard.mover)

        def happens(row, named, net=net, every=every, hazard=hazard):
            """With the named poles so, and the others anyhow (open for a flash)."""
            if hazard.kind == "flash":
                others = dict.fromkeys(every[0], "open")
                return fed(network, row, others | named, net)
            return not any(fed(network, row, way | named, net) for way in every)

        named = {(p.relay, p.pole): p.position for p in hazard.poles}
        assert named
        assert len(named) == len(hazard.poles)
        for row in rows_of(hazard.rows):
            assert happens(row, named)
        for fewer in combinations(named, len(named) - 1):
            assert not happens(hazard.example, {name: named[name] for name in fewer})


def ternary(network, row, mover, net):
    """Eichelberger's value of a load: 1, 0 or None (unknown), by Kleene logic over all paths."""
    graph = nx.MultiGraph()
    graph.add_nodes_from([network.supply, net])
    for contact in network.contacts():
        if contact.relay == mover:
            value = None
        else:
            value = int((row >> network.relays.index(contact.relay) & 1) == contact.make)
        graph.add_edge(contact.common, contact.throw, value=value)
    if net == network.supply:
        return 1
    answer = 0
    for path in nx.all_simple_edge_paths(graph, network.supply, net):
        values = [graph.edges[edge]["value"] for edge in path]
        series = 0 if 0 in values else None if None in values else 1
        answer = 1 if 1 in (answer, series) else None if None in (answer, series) else 0
    return answer


@given(networks(relays=3, poles=6, nets=4, loads=1))
@settings(max_examples=100)
def test_ternary_analysis_finds_the_same_drop_outs_and_no_fewer_flashes(network):
    n = len(network.relays)
    moves = pairs_within(network.relays, all_rows(n))
    targets = as_built(network)
    ours = grouped(hazards(network, moves, targets))
    for i, mover in enumerate(network.relays):
        for load, net in network.loads.items():
            if net is None:
                continue
            on = targets[load].on
            unknown = {
                row
                for row in rows_of(moves.released[mover])
                if (on >> row & 1) == (on >> (row | 1 << i) & 1)
                and ternary(network, row, mover, net) is None
            }
            gone = {row for row in unknown if on >> row & 1}
            assert ours.get((mover, load, "drop-out"), set()) == gone
            flash = ours.get((mover, load, "flash"), set())
            assert flash <= unknown - gone
            for row in unknown - gone - flash:  # only through both throws of one pole
                both = dict.fromkeys(positions_of(network, mover)[0], "both")
                assert fed(network, row, both, net)


def wired(relays, ends, loads):
    return Network(tuple(relays), "L", loads, numbered(relays, ends))


def formula_moves(network, text):
    n = len(network.relays)
    target = Target(n, evaluate(parse(text), network.relays))
    return pairs_within(network.relays, all_rows(n)), {"X": target}


# AB + A'C with B = C = 1: the static hazard that ternary simulation is usually explained by
# (Eichelberger 1965; Huffman 1957).  The example is from memory.
def test_the_textbook_static_hazard_is_a_drop_out_and_the_consensus_term_cures_it():
    relays = ("A", "B", "C")
    ends = [("A", "x", "b", "c"), ("B", "b", "L", None), ("C", "c", "L", None)]
    network = wired(relays, ends, {"X": "x"})
    moves, targets = formula_moves(network, "A B + A' C")
    (hazard,) = hazards(network, moves, targets)
    assert (hazard.kind, hazard.mover, hazard.load) == ("drop-out", "A", "X")
    assert list(rows_of(hazard.rows)) == [0b110]
    assert [(p.relay, p.pole, p.position) for p in hazard.poles] == [("A", 1, "open")]
    cured = wired(relays, [*ends, ("B", "x", "y", None), ("C", "y", "L", None)], {"X": "x"})
    assert not hazards(cured, moves, targets)
    assert cures(network, moves, targets, [hazard]).together == (("A", 1),)


# (A + B)(A' + C) with B = C = 0: the dual static 0 hazard, from memory.
@pytest.mark.parametrize("poles", [1, 2])
def test_the_dual_hazard_is_a_flash_where_two_poles_carry_the_contacts_and_none_on_one(poles):
    relays = ("A", "B", "C")
    ends = [("B", "L", "m", None), ("C", "m", "x", None)]
    ends += [("A", "m", "L", "x")] if poles == 1 else [("A", "m", "L", None), ("A", "m", None, "x")]
    network = wired(relays, ends, {"X": "x"})
    moves, targets = formula_moves(network, "(A + B) (A' + C)")
    found = hazards(network, moves, targets)
    if poles == 1:  # the common leaves one throw before it reaches the other
        assert not found
    else:
        (flash,) = found
        assert (flash.kind, flash.mover) == ("flash", "A")
        assert [(p.pole, p.position) for p in flash.poles] == [(1, "make"), (2, "break")]


@given(networks(relays=3, poles=6, nets=4, loads=3), st.sets(st.sampled_from("XYZ")))
@settings(max_examples=150)
def test_a_cure_is_offered_exactly_where_the_joined_contacts_do_no_harm(network, isolated):
    isolated &= set(network.loads)
    n = len(network.relays)
    moves = pairs_within(network.relays, all_rows(n))
    targets = as_built(network)
    found = hazards(network, moves, targets)
    offered = cures(network, moves, targets, found, isolated=isolated)

    def harmless(mover, names):
        way = {m: v for m, v in moves.released.items() if m == mover}
        rest = by_trying(network, dict.fromkeys(moves.released, 0) | way, targets, names)
        if any(kind == "flash" for *_, kind in rest):
            return False
        for row in range(2**n):
            for position in positions_of(network, mover):
                position |= dict.fromkeys(names, "both")
                for load in isolated:
                    net = network.loads[load]
                    for other in network.loads.values():
                        if None in (net, other) or net == other:
                            continue
                        if joined(network, row, position, net, other) and not fed(
                            network, row, position, net
                        ):
                            return False
        return True

    def vanishes(hazard, names):
        way = {m: hazard.rows if m == hazard.mover else 0 for m in network.relays}
        rest = by_trying(network, way, targets, names)
        return (hazard.mover, hazard.load, "drop-out") not in rest

    dropped = [hazard for hazard in found if hazard.kind == "drop-out"]
    assert [cure.hazard for cure in offered.single] == dropped
    for cure in offered.single:
        hazard = cure.hazard
        changeovers = [
            (p.relay, p.number)
            for p in network.poles
            if p.relay == hazard.mover and p.make is not None and p.break_ is not None
        ]
        good = [
            names
            for size in range(1, 4)
            for names in combinations(changeovers, size)
            if vanishes(hazard, names) and harmless(hazard.mover, names)
        ]
        assert bool(cure.poles) == bool(good)
        assert bool(cure.why_not) != bool(cure.poles)
        if good:
            assert cure.poles == good[0]
    for mover in network.relays:
        own = [c for c in offered.single if c.hazard.mover == mover and c.poles]
        names = {name for cure in own for name in cure.poles}
        if names and mover not in offered.apart:
            assert names <= set(offered.together)
            assert harmless(mover, names)
            assert all(vanishes(cure.hazard, names) for cure in own)


def test_a_repeater_moves_with_its_relay_and_its_poles_are_named_by_their_own_relay():
    network = Network(
        ("A", "A1"),
        "L",
        {"X": "x", "Y": "y"},
        (Pole("A", 1, "L", "x", None), Pole("A1", 1, "L", None, "x"), Pole("A1", 2, "L", "y")),
    )
    targets = {"X": Target(1, 0b11), "Y": Target(1, 0b10)}
    (hazard,) = hazards(network, Moves(("A",), {"A": 1}), targets, {"A1": "A"})
    assert {(p.relay, p.pole) for p in hazard.poles} == {("A", 1), ("A1", 1)}


def test_moves_are_pairs_of_listed_rows_and_steps_of_a_sequence():
    job = Job("", ("A", "B"), (Load("X", Target(2, 0b1000)),), listed=0b1011)
    assert dict(listed_moves(job).released) == {"A": 0b0001, "B": 0b0010}
    assert listed_moves(job).count == 2
    steps = step_moves(("A", "B"), [(0b01, 1), (0b11, 0), (0b10, 1)])
    assert dict(steps.released) == {"A": 0b0100, "B": 0b0011}


@pytest.mark.slow
def test_sixty_poles_of_sixteen_relays_take_seconds():
    import time

    relays = tuple(f"K{i}" for i in range(16))
    ends = []
    for stage in range(15):  # parity of sixteen relays, doubled up to cross over at every stage
        a, b = (f"a{stage}", f"b{stage}") if stage else ("L", "gone")
        c, d = f"a{stage + 1}", f"b{stage + 1}"
        ends += [(relays[stage], a, c, d), (relays[stage], b, d, c)]
        ends += [(relays[15], c, None, f"t{stage}"), (relays[15], f"t{stage}", d, None)]
    network = wired(relays, ends, {"X": "a15", "Y": "b15", "Z": "t3"})
    assert len(network.poles) == 60
    moves = pairs_within(relays, all_rows(16))
    began = time.process_time()
    found = hazards(network, moves, as_built(network))
    assert found
    assert time.process_time() - began < 20
