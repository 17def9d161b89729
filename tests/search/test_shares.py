"""What sets of relays need by look-up, and budgets seen at once to be too small."""

from __future__ import annotations

from random import Random

import plainsearch
import pytest

from contactlogic.job.model import SeparateContacts
from contactlogic.search.problem import Problem
from contactlogic.search.shares import Shortfall, least_for_relay, least_of_sets, shortfall
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


@pytest.mark.parametrize("seed", range(30))
def test_no_network_uses_fewer_poles_of_a_set_than_looked_up(seed):
    random = Random(seed)
    loads = []
    for _ in range(random.choice((1, 2))):
        states = [random.choice("011-") for _ in range(8)]
        on = sum((s == "1") << r for r, s in enumerate(states))
        loads.append((on, sum((s == "-") << r for r, s in enumerate(states))))
    least = least_of_sets(problem(3, *(Target(3, *load) for load in loads)))
    for mask, poles in least.items():
        budgets = {i: 0 if mask == 1 << i else 3 for i in range(3)}
        # as many as the set may have at most, one less than looked up: no network is left
        kept = [i for i in range(3) if mask >> i & 1]
        for split in range(poles):
            if len(kept) == 2 and poles:
                budgets = dict(zip(kept, (split, poles - 1 - split), strict=True))
                assert plainsearch.least(3, loads, budgets=budgets, most=4) is None


def test_a_relay_no_load_needs_takes_no_pole():
    assert least_for_relay(problem(2, Target(2, 0b1010)), "B") == 0
    assert least_for_relay(problem(2, Target(2, 0b1010)), "A") == 1


def test_isolated_loads_that_follow_one_relay_take_a_pole_each():
    loads = [Target(2, 0b1010), Target(2, 0b1000), Target(2, 0b1110)]
    names = frozenset({"X0", "X1", "X2"})
    own = problem(2, *loads, isolated=names)
    assert least_for_relay(own, "A") == 2
    assert (
        plainsearch.least(
            2, [(t.on, t.free) for t in loads], isolated=[0, 1, 2], budgets={0: 1}, most=4
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
