"""The cheapest purchase, against every purchase there is."""

from __future__ import annotations

from collections import Counter
from decimal import Decimal
from itertools import combinations_with_replacement, permutations, product

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.errors import PartsError
from contactlogic.network import Network, Pole
from contactlogic.purchase import program
from contactlogic.purchase.buy import Order, Purchase, buy
from contactlogic.purchase.needs import Need, PoleNeed, needs_of
from contactlogic.purchase.parts import Coil, Contacts, Part, PartsList
from contactlogic.purchase.places import as_bought

D24 = Coil(Decimal(24))


def part(
    name: str,
    price: str,
    *,
    c: int = 0,
    a: int = 0,
    b: int = 0,
    d: int = 0,
    amps: str | None = None,
    stock: int | None = None,
    coil: Coil | None = D24,
) -> Part:
    rating = None if amps is None else Decimal(amps)
    return Part(name, Contacts(a, b, c, d), coil, rating, Decimal(price), stock)


def listed(*parts: Part) -> PartsList:
    return PartsList("parts.csv", parts)


def need(relay: str, *poles: str | tuple[str, str]) -> Need:
    """`need("K1", "make", ("break", "2.5"))`."""
    made = []
    for number, pole in enumerate(poles, start=1):
        use, amps = (pole, "0") if isinstance(pole, str) else pole
        made.append(PoleNeed(number, use, Decimal(amps)))  # type: ignore[arg-type]
    return Need(relay, tuple(made))


# ---------------------------------------------------------------- the oracle, code of its own

ALLOWED = {("A", "make"), ("B", "break"), ("C", "make"), ("C", "break"), ("C", "changeover")} | {
    ("D", "make"),
    ("D", "break"),
}


def letters(piece: Part) -> str:
    have = piece.contacts
    return "A" * have.a + "B" * have.b + "C" * have.c + "D" * have.d


def can_take(pieces: tuple[Part, ...], wanted: Need) -> bool:
    """Try every way to put the poles on the contacts."""
    contacts = [(letter, piece.amps) for piece in pieces for letter in letters(piece)]
    return any(
        all(
            (letter, pole.use) in ALLOWED and (amps is None or pole.amps <= amps)
            for (letter, amps), pole in zip(order, wanted.poles, strict=True)
        )
        for order in permutations(contacts, len(wanted.poles))
    )


def least_price(
    needs: list[Need], parts: tuple[Part, ...], spares: int, repeaters: bool
) -> Decimal | None:
    """Look at every multiset of parts for every relay."""
    ways = []
    for wanted in needs:
        most = len(wanted.poles) if repeaters else 1
        ways.append(
            [
                pieces
                for size in range(1, most + 1)
                for pieces in combinations_with_replacement(range(len(parts)), size)
                if can_take(tuple(parts[k] for k in pieces), wanted)
            ]
        )
    best = None
    for choice in product(*ways):
        used = Counter(k for pieces in choice for k in pieces)
        price = Decimal(0)
        for k, count in used.items():
            bought = count + (count * spares + 99) // 100
            if parts[k].stock is not None and bought > parts[k].stock:
                break
            price += bought * parts[k].price
        else:
            best = price if best is None else min(best, price)
    return best


USES = st.sampled_from(["make", "break", "changeover"])
AMPS = st.sampled_from(["0", "1", "3"])


@st.composite
def panels(draw: st.DrawFn) -> tuple[list[Need], tuple[Part, ...]]:
    needs = []
    for relay in ("K1", "K2", "K3")[: draw(st.integers(1, 3))]:
        poles = draw(st.lists(st.tuples(USES, AMPS), min_size=1, max_size=2))
        needs.append(need(relay, *poles))
    parts = []
    for k in range(draw(st.integers(1, 3))):
        counts = draw(
            st.sampled_from(
                [{"a": 1}, {"b": 1}, {"c": 1}, {"c": 2}, {"a": 1, "b": 1}, {"a": 2}, {"d": 1}]
            )
        )
        cents = draw(st.integers(0, 999))
        parts.append(
            part(
                f"part {k}",
                str(Decimal(cents) / 100),
                amps=draw(st.sampled_from([None, "1", "2"])),
                stock=draw(st.sampled_from([None, None, 0, 1, 2, 3])),
                **counts,
            )
        )
    return needs, tuple(parts)


def assert_right(purchase: Purchase, needs: list[Need]) -> None:
    """Every pole sits on a contact that suits it, and the items are what the units are."""
    for wanted in needs:
        own = [unit for unit in purchase.units if unit.relay == wanted.relay]
        assert own[0].name == wanted.relay
        assert sorted(p for unit in own for p, _ in unit.poles) == [
            pole.number for pole in wanted.poles
        ]
        for unit in own:
            assert unit.part is not None
            spelt = letters(unit.part)
            assert len({at for _, at in unit.poles}) == len(unit.poles)
            for number, at in unit.poles:
                pole = wanted.poles[number - 1]
                assert (spelt[at - 1], pole.use) in ALLOWED
                assert unit.part.amps is None or pole.amps <= unit.part.amps
            left = Counter(spelt) - Counter(spelt[at - 1] for _, at in unit.poles)
            assert left == Counter(
                {k: v for k, v in zip("ABCD", astuple(unit.spare), strict=True) if v}
            )
    names = [unit.name for unit in purchase.units]
    assert len(set(names)) == len(names)
    used = Counter(unit.part.name for unit in purchase.units if unit.part)
    assert {item.part.name: item.used for item in purchase.items} == used


def astuple(contacts: Contacts) -> tuple[int, ...]:
    return contacts.a, contacts.b, contacts.c, contacts.d


@settings(max_examples=150)
@given(panels(), st.sampled_from([0, 0, 10, 50, 100]), st.booleans())
def test_no_purchase_is_cheaper(
    panel: tuple[list[Need], tuple[Part, ...]], spares: int, repeaters: bool
) -> None:
    needs, parts = panel
    expected = least_price(needs, parts, spares, repeaters)
    order = Order(D24, "asked", spares, repeaters)
    if expected is None:
        with pytest.raises(PartsError):
            buy(needs, listed(*parts), order)
        return
    found = buy(needs, listed(*parts), order)
    assert (found.price, found.proved, found.at_least) == (expected, True, expected)
    assert_right(found, needs)


# ---------------------------------------------------------------- by hand


def test_a_repeater_where_it_is_cheaper_than_a_bigger_relay() -> None:
    three = need("K1", "changeover", "make", "changeover")
    parts = (part("two", "3.00", c=2), part("four", "7.00", c=4))
    found = buy([three], listed(*parts), Order(D24))
    assert [(unit.name, unit.part.name) for unit in found.units if unit.part] == [
        ("K1", "two"),
        ("K1_2", "two"),
    ]
    assert found.price == Decimal("6.00")
    assert found.notes[0].startswith("K1_2 is a repeater of K1: its coil in parallel with K1's")
    alone = buy([three], listed(*parts), Order(D24, repeaters=False))
    assert [unit.part.name for unit in alone.units if unit.part] == ["four"]
    assert alone.units[0].spare == Contacts(c=1)


def test_a_slow_relay_with_a_repeater_is_warned_of() -> None:
    slow = Need("K1", need("K1", "changeover", "changeover").poles, slow=True)
    found = buy([slow], listed(part("one", "1.00", c=1)), Order(D24))
    assert "K1 is slow: two coils shorten the hold of one capacitor" in found.notes


def test_repeaters_take_no_name_that_is_taken() -> None:
    both = [need("K1", "changeover", "changeover"), need("K1_2", "make")]
    found = buy(both, listed(part("one", "1.00", c=1)), Order(D24), ["k1_3"])
    assert [unit.name for unit in found.units] == ["K1", "K1_4", "K1_2"]


def test_separate_makes_and_breaks_where_no_changeover_is_wired() -> None:
    parts = (part("2C", "5.00", c=2), part("1A1B", "2.00", a=1, b=1))
    pair = buy([need("K1", "make", "break")], listed(*parts), Order(D24))
    assert [unit.part.name for unit in pair.units if unit.part] == ["1A1B"]
    over = buy([need("K1", "changeover")], listed(*parts), Order(D24))
    assert [unit.part.name for unit in over.units if unit.part] == ["2C"]


def test_make_before_break_is_no_changeover() -> None:
    with pytest.raises(PartsError, match="K1 pole 1 is used as a changeover"):
        buy([need("K1", "changeover")], listed(part("D", "1.00", d=2)), Order(D24))


def test_stock_is_shared_out() -> None:
    both = [need("K1", "changeover"), need("K2", "changeover", "changeover")]
    parts = (part("small", "1.00", c=1, stock=2), part("big", "4.00", c=2, stock=1))
    found = buy(both, listed(*parts), Order(D24))
    assert found.price == Decimal("5.00")


def test_spares_are_rounded_up_for_each_part() -> None:
    many = [need(f"K{k}", "make") for k in range(1, 12)]
    found = buy(many, listed(part("one", "1.10", c=1)), Order(D24, spares=10))
    (item,) = found.items
    assert (item.used, item.spares, item.bought) == (11, 2, 13)
    assert found.price == Decimal("14.30")


def test_currents_are_compared_where_both_are_given() -> None:
    heavy = need("K1", ("make", "6"), ("make", "0.1"))
    parts = (
        part("signal", "1.00", c=2, amps="2"),
        part("power", "4.00", a=1, amps="10"),
        part("both", "6.00", c=2, amps="8"),
    )
    found = buy([heavy], listed(*parts), Order(D24))
    assert {unit.part.name: unit.poles for unit in found.units if unit.part} == {
        "signal": ((2, 2),),
        "power": ((1, 1),),
    }
    unrated = buy([heavy], listed(part("plain", "1.00", c=2)), Order(D24))
    assert unrated.notes == ("K1 carries up to 6 A; what its contacts may carry is not given",)


def test_all_coils_stand_at_one_voltage() -> None:
    both = [need("K1", "make"), need("K2", "changeover", "changeover")]
    parts = (
        part("small 12", "1.00", c=1, coil=Coil(Decimal(12))),
        part("small 24", "2.00", c=1),
        part("big 24", "2.50", c=2, coil=Coil(Decimal(24), "DC")),
        part("big 24 AC", "2.60", c=2, coil=Coil(Decimal(24), "AC")),
    )
    asked = buy(both, listed(*parts), Order(Coil(Decimal(24), "DC"), "stated by the job"))
    assert asked.price == Decimal("4.50")
    assert asked.coil == Coil(Decimal(24), "DC")
    open_ = buy(both, listed(*parts), Order())
    assert (open_.price, open_.coil) == (Decimal("3.00"), Coil(Decimal(12)))
    assert open_.notes[0].startswith("the coil voltage is not given")
    with pytest.raises(PartsError, match="no part has a coil for 48 V"):
        buy(both, listed(*parts), Order(Coil(Decimal(48)), "stated by the job"))


def test_contacts_there_already_cost_nothing() -> None:
    have = Need("K1", need("K1", "changeover", "make").poles, have=Contacts(c=1))
    found = buy([have], listed(part("one", "1.00", a=1)), Order(D24))
    assert [(u.name, u.part and u.part.name, u.poles) for u in found.units] == [
        ("K1", None, ((1, 1),)),
        ("K1_2", "one", ((2, 1),)),
    ]
    assert found.price == Decimal("1.00")


@pytest.mark.parametrize(
    ("needs", "parts", "order", "message"),
    [
        (
            [need("K1", "make"), need("K2", ("break", "6"))],
            [part("one", "1.00", c=1, amps="5"), part("two", "1.00", a=2, amps="10")],
            Order(D24),
            "parts.csv: K2 pole 1 is used as a break and carries 6 A: no part with a coil for 24 V"
            " has such a contact\n  expected: a part of form B or C or D for 6 A or more",
        ),
        (
            [need("K1", "changeover", "changeover", "changeover")],
            [part("two", "1.00", c=2)],
            Order(D24, repeaters=False),
            "parts.csv: no single part with a coil for 24 V holds the 3 changeovers of K1\n"
            "  expected: a part with as many contacts\n"
            "  allow several relays with their coils in parallel",
        ),
        (
            [need("K1", "make"), need("K2", "changeover", "make")],
            [part("one", "1.00", c=1, stock=2)],
            Order(D24),
            "parts.csv: K2 needs 1 changeover, 1 make; the stock that K1 leaves does not hold"
            " them\n  expected: more than there is in stock: 2 of one",
        ),
        (
            [need("K1", "make")],
            [part("one", "1.00", c=1, stock=1)],
            Order(D24, spares=10),
            "parts.csv: the stock does not hold 10 per cent of spares beside what is used\n"
            "  expected: more than there is in stock: 1 of one\n  ask for fewer spares",
        ),
    ],
)
def test_why_nothing_can_be_bought(
    needs: list[Need], parts: list[Part], order: Order, message: str
) -> None:
    with pytest.raises(PartsError) as caught:
        buy(needs, listed(*parts), order)
    assert str(caught.value) == message


def test_nothing_is_bought_for_nothing() -> None:
    found = buy([], listed(part("one", "1.00", c=1)), Order(D24))
    assert (found.units, found.items, found.price) == ((), (), 0)


def test_the_child_process_finds_the_same(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(program, "_SMALL", 0)
    both = [need("K1", "changeover", "make"), need("K2", "break")]
    parts = listed(part("two", "3.00", c=2, stock=1), part("one", "2.00", c=1))
    assert buy(both, parts, Order(D24, seconds=30.0)) == buy(both, parts, Order(D24))


WIRED = Network(
    ("A", "B"),
    "L",
    {"X": "n1", "Y": "n2"},
    (Pole("A", 1, "L", "n1", "n2"), Pole("A", 2, "n1", "n2"), Pole("B", 1, "n2", None, "L")),
)


def test_needs_of_a_network() -> None:
    found = needs_of(WIRED, None, leave_out=["B"])
    assert found == (need("A", "changeover", "make"),)


def test_the_wiring_as_bought() -> None:
    needs = needs_of(WIRED, None)
    found = buy(needs, listed(part("one", "1.00", c=1)), Order(D24))
    network, repeaters = as_bought(WIRED, {}, found.units)
    network.assert_consistent()
    assert repeaters == {"A_2": "A"}
    assert network.poles == (
        Pole("A", 1, "L", "n1", "n2"),
        Pole("B", 1, "n2", None, "L"),
        Pole("A_2", 1, "n1", "n2"),
    )
