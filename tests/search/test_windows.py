"""Windows, starts and the portfolio: always correct, anytime, reproducible, hard to kill."""

from __future__ import annotations

import os
import signal
from collections.abc import Iterator
from itertools import permutations
from queue import Queue

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from oracles import behaviour

from contactlogic.child import Event, Stream
from contactlogic.ladder.recognise import series_parallel
from contactlogic.network import Network, back_feeds
from contactlogic.search import portfolio
from contactlogic.search.diagrams import diagram, fewest_nodes, selector, starts
from contactlogic.search.goal import Goal, cost
from contactlogic.search.mesh import Mesh, from_network, to_network, trim
from contactlogic.search.portfolio import Errand, Progress, explore
from contactlogic.search.windows import Found, Walk, wander
from contactlogic.truth import Target

RELAYS = ("A", "B", "C", "D", "E")


def network_of(mesh: Mesh, n: int) -> Network:
    return to_network(mesh, RELAYS[:n], [f"Z{k}" for k in range(len(mesh.feeds))])


def is_right(mesh: Mesh, targets: tuple[Target, ...]) -> bool:
    """By networkx components, row by row: shares nothing with the search."""
    seen = behaviour(network_of(mesh, targets[0].n))
    return all(target.accepts(seen[f"Z{k}"]) for k, target in enumerate(targets))


@st.composite
def wants(draw: st.DrawFn, most_relays: int = 4, most_loads: int = 3) -> tuple[Target, ...]:
    n = draw(st.integers(2, most_relays))
    rows = st.integers(0, (1 << (1 << n)) - 1)
    count = draw(st.integers(1, most_loads))
    return tuple(
        Target(n, on, draw(rows) & ~on if draw(st.booleans()) else 0)
        for on in (draw(rows) for _ in range(count))
    )


@given(wants())
def test_every_diagram_is_right(targets: tuple[Target, ...]) -> None:
    for order in permutations(range(targets[0].n)):
        assert is_right(diagram(targets, order), targets)


@given(wants(), st.randoms(use_true_random=False))
def test_a_selector_that_the_goal_accepts_is_right(targets: tuple[Target, ...], random) -> None:
    order = list(range(targets[0].n))
    random.shuffle(order)
    mesh = selector(targets, order)
    goal = Goal(targets[0].n, targets)
    if mesh is not None:
        assert goal.accepts(mesh) == is_right(mesh, targets)


# Shannon 1938 (n(n+1) contacts, as n(n+1)/2 changeovers), seen
@pytest.mark.parametrize("n", [3, 4, 5])
def test_selector_of_exact_counts_is_the_lattice(n: int) -> None:
    targets = tuple(
        Target(n, sum(1 << row for row in range(1 << n) if row.bit_count() == k))
        for k in range(n + 1)
    )
    mesh = selector(targets, range(n))
    assert mesh is not None
    assert len(mesh.poles) == n * (n + 1) // 2
    assert is_right(mesh, targets)


# Shannon 1938: odd parity of n relays as 2(n-1) changeovers, from 2n - 1 diagram nodes
def test_walk_reaches_published_parity() -> None:
    odd = (Target(3, sum(1 << row for row in range(8) if row.bit_count() % 2)),)
    assert len(fewest_nodes(odd).poles) == 5
    walk = Walk(fewest_nodes(odd), Goal(3, odd), seed=1)
    for _ in range(60):
        walk.step()
    assert len(walk.best.poles) == 4
    assert is_right(walk.best, odd)


@settings(max_examples=15, deadline=None)
@given(wants(3, 2), st.integers(0, 9))
def test_walks_stay_right_and_never_get_dearer(targets: tuple[Target, ...], seed: int) -> None:
    walk = Walk(fewest_nodes(targets), Goal(targets[0].n, targets), seed=seed)
    start = cost(walk.best)
    for _ in range(6):
        walk.step()
        assert is_right(walk.here, targets)
    assert cost(walk.best) <= start
    assert is_right(walk.best, targets)


@settings(max_examples=8, deadline=None)
@given(wants(3, 2), st.integers(0, 9))
def test_ladders_stay_ladders_and_isolation_holds(targets: tuple[Target, ...], seed: int) -> None:
    n, loads = targets[0].n, range(len(targets))
    goal = Goal(n, targets, ladder=True, isolated=frozenset(loads))
    usable = [mesh for mesh in starts(targets, 40) if goal.accepts(mesh)]
    if not usable:
        return
    walk = Walk(usable[0], goal, seed=seed)
    for _ in range(4):
        walk.step()
        network = network_of(walk.here, n)
        assert series_parallel(network)
        assert not back_feeds(network, [f"Z{k}" for k in loads])
        assert is_right(walk.here, targets)


def test_separate_contacts_and_budgets_are_honoured() -> None:
    odd = (Target(3, sum(1 << row for row in range(8) if row.bit_count() % 2)),)
    changeovers = fewest_nodes(odd)
    assert not Goal(3, odd, separate={0: (9, 9)}).accepts(changeovers)
    use = [sum(pole.relay == k for pole in changeovers.poles) for k in range(3)]
    relay = use.index(max(use))
    assert Goal(3, odd, budgets={relay: max(use)}).excess(changeovers) == 0
    assert Goal(3, odd, budgets={relay: max(use) - 1}).excess(changeovers) == 1
    assert Goal(3, odd, budgets={relay: 1}, repeaters=True).excess(changeovers) == max(use) - 1


def test_walks_keep_to_a_budget_from_a_start_that_breaks_it() -> None:
    # the diagram of odd parity of 3 has 2 poles on two relays; 1 2 1 is the least (4 poles)
    odd = (Target(3, sum(1 << row for row in range(8) if row.bit_count() % 2)),)
    goal = Goal(3, odd, budgets={0: 1, 2: 1})
    start = fewest_nodes(odd)
    assert goal.excess(start)
    walk = Walk(start, goal, seed=1)
    for _ in range(120):
        walk.step()
    assert goal.excess(walk.best) == 0
    assert is_right(walk.best, odd)


@given(wants())
def test_mesh_and_network_say_the_same(targets: tuple[Target, ...]) -> None:
    mesh = fewest_nodes(targets)
    n = targets[0].n
    back = from_network(network_of(mesh, n))
    assert behaviour(network_of(back, n)) == behaviour(network_of(mesh, n))
    assert cost(back) == cost(mesh) == network_of(mesh, n).cost()
    assert trim(mesh) == mesh


SEGMENT_TOP = Target(4, 0b1111101101, 0xFFFF & ~0b1111111111)  # segment a, published-checks


def errand() -> Errand:
    targets = (SEGMENT_TOP, Target(4, 0x6996))
    return Errand(tuple(starts(targets, 4)), Goal(4, targets))


def test_equal_effort_gives_equal_networks() -> None:
    runs = [
        explore([errand()], seconds=None, effort=12, seed=5, workers=workers).standings
        for workers in (1, 2)
    ]
    assert runs[0] == runs[1]
    assert runs[0][0].best is not None


def test_time_is_kept() -> None:
    done = explore([errand()], seconds=1.5, effort=None, seed=0, workers=1)
    assert 1.4 < done.seconds < 2.5
    assert done.standings[0].best is not None


def test_interrupt_keeps_the_best_so_far() -> None:
    def stop(progress: Progress) -> None:
        if progress.standings[0].best is not None:
            raise KeyboardInterrupt

    done = explore([errand()], seconds=60, effort=None, seed=0, workers=1, watch=stop)
    assert done.interrupted
    assert done.standings[0].best is not None


def killed(*_: object) -> Iterator[Found]:
    """A worker that finds something and is then killed by the system."""
    yield Found(1, errand().starts[0])
    os.kill(os.getpid(), signal.SIGKILL)


def test_a_crashed_worker_leaves_the_best(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(portfolio, "wander", killed)
    done = explore([errand()], seconds=20, effort=10, seed=0, workers=2)
    assert done.standings[0].best == errand().starts[0]
    assert done.standings[0].crashed == 2


def test_wander_stops_soon_at_a_proved_bound() -> None:
    e = errand()
    few = len(min(e.starts, key=cost).poles)
    news = list(wander(e.starts, e.goal, 1, None, enough=few))
    assert news[-1].windows < 60


def garbage() -> Iterator[int]:
    yield 1
    os.write(1, b"not a pickle")  # goes to standard error: the channel is kept apart
    yield 2


def fails() -> Iterator[int]:
    yield 1
    raise ValueError("no")


@pytest.mark.parametrize(
    ("work", "values", "failure"),
    [(garbage, [1, 2], False), (fails, [1], True), (killed, None, True)],
)
def test_streams_report_their_end(work, values, failure) -> None:
    inbox: Queue[Event] = Queue()
    stream = Stream(work, inbox=inbox, name=7)
    got = []
    while not (event := inbox.get(timeout=30)).ended:
        got.append(event.value)
    stream.close()
    assert (event.failure is not None) == failure
    assert event.name == 7
    if values is not None:
        assert got == values


def test_starts_that_differ_in_what_is_left_unwired_are_put_in_order() -> None:
    targets = (Target(2, 8, 6), Target(2, 3))
    found = starts(targets, 12)
    assert [len(mesh.poles) for mesh in found] == sorted(len(mesh.poles) for mesh in found)
    goal = Goal(2, targets)
    assert any(is_right(mesh, targets) for mesh in found if goal.accepts(mesh))
