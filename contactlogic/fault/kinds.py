"""The single faults of a panel, and how each changes it.

Contacts: welded on either wired throw; never making.  A welded changeover stays on that throw, so
its other throw stays open.  In a relay with forcibly guided contacts (IEC 61810-3) no break closes
while a make is welded, and conversely; its other contacts of the welded kind are tried both open
and closed, since their springs may or may not follow.  A dead coil leaves its relay released,
whatever the row.  A wire off splits its net.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from itertools import combinations
from typing import Literal

from contactlogic.fault.panel import Panel, PanelContact

__all__ = [
    "Change",
    "Fault",
    "FaultKind",
    "Position",
    "joins_alike",
    "single_faults",
    "swaps",
    "variants",
]

FaultKind = Literal[
    "welded make", "welded break", "never makes", "never breaks", "coil dead", "wire off",
    "return off", "wires swapped",
]  # fmt: skip
"""`never makes` is a make contact that never closes, `never breaks` a break contact that never
closes; `return off` is a wire off on the return side of the loads."""

Position = Literal["rest", "operated", "never", "always"]
"""When a contact is closed: with its relay released, operated, never, always."""

_MOST_TRIED = 5  # other contacts of a guided relay that are tried in every combination


@dataclass(frozen=True)
class Fault:
    """One single fault.

    Args:
        kind: what is wrong.
        relay, pole: whose, for contacts and coils.
        wires: numbers of the wires concerned; for two wires swapped, both.
        ends: the terminals concerned: of the contact, of the wire, or the two where swapped wires
            change places.
    """

    kind: FaultKind
    relay: str | None = None
    pole: int | None = None
    wires: tuple[int, ...] = ()
    ends: tuple[str, ...] = ()

    @property
    def opens(self) -> bool:
        """Whether this is an open fault: a contact never closing, a coil dead, a wire off."""
        return self.kind in ("never makes", "never breaks", "coil dead", "wire off", "return off")


@dataclass(frozen=True)
class Change:
    """How a faulty panel differs: contacts by index, wires by index, pairs of terminals."""

    contacts: Mapping[int, Position] = field(default_factory=dict)
    off: frozenset[int] = frozenset()
    joined: tuple[tuple[str, str], ...] = ()


def single_faults(panel: Panel) -> Iterator[Fault]:
    """Every single fault but swapped wires: contacts and coils by relay, then wires."""
    relays: dict[str, list[PanelContact]] = {}
    for contact in panel.contacts:
        relays.setdefault(contact.pole.relay, []).append(contact)
    for relay, contacts in relays.items():
        for contact in contacts:
            at = (relay, contact.pole.number, (), (contact.common, contact.throw))
            yield Fault("welded make" if contact.make else "welded break", *at)
            yield Fault("never makes" if contact.make else "never breaks", *at)
        yield Fault("coil dead", relay)
    returns = _return_terminals(panel)
    for wire in panel.wires:
        ends = (wire.start, wire.end)
        kind: FaultKind = "return off" if returns.issuperset(ends) else "wire off"
        yield Fault(kind, wires=(wire.number,), ends=ends)


def _return_terminals(panel: Panel) -> frozenset[str]:
    """Terminals on the return rail's net."""
    net = _parts((wire.start, wire.end) for wire in panel.wires)
    return frozenset(end for end, name in net.items() if name == net.get(panel.back))


def swaps(panel: Panel) -> Iterator[Fault]:
    """Every pair of wires swapped at one end of each: two ways for a pair.

    Left out is what nobody would wire: a piece with both its ends on one terminal.  Swapped at
    both ends two wires have only changed numbers.
    """
    for one, two in combinations(panel.wires, 2):
        for mine, stays in ((one.start, one.end), (one.end, one.start)):
            # At the other end of `two` the same terminals would be joined.
            if mine not in (two.start, two.end) and stays not in (two.start, two.end):
                yield Fault("wires swapped", wires=(one.number, two.number), ends=(mine, two.start))


def joins_alike(panel: Panel) -> Callable[[Change], bool]:
    """A test whether a change of wires joins just the terminals that were joined before."""
    net = _parts((wire.start, wire.end) for wire in panel.wires)
    wires: dict[str, list[int]] = {}
    for k, wire in enumerate(panel.wires):
        wires.setdefault(net[wire.start], []).append(k)

    def alike(change: Change) -> bool:
        if any(net[one] != net[two] for one, two in change.joined):
            return False
        for name in {net[panel.wires[k].start] for k in change.off}:
            left = [panel.wires[k] for k in wires[name] if k not in change.off]
            pairs = [(wire.start, wire.end) for wire in left]
            pairs += [pair for pair in change.joined if net[pair[0]] == name]
            parts = _parts(pairs)
            terminals = {
                end for k in wires[name] for end in (panel.wires[k].start, panel.wires[k].end)
            }
            if len({parts.get(end, end) for end in terminals}) > 1:
                return False
        return True

    return alike


def _parts(pairs: Iterable[tuple[str, str]]) -> dict[str, str]:
    """A terminal that stands for all those joined to it, by terminal."""
    above: dict[str, str] = {}

    def top(terminal: str) -> str:
        while (higher := above.setdefault(terminal, terminal)) != terminal:
            terminal = higher
        return terminal

    for one, two in pairs:
        above[top(one)] = top(two)
    return {terminal: top(terminal) for terminal in list(above)}


def variants(panel: Panel, fault: Fault) -> tuple[Change, ...]:
    """The ways a fault may show: one, but for welded contacts of guided relays."""
    if fault.kind == "coil dead":
        return (
            Change(
                {
                    k: "never" if contact.make else "always"
                    for k, contact in enumerate(panel.contacts)
                    if contact.pole.relay == fault.relay
                }
            ),
        )
    if fault.kind in ("wire off", "return off"):
        return (Change(off=frozenset(_indices(panel, fault.wires))),)
    if fault.kind == "wires swapped":
        one, two = (panel.wires[k] for k in _indices(panel, fault.wires))
        mine, theirs = fault.ends
        stays = one.end if mine == one.start else one.start
        goes = two.end if theirs == two.start else two.start
        off = frozenset(_indices(panel, fault.wires))
        return (Change(off=off, joined=((theirs, stays), (mine, goes))),)
    make = fault.kind in ("welded make", "never makes")
    own = [k for k, contact in enumerate(panel.contacts) if contact.pole.relay == fault.relay]
    at = next(
        k
        for k in own
        if panel.contacts[k].pole.number == fault.pole and panel.contacts[k].make == make
    )
    if fault.kind in ("never makes", "never breaks"):
        return (Change({at: "never"}),)
    changed: dict[int, Position] = {at: "always"}
    if fault.relay not in panel.guided:
        other = (k for k in own if k != at and panel.contacts[k].pole.number == fault.pole)
        return (Change(changed | dict.fromkeys(other, "never")),)
    changed |= {k: "never" for k in own if panel.contacts[k].make != make}
    same = [k for k in own if k != at and panel.contacts[k].make == make]
    return tuple(Change(changed | dict.fromkeys(stuck, "always")) for stuck in _subsets(same))


def _subsets(items: list[int]) -> Iterator[tuple[int, ...]]:
    """All subsets of a few; of many none, all, each one alone and all but each one."""
    count = len(items)
    sizes = range(count + 1) if count <= _MOST_TRIED else (0, 1, count - 1, count)
    for size in sizes:
        yield from combinations(items, size)


def _indices(panel: Panel, numbers: tuple[int, ...]) -> list[int]:
    place = {wire.number: k for k, wire in enumerate(panel.wires)}
    return [place[number] for number in numbers]
