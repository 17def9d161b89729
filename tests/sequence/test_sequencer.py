"""Whole sequencers: wired, then simulated from every power-on state by a plain step simulator.

The simulator reads the finished contacts through networkx components and shares no code with what
wired or proved them.
"""

from __future__ import annotations

import random
from collections.abc import Iterator, Sequence

import networkx
import pytest
from oracles import closed_graph
from sequence import explicit

from contactlogic.errors import LimitError
from contactlogic.job.model import Limits, PatternJob, SequenceJob
from contactlogic.job.sequence import Pattern, Row, SequenceTable, Timing
from contactlogic.network import Network
from contactlogic.sequence.pattern import choose_relays
from contactlogic.sequenced import SequencerResult
from contactlogic.sequencer import MOST_RELAYS, wire_sequence
from contactlogic.synthesis import Search

NAMES = ("A", "B", "C", "D")


def ring(slow: bool = True) -> SequenceTable:
    """Four relays, two neighbours operated at a time, a load in the second and fourth step."""
    rows = ((1, 1, 0, 0), (0, 1, 1, 0), (0, 0, 1, 1), (1, 0, 0, 1))
    timing = Timing(slow_release=NAMES) if slow else Timing()
    listed = tuple(Row(row, (k % 2,)) for k, row in enumerate(rows))
    return SequenceTable(NAMES, ("Z",), listed, timing=timing)


def fed(network: Network, load: str, state: Sequence[int]) -> bool:
    graph = closed_graph(network, dict(zip(network.relays, state, strict=True)))
    net = network.loads[load]
    if net is None or net not in graph or network.supply not in graph:
        return net == network.supply
    return networkx.has_path(graph, network.supply, net)


def moves(
    network: Network, timing: Timing, state: tuple[int, ...], inputs: Sequence[str] = ()
) -> Iterator[tuple[int, ...]]:
    """Next states by the rules of the design page: quick moves first, then slow, then inputs."""
    pending = [
        k
        for k, name in enumerate(network.relays)
        if name not in inputs and fed(network, name, state) != bool(state[k])
    ]
    quick = [k for k in pending if not timing.slow(network.relays[k], bool(state[k]))]
    movers = quick or pending
    if not movers:
        movers = [k for k, name in enumerate(network.relays) if name in inputs]
    for k in movers:
        yield tuple(value ^ (i == k) for i, value in enumerate(state))


def comes_home(result: SequencerResult, index: int, cycle: set[tuple[int, ...]]) -> None:
    """Every run from every state enters the cycle, and no loop lies outside it."""
    network, timing = result.designs[index].network, result.timing
    graph = networkx.DiGraph()
    n = len(network.relays)
    for number in range(1 << n):
        state = tuple(number >> k & 1 for k in range(n))
        for other in moves(network, timing, state, result.expansion.inputs):
            graph.add_edge(state, other)
    assert cycle <= set(graph)
    outside = graph.subgraph(set(graph) - cycle)
    assert networkx.is_directed_acyclic_graph(outside)
    assert all(set(graph.successors(state)) <= cycle for state in cycle)


def test_ring_of_four() -> None:
    # design.md section 7: 6 poles in all, at most 2 on a relay; ours takes no more
    result = wire_sequence(SequenceJob("ring", ring()), Search("bridge", effort=40))
    (design,) = result.designs
    assert len(design.network.poles) <= 6
    assert max(count.poles for count in design.network.per_relay().values()) <= 2
    assert result.recoveries[0].verdict == "recovers"
    steps = [step.state for step in result.expansion.steps]
    cycle = {tuple(state >> k & 1 for k in range(4)) for state in steps}
    comes_home(result, 0, cycle)
    assert design.network.relays == NAMES
    assert set(design.network.loads) == {*NAMES, "Z"}
    for step in result.expansion.steps:
        state = [step.state >> k & 1 for k in range(4)]
        if step.loads[0] is not None:
            assert fed(design.network, "Z", state) == bool(step.loads[0])


def test_a_sequence_moved_by_a_button() -> None:
    rows = (Row((0, 0, 0), (0,)), Row((1, 1, 0), (1,)), Row((0, 1, 1), (0,)))
    table = SequenceTable(("COIN", "GATE", "LOCK"), ("BELL",), rows, inputs=("COIN",))
    result = wire_sequence(SequenceJob("turnstile", table), Search("ladder", effort=10))
    assert result.recoveries[0].verdict == "recovers"
    network = result.designs[0].network
    assert set(network.loads) == {"GATE", "LOCK", "BELL"}
    for step in result.expansion.steps:  # while the button waits, nothing moves by itself
        state = tuple(step.state >> k & 1 for k in range(3))
        if result.expansion.waits(step):
            assert all(
                fed(network, name, state) == bool(state[k])
                for k, name in ((1, "GATE"), (2, "LOCK"))
            )


@pytest.mark.parametrize("step", ["slow", "ring", "pulse"])
def test_a_pattern_of_three_steps(step: str) -> None:
    pattern = Pattern(("RED", "AMBER", "GREEN"), ((1, 0, 0), (1, 1, 0), (0, 0, 1)), step)  # type: ignore[arg-type]
    result = wire_sequence(PatternJob("beacon", pattern), Search("bridge", effort=4))
    assert result.recoveries[0].verdict == "recovers"
    assert result.notes
    seen = []
    for each in result.expansion.steps:
        if None not in each.loads and (not seen or seen[-1] != each.loads):
            seen.append(each.loads)
    assert [tuple(loads) for loads in seen][:3] == [(1, 0, 0), (1, 1, 0), (0, 0, 1)]


def test_two_relays_chasing_each_other_repeat_for_ever() -> None:
    rows = tuple(Row(row) for row in ((0, 0), (1, 0), (1, 1), (0, 1)))
    table = SequenceTable(("A", "B"), (), rows)
    result = wire_sequence(SequenceJob("chase", table), Search("bridge", effort=10))
    # A = B', B = A: one break, one make
    assert len(result.designs[0].network.poles) == 2
    comes_home(result, 0, {(0, 0), (1, 0), (1, 1), (0, 1)})


def test_too_many_relays_are_refused_by_name_of_the_limit() -> None:
    names = tuple(f"K{k}" for k in range(MOST_RELAYS + 1))
    rows = []
    for k in range(len(names)):
        rows += [
            Row(tuple(int(k <= at <= k + more) for at in range(len(names)))) for more in (0, 1)
        ]
    rows[-1] = Row((1, *(0 for _ in names[2:]), 1))
    with pytest.raises(LimitError, match=f"{MOST_RELAYS + 1} relays and inputs"):
        wire_sequence(SequenceJob("long", SequenceTable(names, (), tuple(rows))), Search(effort=0))


def steps_home(
    network: Network,
    timing: Timing,
    cycle: set[tuple[int, ...]],
    inputs: Sequence[str],
    dice: random.Random,
) -> None:
    """Some runs, each from a state and with moves drawn at random, come into the cycle."""
    n = len(network.relays)
    for _ in range(6):
        state = tuple(dice.getrandbits(1) for _ in range(n))
        for _ in range(60 * n):
            if state in cycle:
                break
            state = dice.choice(list(moves(network, timing, state, inputs)))
        assert state in cycle


def verdict(result: SequencerResult) -> str:
    """What the finished contacts come to, on the graph of all states."""
    network, expansion, timing = result.designs[0].network, result.expansion, result.timing
    n = len(network.relays)
    states = [tuple(number >> k & 1 for k in range(n)) for number in range(1 << n)]
    tables = [
        [int(fed(network, name, state)) for state in states] if name in network.loads else None
        for name in network.relays
    ]
    slow = {(k, at) for k in range(n) for at in (0, 1) if timing.slow(network.relays[k], bool(at))}
    inputs = [k for k, name in enumerate(network.relays) if name in expansion.inputs]
    waiting = {step.state: set(step.movers) & set(inputs) for step in expansion.steps}
    graph = explicit.graph(n, tables, slow, inputs, waiting)
    return str(explicit.verdict(graph, n, [step.state for step in expansion.steps]))


def wire_pattern(step: str, count: int, search: Search) -> SequencerResult:
    """A pattern of one load, on in every third step and in the last, wired and run."""
    rows = tuple((int(k % 3 == 1 or k == count - 1),) for k in range(count))
    pattern = Pattern(("LAMP",), rows, step)  # type: ignore[arg-type]
    result = wire_sequence(PatternJob("pattern", pattern), search)
    network, expansion = result.designs[0].network, result.expansion
    n = len(network.relays)
    shown = []
    for each in expansion.steps:
        state = tuple(each.state >> k & 1 for k in range(n))
        if each.loads[0] is not None:
            assert fed(network, "LAMP", state) == bool(each.loads[0])
        if not each.inserted:
            shown.append(each.loads[0])
        if not expansion.waits(each):
            after = {tuple(value ^ (k in each.movers) for k, value in enumerate(state))}
            assert set(moves(network, result.timing, state, expansion.inputs)) == after
    wanted = [row[0] for row in rows]
    assert shown[:: 2 if step == "pulse" else 1][:count] == wanted
    if count % 2 and step == "slow":
        assert any("extra state" in note for note in result.notes)
    cycle = {tuple(each.state >> k & 1 for k in range(n)) for each in expansion.steps}
    if n <= 6:
        assert verdict(result) == "recovers"
    steps_home(network, result.timing, cycle, expansion.inputs, random.Random(count))
    assert result.recoveries[0].verdict == "recovers"
    return result


@pytest.mark.parametrize(
    ("step", "count"),
    [("slow", 5), ("ring", 2), ("ring", 13), ("pulse", 5)],
)
def test_patterns_of_many_lengths(step: str, count: int) -> None:
    wire_pattern(step, count, Search("ladder", effort=0))


@pytest.mark.slow
@pytest.mark.parametrize("count", range(2, 25))
@pytest.mark.parametrize("step", ["slow", "ring", "pulse"])
def test_patterns_of_every_length(step: str, count: int) -> None:
    result = wire_pattern(step, count, Search("ladder", effort=0))
    if step == "ring" and count > 2:  # the chain, and a rung of the lamp's own
        assert len(result.designs[0].network.poles) <= 2 * count + 1


def test_stages_of_more_relays_than_are_searched() -> None:
    names = tuple(f"K{k}" for k in range(12))
    rows = []
    for k in range(12):
        rows.append(Row(tuple(int(i in (k, (k + 1) % 12)) for i in range(12)), (k % 2,)))
        rows.append(Row(tuple(int(i == (k + 1) % 12) for i in range(12)), (k % 2,)))
    job = SequenceJob("stages", SequenceTable(names, ("Z",), tuple(rows)))
    result = wire_sequence(job, Search("both", effort=0))
    assert [design.form for design in result.designs] == ["ladder", "bridge"]
    network = result.designs[0].network
    cycle = {tuple(s.state >> k & 1 for k in range(12)) for s in result.expansion.steps}
    steps_home(network, result.timing, cycle, (), random.Random(12))
    assert result.designs[0].verified_rows == 1 << 12
    assert result.designs[0].bound.at_least == 12


def test_budgets_hold_for_many_relays_too() -> None:
    pattern = Pattern(("LAMP",), tuple((k % 2,) for k in range(11)), "ring")
    names = choose_relays(pattern).table.columns
    tight = Limits(poles=dict.fromkeys(names, 1))
    with pytest.raises(LimitError, match="may use 1 pole"):
        wire_sequence(PatternJob("ring", pattern, limits=tight), Search("ladder", effort=0))
    search = Search("ladder", effort=0, repeaters=True)
    result = wire_sequence(PatternJob("ring", pattern, limits=tight), search)
    use = result.designs[0].network.per_relay()
    assert result.repeaters
    assert all(use[name].poles <= 1 for name in (*names, *result.repeaters))
    assert result.recoveries[0].verdict == "recovers"
