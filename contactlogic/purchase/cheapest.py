"""The cheapest wiring: designs searched for the price of their relays, beside the fewest poles.

Two searches, one for the fewest poles and one for the least price (`prices`), then one more
without the parts whose stock the cheapest wiring would overdraw.  Every design found is bought
for exactly (`buy`: stock, currents and spares included), as it is and with changeovers wired
apart where that is cheaper, and the cheapest of each form is kept, under the names of what is
bought, and proved once more.  It is called the least only where no wiring can cost less by
`prices.least_price`.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal

from contactlogic.design import Bound, Design, Result
from contactlogic.errors import PartsError
from contactlogic.job.model import Job
from contactlogic.network import Network, Pole
from contactlogic.purchase.buy import buy, coil_groups
from contactlogic.purchase.needs import needs_of
from contactlogic.purchase.parts import Part, PartsList
from contactlogic.purchase.prices import Prices, least_price, wired_apart
from contactlogic.purchase.schedule import Drawer, Schedule, schedule_of
from contactlogic.sequenced import SequencerResult
from contactlogic.synthesis import EFFORT, Search, proved_rows

__all__ = ["Cheapest", "Offer", "cheapest"]

_FEWEST = 0.4  # of the time goes to the search for the fewest poles
_WIDER = 2  # times the windows of the search for the fewest poles: there is more to choose from
_AGAIN = 0.4  # of what is left is kept for a search within the stock, where stock may run short


@dataclass(frozen=True)
class Offer:
    """A design with what it costs; `schedule` is None where nothing can be bought for it."""

    design: Design
    schedule: Schedule | None
    why_not: str = ""

    @property
    def price(self) -> Decimal | None:
        purchase = None if self.schedule is None else self.schedule.purchase
        return None if purchase is None else purchase.price


@dataclass(frozen=True)
class Cheapest:
    """What was found, form by form.

    Args:
        result: the cheapest designs, under the names of what is bought.
        schedules: of these designs.
        fewest: the designs of fewest poles, for comparison.
        at_least: a price that no wiring of that form goes below; proved.
    """

    result: Result
    schedules: tuple[Schedule, ...]
    fewest: tuple[Offer, ...]
    at_least: tuple[Decimal, ...]


@dataclass(frozen=True)
class _Found:
    """A design, the run it comes from and its place there."""

    offer: Offer
    run: Result
    place: int


def cheapest(
    search: Search,
    wired: Callable[[Search], Result],
    drawer: Drawer,
    *,
    outside: Collection[str] = (),
    slow: Collection[str] = (),
) -> Cheapest:
    """Search for the cheapest wiring.

    Args:
        search: how to search; its time is shared out.
        wired: wires the job by a search.
        drawer: what is on offer, with a parts list.
        outside: relays moved from outside, not bought.
        slow: relays that are slow to move.

    Raises:
        PartsError: nothing can be bought for any design found.
        LimitError, ProofFailed: as `synthesis.wire`.
    """
    parts = drawer.parts
    if parts is None:
        raise ValueError("a parts list is needed")
    shop = _Shop(drawer, parts, tuple(outside), tuple(slow))
    seconds = search.seconds
    part = None if seconds is None else _FEWEST * seconds
    runs = [wired(replace(search, seconds=part))]
    shop.check(runs[0])
    found = shop.offers(runs[0])
    job = runs[0].job
    if not runs[0].interrupted:
        left = None if seconds is None else (1 - _FEWEST) * seconds
        short = any(p.stock is not None for p in parts.parts)
        now = left if left is None or not short else (1 - _AGAIN) * left
        offered = shop.offered(found)
        runs.append(wired(shop.priced(replace(search, seconds=now), job, runs, offered)))
        found += shop.offers(runs[1])
        over = shop.overdrawn(runs[1], offered)
        if over and not runs[1].interrupted:
            offered = [p for p in offered if p not in over]
            again = None if left is None else _AGAIN * left
            if offered:
                runs.append(wired(shop.priced(replace(search, seconds=again), job, runs, offered)))
                found += shop.offers(runs[2])
    forms = [design.form for design in runs[0].designs]
    best = []
    for form in forms:
        mine = [each for each in found if each.offer.design.form == form]
        priced = [each for each in mine if each.offer.price is not None]
        if not priced:
            raise PartsError(mine[0].offer.why_not)
        best.append(min(priced, key=_dearness))
    fewest = tuple(
        next(each.offer for each in found if each.run is runs[0] and each.place == k)
        for k in range(len(forms))
    )
    at_least = tuple(shop.at_least(job, _bound(runs, form)) for form in forms)
    return _kept(best, runs, fewest, at_least)


def _dearness(found: _Found) -> tuple[Decimal, int]:
    price = found.offer.price
    assert price is not None
    return price, len(found.offer.design.network.poles)


def _bound(runs: Sequence[Result], form: str) -> int:
    """Poles that every network of a form needs, as far as any run has proved."""
    return max(d.bound.at_least for run in runs for d in run.designs if d.form == form)


@dataclass(frozen=True)
class _Shop:
    """Buying for one job."""

    drawer: Drawer
    parts: PartsList
    outside: tuple[str, ...]
    slow: tuple[str, ...]

    def check(self, run: Result) -> None:
        """Refuse what no design can cure: names that are not there, no coil that fits."""
        bare = replace(self.drawer, parts=None)
        schedule_of(run.designs[0], bare, job=run.job, repeaters=run.repeaters)

    def offers(self, run: Result) -> list[_Found]:
        """Every design of a run as it is and, of tables, with changeovers wired apart."""
        found = []
        for k, design in enumerate(run.designs):
            found.append(_Found(self._offer(design, run), run, k))
            if isinstance(run, SequencerResult):
                continue
            for group in self._groups():
                prices = self._prices(run.job, group)
                network = wired_apart(design.network, prices, run.job.limits.contacts)
                if network != design.network:
                    apart = replace(design, network=network)
                    found.append(_Found(self._offer(apart, run), run, k))
        return found

    def _offer(self, design: Design, run: Result) -> Offer:
        try:
            schedule = schedule_of(
                design,
                self.drawer,
                job=run.job,
                repeaters=run.repeaters,
                outside=self.outside,
                slow=self.slow,
            )
        except PartsError as error:
            return Offer(design, None, str(error))
        return Offer(design, schedule)

    def _groups(self) -> list[list[Part]]:
        order = self.drawer.order
        return [group for _, group in coil_groups(self.parts.parts, order.coil)]

    def _free(self, job: Job) -> frozenset[str]:
        """Relays that cost nothing, whatever they do."""
        free = {*self.outside, *job.limits.contacts}.difference(self.drawer.buy)
        return frozenset(free | {name for name, have in self.drawer.have.items() if have is None})

    def _prices(self, job: Job, parts: Sequence[Part], *, together: bool = False) -> Prices:
        have = {name: c for name, c in self.drawer.have.items() if c is not None}
        return Prices(
            parts,
            free=self._free(job).difference(have),
            have=have,
            repeaters=self.drawer.order.repeaters,
            most=job.limits.poles,
            together=together,
        )

    def offered(self, found: Sequence[_Found]) -> list[Part]:
        """Parts of the coil voltage that suits the designs found best."""
        groups = self._groups()
        bought = {
            item.part.name
            for each in found
            if each.offer.schedule is not None and each.offer.schedule.purchase is not None
            for item in each.offer.schedule.purchase.items
        }
        return max(groups, key=lambda g: (sum(p.name in bought for p in g), len(g)), default=[])

    def priced(
        self, search: Search, job: Job, runs: Sequence[Result], offered: Sequence[Part]
    ) -> Search:
        """The search, for the least price."""
        prices = self._prices(job, offered, together=isinstance(runs[0], SequencerResult))
        poles = min(_bound(runs, design.form) for design in runs[0].designs)
        bargain = int(least_price(job, prices, poles) * 100)
        effort = search.effort
        if search.seconds is None:
            effort = _WIDER * (EFFORT if effort is None else effort)
        return replace(search, price=prices, bargain=bargain, effort=effort)

    def overdrawn(self, run: Result, offered: Sequence[Part]) -> list[Part]:
        """Parts of which the cheapest purchase without a look at the stock takes too many."""
        plenty = tuple(replace(part, stock=None) for part in offered if part.stock != 0)
        stock = {part.name: part for part in offered}
        over = []
        for design in run.designs:
            needs = needs_of(
                design.network,
                None,
                repeaters=run.repeaters,
                leave_out=self._free(run.job),
                slow=self.slow,
            )
            try:
                taken = buy(needs, PartsList(self.parts.file, plenty), self.drawer.order)
            except PartsError:
                continue
            for item in taken.items:
                part = stock[item.part.name]
                if part.stock is not None and item.bought > part.stock and part not in over:
                    over.append(part)
        return over

    def at_least(self, job: Job, poles: int) -> Decimal:
        """A price that no wiring with at least so many poles goes below."""
        spares = self.drawer.order.spares
        return min(
            (least_price(job, self._prices(job, group), poles, spares) for group in self._groups()),
            default=Decimal(0),
        )


def _kept(
    best: Sequence[_Found],
    runs: Sequence[Result],
    fewest: tuple[Offer, ...],
    at_least: tuple[Decimal, ...],
) -> Cheapest:
    """The result of the designs chosen, all over the same relays and proved as they are bought."""
    job = runs[0].job
    interrupted = any(run.interrupted for run in runs)
    schedules = [each.offer.schedule for each in best if each.offer.schedule is not None]
    if isinstance(runs[0], SequencerResult):
        own = [(each.run, each.place) for each in best if isinstance(each.run, SequencerResult)]
        result: Result = replace(
            runs[0],
            designs=tuple(run.designs[k] for run, k in own),
            recoveries=tuple(run.recoveries[k] for run, k in own),
            transits=tuple(run.transits[k] for run, k in own),
            interrupted=interrupted,
        )
        return Cheapest(result, tuple(schedules), fewest, at_least)
    repeaters: dict[str, str] = {}
    for schedule in schedules:
        repeaters |= schedule.repeaters
    relays = (*job.relays, *repeaters)
    designs = []
    for schedule in schedules:
        network = replace(schedule.network, relays=relays, poles=_sorted(schedule.network, relays))
        bound = max(schedule.design.bound.at_least, _bound(runs, schedule.design.form))
        design = replace(
            schedule.design,
            network=network,
            bound=Bound(bound, bound == len(network.poles)),
            verified_rows=proved_rows(job, schedule.design.form, network, repeaters),
            notes=_notes(schedule),
        )
        designs.append(design)
    result = Result(job, tuple(designs), relays, repeaters, interrupted)
    renamed = (_renamed(*pair) for pair in zip(schedules, designs, strict=True))
    return Cheapest(result, tuple(renamed), fewest, at_least)


def _renamed(schedule: Schedule, design: Design) -> Schedule:
    """The schedule of the design as it is bought: every pole sits where the design says."""
    purchase = schedule.purchase
    assert purchase is not None
    units = tuple(
        replace(unit, relay=unit.name, poles=tuple((at, at) for _, at in unit.poles))
        for unit in purchase.units
    )
    return replace(
        schedule,
        design=design,
        network=design.network,
        purchase=replace(purchase, units=units),
    )


def _sorted(network: Network, relays: Sequence[str]) -> tuple[Pole, ...]:
    order = {name: k for k, name in enumerate(relays)}
    return tuple(sorted(network.poles, key=lambda pole: (order[pole.relay], pole.number)))


def _notes(schedule: Schedule) -> tuple[str, ...]:
    known = schedule.design.notes
    added = (
        f"{name} is a repeater of {relay}: its coil in parallel with {relay}'s"
        for name, relay in schedule.repeaters.items()
    )
    return (*known, *(note for note in added if note not in known))
