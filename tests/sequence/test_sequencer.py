"""Whole sequencers: wired, then simulated from every power-on state by a plain step simulator.

The simulator reads the finished contacts through networkx components and shares no code with what
wired or proved them.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import networkx
import pytest
from oracles import closed_graph

from contactlogic.errors import LimitError
from contactlogic.job.model import PatternJob, SequenceJob
from contactlogic.job.sequence import Pattern, Row, SequenceTable, Timing
from contactlogic.network import Network
from contactlogic.sequencer import MOST_RELAYS, SequencerResult, wire_sequence
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
    rows = tuple(Row(tuple(int(k == at) for k in range(len(names)))) for at in range(len(names)))
    with pytest.raises(LimitError, match=f"{MOST_RELAYS + 1} relays and inputs"):
        wire_sequence(SequenceJob("long", SequenceTable(names, (), rows)), Search(effort=0))
