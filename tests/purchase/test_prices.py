"""Prices for the search: against every purchase there is, and never above what a network costs."""

from __future__ import annotations

import pickle
from decimal import Decimal
from itertools import combinations_with_replacement, permutations

from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import networks

from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole, PoleCount, conduction
from contactlogic.purchase.parts import Contacts, Part
from contactlogic.purchase.prices import OUT_OF_REACH, Prices, least_price, wired_apart
from contactlogic.truth import Target, all_rows


def part(name: str, cents: int, **counts: int) -> Part:
    return Part(name, Contacts(**counts), None, None, Decimal(cents) / 100)


PARTS = st.lists(
    st.tuples(
        st.integers(0, 999),
        st.sampled_from(
            [{"a": 1}, {"b": 1}, {"c": 1}, {"c": 2}, {"a": 1, "b": 1}, {"d": 1}, {"a": 1, "c": 1}]
        ),
    ),
    min_size=1,
    max_size=3,
).map(lambda made: [part(f"p{k}", cents, **counts) for k, (cents, counts) in enumerate(made)])

SERVES = {"A": "m", "B": "b", "C": "mbc", "D": "mb"}


def dearest_first(parts: list[Part], wants: str) -> int | None:
    """The cheapest multiset of parts that can be wired as wanted, by trying all."""
    best = None
    for size in range(len(wants) + 1):
        for pieces in combinations_with_replacement(parts, size):
            spelt = [
                letter
                for piece in pieces
                for letter, count in zip(
                    "ABCD",
                    (piece.contacts.a, piece.contacts.b, piece.contacts.c, piece.contacts.d),
                    strict=True,
                )
                for _ in range(count)
            ]
            fits = any(
                all(use in SERVES[letter] for letter, use in zip(order, wants, strict=True))
                for order in permutations(spelt, len(wants))
            )
            if fits:
                price = sum(int(piece.price * 100) for piece in pieces)
                best = price if best is None else min(best, price)
    return best


@settings(max_examples=60)
@given(PARTS, st.tuples(*[st.integers(0, 1)] * 2, st.integers(0, 2)))
def test_the_price_of_a_relay(parts: list[Part], wants: tuple[int, int, int]) -> None:
    makes, breaks, overs = wants
    count = PoleCount(makes, breaks, overs)
    plain = dearest_first(parts, "m" * makes + "b" * breaks + "c" * overs)
    together = Prices(parts, together=True).of("K", count)
    assert min(together, OUT_OF_REACH) == (OUT_OF_REACH if plain is None else plain)
    ways = [
        dearest_first(parts, "m" * (makes + k) + "b" * (breaks + k) + "c" * (overs - k))
        for k in range(min(overs, 1) + 1)
    ]
    possible = [way for way in ways if way is not None]
    apart = Prices(parts).of("K", PoleCount(makes, breaks, min(overs, 1)))
    if overs <= 1:
        assert min(apart, OUT_OF_REACH) == min(possible, default=OUT_OF_REACH)


def job_of(network: Network) -> Job:

    n = len(network.relays)
    live = conduction(network)
    loads = tuple(
        Load(name, Target(n, 0 if net is None else live[net]))
        for name, net in network.loads.items()
    )
    return Job("test", network.relays, loads, all_rows(n))


@given(networks(relays=3, poles=5), PARTS, st.sampled_from([0, 10]))
def test_no_network_costs_less_than_the_bound(
    network: Network, parts: list[Part], spares: int
) -> None:
    prices = Prices(parts)
    cents = -(-prices(network) * (100 + spares) // 100)  # every real price is in whole cents
    bound = least_price(job_of(network), prices, 0, spares)
    known = least_price(job_of(network), prices, len(network.poles), spares)
    assert 100 * bound <= 100 * known <= cents


@given(networks(relays=3, poles=5), PARTS)
def test_wired_apart_the_network_does_the_same_at_its_price(
    network: Network, parts: list[Part]
) -> None:
    prices = Prices(parts)
    apart = wired_apart(network, prices)
    apart.assert_consistent()
    assert Prices(parts, together=True)(apart) == prices(network)
    assert job_of(apart) == job_of(network)


TURN = Network(("A",), "L", {"X": "n1", "Y": "n2"}, (Pole("A", 1, "L", "n1", "n2"),))


def test_a_changeover_is_wired_apart_where_that_is_cheaper() -> None:
    cheap = Prices([part("over", 500, c=1), part("pair", 300, a=1, b=1)])
    assert cheap(TURN) == 300
    assert wired_apart(TURN, cheap).poles == (
        Pole("A", 1, "L", "n1"),
        Pole("A", 2, "L", None, "n2"),
    )
    kept = Prices([part("over", 500, c=1), part("pair", 300, a=1, b=1)], most={"A": 1})
    assert (kept(TURN), wired_apart(TURN, kept)) == (500, TURN)


def test_what_is_there_already_costs_nothing() -> None:
    parts = [part("one", 200, c=1)]
    two = PoleCount(changeovers=2)
    assert Prices(parts).of("A", two) == 400
    assert Prices(parts, have={"A": Contacts(c=1)}).of("A", two) == 200
    assert Prices(parts, free=["A"]).of("A", two) == 0
    assert Prices(parts, repeaters=False).of("A", two) >= OUT_OF_REACH


def test_a_relay_that_turns_a_load_on_and_off_needs_both_contacts() -> None:
    exclusive = Job("test", ("A", "B"), (Load("X", Target(2, 0b0110)),), 0b1111)
    prices = Prices([part("make", 100, a=1), part("break", 100, b=1), part("over", 350, c=1)])
    assert least_price(exclusive, prices, 2) == Decimal("4.00")
    assert least_price(exclusive, prices, 2, 10) == Decimal("4.40")


def test_prices_can_be_pickled() -> None:
    prices = Prices([part("one", 200, c=1)])
    assert pickle.loads(pickle.dumps(prices))(TURN) == prices(TURN) == 200
