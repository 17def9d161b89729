"""Drop-outs and flashes of a finished network while one relay moves.

A changeover opens before it closes, and the contacts of one relay do not move together.  A load
that should stay on *drops out* if some mixture of old, open and new contacts leaves it unfed; a
load that should stay off *flashes* if some mixture feeds it (`mixture`).  Ternary analysis
(Eichelberger 1965), with the moving relay's contacts unknown, finds the same drop-outs, and beside
the flashes found here those that would need both throws of one pole closed.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Literal

from contactlogic.hazard.mixture import Edge, Transit
from contactlogic.hazard.moves import Moves, stays_off, stays_on
from contactlogic.network import Network, Pole
from contactlogic.truth import Target, all_rows, literal

__all__ = ["Hazard", "HazardPenalty", "Kind", "MovingPole", "hazards", "transit_of"]

Kind = Literal["drop-out", "flash"]

_NONE: Mapping[str, str] = MappingProxyType({})


@dataclass(frozen=True)
class MovingPole:
    """A pole that brings a hazard about, and where it is then."""

    relay: str
    pole: int
    position: Literal["open", "make", "break"]


@dataclass(frozen=True)
class Hazard:
    """What one load may do while one relay moves.

    Args:
        kind: "drop-out" of a load that should stay on, "flash" of one that should stay off.
        mover: the relay that moves (a repeater of it moves with it).
        load: the load concerned.
        rows: moves in which this happens, each by its row with the mover released; truth table.
        example: the lowest such row.
        poles: a least set that brings it about: open together, whatever the other poles of the
            mover do (drop-out); or closed together on these sides (flash).
    """

    kind: Kind
    mover: str
    load: str
    rows: int
    example: int
    poles: tuple[MovingPole, ...]

    @property
    def moves(self) -> int:
        """In how many moves it happens."""
        return self.rows.bit_count()


def hazards(
    network: Network,
    moves: Moves,
    targets: Mapping[str, Target],
    repeaters: Mapping[str, str] = _NONE,
    *,
    joining: Collection[tuple[str, int]] = (),
) -> tuple[Hazard, ...]:
    """Every drop-out and flash, by mover and load in their order, drop-outs first.

    One load and mover may have several entries, each with its own poles; their moves are apart.

    Args:
        network: the finished wiring.
        moves: the moves to look at, over the network's relays that are no repeaters.
        targets: what each load must do; cells that are free are not judged.
        repeaters: relays of the network that follow another.
        joining: poles (relay, number) that make before they break.
    """
    found: list[Hazard] = []
    for mover, transit, kind, load, rows in _unsteady(network, moves, targets, repeaters, joining):
        net = network.loads[load]
        assert net is not None
        left = rows
        while left:
            row = left & -left
            if kind == "drop-out":
                poles = () if transit.joining else transit.holding(net, row)
                here = left & ~transit.can_feed(net, left, open_=poles) if poles else left
                causes = tuple(MovingPole(p.relay, p.number, "open") for p in poles)
            else:
                contacts = transit.feeding(net, row)
                here = left & transit.live(contacts).get(net, 0)
                causes = tuple(
                    MovingPole(c.relay, c.pole.number, "make" if c.make else "break")
                    for c in contacts
                )
            found.append(Hazard(kind, mover, load, here, row.bit_length() - 1, causes))
            left &= ~here
    return tuple(found)


@dataclass(frozen=True)
class HazardPenalty:
    """A penalty for `search.goal.Goal`: the hazards of a network, each move `weight` times."""

    moves: Moves
    targets: Mapping[str, Target]
    weight: int = 1

    def __call__(self, network: Network) -> int:
        found = _unsteady(network, self.moves, self.targets, _NONE, ())
        return self.weight * sum(rows.bit_count() for *_, rows in found)


def transit_of(
    network: Network,
    mover: str,
    inputs: tuple[str, ...],
    repeaters: Mapping[str, str] = _NONE,
    joining: Collection[tuple[str, int]] = (),
) -> Transit:
    """The network while `mover` and its repeaters move; rows over `inputs`."""
    n = len(inputs)
    place = {name: i for i, name in enumerate(inputs)}
    fixed: list[Edge] = []
    for contact in network.contacts():
        relay = repeaters.get(contact.relay, contact.relay)
        if relay != mover:
            closed = literal(n, place[relay], contact.make)
            fixed.append((contact.common, contact.throw, closed))
    moving = [p for p in network.poles if repeaters.get(p.relay, p.relay) == mover]
    both = [p for p in moving if (p.relay, p.number) in joining]
    return Transit(network.supply, fixed, moving, all_rows(n), both)


def _unsteady(
    network: Network,
    moves: Moves,
    targets: Mapping[str, Target],
    repeaters: Mapping[str, str],
    joining: Collection[tuple[str, int]],
) -> Iterator[tuple[str, Transit, Kind, str, int]]:
    """(mover, its transit, kind, load, rows) of everything that is not steady."""
    moving: dict[str, list[Pole]] = {}
    for pole in network.poles:
        moving.setdefault(repeaters.get(pole.relay, pole.relay), []).append(pole)
    for i, mover in enumerate(moves.relays):
        released = moves.released[mover]
        if not released or mover not in moving:
            continue
        transit = transit_of(network, mover, moves.relays, repeaters, joining)
        before, after = transit.steady(False), transit.steady(True)
        everything = transit.with_all_closed()
        for load, net in network.loads.items():
            if net is None or net == network.supply or load not in targets:
                continue
            always = before.get(net, 0) & after.get(net, 0)
            on = stays_on(targets[load], i, released) & always
            if rows := transit.can_leave(net, on):
                yield mover, transit, "drop-out", load, rows
            never = ~(before.get(net, 0) | after.get(net, 0))
            off = stays_off(targets[load], i, released) & never & everything.get(net, 0)
            if off and (rows := transit.can_feed(net, off)):
                yield mover, transit, "flash", load, rows
