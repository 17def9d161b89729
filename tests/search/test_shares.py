"""What sets of relays need by look-up, and budgets seen at once to be too small."""

from __future__ import annotations

from random import Random

import plainsearch
import pytest

from contactlogic.job.model import SeparateContacts
from contactlogic.search.problem import Problem
from contactlogic.search.shares import (
    Shortfall,
    least_at_once,
    least_for_relay,
    least_of_sets,
    shortfall,
)
from contactlogic.truth import Target

NAMES = tuple("ABCDEFGH")


def parity(n: int) -> Target:
    return Target(n, sum((row.bit_count() & 1) << row for row in range(1 << n)))


def problem(n: int, *loads: Target, **limits: object) -> Problem:
    return Problem(NAMES[:n], {f"X{k}": load for k, load in enumerate(loads)}, **limits)  # type: ignore[arg-type]


def test_each_three_of_five_relays_of_a_parity_need_four_poles():
    # Odd parity of n relays takes 2(n - 1) poles: memory of the trade, proved by the exact search.
    least = least_of_sets(problem(5, parity(5)))
    assert {least[mask] for mask in least if mask.bit_count() == 3} == {4}
    assert {least[mask] for mask in least if mask.bit_count() == 4} == {6}


def test_one_load_of_four_relays_is_not_looked_up_whole():
    assert 15 not in least_of_sets(problem(4, parity(4)))
    assert 15 in least_of_sets(problem(4, parity(4), Target(4, 1)))


@pytest.mark.parametrize("seed", range(8))
def test_no_network_uses_fewer_poles_of_a_set_than_looked_up(seed):
    random = Random(seed)
    states = [random.choice("011-") for _ in range(8)]
    on = sum((s == "1") << r for r, s in enumerate(states))
    load = (on, sum((s == "-") << r for r, s in enumerate(states)))
    for mask, poles in least_of_sets(problem(3, Target(3, *load))).items():
        one, other = [i for i in range(3) if mask >> i & 1]
        for split in range(poles):  # one pole less than looked up, shared out in every way
            budgets = {one: split, other: poles - 1 - split}
            assert plainsearch.least(3, [load], budgets=budgets, most=3) is None


@pytest.mark.parametrize("n", range(2, 9))
def test_odd_parity_is_bounded_without_search(n):
    # 2(n - 1) from five relays on, since four take six (trade; proved by the exact search)
    assert least_at_once(problem(n, parity(n))) == (2 * (n - 1) if n != 3 else 3)


@pytest.mark.parametrize("seed", range(12))
def test_bounds_at_once_hold_for_small_jobs(seed):
    random = Random(f"at once {seed}")
    loads = [(random.getrandbits(4), random.getrandbits(4)) for _ in range(2)]
    loads = [(on, free & ~on) for on, free in loads]
    least = plainsearch.least(2, loads, most=4)
    assert least is not None
    assert least >= least_at_once(problem(2, *(Target(2, *load) for load in loads)))


def test_a_relay_no_load_needs_takes_no_pole():
    assert least_for_relay(problem(2, Target(2, 0b1010)), "B") == 0
    assert least_for_relay(problem(2, Target(2, 0b1010)), "A") == 1


def test_isolated_loads_that_follow_one_relay_take_a_pole_each():
    loads = [Target(2, 0b1010), Target(2, 0b1000)]
    names = frozenset({"X0", "X1"})
    own = problem(2, *loads, isolated=names)
    assert least_for_relay(own, "A") == 2
    assert (
        plainsearch.least(
            2, [(t.on, t.free) for t in loads], isolated=[0, 1], budgets={0: 1}, most=3
        )
        is None
    )


@pytest.mark.parametrize(
    ("limits", "want"),
    [
        ({"budgets": {"A": 0}}, Shortfall(("A",), 0, 1)),
        ({"budgets": {"A": 1, "B": 1, "C": 1}}, Shortfall(("A", "B", "C"), 3, 4)),
        ({"budgets": {"A": 1, "B": 1, "C": 2}}, None),
        ({"budgets": {"A": 1, "D": 1}}, None),
        (
            {"separate": {"A": SeparateContacts(0, 5)}},
            Shortfall(("A",), 0, 1, "makes"),
        ),
        ({"separate": {"A": SeparateContacts(5, 5)}}, None),
    ],
)
def test_budgets_that_no_network_keeps_are_seen_at_once(limits, want):
    assert shortfall(problem(4, parity(4), **limits)) == want


def test_a_whole_job_over_its_budgets_names_all_relays():
    # a full tree of two relays takes three poles (trade)
    tree = [Target(2, 1 << row) for row in range(4)]
    assert shortfall(problem(2, *tree, budgets={"A": 1, "B": 1})) == Shortfall(("A", "B"), 2, 3)
    assert shortfall(problem(2, *tree, budgets={"A": 1, "B": 2})) is None
