"""The cheapest purchase for the relays of a design, as an integer program.

Variables are how many of each part serve each relay; more than one is a repeater, its coil in
parallel with the first.  Whether the contacts of some parts can take over all poles of a relay is
a marriage problem (P. Hall, 1935): every set of poles must find as many contacts that suit one of
them.  A pole's use and current say which contacts suit it, so it is enough to ask this of the sets
"every pole of these uses that carries at least so much", a handful for each relay, and the program
needs no variable for who takes over what.  Beside these stand stock limits and spares.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from decimal import Decimal
from itertools import product
from typing import get_args

from contactlogic.errors import PartsError, Place
from contactlogic.purchase.needs import Need, PoleNeed, fits
from contactlogic.purchase.parts import (
    FORMS,
    SERVES,
    Coil,
    Contacts,
    Part,
    PartsList,
    Use,
    plain,
)
from contactlogic.purchase.places import Unit, place_poles
from contactlogic.purchase.program import Bound, Program, solved

__all__ = ["Item", "Order", "Purchase", "buy", "coil_groups"]

_USES: tuple[Use, ...] = get_args(Use)


@dataclass(frozen=True)
class Order:
    """How to buy.

    Args:
        coil: the coil voltage asked for; None for whichever is cheapest, the same for all.
        said: where that voltage is stated, for reports.
        spares: per cent of each part bought on top, rounded up.
        repeaters: whether several relays with their coils in parallel may stand for one.
        seconds: limit for the solver, in a process of its own; None for none, in this process.
    """

    coil: Coil | None = None
    said: str = ""
    spares: int = 0
    repeaters: bool = True
    seconds: float | None = None


@dataclass(frozen=True)
class Item:
    """One part as bought: for use, and as spares."""

    part: Part
    used: int
    spares: int

    @property
    def bought(self) -> int:
        return self.used + self.spares

    @property
    def price(self) -> Decimal:
        return self.bought * self.part.price


@dataclass(frozen=True)
class Purchase:
    """What to buy and what for.

    Args:
        units: the relays of the panel one by one, repeaters after the relay they follow.
        items: what to buy, in the order of the parts list.
        coil: the coils' voltage, None where the list does not give it.
        said: where that voltage is stated; empty if nowhere.
        spares: per cent asked for.
        at_least: proved of the price.
        proved: whether the price is proved least.
        notes: warnings and what could not be compared.
    """

    units: tuple[Unit, ...]
    items: tuple[Item, ...]
    coil: Coil | None
    said: str
    spares: int
    at_least: Decimal
    proved: bool
    notes: tuple[str, ...] = ()

    @property
    def price(self) -> Decimal:
        return sum((item.price for item in self.items), Decimal(0))


def buy(
    needs: Sequence[Need], parts: PartsList, order: Order, taken: Sequence[str] = ()
) -> Purchase:
    """The cheapest purchase; among equals the fewest relays, then the fewest spare contacts.

    Args:
        needs: of each relay to buy.
        parts: what is on offer.
        order: how to buy.
        taken: names that repeaters cannot be given.

    Raises:
        PartsError: nothing in the list fits or the stock does not reach; says for which relay.
    """
    groups = coil_groups(parts.parts, order.coil)
    if not groups and any(need.have is None for need in needs):
        wanted = order.coil.text if order.coil else "any voltage"
        raise PartsError(
            f"no part has a coil for {wanted} ({order.said})" if order.said else "no part fits",
            place=Place(file=parts.file),
            expected=f"parts with {wanted} in coil_volts",
        )
    best: tuple[tuple[int, ...], Coil | None, _Table, tuple[int, ...]] | None = None
    bounds: list[int] = []
    proved = True
    for coil, offered in groups or [(None, [])]:
        table = _Table(needs, _worth_a_look(offered, needs, order), order)
        found = solved(table.program(), order.seconds)
        if not found.feasible:
            continue
        bounds.append(found.at_least)
        proved = proved and found.proved
        if found.values is not None:
            cost = table.cost(found.values)
            if best is None or cost < best[0]:
                best = (cost, coil, table, found.values)
    if best is None and bounds:
        raise PartsError(
            "no purchase was found in time",
            place=Place(file=parts.file),
            hint="leave out parts that do not come into question",
        )
    if best is None:
        raise _why_not(needs, parts, [offered for _, offered in groups], order)
    _, coil, table, values = best
    units = place_poles(needs, table.chosen(values), [*taken, *(need.relay for need in needs)])
    notes = list(_notes(needs, units))
    if order.coil is None and len(groups) > 1:
        notes.insert(0, "the coil voltage is not given; the cheapest of the list's was taken")
    return Purchase(
        units,
        tuple(table.items(units)),
        coil,
        order.said if order.coil else "",
        order.spares,
        Decimal(min(bounds)) / 100,
        proved,
        tuple(notes),
    )


def coil_groups(parts: Sequence[Part], wanted: Coil | None) -> list[tuple[Coil | None, list[Part]]]:
    """Parts whose coils can stand side by side, by voltage and kind of current.

    A part that does not say AC or DC stands with either.  A part that gives no voltage stands
    only with others like it, and nowhere if a voltage is asked for.
    """
    coils: list[Coil | None] = []
    for part in parts:
        if part.coil not in coils and (
            wanted is None or (part.coil is not None and part.coil.volts == wanted.volts)
        ):
            coils.append(part.coil)
    sided = {coil.volts for coil in coils if coil is not None and coil.kind}
    groups: list[tuple[Coil | None, list[Part]]] = []
    for coil in coils:
        if coil is None:
            groups.append((None, [part for part in parts if part.coil is None]))
            continue
        if coil.kind is None and coil.volts in sided:
            continue
        if wanted is not None and None not in (wanted.kind, coil.kind) and wanted.kind != coil.kind:
            continue
        near = (coil, Coil(coil.volts))
        groups.append((coil, [part for part in parts if part.coil in near]))
    return groups


def _worth_a_look(parts: Sequence[Part], needs: Sequence[Need], order: Order) -> list[Part]:
    """Parts but for those in whose place another one can always be bought for less.

    That other one can do whatever the part can, and there are enough of it for everything.
    """
    most = sum(len(need.poles) for need in needs)
    most += -(-most * order.spares // 100)

    def better(one: Part, two: Part) -> bool:
        cheaper = one.price < two.price or (
            one.price == two.price
            and one.contacts == two.contacts
            and parts.index(one) < parts.index(two)
        )
        plenty = one.stock is None or one.stock >= most
        strong = one.amps is None or (two.amps is not None and one.amps >= two.amps)
        return cheaper and plenty and strong and _stands_in(one.contacts, two.contacts)

    return [part for part in parts if not any(better(other, part) for other in parts)]


def _stands_in(one: Contacts, two: Contacts) -> bool:
    """Whether contacts can take over whatever others can: changeovers stand in for any."""
    missing = sum(max(0, two.of(form) - one.of(form)) for form in FORMS if form != "C")
    return one.c - two.c >= missing


class _Table:
    """The integer program of some needs and parts, and its answer read back."""

    def __init__(self, needs: Sequence[Need], parts: Sequence[Part], order: Order) -> None:
        self.needs = needs
        self.parts = parts
        self.order = order
        self.pairs = [
            (r, p)
            for r, need in enumerate(needs)
            for p, part in enumerate(parts)
            if any(
                part.contacts.of(form) and fits(form, part.amps, pole)
                for form in FORMS
                for pole in need.poles
            )
        ]
        self.spare = len(self.pairs)  # variable of the first part's spares

    def program(self) -> Program:
        most = [len(self.needs[r].poles) if self.order.repeaters else 1 for r, _ in self.pairs]
        in_use = [
            sum(most[k] for k, pair in enumerate(self.pairs) if pair[1] == p)
            for p in range(len(self.parts))
        ]
        most += [self._spares(count) for count in in_use]
        return Program(tuple(most), tuple(self._bounds()), tuple(self._costs()))

    def _spares(self, used: int) -> int:
        return -(-used * self.order.spares // 100)

    def _bounds(self) -> Iterator[Bound]:
        for r, need in enumerate(self.needs):
            own = [(k, p) for k, (relay, p) in enumerate(self.pairs) if relay == r]
            for poles in _sets(need.poles):
                there = _suiting(need.have or Contacts(), None, poles)
                terms = tuple(
                    (k, count)
                    for k, p in own
                    if (count := _suiting(self.parts[p].contacts, self.parts[p].amps, poles))
                )
                yield Bound(terms, len(poles) - there)
            if not self.order.repeaters:
                yield Bound(tuple((k, -1) for k, _ in own), 0 if need.have else -1)
        for p, part in enumerate(self.parts):
            used = [k for k, pair in enumerate(self.pairs) if pair[1] == p]
            spare = self.spare + p
            if self.order.spares:
                yield Bound(((spare, 100), *((k, -self.order.spares) for k in used)), 0)
            if part.stock is not None:
                yield Bound(((spare, -1), *((k, -1) for k in used)), -part.stock)

    def _costs(self) -> Iterator[tuple[int, ...]]:
        """Price in hundredths; relays; contacts bought, then places in the list."""
        parts, pairs = self.parts, self.pairs
        cents = [int(part.price * 100) for part in parts]
        yield (*(cents[p] for _, p in pairs), *cents)
        yield (*(1 for _ in pairs), *(1 for _ in parts))
        weight = 1 + len(parts) * sum(len(need.poles) for need in self.needs)
        yield (
            *(weight * parts[p].contacts.poles + p for _, p in pairs),
            *(0 for _ in parts),
        )

    def cost(self, values: Sequence[int]) -> tuple[int, ...]:
        return tuple(
            sum(c * v for c, v in zip(costs, values, strict=True)) for costs in self._costs()
        )

    def chosen(self, values: Sequence[int]) -> list[list[Part]]:
        """Parts for each need, the largest first."""
        parts: list[list[Part]] = [[] for _ in self.needs]
        for (r, p), count in zip(self.pairs, values, strict=False):
            parts[r] += [self.parts[p]] * count
        for own in parts:
            own.sort(key=lambda part: -part.contacts.poles)  # stable: else the list's order
        return parts

    def items(self, units: Sequence[Unit]) -> Iterator[Item]:
        """What to buy for these units, in the list's order."""
        for part in self.parts:
            used = sum(unit.part == part for unit in units)
            if used:
                yield Item(part, used, self._spares(used))


def _sets(poles: Sequence[PoleNeed]) -> Iterator[tuple[PoleNeed, ...]]:
    """Sets of poles of which Hall's condition must be asked."""
    levels = [(None, *sorted({pole.amps for pole in poles if pole.use == use})) for use in _USES]
    for least in product(*levels):
        floor = dict(zip(_USES, least, strict=True))
        chosen = tuple(
            pole
            for pole in poles
            if (lowest := floor[pole.use]) is not None and pole.amps >= lowest
        )
        if chosen:
            yield chosen


def _suiting(contacts: Contacts, amps: Decimal | None, poles: Sequence[PoleNeed]) -> int:
    """How many of the contacts suit at least one of the poles."""
    return sum(contacts.of(form) for form in FORMS if any(fits(form, amps, pole) for pole in poles))


def _notes(needs: Sequence[Need], units: Sequence[Unit]) -> Iterator[str]:
    slow = {need.relay for need in needs if need.slow}
    amps = {(need.relay, pole.number): pole.amps for need in needs for pole in need.poles}
    for unit in units:
        if unit.name != unit.relay:
            yield (
                f"{unit.name} is a repeater of {unit.relay}: its coil in parallel with"
                f" {unit.relay}'s; it is a relay of its own and may move sooner or later"
            )
            if unit.relay in slow:
                yield f"{unit.relay} is slow: two coils shorten the hold of one capacitor"
        if unit.part is not None and unit.part.amps is None:
            most = max(amps[unit.relay, pole] for pole, _ in unit.poles)
            if most:
                yield (
                    f"{unit.name} carries up to {plain(most)} A; what its contacts may carry is"
                    " not given"
                )


def _why_not(
    needs: Sequence[Need], parts: PartsList, groups: Sequence[list[Part]], order: Order
) -> PartsError:
    """Why nothing can be bought: the first relay, or the first that the stock does not reach."""
    offered = max(groups, key=len, default=[])

    def possible(some: Sequence[Need], free: bool, how: Order) -> bool:
        stock = [_without_stock(part) for part in offered] if free else offered
        return solved(_Table(some, stock, how).program(), order.seconds).feasible

    coil = f" with a coil for {order.coil.text}" if order.coil else ""
    place = Place(file=parts.file)
    for need in needs:
        for pole in need.poles:
            if not any(
                contacts.of(form) and fits(form, amps, pole)
                for form in FORMS
                for contacts, amps in [
                    (need.have or Contacts(), None),
                    *((part.contacts, part.amps) for part in offered),
                ]
            ):
                current = f" and carries {plain(pole.amps)} A" if pole.amps else ""
                forms = " or ".join(form for form in FORMS if pole.use in SERVES[form])
                return PartsError(
                    f"{need.relay} pole {pole.number} is used as a {pole.use}{current}:"
                    f" no part{coil} has such a contact",
                    place=place,
                    expected=f"a part of form {forms}"
                    + (f" for {plain(pole.amps)} A or more" if pole.amps else ""),
                )
        if not possible([need], True, order):
            return PartsError(
                f"no single part{coil} holds the {_wanted(need)} of {need.relay}",
                place=place,
                expected="a part with as many contacts",
                hint="allow several relays with their coils in parallel",
            )
    stock = "; ".join(f"{part.stock} of {part.name}" for part in offered if part.stock is not None)
    bare = Order(order.coil, order.said, 0, order.repeaters)
    if order.spares and possible(needs, False, bare):
        return PartsError(
            f"the stock does not hold {order.spares} per cent of spares beside what is used",
            place=place,
            expected=f"more than there is in stock: {stock}",
            hint="ask for fewer spares",
        )
    last = next(
        (k for k in range(1, len(needs)) if not possible(needs[:k], False, bare)), len(needs)
    )
    need = needs[last - 1]
    before = ", ".join(other.relay for other in needs[: last - 1])
    left = f" that {before} leave" if "," in before else f" that {before} leaves" if before else ""
    return PartsError(
        f"{need.relay} needs {_wanted(need)}; the stock{left} does not hold them",
        place=place,
        expected=f"more than there is in stock: {stock}",
    )


def _without_stock(part: Part) -> Part:
    return Part(part.name, part.contacts, part.coil, part.amps, part.price)


def _wanted(need: Need) -> str:
    """`2 changeovers, 1 make`."""
    counts = ((use, need.count(use)) for use in reversed(_USES))
    return ", ".join(f"{n} {use}{'' if n == 1 else 's'}" for use, n in counts if n)
