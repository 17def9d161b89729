"""Which relays of a design must be bought, what each of their poles is used for and carries."""

from __future__ import annotations

import re
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from decimal import Decimal

from contactlogic.job.model import AnyJob, Job
from contactlogic.network import Network, Pole
from contactlogic.purchase.currents import pole_currents
from contactlogic.purchase.parts import SERVES, Coil, Contacts, FormLetter, Use, current_kind

__all__ = ["Need", "PoleNeed", "fits", "needs_of", "use_of", "wanted_coil"]


@dataclass(frozen=True)
class PoleNeed:
    """One pole in use: what for, and the largest current known to flow through it (0 if none)."""

    number: int
    use: Use
    amps: Decimal = Decimal(0)


@dataclass(frozen=True)
class Need:
    """What one relay must have.

    Args:
        relay: its name.
        poles: the poles in use.
        slow: whether its own move takes time, by a capacitor that a repeater's coil would share.
        have: contacts that are there already and cost nothing, None if the relay is to be bought.
    """

    relay: str
    poles: tuple[PoleNeed, ...]
    slow: bool = False
    have: Contacts | None = None

    def count(self, use: Use) -> int:
        return sum(pole.use == use for pole in self.poles)


def fits(form: FormLetter, amps: Decimal | None, pole: PoleNeed) -> bool:
    """Whether a contact can take over a pole; currents are compared where both are given."""
    return pole.use in SERVES[form] and (amps is None or amps >= pole.amps)


def use_of(pole: Pole) -> Use:
    """What a pole is wired for."""
    if pole.make is not None and pole.break_ is not None:
        return "changeover"
    return "break" if pole.make is None else "make"


def needs_of(
    network: Network,
    job: Job | None,
    *,
    repeaters: Mapping[str, str] | None = None,
    leave_out: Collection[str] = (),
    have: Mapping[str, Contacts] | None = None,
    slow: Collection[str] = (),
) -> tuple[Need, ...]:
    """Needs of the relays that use contacts, in relay order.

    Args:
        network: a design's network.
        job: what it was made for, for the currents of its loads; None if not known.
        repeaters: repeater -> the relay it follows.
        leave_out: relays that are not bought, such as push-buttons.
        have: contacts that a relay has already; only what they lack is bought.
        slow: relays that are slow to move.
    """
    follows = repeaters or {}
    amps: dict[tuple[str, int], Decimal] = {}
    if job is not None and any(load.amps is not None for load in job.loads):
        amps = {
            (current.relay, current.number): current.amps
            for current in pole_currents(network, job, follows)
        }
    there = have or {}
    found = []
    for relay in network.relays:
        poles = tuple(
            PoleNeed(pole.number, use_of(pole), amps.get((relay, pole.number), Decimal(0)))
            for pole in network.poles
            if pole.relay == relay
        )
        if poles and relay not in leave_out:
            is_slow = relay in slow or follows.get(relay) in slow
            found.append(Need(relay, poles, is_slow, there.get(relay)))
    return tuple(found)


def wanted_coil(job: AnyJob | None, stated: float | None = None) -> tuple[Coil | None, str]:
    """The coil voltage asked for, and where it is stated; None if nowhere.

    Args:
        job: its `[supply]` may state `coil_volts`, or a label with one voltage ("+24 V").
        stated: from the command line; goes before what the job states.
    """
    if stated is not None:
        return Coil(Decimal(str(stated))), "as asked for"
    if job is None:
        return None, ""
    if job.supply.coil_volts is not None:
        return Coil(Decimal(str(job.supply.coil_volts))), "stated by the job"
    found = re.findall(
        r"(?<![0-9.,])([0-9]{1,5}(?:[.,][0-9]{1,3})?)\s*V(?:olts?)?\b(?:\s*(AC|DC)\b)?",
        job.supply.feed or "",
        re.IGNORECASE,
    )
    if len(found) == 1 and (volts := Decimal(found[0][0].replace(",", "."))):
        return Coil(volts, current_kind(found[0][1])), "by the label of the supply"
    return None, ""
