"""Plans, order and pairing, taps and recognition, each against brute force."""

from itertools import permutations, product

import networkx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.ladder.arrange import Rules, arrange
from contactlogic.ladder.build import Edge, build, pair
from contactlogic.ladder.candidates import least_tree
from contactlogic.ladder.plan import Branch, Plan, plan_rungs
from contactlogic.ladder.recognise import load_tree, series_parallel
from contactlogic.ladder.selecting import selecting_tree
from contactlogic.ladder.taps import tap_loads
from contactlogic.ladder.tree import (
    Leaf,
    Parallel,
    Series,
    Tree,
    contact_count,
    fewest_poles,
    parallel,
    series,
    table,
)
from contactlogic.network import Network, Pole, conduction
from contactlogic.truth import Target, all_rows

RELAYS = ("A", "B", "C", "D")


def trees(depth: int = 2) -> st.SearchStrategy[Tree]:
    leaf = st.builds(Leaf, st.integers(0, 3), st.booleans())
    if depth == 0:
        return leaf
    inner = st.lists(trees(depth - 1), min_size=2, max_size=3)
    return st.one_of(leaf, inner.map(series), inner.map(parallel))


def orders(tree: Tree) -> list[Tree]:
    if isinstance(tree, Leaf):
        return [tree]
    choices = [orders(part) for part in tree.parts]
    if isinstance(tree, Parallel):
        return [Parallel(parts) for parts in product(*choices)]
    return [Series(p) for parts in product(*choices) for p in permutations(parts)]


@settings(deadline=None, max_examples=60)
@given(st.lists(trees(), min_size=1, max_size=2))
def test_engine_finds_the_fewest_poles_of_all_orders(wanted: list[Tree]) -> None:
    names = [f"Z{k}" for k in range(len(wanted))]
    plan = plan_rungs(wanted, share=False)
    every = list(product(*(orders(b.tree) for b in plan.branches)))
    if len(every) > 3000:
        return
    least = min(
        len(
            build(
                Plan(
                    tuple(
                        Branch(b.start, b.end, t) for b, t in zip(plan.branches, order, strict=True)
                    ),
                    plan.loads,
                ),
                RELAYS,
                names,
            ).poles
        )
        for order in every
    )
    found = arrange(plan, Rules())
    assert found is not None
    assert found.least
    assert found.poles == least == len(build(found.plan, RELAYS, names).poles)
    assert least >= fewest_poles(b.tree for b in plan.branches)


@given(st.lists(trees(), min_size=1, max_size=3), st.booleans())
def test_plans_keep_every_function(wanted: list[Tree], share: bool) -> None:
    names = [f"Z{k}" for k in range(len(wanted))]
    network = build(plan_rungs(wanted, share), RELAYS, names)
    network.assert_consistent()
    live = conduction(network)
    for name, tree in zip(names, wanted, strict=True):
        assert live[network.loads[name]] == table(tree, 4)
    assert series_parallel(network)


@given(trees(3))
def test_recognised_tree_equals_what_was_built(tree: Tree) -> None:
    network = build(plan_rungs([tree], share=False), RELAYS, ["Z"])
    seen = load_tree(network, "Z")
    assert seen is not None
    assert not isinstance(seen, bool)
    assert table(seen, 4) == table(tree, 4)
    assert contact_count(seen) == contact_count(tree)


def test_shannon_figure_10_is_no_ladder() -> None:
    # RU + SV + RTV + STU, five contacts as a bridge (Shannon 1938 fig. 10, seen)
    relays = ("R", "S", "T", "U", "V")
    poles = (
        Pole("R", 1, "L", "a"),
        Pole("S", 1, "L", "b"),
        Pole("T", 1, "a", "b"),
        Pole("U", 1, "a", "z"),
        Pole("V", 1, "b", "z"),
    )
    network = Network(relays, "L", {"Z": "z"}, poles)
    assert load_tree(network, "Z") is None
    assert not series_parallel(network)


@given(
    st.lists(
        st.builds(
            Edge,
            st.sampled_from("AB"),
            st.booleans(),
            st.sampled_from("pqr"),
            st.sampled_from("stu"),
        ),
        max_size=8,
    )
)
def test_pairing_is_a_largest_matching(edges: list[Edge]) -> None:
    poles = pair(edges, ("A", "B"))
    most = 0
    for relay in "AB":
        own = [e for e in edges if e.relay == relay]
        graph = networkx.Graph()
        for i, j in product(range(len(own)), repeat=2):
            meets = {own[i].near, own[i].far} & {own[j].near, own[j].far}
            if own[i].make and not own[j].make and meets:
                graph.add_edge(i, j)
        most += len(networkx.max_weight_matching(graph, maxcardinality=True))
    assert len(poles) == len(edges) - most
    wired = sorted(
        (p.relay, throw, *sorted((p.common, net)))
        for p in poles
        for throw, net in ((True, p.make), (False, p.break_))
        if net is not None
    )
    assert wired == sorted((e.relay, e.make, *sorted((e.near, e.far))) for e in edges)


def test_separate_contacts_never_pair() -> None:
    edges = [Edge("A", True, "L", "x"), Edge("A", False, "L", "y")]
    assert len(pair(edges, ("A",))) == 1
    assert len(pair(edges, ("A",), separate={"A"})) == 2


def test_budget_is_kept_or_refused() -> None:
    # A B + A' C with the two contacts of A on one changeover needs one pole of A, never none
    tree = parallel(
        [series([Leaf(0, True), Leaf(1, True)]), series([Leaf(0, False), Leaf(2, True)])]
    )
    plan = plan_rungs([tree], share=False)
    kept = arrange(plan, Rules(poles={0: 1}))
    assert kept is not None
    assert kept.poles == 3
    assert arrange(plan, Rules(poles={0: 0})) is None


# Shannon 1949, Moore 1960 (seen in abstract): 2**n - 1 changeovers select one of 2**n loads
@pytest.mark.parametrize("n", [1, 2, 3, 4])
def test_full_selecting_tree(n: int) -> None:
    targets = [Target(n, 1 << row) for row in range(1 << n)]
    plan = selecting_tree(targets, least_tree)
    names = [f"D{row}" for row in range(1 << n)]
    network = build(plan, RELAYS[:n], names)
    live = conduction(network)
    assert len(network.poles) == 2**n - 1
    assert all(live[network.loads[f"D{row}"]] == 1 << row for row in range(1 << n))


@settings(deadline=None, max_examples=50)
@given(st.lists(st.tuples(st.integers(1, 0xFE), st.integers(0, 0xFF)), min_size=2, max_size=3))
def test_selecting_and_taps_keep_every_target(wants: list[tuple[int, int]]) -> None:
    targets = [Target(3, on, free & ~on) for on, free in wants]
    names = [f"Z{k}" for k in range(len(targets))]
    by_name = dict(zip(names, targets, strict=True))
    network = build(selecting_tree(targets, least_tree), RELAYS[:3], names)
    tapped = tap_loads(network, by_name, lambda _: True, ())
    assert tapped.cost() <= network.cost()
    assert series_parallel(tapped)
    for made in (network, tapped):
        live = conduction(made)
        for name, target in by_name.items():
            net = made.loads[name]
            assert target.accepts(0 if net is None else live[net])


def test_a_load_is_tapped_from_anothers_joint() -> None:
    # LAMP = A B C, HORN = A B: HORN is the joint before C, three contacts in all
    lamp, horn = Target(3, 0b10000000), Target(3, 0b10001000)
    trees_ = [least_tree(lamp), least_tree(horn)]
    network = build(plan_rungs(trees_, share=True), RELAYS[:3], ["LAMP", "HORN"])
    assert len(network.poles) == 3
    apart = build(plan_rungs(trees_, share=False), RELAYS[:3], ["LAMP", "HORN"])
    tapped = tap_loads(apart, {"LAMP": lamp, "HORN": horn}, lambda _: True, ())
    assert len(tapped.poles) == 3
    assert conduction(tapped)[tapped.loads["HORN"]] == horn.on


def test_constant_loads() -> None:
    network = build(plan_rungs([True, False], share=True), ("A",), ["ON", "OFF"])
    assert network.loads == {"ON": "L", "OFF": None}
    assert load_tree(network, "ON") is True
    assert load_tree(network, "OFF") is False
    assert all_rows(1) == 0b11
