"""The schedule of a design: every relay with its contacts, and what is bought for it."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass, field

from contactlogic.design import Design
from contactlogic.errors import PartsError
from contactlogic.job.model import Job
from contactlogic.naming import did_you_mean, listed
from contactlogic.network import Network, PoleCount
from contactlogic.purchase.buy import Order, Purchase, buy
from contactlogic.purchase.fittings import Bill, fittings_of
from contactlogic.purchase.needs import Need, needs_of
from contactlogic.purchase.parts import Contacts, Part, PartsList
from contactlogic.purchase.places import as_bought

__all__ = ["Drawer", "Line", "Schedule", "schedule_of"]

THERE = "there already"
UNUSED = "no contact used"
OUTSIDE = "moved from outside"
SEPARATE = "separate contacts, not bought"


@dataclass(frozen=True)
class Drawer:
    """What is on offer, and what need not be bought.

    Args:
        parts: the parts list, None for a schedule without purchase.
        order: how to buy.
        have: relays that are there already, with their contacts; None for all they need.
        buy: relays to be bought although the job says that they are moved from outside.
    """

    parts: PartsList | None = None
    order: Order = field(default_factory=Order)
    have: Mapping[str, Contacts | None] = field(default_factory=dict)
    buy: Collection[str] = ()


@dataclass(frozen=True)
class Line:
    """One relay of the panel.

    Args:
        relay: its name.
        follows: the relay whose repeater it is.
        count: how its poles are used.
        part: what is bought for it.
        spare: contacts that nothing is wired to, None where not given.
        said: why nothing is bought for it.
    """

    relay: str
    follows: str | None
    count: PoleCount
    part: Part | None = None
    spare: Contacts | None = None
    said: str = ""


@dataclass(frozen=True)
class Schedule:
    """A design's schedule.

    Args:
        design: as it was before anything was bought.
        network: its wiring under the names and contact numbers of what is bought.
        repeaters: all of them, those that the purchase adds included.
        lines: in relay order.
        purchase: None without a parts list.
        notes: what could not be compared.
        fittings: what the job states at loads and coils.
    """

    design: Design
    network: Network
    repeaters: Mapping[str, str]
    lines: tuple[Line, ...]
    purchase: Purchase | None
    notes: tuple[str, ...]
    fittings: tuple[Bill, ...] = ()

    def moved(self) -> Iterator[str]:
        """Where a pole sits on another contact than the design's papers say."""
        units = self.purchase.units if self.purchase else ()
        for unit in units:
            for pole, at in unit.poles:
                if (unit.relay, pole) != (unit.name, at):
                    yield f"{unit.relay} pole {pole} sits on {unit.name} contact {at}"


def schedule_of(
    design: Design,
    drawer: Drawer,
    *,
    job: Job | None = None,
    repeaters: Mapping[str, str] | None = None,
    outside: Collection[str] = (),
    slow: Collection[str] = (),
) -> Schedule:
    """The schedule of a design, with the cheapest purchase where there is a parts list.

    Args:
        design: the design.
        drawer: what is on offer, and what need not be bought.
        job: what the design was made for, for the currents of its loads and for relays with
            separate contacts; None if not known.
        repeaters: repeater -> the relay it follows.
        outside: relays moved from outside, such as push-buttons; not bought.
        slow: relays that are slow to move.

    Raises:
        PartsError: nothing fits, the stock does not reach, or a relay named is not there.
    """
    network, follows = design.network, dict(repeaters or {})
    for name in (*drawer.have, *drawer.buy):
        if name not in network.relays:
            raise PartsError(
                f"the design has no relay {name}",
                expected=listed(network.relays),
                hint=did_you_mean(name, network.relays),
            )
    separate = {} if job is None else job.limits.contacts
    reasons = dict.fromkeys(outside, OUTSIDE) | dict.fromkeys(separate, SEPARATE)
    reasons = {name: said for name, said in reasons.items() if name not in drawer.buy}
    reasons |= {name: THERE for name, contacts in drawer.have.items() if contacts is None}
    there = {name: contacts for name, contacts in drawer.have.items() if contacts is not None}
    needs = needs_of(
        network,
        job,
        repeaters=follows,
        leave_out=frozenset(reasons).difference(there),
        have=there,
        slow=slow,
    )
    purchase = None
    if drawer.parts is not None:
        taken = (*network.relays, *network.loads)
        purchase = buy(needs, drawer.parts, drawer.order, taken)
    units = purchase.units if purchase else ()
    network, follows = as_bought(network, follows, units)
    bought = {unit.name: unit for unit in units}
    lines = []
    for relay, count in network.per_relay().items():
        spare, said, part = None, reasons.get(relay, ""), None
        if relay in bought:
            part, spare = bought[relay].part, bought[relay].spare
            said = "" if part else THERE
        elif relay in separate:
            have = separate[relay]
            spare = Contacts(have.makes - count.makes, have.breaks - count.breaks)
        elif not count.poles:
            said = said or UNUSED
        lines.append(Line(relay, follows.get(relay), count, part, spare, said))
    notes = tuple(_notes(job, drawer.parts, needs))
    fittings = () if job is None else fittings_of(job)
    return Schedule(design, network, follows, tuple(lines), purchase, notes, fittings)


def _notes(job: Job | None, parts: PartsList | None, needs: Collection[Need]) -> Iterator[str]:
    if parts is None:
        return
    if parts.passed_over:
        yield f"columns of {parts.file} passed over: {', '.join(parts.passed_over)}"
    if any(part.amps is not None for part in parts.parts) and needs:
        silent = ["every load"] if job is None else [x.name for x in job.loads if x.amps is None]
        if silent:
            yield (
                f"the current of {', '.join(silent)} is not given and was not compared with"
                " contact_amps"
            )
