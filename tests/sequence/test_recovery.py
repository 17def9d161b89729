"""The recovery engine against listing every state, and the known failing sequencers."""

from __future__ import annotations

from itertools import pairwise

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sequence import explicit

from contactlogic.errors import LimitError
from contactlogic.formula import evaluate, parse
from contactlogic.sequence import motion as motion_module
from contactlogic.sequence import reach
from contactlogic.sequence.drives import FormulaDrives, TableDrives, formula_drive, variables
from contactlogic.sequence.groups import GroupMotion
from contactlogic.sequence.motion import MoveRules, build_motion, memory_needed
from contactlogic.sequence.recovery import Wanted, recover
from contactlogic.sequence.space import Watch

NAMES = tuple("ABCDEFGHIJ")


@st.composite
def systems(draw, most=6, inputs=False):
    """Drives over 1 to `most` columns as truth tables, with slow moves and maybe inputs."""
    n = draw(st.integers(1, most))
    moved = sorted(draw(st.sets(st.integers(0, n - 1), max_size=n - 1))) if inputs else []
    tables = []
    for i in range(n):
        if i in moved:
            tables.append(None)
            continue
        # Tables of few columns lock up and hunt more often than tables of all columns.
        seen = draw(st.lists(st.integers(0, n - 1), min_size=0, max_size=3, unique=True))
        small = draw(st.integers(0, 2**2 ** len(seen) - 1))
        value = 0
        for state in range(2**n):
            row = sum((state >> column & 1) << k for k, column in enumerate(seen))
            value |= (small >> row & 1) << state
        tables.append(value)
    slow = draw(st.sets(st.tuples(st.integers(0, n - 1), st.integers(0, 1))))
    slow = {(i, at) for i, at in slow if i not in moved}
    waiting = draw(
        st.dictionaries(st.integers(0, 2**n - 1), st.sets(st.sampled_from(moved)), max_size=3)
        if moved
        else st.just({})
    )
    return n, tuple(tables), slow, tuple(moved), waiting


def spaces(system, together=False):
    n, tables, slow, inputs, waiting = system
    rules = MoveRules(
        n,
        slow_operate=[i for i, at in slow if not at],
        slow_release=[i for i, at in slow if at],
        inputs=inputs,
        waiting=waiting,
    )
    single = build_motion(rules, TableDrives(n, tables))
    fed = [None if t is None else [t >> s & 1 for s in range(2**n)] for t in tables]
    moves = explicit.graph(n, fed, slow, inputs, waiting, together)
    return (GroupMotion(single) if together else single), moves


def check_recovery(found, moves, n, legal=None):
    """Everything a recovery claims, against the listed graph."""
    expected = explicit.traps(moves)
    assert found.traps_known == len(expected)
    by_example = {min(trap): trap for trap in expected}
    assert {trap.example for trap in found.traps} == set(by_example)
    for trap in found.traps:
        members = by_example[trap.example]
        assert trap.states == len(members)
        start = trap.example
        assert trap.reached_from == len(nx.ancestors(moves, start) | {start})
        assert trap.run[-1] in members
        assert all(moves.has_edge(*step) for step in pairwise(trap.run))
        if 0 in nx.ancestors(moves, start) | {start} and found.stray is None:
            to_members = nx.single_source_shortest_path_length(moves, 0)
            assert len(trap.run) - 1 == min(to_members[m] for m in members if m in to_members)
    if legal is None:
        legal = min(expected, key=len) if len(expected) == 1 else None
    if legal is None:
        assert found.verdict == "sticks"
        return
    wanted_verdict = explicit.verdict(moves, n, legal)
    if found.stray is not None:
        assert found.verdict == "sticks"
        return
    assert found.verdict == wanted_verdict
    if found.verdict == "recovers":
        longest = explicit.longest(moves, legal)
        assert (found.slowest and found.slowest.moves) == longest
        if longest:
            rest = moves.subgraph(set(moves) - set(legal))
            tails = {s: 1 for s in rest if not rest.out_degree(s)}
            for s in reversed(list(nx.topological_sort(rest))):
                tails[s] = 1 + max((tails[t] for t in rest[s]), default=0)
            assert found.slowest.start == min(s for s in tails if tails[s] == longest)
    if found.verdict == "hunts":
        loop = found.hunting
        assert loop
        assert not set(loop) & set(legal)
        assert all(moves.has_edge(*step) for step in pairwise((*loop, loop[0])))
        for i in range(n):
            assert any((a ^ b) >> i & 1 for a, b in pairwise((*loop, loop[0]))) or any(
                not any((a ^ b) >> i & 1 for b in moves[a]) for a in loop
            )


@given(systems(inputs=True))
@settings(max_examples=150, deadline=None)
def test_single_moves_agree_with_listing_every_state(system):
    space, moves = spaces(system)
    check_recovery(recover(space, NAMES[: system[0]]), moves, system[0])


@given(systems(most=7))
@settings(max_examples=80, deadline=None)
def test_moves_together_agree_with_listing_every_state(system):
    space, moves = spaces(system, together=True)
    check_recovery(recover(space, NAMES[: system[0]], moves="together"), moves, system[0])


@given(systems(most=5, inputs=True))
@settings(max_examples=60, deadline=None)
def test_inputs_move_one_at_a_time_beside_groups(system):
    space, moves = spaces(system, together=True)
    check_recovery(recover(space, NAMES[: system[0]], moves="together"), moves, system[0])


@pytest.fixture
def tiny_chunks(monkeypatch):
    """Let small systems go the ways that only large ones go: chunks, arrays and sweeps."""
    monkeypatch.setattr(motion_module, "CHUNK", 2)
    monkeypatch.setattr(reach, "_WIDE", 4)
    monkeypatch.setattr(reach, "_NARROW", 1)
    monkeypatch.setattr(reach, "_PASSES", 1)


@pytest.mark.usefixtures("tiny_chunks")
def test_sweeps_over_chunks_agree_with_listing_every_state():
    @given(systems(most=9))
    @settings(max_examples=50, deadline=None)
    def run(system):
        space, moves = spaces(system)
        check_recovery(recover(space, NAMES[: system[0]]), moves, system[0])

    run()


@given(systems(most=5, inputs=True), st.data())
@settings(max_examples=80, deadline=None)
def test_a_wanted_sequence_is_held_to_its_ways_out(system, data):
    space, moves = spaces(system)
    chosen = data.draw(st.sampled_from(sorted(explicit.traps(moves), key=sorted)))
    ways = {state: tuple(moves[state]) for state in sorted(chosen)}
    if data.draw(st.booleans()):
        spoilt = data.draw(st.sampled_from(sorted(ways)))
        ways[spoilt] = ways[spoilt][1:]
    found = recover(space, NAMES[: system[0]], wanted=Wanted(ways, tuple(ways)))
    assert (found.stray is None) == all(set(moves[s]) == set(t) for s, t in ways.items())
    check_recovery(found, moves, system[0], chosen)


def formulas(**drives):
    names = tuple(drives)
    return names, FormulaDrives(names, drives)


def verdict_of(names, drives, **rules):
    return recover(build_motion(MoveRules(len(names), **rules), drives), names)


def test_a_ring_whose_first_drive_needs_an_operated_relay_sticks():
    names, drives = formulas(
        A=lambda v: v["D"] & ~v["C"],
        B=lambda v: v["A"] & ~v["D"],
        C=lambda v: v["B"] & ~v["A"],
        D=lambda v: v["C"] & ~v["B"],
    )
    found = verdict_of(names, drives, slow_release=range(4))
    assert found.verdict == "sticks"
    assert [trap.states for trap in found.traps] == [1, 8]
    assert found.traps[0].example == 0


def test_cross_coupled_drives_stick_and_race():
    names, drives = formulas(A=lambda v: ~v["B"], B=lambda v: ~v["A"])
    found = verdict_of(names, drives)
    assert found.verdict == "sticks"
    assert sorted(trap.example for trap in found.traps) == [0b01, 0b10]
    (zero, both) = 0b00, 0b11
    assert [race.columns for race in found.races] == [(0, 1)]
    assert found.races[0].states == 2
    assert {zero, both} >= {found.races[0].example}


def test_an_odd_ring_of_breaks_has_no_state_at_rest():
    # A = E', B = A', ...: no state is at rest, as an odd number of inversions shows by hand.
    names = tuple("ABCDE")
    drives = {name: (lambda v, other=names[i - 1]: ~v[other]) for i, name in enumerate(names)}
    found = verdict_of(names, FormulaDrives(names, drives))
    assert found.traps_known == 1
    assert found.traps[0].states == 10
    assert found.verdict == "recovers" or found.hunting is not None


def test_inputs_that_never_return_can_leave_it_parked():
    # A holds itself once P was pressed; released, it waits for a P that may never come.
    names, drives = formulas(A=lambda v: v["A"] | v["P"])
    names = ("A", "P")
    drives = FormulaDrives(names, drives.formulas)
    space = build_motion(MoveRules(2, inputs=(1,), waiting={1: (1,), 3: (1,)}), drives)
    wanted = Wanted({1: (3,), 3: (1,)}, (1, 3))
    assert recover(space, names, wanted=wanted).verdict == "recovers"
    parked = recover(space, names, wanted=wanted, inputs_return=False)
    assert parked.verdict == "sticks"
    assert [(trap.example, trap.parked) for trap in parked.traps] == [(1, False), (0, True)]


def test_memory_is_foretold_and_refused():
    assert memory_needed(28) < 4 << 30
    _, drives = formulas(A=lambda v: v["A"])
    with pytest.raises(LimitError, match="GiB"):
        build_motion(MoveRules(40), drives, memory=4 << 30)


def test_a_stopped_search_keeps_what_is_known():
    n = 12
    tables = tuple(  # every relay keeps its place: 4096 traps of one state
        sum(1 << s for s in range(2**n) if s >> i & 1) for i in range(n)
    )
    asked = []

    def stop():
        asked.append(None)
        return len(asked) > 20

    space = build_motion(MoveRules(n), TableDrives(n, tables), watch=Watch(stop=stop))
    found = recover(space, tuple(f"K{i}" for i in range(n)))
    assert not found.complete
    assert found.verdict == "sticks"
    assert found.traps_known > 1


@pytest.mark.parametrize(
    "text", ["A B' + C", "A ^ B ^ C'", "2oo3(A, B, C)", "=1oo3(A, B, C)", "1", "0", "(A + B)' C"]
)
def test_formulas_drive_as_their_truth_tables_say(text):
    expression = parse(text)
    words = formula_drive(expression)(variables(("A", "B", "C"), 0, 1))
    table = evaluate(expression, ("A", "B", "C"))
    assert int(words[0]) & 0xFF == table


def test_more_traps_than_looked_for_leave_it_incomplete():
    names, drives = formulas(A=lambda v: v["A"], B=lambda v: v["B"], C=lambda v: v["C"])
    space = build_motion(MoveRules(3), drives)
    found = recover(space, names, most_traps=5)
    assert (found.verdict, found.traps_known, found.complete) == ("sticks", 5, False)
    assert recover(space, names).traps_known == 8
