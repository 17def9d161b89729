"""The largest current that the loads can draw through each pole.

How current divides between parallel contacts is not known (one of them may be the only one that
makes), so a closed contact is taken to carry all of every load that is on and fed over some path
through it.  A path visits no net twice; paths are walked once from the supply with the rows in
which each conducts as a truth table, so that one walk serves all rows, listed or not.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from decimal import Decimal

from contactlogic.job.model import Job
from contactlogic.network import Contact, Network, conduction, folded
from contactlogic.truth import all_rows, literal, rows_of

__all__ = ["PoleCurrent", "pole_currents"]

_MOST_STEPS = 200_000  # of the walk; past it currents are bounded from above without paths


@dataclass(frozen=True)
class PoleCurrent:
    """What one pole may have to carry.

    Args:
        relay: the pole's relay.
        number: the pole.
        amps: largest sum, over all rows, of what the job states of the loads fed through it.
        row: the first row with that sum; None where no load with a stated current is fed
            through it.
        loads: the loads that make up the sum.
        not_given: loads fed through it in some row whose current the job does not state.
        exact: False where the walk was cut short and `amps` may be too large.
    """

    relay: str
    number: int
    amps: Decimal
    row: int | None
    loads: tuple[str, ...]
    not_given: tuple[str, ...]
    exact: bool = True


def pole_currents(
    network: Network, job: Job, repeaters: Mapping[str, str] | None = None
) -> tuple[PoleCurrent, ...]:
    """Each pole's largest summed load current, in the order of `network.poles`.

    Args:
        network: a design's network.
        job: the job it was made for; of a sequence, the table job of its coils and loads.
        repeaters: repeater -> the relay it follows.
    """
    follows = repeaters or {}
    place = {name: i for i, name in enumerate(n for n in network.relays if n not in follows)}
    closed = {
        contact: literal(len(place), place[follows.get(contact.relay, contact.relay)], contact.make)
        for contact in network.contacts()
    }
    fed, exact = _fed_through(network, closed, all_rows(len(place)))
    if not exact:
        fed = _joined(network, closed, follows)
    amps = {load.name: load.amps for load in job.loads}
    found = []
    for pole in network.poles:
        through = dict.fromkeys(network.loads, 0)
        for contact in closed:
            if contact.pole == pole:
                for load in network.loads:
                    through[load] |= fed.get((contact, load), 0)
        known = {
            load: Decimal(str(amps[load]))
            for load, rows in through.items()
            if rows and amps.get(load) is not None
        }
        most, row, loads = _largest({load: (through[load], known[load]) for load in known})
        missing = tuple(load for load, rows in through.items() if rows and load not in known)
        found.append(PoleCurrent(pole.relay, pole.number, most, row, loads, missing, exact))
    return tuple(found)


def _fed_through(
    network: Network, closed: Mapping[Contact, int], rows: int
) -> tuple[dict[tuple[Contact, str], int], bool]:
    """Rows in which each contact lies on a conducting path to each load, and if all were walked."""
    touching: dict[str, list[tuple[Contact, str]]] = {net: [] for net in network.nets()}
    for contact in closed:
        if contact.common != contact.throw:
            touching[contact.common].append((contact, contact.throw))
            touching[contact.throw].append((contact, contact.common))
    at: dict[str, list[str]] = {}
    for load, net in network.loads.items():
        if net is not None:
            at.setdefault(net, []).append(load)
    fed: dict[tuple[Contact, str], int] = {}
    path: list[Contact] = []
    on_path = {network.supply}
    trail: list[tuple[str, int, Iterator[tuple[Contact, str]]]] = [
        (network.supply, rows, iter(touching[network.supply]))
    ]
    for _ in range(_MOST_STEPS):
        net, here, ways = trail[-1]
        way = next(ways, None)
        if way is None:
            trail.pop()
            on_path.discard(net)
            if not trail:
                return fed, True
            path.pop()
            continue
        contact, other = way
        there = here & closed[contact]
        if other in on_path or not there:
            continue
        path.append(contact)
        on_path.add(other)
        trail.append((other, there, iter(touching[other])))
        for load in at.get(other, ()):
            for passed in path:
                fed[passed, load] = fed.get((passed, load), 0) | there
    return fed, False


def _joined(
    network: Network, closed: Mapping[Contact, int], follows: Mapping[str, str]
) -> dict[tuple[Contact, str], int]:
    """Rows in which a contact is closed and live while a load is on: never too few."""
    live = conduction(folded(network, follows))
    return {
        (contact, load): rows & live[contact.common] & live[net]
        for contact, rows in closed.items()
        for load, net in network.loads.items()
        if net is not None
    }


def _largest(
    loads: Mapping[str, tuple[int, Decimal]],
) -> tuple[Decimal, int | None, tuple[str, ...]]:
    """The largest sum of currents in one row, the first such row and the loads that are on in it.

    The rows are split load by load into those with and those without it, so that rows alike are
    looked at once.
    """
    groups: list[tuple[int, Decimal, tuple[str, ...]]] = []
    any_row = 0
    for rows, _ in loads.values():
        any_row |= rows
    if not any_row:
        return Decimal(0), None, ()
    groups = [(any_row, Decimal(0), ())]
    for load, (rows, amps) in loads.items():
        split = []
        for group, total, names in groups:
            if group & rows:
                split.append((group & rows, total + amps, (*names, load)))
            if group & ~rows:
                split.append((group & ~rows, total, names))
        groups = split
    most = max(total for _, total, _ in groups)
    rows, _, names = min(
        (group for group in groups if group[1] == most), key=lambda group: group[0] & -group[0]
    )
    return most, next(rows_of(rows)), names
