"""One suite for every engine: what it returns does what was asked, in every row."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from oracles import behaviour

from contactlogic.ladder import LadderTask, best_ladder
from contactlogic.ladder.recognise import series_parallel
from contactlogic.ladder.synthesise import plain_ladder
from contactlogic.minimize import covers
from contactlogic.network import Network
from contactlogic.search.diagrams import fewest_nodes
from contactlogic.search.exact import exact
from contactlogic.search.goal import Goal
from contactlogic.search.mesh import to_network
from contactlogic.search.problem import Problem
from contactlogic.search.windows import wander
from contactlogic.truth import Target

Wants = dict[str, Target]
RELAYS = ("A", "B", "C")


def by_windows(wants: Wants) -> Network:
    targets = tuple(wants.values())
    start = fewest_nodes(targets)
    best = start
    for news in wander([start], Goal(3, targets), 1, 8):
        best = news.best or best
    return to_network(best, RELAYS, list(wants))


def by_exact(wants: Wants) -> Network:
    # the diagram may have 3-pole proofs to refute for long: a conflict budget ends it
    start = to_network(fewest_nodes(tuple(wants.values())), RELAYS, list(wants))
    network = exact(Problem(RELAYS, wants), known=start, conflicts=3000).network
    assert network is not None
    return network


def task(wants: Wants) -> LadderTask:
    return LadderTask(RELAYS, wants, {name: covers(target) for name, target in wants.items()})


def by_diagram(wants: Wants) -> Network:
    return to_network(fewest_nodes(tuple(wants.values())), RELAYS, list(wants))


ENGINES: dict[str, Callable[[Wants], Network]] = {
    "diagram": by_diagram,
    "plain ladder": lambda wants: plain_ladder(task(wants)),
    "ladder": lambda wants: best_ladder(task(wants), seconds=0).network,
    "windows": by_windows,
    "exact": by_exact,
}

ROWS = st.integers(0, 255)
WANTS = st.lists(st.tuples(ROWS, ROWS), min_size=1, max_size=2).map(
    lambda pairs: {f"Z{k}": Target(3, on, free & ~on) for k, (on, free) in enumerate(pairs)}
)


@pytest.mark.parametrize("engine", ENGINES)
class TestEngine:
    @settings(max_examples=12, deadline=None)
    @given(wants=WANTS)
    def test_does_what_was_asked(self, engine: str, wants: Wants) -> None:
        network = ENGINES[engine](wants)
        network.assert_consistent()
        assert set(network.loads) == set(wants)
        seen = behaviour(network)
        assert all(target.accepts(seen[name]) for name, target in wants.items())
        if "ladder" in engine:
            assert series_parallel(network)

    def test_constants_cost_nothing(self, engine: str) -> None:
        network = ENGINES[engine]({"ON": Target(3, 255), "OFF": Target(3, 0)})
        assert not network.poles
        assert behaviour(network) == {"ON": 255, "OFF": 0}

    def test_same_again(self, engine: str) -> None:
        wants = {"S": Target(3, 0b10010110), "T": Target(3, 0b11101000, 1)}
        assert ENGINES[engine](wants) == ENGINES[engine](wants)
