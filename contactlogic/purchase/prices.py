"""The least price of a network's relays, quickly, for the search that looks for the cheapest one.

Relay by relay the cheapest parts whose contacts take over its makes, breaks and changeovers, by
dynamic programming over what is still to be taken over; a changeover may also be wired as a make
and a break of its own.  Stock, contact currents and spares are left out, so that no purchase
(`buy`) of the network, or of the network so rewired, costs less than this times the share of
spares.  The bound is the same over all networks there can be: every one has so many poles, and a
relay whose move turns some load on (off) has a make (break).
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping, Sequence
from decimal import Decimal
from itertools import product

from contactlogic.job.model import Job
from contactlogic.network import Network, Pole, PoleCount
from contactlogic.purchase.parts import Contacts, Part
from contactlogic.truth import all_rows, variable

__all__ = ["OUT_OF_REACH", "Prices", "least_price", "wired_apart"]

OUT_OF_REACH = 10**9
"""Hundredths that stand for contacts no part has; more than any real purchase."""

_Wants = tuple[int, int, int]  # makes, breaks, changeovers


class Prices:
    """Least price of a network in hundredths; can be pickled.

    Args:
        parts: on offer, all with coils that can stand side by side.
        free: relays that cost nothing: not bought, or there already.
        have: contacts that a relay has already.
        repeaters: whether several parts may stand for one relay.
        most: most poles of a relay, as far as the job says; a changeover is not wired apart
            beyond it.
        together: relays whose makes and breaks are never wired apart.
    """

    def __init__(
        self,
        parts: Sequence[Part],
        *,
        free: Collection[str] = (),
        have: Mapping[str, Contacts] | None = None,
        repeaters: bool = True,
        most: Mapping[str, int] | None = None,
        together: bool = False,
    ) -> None:
        self.free = frozenset(free)
        self.have = dict(have or {})
        self.repeaters = repeaters
        self.most = dict(most or {})
        self.together = together
        self.offers = _best_offers(parts)
        self._known: dict[_Wants, int] = {(0, 0, 0): 0}

    def __call__(self, network: Network) -> int:
        """Of the whole network, in hundredths."""
        return sum(self.of(relay, n) for relay, n in network.per_relay().items() if n.poles)

    def of(self, relay: str, count: PoleCount) -> int:
        """Of one relay."""
        return self.apart(relay, count)[0]

    def apart(self, relay: str, count: PoleCount) -> tuple[int, int]:
        """Of one relay, and how many of its changeovers are wired apart for that."""
        if relay in self.free:
            return 0, 0
        spare = 0 if self.together else count.changeovers
        if relay in self.most:
            spare = min(spare, max(0, self.most[relay] - count.poles))
        return min(
            (self._relay(relay, (count.makes + k, count.breaks + k, count.changeovers - k)), k)
            for k in range(spare + 1)
        )

    def _relay(self, relay: str, wants: _Wants) -> int:
        have = self.have.get(relay)
        if have is None:
            return self._least(wants)
        return min(self._least(_less(wants, taken)) for taken in _takings(have, wants))

    def _least(self, wants: _Wants) -> int:
        """Cheapest parts that take over these contacts."""
        known = self._known.get(wants)
        if known is None:
            known = OUT_OF_REACH
            for contacts, price in self.offers:
                for taken in _takings(contacts, wants):
                    left = _less(wants, taken)
                    if taken == (0, 0, 0) or (not self.repeaters and any(left)):
                        continue
                    known = min(known, price + self._least(left))
            self._known[wants] = known
        return known


def _best_offers(parts: Sequence[Part]) -> tuple[tuple[Contacts, int], ...]:
    """Contacts with the least price at which they are to be had, in the list's order."""
    offers: dict[Contacts, int] = {}
    for part in parts:
        if part.stock != 0:
            cents = int(part.price * 100)
            offers[part.contacts] = min(cents, offers.get(part.contacts, cents))
    return tuple(offers.items())


def _takings(contacts: Contacts, wants: _Wants) -> Iterator[_Wants]:
    """What contacts can take over at once, by Hall's condition; only what cannot be more."""

    def can(makes: int, breaks: int, overs: int) -> bool:
        c, d = contacts.c, contacts.d
        return (
            overs <= c
            and overs + makes <= contacts.a + c + d
            and overs + breaks <= contacts.b + c + d
            and overs + makes + breaks <= contacts.poles
        )

    ranges = (range(min(want, contacts.poles) + 1) for want in wants)
    possible = [taken for taken in product(*ranges) if can(*taken)]
    for m, b, c in possible:
        more = ((m + 1, b, c), (m, b + 1, c), (m, b, c + 1))
        if not any(all(x <= w for x, w in zip(t, wants, strict=True)) and can(*t) for t in more):
            yield m, b, c


def _less(wants: _Wants, taken: _Wants) -> _Wants:
    return wants[0] - taken[0], wants[1] - taken[1], wants[2] - taken[2]


def wired_apart(network: Network, prices: Prices, separate: Collection[str] = ()) -> Network:
    """The network with changeovers wired as a make and a break where that is cheaper."""
    poles: list[Pole] = []
    for relay, count in network.per_relay().items():
        own = [pole for pole in network.poles if pole.relay == relay]
        _, left = prices.apart(relay, count) if relay not in separate else (0, 0)
        number = 0
        for pole in own:
            halves = [pole]
            if left and pole.make is not None and pole.break_ is not None:
                left -= 1
                halves = [
                    Pole(relay, 0, pole.common, pole.make),
                    Pole(relay, 0, pole.common, None, pole.break_),
                ]
            for half in halves:
                number += 1
                poles.append(Pole(relay, number, half.common, half.make, half.break_))
    if len(poles) == len(network.poles):
        return network
    return Network(network.relays, network.supply, network.loads, tuple(poles))


def least_price(job: Job, prices: Prices, poles: int, spares: int = 0) -> Decimal:
    """A price that no purchase for any wiring of the job goes below.

    Args:
        job: what is wanted, row by row.
        prices: of its relays.
        poles: every wiring has at least so many.
        spares: per cent bought on top.
    """
    reach = {0: 0}  # poles (as many as matter) -> least price
    most = max(2, poles)
    for i, relay in enumerate(job.relays):
        make, break_ = _needs(job, i)
        costs = {0: OUT_OF_REACH if make or break_ else 0}
        for count in range(1, most + 1):
            costs[count] = min(
                prices.of(relay, PoleCount(m, b, count - m - b))
                for m in range(count + 1)
                for b in range(count + 1 - m)
                if (m < count or not break_) and (b < count or not make)
            )
        for count in range(most - 1, -1, -1):  # a make and a break may cost less than both in one
            costs[count] = min(costs[count], costs[count + 1])
        fresh: dict[int, int] = {}
        for (have, price), (more, cost) in product(reach.items(), costs.items()):
            total = min(poles, have + more)
            fresh[total] = min(price + cost, fresh.get(total, OUT_OF_REACH * 100))
        reach = fresh
    least = reach.get(poles, 0)
    return Decimal(-(-least * (100 + spares) // 100)) / 100


def _needs(job: Job, i: int) -> tuple[bool, bool]:
    """Whether relay `i` needs a make, and a break, in every wiring.

    Some load must come on (go off) by the move of this relay alone.
    """
    n = len(job.relays)
    released = all_rows(n) & ~variable(n, i)
    targets = [load.target for load in job.loads]
    return (
        any(t.off & released & t.on >> (1 << i) for t in targets),
        any(t.on & released & t.off >> (1 << i) for t in targets),
    )
