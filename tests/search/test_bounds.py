"""Bounds hold for networks that exist, and reach the published least where they can."""

from __future__ import annotations

from itertools import permutations, product
from random import Random

import plainsearch
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.search.alike import Symmetries, moved
from contactlogic.search.bounds import demands, least_by_load, private_rows
from contactlogic.search.cases import Budget
from contactlogic.search.problem import Problem, groupings
from contactlogic.search.restriction import Restrictions, restricted
from contactlogic.truth import Target

NAMES = tuple("ABCDEFGH")


def joined(n, poles, net):
    """Table of "net 0 and `net` are joined", by plain search of each row."""
    table = 0
    for row in range(1 << n):
        reached = {0}
        for _ in poles:
            for relay, common, make, break_ in poles:
                throw = make if row >> relay & 1 else break_
                if throw is not None and {common, throw} & reached:
                    reached |= {common, throw}
        table |= (net in reached) << row
    return table


@st.composite
def networks(draw, most_relays=4, most_poles=8):
    n = draw(st.integers(2, most_relays))
    nets = st.integers(0, 7)
    ends = st.one_of(st.none(), nets)
    poles = draw(
        st.lists(
            st.tuples(st.integers(0, n - 1), nets, nets, ends), min_size=1, max_size=most_poles
        )
    )
    return n, poles


def wanted(n, poles):
    """The problem that a network solves with the loads that are neither always on nor always off.

    Where loads behave alike one of them stands for all.
    """
    tables = {joined(n, poles, net): None for net in range(1, 8)}
    loads = [t for t in tables if t not in (0, (1 << (1 << n)) - 1)]
    return Problem(NAMES[:n], {f"X{k}": Target(n, table) for k, table in enumerate(loads)})


@given(networks())
@settings(max_examples=150, deadline=None)
def test_what_a_network_does_never_demands_more_poles_than_it_has(network):
    n, poles = network
    problem = wanted(n, poles)
    counts = [sum(pole[0] == i for pole in poles) for i in range(n)]
    way = next(groupings(problem))
    for demand in [*demands(problem, way), *least_by_load(problem)]:
        assert demand.met(counts), demand


@given(networks(most_relays=3, most_poles=5))
@settings(max_examples=40, deadline=None)
def test_smaller_problems_never_demand_more_poles_than_a_network_has(network):
    n, poles = network
    problem = wanted(n, poles)
    counts = [sum(pole[0] == i for pole in poles) for i in range(n)]
    smaller = Restrictions(problem, seed=0, solver="cadical153")
    for demand in smaller.work(Budget(), 500):
        assert demand.met(counts), demand


@pytest.mark.parametrize("seed", range(12))
def test_private_rows_never_ask_for_more_than_plain_search_finds(seed):
    random = Random(seed)
    loads = []
    for _ in range(random.choice((2, 3, 3))):
        states = [random.choice("100--") for _ in range(4)]
        on = sum((s == "1") << r for r, s in enumerate(states))
        loads.append((on, sum((s == "-") << r for r, s in enumerate(states))))
    least = plainsearch.least(2, loads, most=3)
    assert least is None or private_rows([Target(2, *load) for load in loads]) <= least


@pytest.mark.parametrize("n", [1, 2, 3, 4])
def test_full_tree_needs_one_pole_less_than_it_has_loads(n):
    # design.md and the trade: a full tree of n relays takes 2^n - 1 changeovers.
    assert private_rows([Target(n, 1 << row) for row in range(1 << n)]) == 2**n - 1


def test_one_of_ten_needs_nine_poles_with_the_other_codes_free():
    free = sum(1 << row for row in range(10, 16))
    assert private_rows([Target(4, 1 << row, free) for row in range(10)]) == 9


def test_a_row_with_all_loads_off_takes_a_pole_more():
    assert private_rows([Target(2, 1 << row) for row in range(3)]) == 3


def test_separate_contacts_are_the_last_of_one_load_each():
    assert private_rows([Target(2, 1 << row) for row in range(4)], pairs=False) == 4


def test_a_target_moves_as_its_relays_are_renamed_and_negated():
    target = Target(3, 0b01100010, 0b00010001)
    for perm in permutations(range(3)):
        for mask in range(8):
            turned = moved(target, perm, mask)
            for row in range(8):
                there = sum((row >> i & 1 ^ mask >> i & 1) << perm[i] for i in range(3))
                assert turned.on >> there & 1 == target.on >> row & 1
                assert turned.free >> there & 1 == target.free >> row & 1


def test_a_comparator_may_trade_its_numbers_with_its_loads():
    def load(compare):
        rows = product((0, 1), repeat=4)  # the last relay varies fastest
        return Target(
            4,
            sum(
                bool(compare(2 * a + b, 2 * c + d)) << (a + 2 * b + 4 * c + 8 * d)
                for a, b, c, d in rows
            ),
        )

    wants = {"LT": load(int.__lt__), "EQ": load(int.__eq__), "GT": load(int.__gt__)}
    problem = Problem(NAMES[:4], wants)
    alike = Symmetries(problem, next(groupings(problem)))
    assert alike.foremost((2, 2, 1, 1))
    assert not alike.foremost((1, 1, 2, 2))
    assert alike.foremost((2, 1, 1, 1))
    assert alike.foremost((1, 2, 1, 1))


def test_holding_a_relay_leaves_the_rows_in_which_it_stands_so():
    problem = Problem(NAMES[:2], {"X": Target(2, 0b0110), "Y": Target(2, 0b1000)})
    held = restricted(problem, (1,), 0b01)
    assert held.relays == ("B",)
    assert set(held.targets.values()) == {Target(1, 0b01), Target(1, 0b10)}
    assert set(restricted(problem, (1,), 0b00).targets.values()) == {Target(1, 0b10)}
