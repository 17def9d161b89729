"""Where a make-before-break pole (form D) cures a drop-out.

In transit such a pole joins common, make and break.  That keeps a load fed, but may feed one that
should be off, or join two coils that hold a charge.  So a cure is named only after a recheck with
the three joined, the relay's other poles old, open or new: no load that should stay off may flash
in any of the moves looked at, and no isolated load that is off may be joined to another that is
off, in any setting of the other relays (design.md section 3).
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations, product
from types import MappingProxyType

from contactlogic.hazard.find import Hazard, transit_of
from contactlogic.hazard.mixture import Transit, halves
from contactlogic.hazard.moves import Moves, stays_off
from contactlogic.network import Contact, Network, Pole
from contactlogic.truth import Target

__all__ = ["Cure", "Cures", "PoleName", "cures"]

PoleName = tuple[str, int]
"""Relay and pole number."""

_MOST_POLES = 3  # of one cure
_MOST_MIXED = 5  # other poles of the mover whose positions are all tried for isolation


@dataclass(frozen=True)
class Cure:
    """What makes one drop-out vanish.

    Args:
        hazard: the drop-out.
        poles: make these form D; the fewest that do, empty if no pole is offered.
        why_not: what stands against the poles that would keep the load fed; "" if some are
            offered.
    """

    hazard: Hazard
    poles: tuple[PoleName, ...]
    why_not: str = ""


@dataclass(frozen=True)
class Cures:
    """Cures of all drop-outs.

    Args:
        single: one entry for each drop-out, in the order given.
        together: all poles of them, in pole order, for the movers whose cures were rechecked
            together and hold together.
        apart: movers whose cures each hold alone but not together.
    """

    single: tuple[Cure, ...]
    together: tuple[PoleName, ...]
    apart: tuple[str, ...] = ()


def cures(
    network: Network,
    moves: Moves,
    targets: Mapping[str, Target],
    found: Sequence[Hazard],
    *,
    isolated: Collection[str] = (),
    separate: Collection[str] = (),
    repeaters: Mapping[str, str] = MappingProxyType({}),
) -> Cures:
    """Form D cures of the drop-outs among `found` (from `hazards`).

    Args:
        isolated: loads that may be joined to no other load that is off.
        separate: relays with separate makes and breaks, which have no common to join.
    """
    work = _Rechecks(network, moves, targets, frozenset(isolated), repeaters)
    single: list[Cure] = []
    for hazard in found:
        if hazard.kind == "drop-out":
            usable = [p for p in work.moving(hazard.mover) if p.relay not in separate]
            single.append(_cure(work, hazard, usable))
    together: set[PoleName] = set()
    apart = []
    for mover in moves.relays:
        own = [cure for cure in single if cure.hazard.mover == mover and cure.poles]
        names = {name for cure in own for name in cure.poles}
        if not names:
            continue
        if all(work.cures(cure.hazard, names) for cure in own) and not work.harm(mover, names):
            together |= names
        else:
            apart.append(mover)
    order = {relay: i for i, relay in enumerate(network.relays)}
    listed = sorted(together, key=lambda name: (order[name[0]], name[1]))
    return Cures(tuple(single), tuple(listed), tuple(apart))


def _cure(work: _Rechecks, hazard: Hazard, usable: Sequence[Pole]) -> Cure:
    names = [(pole.relay, pole.number) for pole in usable if None not in (pole.make, pole.break_)]
    why = "no changeover hands over its feed"
    for size in range(1, min(_MOST_POLES, len(names)) + 1):
        for chosen in combinations(names, size):
            if not work.cures(hazard, chosen):
                continue
            harm = work.harm(hazard.mover, chosen)
            if not harm:
                return Cure(hazard, chosen)
            why = harm
    return Cure(hazard, (), why)


class _Rechecks:
    """Transits with some poles make-before-break, each judged once."""

    def __init__(
        self,
        network: Network,
        moves: Moves,
        targets: Mapping[str, Target],
        isolated: frozenset[str],
        repeaters: Mapping[str, str],
    ) -> None:
        self.network = network
        self.moves = moves
        self.targets = targets
        self.isolated = isolated
        self.repeaters = repeaters
        self._transits: dict[tuple[str, frozenset[PoleName]], Transit] = {}
        self._harm: dict[tuple[str, frozenset[PoleName]], str] = {}

    def moving(self, mover: str) -> tuple[Pole, ...]:
        return self.transit(mover, ()).moving

    def transit(self, mover: str, joining: Collection[PoleName]) -> Transit:
        key = (mover, frozenset(joining))
        if key not in self._transits:
            self._transits[key] = transit_of(
                self.network, mover, self.moves.relays, self.repeaters, key[1]
            )
        return self._transits[key]

    def cures(self, hazard: Hazard, joining: Collection[PoleName]) -> bool:
        net = self.network.loads[hazard.load]
        assert net is not None
        return not self.transit(hazard.mover, joining).can_leave(net, hazard.rows)

    def harm(self, mover: str, joining: Collection[PoleName]) -> str:
        """What the joined poles bring about, "" if nothing."""
        key = (mover, frozenset(joining))
        if key not in self._harm:
            self._harm[key] = self._flash(*key) or self._joined(*key)
        return self._harm[key]

    def _flash(self, mover: str, joining: frozenset[PoleName]) -> str:
        transit = self.transit(mover, joining)
        before, after = transit.steady(False), transit.steady(True)
        i = self.moves.relays.index(mover)
        for load, net in self.network.loads.items():
            if net is None or net == self.network.supply or load not in self.targets:
                continue
            off = stays_off(self.targets[load], i, self.moves.released[mover])
            off &= ~(before.get(net, 0) | after.get(net, 0))
            if off and transit.can_feed(net, off):
                return f"{load} could flash"
        return ""

    def _joined(self, mover: str, joining: frozenset[PoleName]) -> str:
        transit = self.transit(mover, joining)
        for load in (name for name in self.network.loads if name in self.isolated):
            net = self.network.loads[load]
            if net is None or net == self.network.supply:
                continue
            for closed, at_least in _positions(transit):
                joined = transit.live(closed, net)
                fed = transit.live(at_least).get(net, 0)
                for other, elsewhere in self.network.loads.items():
                    if elsewhere not in (None, net) and joined.get(elsewhere, 0) & ~fed:
                        return f"{load} could discharge into {other}"
        return ""


def _positions(transit: Transit) -> list[tuple[list[Contact], list[Contact]]]:
    """(contacts that join, contacts that surely feed) for each position with the joined closed.

    With many other poles one entry stands for all: everything closed, and only the joined closed.
    """
    joined = [half for pole in transit.moving if pole in transit.joining for half in halves(pole)]
    others = [pole for pole in transit.moving if pole not in transit.joining]
    if len(others) > _MOST_MIXED:
        return [(joined + [half for pole in others for half in halves(pole)], joined)]
    found = []
    for picked in product(*([(), *((half,) for half in halves(pole))] for pole in others)):
        closed = [*joined, *(half for some in picked for half in some)]
        found.append((closed, closed))
    return found
