"""One window at a time: wants, isolation and budgets, against plain trial of every pole."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from itertools import product
from random import Random

import networkx as nx
import pytest

from contactlogic.search.encoding import Ends, Row
from contactlogic.search.resynthesis import WindowProblem, resynthesise

PARITY = tuple(  # supply, load: on where one or three of three relays are operated
    Row(s, (0, 1), 0, *(((1,), ()) if s.bit_count() % 2 else ((), (1,)))) for s in range(8)
)


def kept(rows: Sequence[Row], poles: Sequence[Ends]) -> bool:
    """Whether poles do what the rows ask, by connected components."""
    for row in rows:
        graph = nx.Graph()
        graph.add_nodes_from(
            [row.source, *row.on, *row.off, *(net for p in row.apart for net in p)]
        )
        graph.add_edges_from(enumerate(row.node))
        for pole in poles:
            end = pole.make if row.setting >> pole.relay & 1 else pole.break_
            if end is not None:
                graph.add_edge(pole.common, end)
        live = nx.node_connected_component(graph, row.source)
        if not live >= set(row.on) or live & set(row.off):
            return False
        if any(a not in live and nx.has_path(graph, a, b) for a, b in row.apart):
            return False
    return True


def every_pole(relays: int, nets: int):
    ends = [*range(nets), None]
    for relay, common, make, break_ in product(range(relays), range(nets), ends, ends):
        if common not in (make, break_) and make != break_:
            yield Ends(relay, common, make, break_)


def window(random: Random, apart: bool) -> tuple[Row, ...]:
    """Rows over four nets, net 0 the supply; some of them joined outside."""
    rows = []
    for setting in range(4):
        node = (0, 1, 2, random.choice((2, 3, 3)))
        loads = sorted({1, node[3]})
        wish = {load: random.choice(("on", "off", "free")) for load in loads}
        pairs = [(a, b) for a in loads for b in loads if a != b and random.random() < 0.8]
        rows.append(
            Row(
                setting,
                node,
                0,
                tuple(load for load in loads if wish[load] == "on"),
                tuple(load for load in loads if wish[load] == "off"),
                tuple(pairs) if apart else (),
            )
        )
    return tuple(rows)


@pytest.mark.parametrize("apart", [False, True])
def test_one_pole_is_found_just_where_one_will_do(apart: bool) -> None:
    outcomes = set()
    for seed in range(80):
        rows = window(Random(f"{seed} {apart}"), apart)
        answer = resynthesise(WindowProblem(2, 4, rows), 1, 0, seed=seed)
        possible = kept(rows, ()) or any(kept(rows, [pole]) for pole in every_pole(2, 4))
        assert (answer.status == "sat") == possible, rows
        if answer.status == "sat":
            assert kept(rows, answer.poles), (rows, answer)
        outcomes.add(answer.status)
    assert outcomes == {"sat", "unsat"}


def test_answers_of_more_poles_keep_loads_apart() -> None:
    careless = 0  # windows whose answer without isolation would break it
    for seed in range(40):
        rows = window(Random(f"{seed} True"), True)
        for poles in (2, 3):
            answer = resynthesise(WindowProblem(2, 4, rows), poles, 1, seed=seed)
            if answer.status == "sat":
                assert kept(rows, answer.poles), (rows, answer)
            loose = tuple(replace(row, apart=()) for row in rows)
            other = resynthesise(WindowProblem(2, 4, loose), poles, 1, seed=seed)
            careless += other.status == "sat" and not kept(rows, other.poles)
    assert careless


@pytest.mark.parametrize("seed", range(4))
def test_budgets_are_kept(seed: int) -> None:
    # odd parity of three takes four poles, two of them of one relay (seen: Shannon 1938)
    free = resynthesise(WindowProblem(3, 2, PARITY), 4, 3, seed=seed)
    assert free.status == "sat"
    assert kept(PARITY, free.poles)
    one_each = WindowProblem(3, 2, PARITY, poles={0: 1, 2: 1})
    held = resynthesise(one_each, 4, 3, seed=seed)
    assert held.status == "sat"
    assert kept(PARITY, held.poles)
    assert sorted(pole.relay for pole in held.poles) == [0, 1, 1, 2]
    too_few = WindowProblem(3, 2, PARITY, poles={0: 1, 1: 1, 2: 1})
    assert resynthesise(too_few, 4, 3, seed=seed).status == "unsat"


@pytest.mark.parametrize("seed", range(4))
def test_separate_contacts_keep_to_their_makes_and_breaks(seed: int) -> None:
    rows = tuple(  # on where just one of two relays is operated
        Row(s, (0, 1), 0, *(((1,), ()) if s in (1, 2) else ((), (1,)))) for s in range(4)
    )
    enough = WindowProblem(2, 2, rows, frozenset({0}), makes={0: 1}, breaks={0: 1})
    found = resynthesise(enough, 3, 2, seed=seed)
    assert found.status == "sat"
    assert kept(rows, found.poles)
    own = [pole for pole in found.poles if pole.relay == 0]
    assert all(None in (pole.make, pole.break_) for pole in own)
    assert sum(pole.make is not None for pole in own) == 1
    no_break = WindowProblem(2, 2, rows, frozenset({0}), makes={0: 3}, breaks={0: 0})
    assert resynthesise(no_break, 4, 2, seed=seed).status == "unsat"


def test_a_spent_budget_is_told() -> None:
    hard = tuple(
        Row(s, (0, 1), 0, *(((1,), ()) if s.bit_count() % 2 else ((), (1,)))) for s in range(32)
    )
    assert resynthesise(WindowProblem(5, 2, hard), 7, 6, conflicts=50).status == "unknown"
    assert resynthesise(WindowProblem(5, 2, hard), 7, 6, seconds=0.0).status == "unknown"
