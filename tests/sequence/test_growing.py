"""Drives grown from the listed states, and rings wired as a selecting chain.

What they come to is worked out on the graph of all states by `explicit`, which shares no code.
"""

from __future__ import annotations

import random

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sequence import explicit

from contactlogic.check import prove
from contactlogic.job.sequence import Pattern, Row, SequenceTable, Timing
from contactlogic.ladder.build import build
from contactlogic.sequence.growing import grow
from contactlogic.sequence.memory import resolve
from contactlogic.sequence.pattern import choose_relays
from contactlogic.sequence.ring import ring_order, selecting_chain
from contactlogic.sequence.selfstart import homing
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.wants import drive_targets


def ring_table(n, order=None):
    """A ring of n relays slow to release; with `order` its columns in another order."""
    table = choose_relays(Pattern((), ((),) * n, "ring")).table
    if order is None:
        return table
    rows = tuple(Row(tuple(row.columns[k] for k in order)) for row in table.rows)
    columns = tuple(table.columns[k] for k in order)
    return SequenceTable(columns, (), rows, timing=table.timing)


def stages(n, slow=False):
    """One stage after another, each let go when the next one is operated."""
    names = tuple(f"K{k}" for k in range(n))
    rows = []
    for k in range(n):
        rows.append(Row(tuple(int(i in (k, (k + 1) % n)) for i in range(n))))
        rows.append(Row(tuple(int(i == (k + 1) % n) for i in range(n))))
    return SequenceTable(names, (), tuple(rows), timing=Timing(slow_release=names if slow else ()))


def twisted(n):
    """All operate one after another, then all release in the same order."""
    names = tuple(f"K{k}" for k in range(n))
    up = [tuple(int(i < k) for i in range(n)) for k in range(n + 1)]
    down = [tuple(int(i >= k) for i in range(n)) for k in range(1, n)]
    return SequenceTable(names, (), tuple(map(Row, up + down)))


def started(n):
    """Operated one after another while START is, for ever if it is."""
    names = ("START", *(f"K{k}" for k in range(n)))
    rows = [Row((0,) * (n + 1))]
    rows += [Row((1, *(int(i <= k) for i in range(n)))) for k in range(n)]
    rows.append(Row((0, *(1,) * n)))
    return SequenceTable(names, (), tuple(rows), inputs=("START",))


def verdict(expansion: Expansion, fed: list[list[int] | None]) -> str:
    """What the drives come to, on the graph of all states."""
    n = len(expansion.columns)
    column = {name: i for i, name in enumerate(expansion.columns)}
    slow = {(column[name], 1) for name in expansion.timing.slow_release}
    slow |= {(column[name], 0) for name in expansion.timing.slow_operate}
    inputs = [column[name] for name in expansion.inputs]
    waiting = {step.state: set(step.movers) & set(inputs) for step in expansion.steps}
    moves = explicit.graph(n, fed, slow, inputs, waiting)
    for step in expansion.steps:
        assert set(moves[step.state]) == {step.state ^ 1 << mover for mover in step.movers}
    return explicit.verdict(moves, n, [step.state for step in expansion.steps])


def value(tree, state):
    """Whether a tree conducts, contact by contact."""
    if isinstance(tree, bool):
        return int(tree)
    if not hasattr(tree, "parts"):
        return int(bool(state >> tree.relay & 1) == tree.make)
    parts = [value(part, state) for part in tree.parts]
    return min(parts) if type(tree).__name__ == "Series" else max(parts)


def grown_tables(expansion):
    grown = grow(expansion)
    assert grown.recovery.verdict == "recovers"
    return [
        [value(grown.trees[name], state) for state in range(1 << len(expansion.columns))]
        if name in grown.trees
        else None
        for name in expansion.columns
    ]


@pytest.mark.parametrize(
    "table",
    [ring_table(6), stages(6), stages(5, slow=True), twisted(5), twisted(6), started(6)],
    ids=["ring", "stages", "slow stages", "twisted 5", "twisted 6", "started"],
)
def test_grown_drives_recover_from_every_state(table):
    expansion = resolve(table)
    assert verdict(expansion, grown_tables(expansion)) == "recovers"


@settings(max_examples=12, deadline=None)
@given(st.integers(0, 10**6), st.integers(3, 6))
def test_grown_drives_of_a_random_walk_recover(seed, n):
    dice = random.Random(seed)
    walk = [0]
    while len(walk) < 2 or walk[-1]:  # until it is back where it began
        there = walk[-1] ^ 1 << dice.randrange(n)
        if there and there in walk:
            walk = [0]
            continue
        walk.append(there)
    if len(walk) < 4:  # there and back again: the same state would want two things
        return
    rows = tuple(Row(tuple(state >> i & 1 for i in range(n))) for state in walk[:-1])
    names = tuple(f"K{k}" for k in range(n))
    expansion = resolve(SequenceTable(names, (), rows))
    assert verdict(expansion, grown_tables(expansion)) == "recovers"


@pytest.mark.parametrize("n", [3, 4, 5, 6, 7, 9])
def test_a_selecting_chain_recovers_with_one_pole_more_than_relays(n):
    order = random.Random(n).sample(range(n), n)
    expansion = resolve(ring_table(n, order))
    found = ring_order(expansion)
    assert found is not None
    network = build(selecting_chain(found), expansion.columns, expansion.columns)
    assert len(network.poles) == n + 1
    proof = prove(network, drive_targets(expansion), form="ladder", isolated=expansion.columns)
    assert proof.ok, proof.explain()
    tables = [proof.as_built[name] for name in expansion.columns]
    fed = [[table >> state & 1 for state in range(1 << n)] for table in tables]
    assert verdict(expansion, fed) == "recovers"


@pytest.mark.parametrize(
    "table",
    [
        twisted(5),
        stages(5),
        SequenceTable(
            ("A", "B", "C"),
            (),
            tuple(map(Row, [(1, 1, 0), (0, 1, 1), (1, 0, 1)])),
            timing=Timing(slow_release=("A", "B", "C"), slow_operate=("A",)),
        ),
    ],
    ids=["twisted", "stages", "slow to operate"],
)
def test_other_sequences_are_not_taken_for_such_a_ring(table):
    assert ring_order(resolve(table)) is None


@pytest.mark.parametrize("table", [ring_table(4), twisted(4), started(4)], ids=["ring", "t", "s"])
def test_homing_moves_one_relay_in_every_state_outside_and_one_step_nearer(table):
    expansion = resolve(table)
    n = len(expansion.columns)
    relays = [expansion.columns.index(name) for name in expansion.relays]
    listed = [step.state for step in expansion.steps]
    cube = nx.Graph((s, s ^ 1 << i) for s in range(1 << n) for i in relays)
    away = nx.multi_source_dijkstra_path_length(cube, set(listed))
    filled = homing(expansion, drive_targets(expansion))
    for state in set(range(1 << n)) - set(listed):
        drives = {i: filled[expansion.columns[i]].on >> state & 1 for i in relays}
        moves = [i for i in relays if drives[i] != state >> i & 1]
        assert [away[state ^ 1 << i] for i in moves] == ([away[state] - 1] if state in away else [])
