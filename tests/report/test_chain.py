"""The least wire of a net against every way to join its terminals."""

from __future__ import annotations

from itertools import combinations, pairwise, permutations

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.job.model import Position
from contactlogic.report.chain import EXACT_PLACES, joined, length_of

NAMES = [f"K{i}:11" for i in range(30)]

PLACES = st.lists(st.builds(Position, st.integers(0, 4), st.integers(0, 4)), min_size=2, max_size=6)


def steps(a: Position, b: Position) -> float:
    return abs(a.row - b.row) + abs(a.column - b.column)


def wires_on(pairs: tuple[tuple[str, str], ...]) -> dict[str, int]:
    count: dict[str, int] = {}
    for pair in pairs:
        for end in pair:
            count[end] = count.get(end, 0) + 1
    return count


@given(PLACES)
@settings(max_examples=40)
def test_no_chain_is_shorter(places):
    names = NAMES[: len(places)]
    at = dict(zip(names, places, strict=True))
    pairs = joined(names, at)
    assert nx.is_tree(nx.Graph(pairs))
    assert set(nx.Graph(pairs)) == set(names)
    assert max(wires_on(pairs).values()) <= 2
    least = min(
        sum(steps(at[a], at[b]) for a, b in pairwise(order)) for order in permutations(names)
    )
    assert length_of(pairs, at) == pytest.approx(least)


@given(PLACES, st.integers(3, 4))
@settings(max_examples=30)
def test_no_tree_with_so_many_wires_to_a_terminal_is_shorter(places, most):
    names = NAMES[: len(places[:5])]
    at = dict(zip(names, places, strict=False))
    pairs = joined(names, at, per_terminal=most)
    assert nx.is_tree(nx.Graph(pairs))
    assert max(wires_on(pairs).values()) <= most
    trees = []
    for chosen in combinations(list(combinations(names, 2)), len(names) - 1):
        graph = nx.Graph(chosen)
        if set(graph) != set(names) or not nx.is_tree(graph):
            continue
        if max(degree for _, degree in graph.degree) <= most:
            trees.append(sum(steps(at[a], at[b]) for a, b in chosen))
    assert length_of(pairs, at) == pytest.approx(min(trees))


@given(
    st.lists(st.none() | st.builds(Position, st.integers(0, 3), st.integers(0, 3)), max_size=8),
    st.integers(2, 4),
)
@settings(max_examples=40)
def test_every_terminal_is_joined_wherever_positions_are_missing(places, most):
    names = NAMES[: len(places)]
    at = {n: p for n, p in zip(names, places, strict=True) if p is not None}
    pairs = joined(names, at, per_terminal=most)
    assert len(pairs) == max(0, len(names) - 1)
    if pairs:
        assert set(nx.Graph(pairs)) == set(names)
        assert nx.is_connected(nx.Graph(pairs))
        assert max(wires_on(pairs).values()) <= most


def test_without_positions_the_order_of_the_panel_is_kept() -> None:
    assert joined(NAMES[:4]) == tuple(pairwise(NAMES[:4]))


def test_many_places_are_chained_in_fair_order() -> None:
    count = EXACT_PLACES + 7
    order = [(7 * i) % count for i in range(count)]
    at = {name: Position(0, place) for name, place in zip(NAMES, order, strict=False)}
    pairs = joined(NAMES[:count], at)
    assert max(wires_on(pairs).values()) == 2
    assert nx.is_connected(nx.Graph(pairs))
    length = length_of(pairs, at)
    assert length is not None
    assert length <= 1.5 * (count - 1)  # a straight row: count - 1 is least


def test_one_wire_to_a_terminal_is_too_few() -> None:
    with pytest.raises(ValueError, match="two wires"):
        joined(NAMES[:3], per_terminal=1)
