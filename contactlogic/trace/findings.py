"""What is found in existing wiring: what each load does, and what is wrong or odd about it.

With a job every load is compared row by row; free rows are right either way.  Without one the
findings stand that need none: shorts, loads joined when off, idle contacts and relays.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from contactlogic.check.seriesparallel import between
from contactlogic.job.model import Job
from contactlogic.trace.behaviour import Behaviour
from contactlogic.trace.circuit import Circuit, TracedLoad
from contactlogic.trace.known import Known
from contactlogic.truth import Target, depends_on, rows_of

__all__ = ["Joined", "LoadTrace", "Short", "SneakPath", "Trace", "setting", "trace"]

_MOST_PATHS = 200  # rows of one load for which a sneak path is worked out


@dataclass(frozen=True)
class LoadTrace:
    """What one load does.

    Args:
        name: the load.
        coil: whether its terminals are those of a coil.
        table: rows in which it is on.
        formula: a least sum of products or product of sums of that.
        proved: whether the formula is proved least.
        target: what the job wants; None where it knows no such load.
    """

    name: str
    coil: bool
    table: int
    formula: str
    proved: bool
    target: Target | None = None

    @property
    def wrongly_on(self) -> int:
        return 0 if self.target is None else self.table & self.target.off

    @property
    def wrongly_off(self) -> int:
        return 0 if self.target is None else self.target.on & ~self.table


@dataclass(frozen=True)
class SneakPath:
    """A way along which a load conducts although it should not, and the rows in which it does."""

    load: str
    path: tuple[str, ...]
    rows: tuple[int, ...]


@dataclass(frozen=True)
class Joined:
    """Two loads that are joined through contacts while both are off.

    `forbidden` where the job wants one of them isolated (design.md section 3).
    """

    load: str
    other: str
    rows: int
    path: tuple[str, ...]
    forbidden: bool


@dataclass(frozen=True)
class Short:
    """Rows in which the rails are joined, and the way in the first of them."""

    rows: int
    path: tuple[str, ...]


@dataclass(frozen=True)
class Trace:
    """All that was found.

    Args:
        circuit: what the wires join.
        relays: the bits of a row number.
        follows: repeaters, by name.
        loads: what each load of the list does.
        missing: loads of the job that no wire goes to.
        sneak: sneak paths, in the order of loads, then of rows.
        joined: loads joined when off.
        in_series: rows in which a load that is not on carries current through other loads.
        short: the rails joined, None if they never are.
        turned: fittings wired the wrong way round, one sentence each.
        on_rails: nets tied straight to a rail, one sentence each.
        idle_relays: relays that no load depends on.
        idle_contacts: contacts on no way from the feed to a load.
        compared: whether there was a job to compare with.
        notes: what else should be known.
    """

    circuit: Circuit
    relays: tuple[str, ...]
    follows: Mapping[str, str]
    loads: tuple[LoadTrace, ...]
    missing: tuple[str, ...]
    sneak: tuple[SneakPath, ...]
    joined: tuple[Joined, ...]
    in_series: Mapping[str, int]
    short: Short | None
    turned: tuple[str, ...]
    on_rails: tuple[str, ...]
    idle_relays: tuple[str, ...]
    idle_contacts: tuple[str, ...]
    compared: bool
    notes: tuple[str, ...]

    @property
    def strangers(self) -> tuple[str, ...]:
        """Loads, not coils of relays, that the job does not know."""
        return tuple(
            load.name
            for load in self.loads
            if self.compared and load.target is None and load.name not in self.relays
        )

    @property
    def agrees(self) -> bool:
        """Whether the wiring does what the job wants, and in no row joins the rails."""
        return not (
            self.short
            or self.strangers
            or any(load.wrongly_on or load.wrongly_off for load in self.loads)
            or any(joined.forbidden for joined in self.joined)
            or any(
                load.target is not None and self.in_series.get(load.name, 0) & load.target.off
                for load in self.loads
            )
            or self.missing
            or (self.compared and self.turned)
        )


def trace(circuit: Circuit, job: Job | None, known: Known) -> Trace:
    """Work out what a circuit does and compare it with a job.

    Args:
        circuit: from `circuit_of`.
        job: what is wanted, None if that is not known.
        known: what the list was read with.

    Raises:
        LimitError: more relays than rows can be worked out for.
    """
    follows, notes = _follows(circuit, known)
    unused = [relay for relay in known.relays if relay not in _wired(circuit)]
    if unused:
        notes += (f"no wire goes to a contact of {', '.join(unused)}",)
    circuit = _without_repeaters(circuit, follows)
    does = Behaviour(circuit, follows)
    targets = {} if job is None else job.targets
    extra = len(does.relays) - len(known.relays)
    loads = []
    for load in circuit.loads:
        table = does.on[load.name]
        text, proved = _formula(table, does.relays)
        target = targets.get(load.name)
        wide = None if target is None else _widened(target, extra)
        loads.append(LoadTrace(load.name, load.coil, table, text, proved, wide))
    there = {load.name for load in circuit.loads}
    isolated = frozenset() if job is None else job.isolated
    short = None
    if does.shorts:
        first = next(rows_of(does.shorts))
        short = Short(does.shorts, does.way(circuit.feed, circuit.back, first))
    return Trace(
        circuit=circuit,
        relays=does.relays,
        follows=follows,
        loads=tuple(loads),
        missing=tuple(n for n, t in targets.items() if n not in there and t.on),
        sneak=tuple(_sneaks(loads, circuit, does)),
        joined=tuple(_joined(circuit, does, isolated)),
        in_series=does.in_series(),
        short=short,
        turned=tuple(_turned(circuit, does, job is None or job.supply.positive)),
        on_rails=tuple(_on_rails(circuit, does)),
        idle_relays=tuple(_idle_relays(circuit, does, follows)),
        idle_contacts=tuple(_idle_contacts(circuit, does)),
        compared=job is not None,
        notes=notes,
    )


def _formula(table: int, relays: tuple[str, ...]) -> tuple[str, bool]:
    from contactlogic.minimize import covers

    best = covers(Target(len(relays), table), seconds=10.0)[0]
    return best.to_text(relays), best.proved


def _widened(target: Target, extra: int) -> Target:
    """The same want over rows of `extra` more relays, which it does not depend on."""
    n, on, free = target.n, target.on, target.free
    for i in range(n, n + extra):
        on |= on << (1 << i)
        free |= free << (1 << i)
    return Target(n + extra, on, free)


def _follows(circuit: Circuit, known: Known) -> tuple[dict[str, str], tuple[str, ...]]:
    """Repeaters: as the user says, by a coil in parallel, or by a name such as UP_2."""
    follows = {name: of for name, of in known.follows.items() if name in circuit.relays}
    notes = []
    coils = {load.name: (load.fed, load.returned) for load in circuit.loads if load.coil}
    nets = {name: circuit.net_of[fed] for name, (fed, _) in coils.items() if fed is not None}
    for relay in circuit.relays:
        if not known.job or relay in known.relays or relay in follows:
            continue
        named = re.fullmatch(r"(.+)_[0-9]+", relay)
        of = named[1] if named and named[1] in known.relays else None
        if relay in nets:
            of = next((n for n in known.relays if nets.get(n) == nets[relay]), None)
        if of is not None:
            why = "its coil is in parallel" if relay in nets else "by its name"
            follows[relay] = of
            notes.append(f"{relay} is taken as a repeater of {of}: {why}")
    return follows, tuple(notes)


def _without_repeaters(circuit: Circuit, follows: Mapping[str, str]) -> Circuit:
    return replace(circuit, loads=tuple(x for x in circuit.loads if x.name not in follows))


def _sneaks(loads: list[LoadTrace], circuit: Circuit, does: Behaviour) -> Iterator[SneakPath]:
    """Rows in which a load is wrongly on, those of the same way together."""
    by_name = {load.name: load for load in circuit.loads}
    for load in loads:
        ways: dict[tuple[str, ...], list[int]] = {}
        for count, row in enumerate(rows_of(load.wrongly_on)):
            if count == _MOST_PATHS:
                break
            ways.setdefault(does.path(by_name[load.name], row), []).append(row)
        for path, rows in ways.items():
            yield SneakPath(load.name, path, tuple(rows))


def _joined(circuit: Circuit, does: Behaviour, isolated: frozenset[str]) -> Iterator[Joined]:
    """Pairs of loads whose switched ends are joined while both are off."""
    ends: list[tuple[TracedLoad, str, int]] = []
    for load in circuit.loads:
        end = _switched_end(load, circuit, does)
        if end is not None:
            ends.append((load, end, circuit.net_of[end]))
    for at, (load, end, net) in enumerate(ends):
        joined = does.joined(net)
        for other, its_end, its_net in ends[at + 1 :]:
            if its_net == net:
                continue
            rows = joined.get(its_net, 0) & ~does.on[load.name] & ~does.on[other.name]
            rows &= ~(0 if does.back is None else joined.get(does.back, 0))
            if rows:
                path = does.way((end,), (its_end,), next(rows_of(rows)))
                barred = bool({load.name, other.name} & isolated)
                yield Joined(load.name, other.name, rows, path, barred)


def _switched_end(load: TracedLoad, circuit: Circuit, does: Behaviour) -> str | None:
    """The end of a load that contacts lead to: its feed unless that is a rail itself."""
    for end in (load.fed, load.returned):
        if end is not None and circuit.net_of[end] not in (does.feed, does.back):
            return end
    return None


def _turned(circuit: Circuit, does: Behaviour, positive: bool) -> Iterator[str]:
    """Capacitors and diodes across a load whose positive end is on the negative side."""
    loads = {load.name: load for load in circuit.loads}
    for name, ends in circuit.fittings.items():
        whose, _, part = name.rpartition("/")
        load = loads.get(whose)
        for plus, minus in (("+", "-"), ("K", "A")):
            # the marks that belong at the return and at the feed
            marks = (minus, plus) if positive else (plus, minus)
            to_return, to_feed = (circuit.net_of.get(ends.get(mark, "")) for mark in marks)
            fed = None if load is None or load.fed is None else circuit.net_of[load.fed]
            if (fed is not None and to_return == fed) or (
                does.back is not None and to_feed == does.back
            ):
                yield f"the {part} of {whose} is wired the wrong way round"


def _on_rails(circuit: Circuit, does: Behaviour) -> Iterator[str]:
    if does.feed == does.back:
        yield f"{circuit.feed[0]} and {circuit.back[0]} are joined by wires"
        return
    net_of = circuit.net_of
    for load in circuit.loads:
        fed = None if load.fed is None else net_of[load.fed]
        returned = None if load.returned is None else net_of[load.returned]
        if fed is not None and fed == returned:
            yield f"both ends of {load.name} are on one net: it does nothing"
        elif fed == does.feed and (returned == does.back or not circuit.returns_listed):
            yield f"{load.fed} is tied straight to the feed"
        elif fed == does.back and fed is not None:
            yield f"{load.fed} is tied straight to the return"
        elif returned == does.feed:
            yield f"{load.returned} is tied straight to the feed"
    for contact in circuit.contacts:
        a, b = net_of[contact.common], net_of[contact.throw]
        if a == b:
            rail = {does.feed: ", the feed", does.back: ", the return"}.get(a, "")
            yield f"both ends of {contact.name} are on one net{rail}: it does nothing"
            continue
        for end, net in ((contact.common, a), (contact.throw, b)):
            if net == does.back:
                yield f"{end} is tied straight to the return"


def _idle_relays(circuit: Circuit, does: Behaviour, follows: Mapping[str, str]) -> Iterator[str]:
    """Relays with contacts in the list that change no load and never join the rails."""
    used = _wired(circuit)
    n = len(does.relays)
    tables = (*does.on.values(), does.shorts)
    for relay in circuit.relays:
        if relay not in used:
            continue
        i = does.relays.index(follows.get(relay, relay))
        if not any(depends_on(table, n, i) for table in tables):
            yield relay


def _wired(circuit: Circuit) -> set[str]:
    """Relays that have a wire on one of their contacts."""
    ends = (terminal.rpartition(":") for terminal in circuit.net_of)
    return {owner for owner, _, mark in ends if owner in circuit.relays and mark.isdecimal()}


def _idle_contacts(circuit: Circuit, does: Behaviour) -> Iterator[str]:
    """Contacts that no current to a load can pass, in any row."""
    edges = [
        (str(circuit.net_of[c.common]), str(circuit.net_of[c.throw])) for c in circuit.contacts
    ]
    ends = {
        circuit.net_of[end]
        for load in circuit.loads
        for end in (load.fed, load.returned)
        if end is not None
    }
    blocks = [
        between(edges, str(rail), str(net))
        for rail in (does.feed, does.back)
        if rail is not None
        for net in sorted(ends)
    ]
    for contact, (a, b) in zip(circuit.contacts, edges, strict=True):
        if a == b or not any(a in block and b in block for block in blocks):
            yield contact.name


def setting(row: int, relays: tuple[str, ...]) -> str:
    """`UP=1 DOWN=0` for a row number."""
    return " ".join(f"{relay}={row >> i & 1}" for i, relay in enumerate(relays)) or "no relays"
