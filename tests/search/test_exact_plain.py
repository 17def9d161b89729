"""The exact search against the plainest clauses, over every kind of limit."""

from __future__ import annotations

from random import Random

import plainsearch
import pytest

from contactlogic.job.model import SeparateContacts
from contactlogic.search.exact import exact, prove
from contactlogic.search.problem import Problem
from contactlogic.truth import Target

NAMES = tuple("ABCD")
QUICK = [
    # relays, loads, kind of limit, most poles compared, seeds
    (2, 2, "", 4, range(8)),
    (2, 3, "", 4, range(6)),
    (3, 1, "", 3, range(10)),
    (3, 2, "", 3, range(3)),
    (2, 2, "isolated", 3, range(10)),
    (2, 3, "isolated", 3, range(3)),
    (2, 2, "budgets", 4, range(12)),
    (3, 2, "budgets", 3, range(3)),
    (2, 2, "separate", 4, range(10)),
    (2, 2, "contacts", 3, range(8)),
    (2, 1, "contacts budgets", 5, range(12)),
    (2, 2, "contacts budgets", 3, range(6)),
    (2, 2, "separate isolated budgets", 3, range(8)),
]
LONG = [
    (2, 3, "", 4, range(100, 140)),
    (3, 1, "", 4, range(100, 160)),
    (3, 2, "", 4, range(100, 115)),
    (2, 3, "isolated", 4, range(100, 120)),
    (2, 2, "contacts", 4, range(100, 112)),
    (2, 2, "contacts isolated", 4, range(100, 108)),
    (2, 2, "contacts budgets", 5, range(100, 108)),
]


def agree(n, loads, limits, most, seed):
    random = Random(f"{n} {loads} {limits} {seed}")
    wants = []
    for _ in range(loads):
        states = ["0"]
        while not {"0", "1"} <= set(states):
            states = [random.choice("0011-") for _ in range(1 << n)]
        on = sum((state == "1") << row for row, state in enumerate(states))
        wants.append((on, sum((state == "-") << row for row, state in enumerate(states))))
    isolated = [k for k in range(loads) if "isolated" in limits and random.random() < 0.7]
    budgets = {i: random.choice((1, 1, 2)) for i in range(n) if "budgets" in limits}
    single = [i for i in range(n) if "separate" in limits and random.random() < 0.6]
    contacts = "contacts" in limits
    problem = Problem(
        NAMES[:n],
        {f"X{k}": Target(n, *want) for k, want in enumerate(wants)},
        {NAMES[i]: limit for i, limit in budgets.items()},
        {NAMES[i]: SeparateContacts(9, 9) for i in single},
        frozenset(f"X{k}" for k in isolated),
        "contacts" if contacts else "poles",
    )
    found = exact(problem, most=most, seed=seed)
    least = plainsearch.least(
        n,
        wants,
        isolated=isolated,
        budgets=budgets,
        single=single,
        contacts=contacts,
        most=min(most, found.at_least),
    )
    assert (found.at_least if found.network else None) == least
    if found.feasible:
        assert found.proven == (found.network is not None)
        assert found.network is not None or found.at_least == most + 1
    if found.network is not None:
        use = found.network.per_relay()
        assert all(use[NAMES[i]].poles <= limit for i, limit in budgets.items())


@pytest.mark.parametrize(
    ("n", "loads", "limits", "most", "seeds"), QUICK, ids=[f"{c[0]}-{c[1]}-{c[2]}" for c in QUICK]
)
def test_as_few_poles_as_plain_search(n, loads, limits, most, seeds):
    for seed in seeds:
        agree(n, loads, limits, most, seed)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("n", "loads", "limits", "most", "seeds"), LONG, ids=[f"{c[0]}-{c[1]}-{c[2]}" for c in LONG]
)
def test_as_few_poles_as_plain_search_at_length(n, loads, limits, most, seeds):
    for seed in seeds:
        agree(n, loads, limits, most, seed)


def parity(n):
    return Problem(
        NAMES[:n], {"X": Target(n, sum((row.bit_count() & 1) << row for row in range(1 << n)))}
    )


def test_news_rises_and_ends_with_the_network():
    news = list(prove(parity(3)))
    assert [step.at_least for step in news] == sorted(step.at_least for step in news)
    assert [step.network is None for step in news] == [True] * (len(news) - 1) + [False]
    assert [step.finished for step in news] == [False] * (len(news) - 1) + [True]
    assert len(news[-1].network.poles) == news[-1].at_least == 4


def test_news_ends_once_the_known_network_is_proved_least():
    known = exact(parity(3)).network
    news = list(prove(parity(3), known=known))
    assert (news[-1].at_least, news[-1].finished, news[-1].network) == (4, True, None)


def test_equal_conflicts_give_equal_news():
    once = list(prove(parity(4), conflicts=6000, seed=3))
    assert once == list(prove(parity(4), conflicts=6000, seed=3))
    assert not once[-1].finished


def test_big_problems_get_their_bound_and_no_search():
    # Each relay of a parity of ten matters, and the search is for up to eight.
    wide = Problem(
        tuple(f"K{k}" for k in range(10)),
        {"X": Target(10, sum((row.bit_count() & 1) << row for row in range(1 << 10)))},
    )
    assert [(step.at_least, step.finished) for step in prove(wide)] == [(10, False)]


def test_second_solver_refutes_what_the_first_did():
    assert exact(parity(3), most=3, solver="glucose4").at_least == 4
    loads = {"S": parity(3).targets["X"], "C": Target(3, 0b11101000)}
    assert exact(Problem(NAMES[:3], loads), most=5, solver="glucose4").at_least == 6
