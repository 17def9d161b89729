"""The exact search against plain enumeration and published values."""

from __future__ import annotations

import enumerator
import pytest

from contactlogic.job.model import SeparateContacts
from contactlogic.search.exact import exact
from contactlogic.search.problem import Problem
from contactlogic.truth import Target

RELAYS = ("A", "B", "C", "D", "E")


def table(n, function):
    return sum(bool(function(*(r >> i & 1 for i in range(n)))) << r for r in range(1 << n))


def problem(n, loads, **more):
    return Problem(RELAYS[:n], {name: Target(n, on) for name, on in loads.items()}, **more)


def poles(result):
    assert result.proven
    return len(result.network.poles)


def test_every_function_of_three_inputs_needs_what_enumeration_finds():
    least = {}
    for count, (names, states) in enumerate(enumerator.behaviours(3, 5, 2, keep=2)):
        for found in enumerator.joined_tables(names, states, 0, 1).tolist():
            least.setdefault(found, count)
    for last in enumerator.last_round(3, 5, states):
        for found in set(enumerator.joined_tables(names, last, 0, 1).tolist()):
            least.setdefault(found, 3)
    least[255] = 0  # load on the supply itself
    for function in range(256):
        assert poles(exact(problem(3, {"X": function}))) == least.get(function, 4), function


def test_every_pair_of_functions_of_two_inputs_needs_what_enumeration_finds():
    pairs, alone = {}, {15: 0}
    for count, (names, states) in enumerate(enumerator.behaviours(2, 6, 3, keep=3)):
        one = enumerator.joined_tables(names, states, 0, 1).tolist()
        two = enumerator.joined_tables(names, states, 0, 2).tolist()
        for pair in zip(one, two, strict=True):
            pairs.setdefault(pair, count)
            alone.setdefault(pair[0], count)
    for a in range(16):
        for b in range(a, 16):
            free = {0, 15} & {a, b} or a == b  # such a load shares a net or the supply
            want = alone[b if a in (0, 15) else a] if free else pairs.get((a, b), 4)
            assert poles(exact(problem(2, {"X": a, "Y": b}))) == want, (a, b)


@pytest.mark.parametrize("n", [2, 3])
def test_parity_takes_two_changeovers_for_each_relay_after_the_first(n):
    # Shannon 1938: 4(n-1) contacts, drawn as 2(n-1) changeovers (seen).
    assert poles(exact(problem(n, {"X": table(n, lambda *x: sum(x) % 2)}))) == 2 * (n - 1)


def test_hardest_function_of_three_inputs_in_contacts():
    # OEIS A058759: 8 contacts for n = 3 (seen); parity is among the hardest.
    odd = problem(3, {"X": table(3, lambda *x: sum(x) % 2)}, objective="contacts")
    result = exact(odd)
    assert result.proven
    assert sum(1 for _ in result.network.contacts()) == 8


def test_shannons_bridge():
    # Shannon 1938 fig. 10: RU + SV + RTV + STU takes 5 contacts as a bridge (seen).
    load = table(5, lambda r, s, t, u, v: r & u | s & v | r & t & v | s & t & u)
    result = exact(problem(5, {"X": load}, objective="contacts"))
    assert (result.at_least, result.proven) == (5, True)


def test_adder_in_six_poles():
    # design.md section 8.2: 6 is proved, by another program (seen).
    loads = {"S": table(3, lambda *x: sum(x) % 2), "C": table(3, lambda *x: sum(x) > 1)}
    assert poles(exact(problem(3, loads))) == 6


def test_budget_that_cannot_be_kept_is_told():
    majority = {"X": table(3, lambda *x: sum(x) > 1)}
    result = exact(problem(3, majority, budgets={"A": 1, "B": 1, "C": 1}))
    assert (result.feasible, result.network) == (False, None)


def test_separate_contacts_never_pair():
    apart = {"A": SeparateContacts(2, 2)}
    result = exact(problem(2, {"X": 0b0110}, separate=apart))
    assert len(result.network.poles) == 3
    assert all(None in (p.make, p.break_) for p in result.network.poles if p.relay == "A")


def test_a_known_network_is_kept_when_time_runs_out():
    odd = problem(4, {"X": table(4, lambda *x: sum(x) % 2)})
    known = exact(odd).network
    result = exact(odd, known=known, seconds=0.0, catalogue=False)
    assert result.network is known
    assert not result.proven
