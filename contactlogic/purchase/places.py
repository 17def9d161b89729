"""Which pole of a design sits on which contact of the relays bought for it.

A bipartite matching by augmenting paths (H. W. Kuhn's method of 1955, unweighted), poles that few
contacts suit first, each trying the contact of its own number before others.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal

from contactlogic.errors import InternalError
from contactlogic.naming import free_name
from contactlogic.network import Network
from contactlogic.purchase.needs import Need, PoleNeed, fits
from contactlogic.purchase.parts import FORMS, Contacts, FormLetter, Part

__all__ = ["Unit", "as_bought", "place_poles"]


@dataclass(frozen=True)
class Unit:
    """One relay of the panel.

    Args:
        relay: the relay of the design whose poles it carries.
        name: the same, or a name of its own for a repeater.
        part: what is bought, None if it is there already.
        contacts: what it has.
        poles: pole of the design -> contact of this unit, ascending.
        spare: contacts that nothing is wired to.
    """

    relay: str
    name: str
    part: Part | None
    contacts: Contacts
    poles: tuple[tuple[int, int], ...]
    spare: Contacts


@dataclass(frozen=True)
class _Contact:
    unit: int
    number: int
    form: FormLetter
    amps: Decimal | None

    def suits(self, pole: PoleNeed) -> bool:
        return fits(self.form, self.amps, pole)


def place_poles(
    needs: Sequence[Need], chosen: Sequence[Sequence[Part]], taken: Sequence[str]
) -> tuple[Unit, ...]:
    """Every pole on a contact of the parts chosen for its relay.

    Args:
        needs: of each relay.
        chosen: the parts bought for each; those that carry no pole are left out.
        taken: names that repeaters cannot be given.
    """
    units: list[Unit] = []
    names = list(taken)
    for need, parts in zip(needs, chosen, strict=True):
        offered: list[tuple[Part | None, Contacts]] = [(part, part.contacts) for part in parts]
        if need.have is not None:
            offered.insert(0, (None, need.have))
        contacts = [
            _Contact(k, number, form, None if part is None else part.amps)
            for k, (part, have) in enumerate(offered)
            for number, form in enumerate((f for f in FORMS for _ in range(have.of(f))), start=1)
        ]
        places = _matched(need.poles, contacts)
        for k, (part, have) in enumerate(offered):
            own = {pole: at for pole, at in places.items() if at.unit == k}
            if not own:
                continue  # a purchase that is not proved least may hold one too many
            first = need.relay not in (unit.relay for unit in units)
            name = need.relay if first else free_name(need.relay, names)
            names.append(name)
            used = [at.form for at in own.values()]
            spare = Contacts(*(have.of(form) - used.count(form) for form in FORMS))
            poles = tuple(sorted((pole, at.number) for pole, at in own.items()))
            units.append(Unit(need.relay, name, part, have, poles, spare))
    return tuple(units)


def _matched(poles: Sequence[PoleNeed], contacts: Sequence[_Contact]) -> dict[int, _Contact]:
    holder: dict[int, PoleNeed] = {}  # contact -> its pole

    def place(pole: PoleNeed, seen: set[int]) -> bool:
        order = sorted(
            (k for k, contact in enumerate(contacts) if contact.suits(pole)),
            key=lambda k: (contacts[k].unit, contacts[k].number != pole.number, k),
        )
        for k in order:
            if k not in holder:
                holder[k] = pole
                return True
        for k in order:
            if k not in seen:
                seen.add(k)
                if place(holder[k], seen):
                    holder[k] = pole
                    return True
        return False

    few_first = sorted(poles, key=lambda pole: sum(c.suits(pole) for c in contacts))
    for pole in few_first:
        if not place(pole, set()):
            raise InternalError(f"no contact of what was bought suits pole {pole.number}")
    return {pole.number: contacts[k] for k, pole in holder.items()}


def as_bought(
    network: Network, repeaters: Mapping[str, str], units: Sequence[Unit]
) -> tuple[Network, dict[str, str]]:
    """The same wiring with poles under the names and contact numbers of the units bought.

    Returns the network and all its repeaters, earlier ones included.
    """
    at = {(unit.relay, pole): (unit.name, number) for unit in units for pole, number in unit.poles}
    added = {unit.name: unit.relay for unit in units if unit.name != unit.relay}
    relays = (*network.relays, *added)
    poles = []
    for pole in network.poles:
        name, number = at.get((pole.relay, pole.number), (pole.relay, pole.number))
        poles.append(replace(pole, relay=name, number=number))
    order = {name: k for k, name in enumerate(relays)}
    poles.sort(key=lambda pole: (order[pole.relay], pole.number))
    follows = dict(repeaters) | {name: repeaters.get(relay, relay) for name, relay in added.items()}
    return Network(relays, network.supply, network.loads, tuple(poles)), follows
