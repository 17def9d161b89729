"""From wires between terminals to nets, contacts and loads.

Terminals joined by wires are one net; fuses and resistors join nets as well.  A load that the
list names without marks is one symbol with two ends: a wire that leads on to the return rail ends
at its return, any other at its feed.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

from contactlogic.errors import Place, WiringError
from contactlogic.trace.known import Known, key, natural
from contactlogic.trace.listing import Wire
from contactlogic.trace.marks import LINKS, Meaning, load_ends, meanings
from contactlogic.trace.rails import find_rails

__all__ = ["Circuit", "TracedContact", "TracedLoad", "circuit_of"]


@dataclass(frozen=True)
class TracedContact:
    """A make or break with both ends wired; `common` and `throw` are terminals."""

    relay: str
    make: bool
    common: str
    throw: str

    @property
    def name(self) -> str:
        """`UP:11-14`."""
        return f"{self.common}-{self.throw.rpartition(':')[2]}"


@dataclass(frozen=True)
class TracedLoad:
    """A load; a terminal that is not wired is None."""

    name: str
    fed: str | None
    returned: str | None
    coil: bool = False


@dataclass(frozen=True)
class Circuit:
    """What the wires join.

    Args:
        relays: relays whose contacts or coils the list names, and those of the job before them.
        feed: terminals of the feed rail; empty if every wire is on the return.
        back: terminals of the return rail; empty if the list names none.
        wires: pairs of terminals joined by wires.
        links: pairs of terminals joined through a fuse or resistor.
        net_of: number of each terminal's net, fuses and resistors taken as joined.
        contacts: makes and breaks with both ends wired.
        loads: in the order of the job, then by name.
        fittings: terminals of parts at loads by the part's name (`LAMP/diode`) and their marks.
        unwired: terminals wired to nothing, one sentence each.
        understood: how hand-written names were taken, one sentence each.
    """

    relays: tuple[str, ...]
    feed: tuple[str, ...]
    back: tuple[str, ...]
    wires: tuple[tuple[str, str], ...]
    links: tuple[tuple[str, str], ...]
    net_of: Mapping[str, int]
    contacts: tuple[TracedContact, ...]
    loads: tuple[TracedLoad, ...]
    fittings: Mapping[str, Mapping[str, str]]
    unwired: tuple[str, ...]
    understood: tuple[str, ...]

    @property
    def returns_listed(self) -> bool:
        """Whether the list says how loads are returned; else every load is taken as returned."""
        return bool(self.back) and any(load.returned for load in self.loads)


def circuit_of(wires: Sequence[Wire], known: Known) -> Circuit:
    """The circuit that a list of wires makes.

    Raises:
        WiringError: a terminal, rail or name that is not clear.
    """
    rails = find_rails(wires, known)
    found = meanings(wires, known, rails)
    feed = _terminals(found, "feed")
    back = _terminals(found, "return")
    ends = load_ends(found)
    joined = _Sides(wires, found, ends, bool(back)).wires()
    relays = _relays(found, known)
    contacts, unwired = _contacts(found, relays, known)
    marked = {end for pair in joined for end in pair}
    loads = []
    for name in sorted(ends, key=lambda n: (_place(n, known.loads), natural(n))):
        fed, returned, coil = ends[name]
        bare = (name, _other_end(name)) if fed is None or returned is None else ("", "")
        fed = fed or (bare[0] if bare[0] in marked else None)
        returned = returned or (bare[1] if bare[1] in marked else None)
        loads.append(TracedLoad(name, fed, returned, coil))
    links = _links(_fittings(found))
    nets = _nets((*joined, *links), (feed, back))
    circuit = Circuit(
        relays,
        feed,
        back,
        tuple(joined),
        links,
        nets,
        contacts,
        tuple(loads),
        _fittings(found),
        (),
        tuple(_understood(feed, back, wires, found, ends, known)),
    )
    unwired += [said for load in loads for said in _open_ends(load, circuit.returns_listed)]
    return replace(circuit, unwired=tuple(unwired))


def _terminals(found: Mapping[str, Meaning], kind: str) -> tuple[str, ...]:
    return tuple(sorted({m.terminal for m in found.values() if m.kind == kind}, key=natural))


def _place(name: str, order: Sequence[str]) -> int:
    return order.index(name) if name in order else len(order)


def _relays(found: Mapping[str, Meaning], known: Known) -> tuple[str, ...]:
    strange = {m.name for m in found.values() if m.kind == "contact"} - set(known.relays)
    return (*known.relays, *sorted(strange, key=natural))


def _other_end(name: str) -> str:
    """The returned end of a load that the list writes without marks."""
    return f"{name} (return)"


class _Sides:
    """Which end of an unmarked load each wire goes to."""

    def __init__(
        self,
        wires: Sequence[Wire],
        found: Mapping[str, Meaning],
        ends: Mapping[str, tuple[str | None, str | None, bool]],
        returned: bool,
    ) -> None:
        self.pairs: list[list[str]] = []
        self.places: list[Place] = []
        self.bare: list[tuple[int, int, str]] = []  # wire, which end of it, load
        for wire in wires:
            pair = []
            for side, end in enumerate((wire.start, wire.end)):
                meaning = found[key(end.terminal)]
                if meaning.kind == "load" and not meaning.mark:
                    self.bare.append((len(self.pairs), side, meaning.name))
                    pair.append("")
                else:
                    pair.append(meaning.terminal)
            self.pairs.append(pair)
            self.places.append(wire.start.place)
        self.ends, self.returned = ends, returned
        self.feed, self.back = _terminals(found, "feed"), _terminals(found, "return")

    def wires(self) -> list[tuple[str, str]]:
        """The wires as pairs of terminals, each pair and the list of them in one order."""
        waiting = list(self.bare)
        while waiting:
            left = [entry for entry in waiting if not self._settled(entry)]
            if len(left) == len(waiting):
                at, _, name = left[0]
                raise WiringError(
                    f"which ends of its loads this wire joins is not clear, at {name} for one",
                    place=self.places[at],
                    expected=f"{name}:X1 for its feed, {name}:X2 for its return",
                )
            waiting = left
        self._switch_returns()
        pairs = (sorted(pair, key=natural) for pair in self.pairs)
        return sorted(((a, b) for a, b in pairs), key=lambda p: (natural(p[0]), natural(p[1])))

    def _settled(self, entry: tuple[int, int, str]) -> bool:
        """Put the right end of the load into its wire, if that is clear by now."""
        at, side, name = entry
        if self.pairs[at][side]:
            return True
        other = self.pairs[at][1 - side]
        fed, returned, _ = self.ends[name]
        chosen: str | None = None
        if fed is not None:
            chosen = _other_end(name)  # the marked end is spoken for
        elif returned is not None or not self.returned:
            chosen = name
        elif other:
            chosen = _other_end(name) if self._is_returned(other) else name
        else:
            partner = next(n for w, s, n in self.bare if w == at and s != side)
            if self.ends[partner][:2] != (None, None):
                return False  # that one is settled first
            second = self._between(name, partner)
            if second is None:
                return False
            chosen = _other_end(name) if second else name
            self.pairs[at][1 - side] = _other_end(partner) if second else partner
        self.pairs[at][side] = chosen
        return True

    def _switch_returns(self) -> None:
        """Loads fed straight from the rail and switched in their return, in which no end leads
        to the return rail by wires alone: the wires that do not come from the feed rail are it."""
        for name in dict.fromkeys(name for *_, name in self.bare):
            if not self.returned or self.ends[name][:2] != (None, None):
                continue
            mine = [(at, side) for at, side, other in self.bare if other == name]
            if any(self.pairs[at][side] != name for at, side in mine):
                continue
            away = [e for e in mine if not self._leads(self.pairs[e[0]][1 - e[1]], self.feed, name)]
            if len(away) < len(mine):
                for at, side in away:
                    self.pairs[at][side] = _other_end(name)

    def _leads(self, terminal: str, rail: Sequence[str], without: str = "") -> bool:
        """Whether wires alone lead from a terminal to a rail, not by the end `without`."""
        return any(end in rail for end in self._joined(terminal, without))

    def _is_returned(self, terminal: str) -> bool:
        """Whether a terminal is on the return rail, or on nothing but returned ends of loads."""
        there = self._joined(terminal)
        seconds = {ends[1] for ends in self.ends.values()} | {_other_end(n) for n in self.ends}
        return any(end in self.back for end in there) or there <= seconds

    def _joined(self, terminal: str, without: str = "") -> set[str]:
        """Terminals that wires join to one, as far as their ends are settled."""
        near: dict[str, list[str]] = {}
        for a, b in self.pairs:
            near.setdefault(a, []).append(b)
            near.setdefault(b, []).append(a)
        waiting, seen = [terminal], {terminal, without, ""}
        while waiting:
            for other in near.get(waiting.pop(), ()):
                if other not in seen:
                    seen.add(other)
                    waiting.append(other)
        return seen - {without, ""}

    def _between(self, name: str, partner: str) -> bool | None:
        """Whether a wire between two unmarked loads joins their returns, None if not clear yet."""
        placed = {end for pair in self.pairs for end in pair}

        def has(load: str, second: bool) -> bool:
            ends = self.ends[load]
            return ends[second] is not None or (_other_end(load) if second else load) in placed

        as_return = (has(name, False) and not has(name, True) and has(partner, True)) or (
            has(partner, False) and not has(partner, True) and has(name, True)
        )
        as_feed = (has(name, True) and not has(name, False) and has(partner, False)) or (
            has(partner, True) and not has(partner, False) and has(name, False)
        )
        if as_return == as_feed:
            return None
        return as_return


def _contacts(
    found: Mapping[str, Meaning], relays: Sequence[str], known: Known
) -> tuple[tuple[TracedContact, ...], list[str]]:
    """Contacts with both ends wired, and a sentence for each terminal that leads to none."""
    digits: dict[tuple[str, int], set[str]] = {}
    for meaning in found.values():
        if meaning.kind == "contact":
            pole = (meaning.name, int(meaning.mark[:-1]))
            digits.setdefault(pole, set()).add(meaning.mark[-1])
    contacts: list[TracedContact] = []
    unwired: list[str] = []
    for relay, number in sorted(digits, key=lambda p: (_place(p[0], relays), p[1])):
        there = digits[relay, number]
        apart = "3" in there or (relay in known.separate and "4" in there)
        ways = (("3" if apart else "1", "4", True), ("1", "2", False))
        used: set[str] = set()
        for common, throw, make in ways:
            if {common, throw} <= there:
                used |= {common, throw}
                end, other = f"{relay}:{number}{common}", f"{relay}:{number}{throw}"
                contacts.append(TracedContact(relay, make, end, other))
        for digit in sorted(there - used):
            others = {"1": ("2",) if apart else ("2", "4"), "2": ("1",), "3": ("4",)}
            ends = others.get(digit, ("3" if apart else "1",))
            missing = " or ".join(f"{relay}:{number}{other}" for other in ends)
            unwired.append(f"{relay}:{number}{digit} leads nowhere: no wire goes to {missing}")
    return tuple(contacts), unwired


def _fittings(found: Mapping[str, Meaning]) -> dict[str, dict[str, str]]:
    parts: dict[str, dict[str, str]] = {}
    for meaning in found.values():
        if meaning.kind == "fitting":
            parts.setdefault(meaning.name, {})[meaning.mark] = meaning.terminal
    return dict(sorted(parts.items()))


def _links(parts: Mapping[str, Mapping[str, str]]) -> tuple[tuple[str, str], ...]:
    """Both terminals of every fuse and resistor."""
    passing = (ends for name, ends in parts.items() if name.rpartition("/")[2] in LINKS)
    pairs = (sorted(ends.values(), key=natural) for ends in passing)
    return tuple((ends[0], ends[1]) for ends in pairs if len(ends) == 2)


def _nets(
    pairs: Iterable[tuple[str, str]], rails: tuple[tuple[str, ...], tuple[str, ...]]
) -> dict[str, int]:
    """Net of each terminal: the feed 1, then in the order of their first terminals."""
    import networkx

    graph = networkx.Graph()
    graph.add_edges_from(pairs)
    for rail in rails:  # terminals of one rail are joined off the list
        graph.add_nodes_from(rail)
        graph.add_edges_from((rail[0], other) for other in rail[1:])
    first = [min(net, key=natural) for net in networkx.connected_components(graph)]
    at = {terminal: net for net in networkx.connected_components(graph) for terminal in net}
    feed, back = (rail[0] if rail else None for rail in rails)
    ordered = sorted(
        first,
        key=lambda t: (feed not in at[t], back in at[t], natural(t)),
    )
    return {
        terminal: number
        for number, name in enumerate(ordered, start=1)
        for terminal in sorted(at[name], key=natural)
    }


def _open_ends(load: TracedLoad, returns_listed: bool) -> list[str]:
    """A sentence for each end of a load that no wire goes to."""
    said = []
    if load.fed is None:
        said.append(f"no wire goes to the feed of {load.name}")
    if load.returned is None and returns_listed:
        said.append(f"no wire goes to the return of {load.name}")
    return said


def _understood(
    feed: Sequence[str],
    back: Sequence[str],
    wires: Sequence[Wire],
    found: Mapping[str, Meaning],
    ends: Mapping[str, tuple[str | None, str | None, bool]],
    known: Known,
) -> Iterable[str]:
    yield f"feed: {', '.join(feed)}" if feed else "no wire goes to the feed"
    if back:
        yield f"return: {', '.join(back)}"
    as_loads = sorted(set(ends) - set(known.loads), key=natural)
    if not back or not any(returned for _, returned, _ in ends.values()):
        bare = any(m.kind == "load" and not m.mark for m in found.values())
        if not back or not bare:
            yield "the list does not say how loads are returned: each is taken as returned"
            if as_loads and not back:
                yield "if one of the names taken as loads is the return rail: --return NAME"
    if as_loads:
        kinds = (f"{name} (coil)" if ends[name][2] else name for name in as_loads)
        yield f"taken as loads: {', '.join(kinds)}"
    strange = [r for r in _relays(found, known) if r not in known.relays]
    if strange:
        yield f"taken as relays: {', '.join(strange)}"
    for written, name in sorted(known.names.items()):
        yield f"{written} is {name}"
    seen: dict[frozenset[str], int] = {}
    for wire in wires:
        pair = frozenset(found[key(e.terminal)].terminal for e in (wire.start, wire.end))
        seen[pair] = seen.get(pair, 0) + 1
    for pair, times in sorted(seen.items(), key=lambda item: sorted(item[0])):
        if times > 1:
            yield f"{' and '.join(sorted(pair))} are joined by {times} wires"
