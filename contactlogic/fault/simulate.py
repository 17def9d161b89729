"""What a panel does with a fault in it, all rows at once.

Terminals joined by wires are one node; rows are the bits of Python ints; the rows that join each
node to a rail follow by passing contacts to a fixed point.  While all loads have their return, a
load is on iff its fed end is joined to the supply.  Where a wire of the return is off or swapped,
loads are two-terminal conductors: a load is *on* iff it lies across the two rails, and *in series*
if it lies on a path from rail to rail that leads through other loads.  It does iff, with an edge
laid from rail to rail, no single node parts it from that edge (both lie in one biconnected
component; Whitney 1932): so each node that loads meet at is taken out in turn, all rows at once.
"""

from __future__ import annotations

from collections.abc import Container, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import combinations

from contactlogic.fault.kinds import Change, Position
from contactlogic.fault.panel import Panel
from contactlogic.truth import literal

__all__ = ["Outcome", "Simulator"]

_BITS = 1 << 16  # of one number in which several changes lie side by side
_SIDE_BY_SIDE = 512

_Edge = tuple[int, int, int]  # two nodes and the rows that join them


@dataclass(frozen=True)
class Outcome:
    """What the loads do, as tables over the simulator's rows.

    Args:
        on: rows in which each load lies across the rails.
        in_series: rows in which a load is fed in series through others; a load in neither table
            is off.  Loads without such rows are left out.
        short: rows in which the rails are joined; nothing is on there.
    """

    on: Mapping[str, int]
    in_series: Mapping[str, int] = field(default_factory=dict)
    short: int = 0


class Simulator:
    """A panel over some rows.

    Args:
        panel: what to simulate.
        rows: the rows, each a bit of all tables in this order; None for all in their order.
    """

    def __init__(self, panel: Panel, rows: Sequence[int] | None = None) -> None:
        self.panel = panel
        n = len(panel.inputs)
        self.rows: Sequence[int] = range(1 << n) if rows is None else rows
        self.all = (1 << len(self.rows)) - 1
        place = {name: i for i, name in enumerate(panel.inputs)}
        if rows is None:
            made = {name: literal(n, i, True) for name, i in place.items()}
        else:
            made = {
                name: sum((row >> i & 1) << k for k, row in enumerate(rows))
                for name, i in place.items()
            }
        self._made = [made[panel.follows[contact.pole.relay]] for contact in panel.contacts]
        names: dict[str, int] = {}
        for terminal in self._terminals():
            names.setdefault(terminal, len(names))
        self._index = names
        self._wires = [(names[wire.start], names[wire.end]) for wire in panel.wires]
        self._links = [(names[one], names[two]) for one, two in panel.links]
        self._contacts = [
            (names[contact.common], names[contact.throw]) for contact in panel.contacts
        ]
        self._loads = {load: (names[one], names[two]) for load, (one, two) in panel.loads.items()}
        self._closed = [
            self._when("operated" if contact.make else "rest", k)
            for k, contact in enumerate(panel.contacts)
        ]
        self._whole = self._nodes((), ())
        self._steady: list[_Edge] = self._wired([Change()], 1)[1]
        self._kept: dict[int, dict[int, int]] = {}

    def _terminals(self) -> Iterable[str]:
        panel = self.panel
        yield from (panel.feed, panel.back)
        for wire in panel.wires:
            yield from (wire.start, wire.end)
        for contact in panel.contacts:
            yield from (contact.common, contact.throw)
        for pair in (*panel.loads.values(), *panel.links):
            yield from pair

    def _when(self, position: Position, contact: int) -> int:
        made = self._made[contact]
        return {
            "operated": made, "rest": self.all & ~made, "never": 0, "always": self.all
        }[position]  # fmt: skip

    def _nodes(self, off: Container[int], joined: Iterable[tuple[str, str]]) -> list[int]:
        """The node of each terminal: the lowest terminal that wires join it to."""
        above = list(range(len(self._index)))

        def top(terminal: int) -> int:
            while above[terminal] != terminal:
                above[terminal] = above[above[terminal]]
                terminal = above[terminal]
            return terminal

        pairs = [pair for k, pair in enumerate(self._wires) if k not in off]
        pairs += self._links
        pairs += [(self._index[one], self._index[two]) for one, two in joined]
        for one, two in pairs:
            first, second = top(one), top(two)
            above[max(first, second)] = min(first, second)
        return [top(terminal) for terminal in range(len(above))]

    def run(self, change: Change | None = None, *, exact: bool = True) -> Outcome:
        """What the loads do, with a change or without.

        Unless `exact`, `in_series` may hold more rows than it should, which is quicker.
        """
        return self._block([change or Change()], exact)[0]

    def run_all(self, changes: Sequence[Change], *, exact: bool = True) -> list[Outcome]:
        """`run` for many changes, side by side in one number as far as that is quicker."""
        size = min(_SIDE_BY_SIDE, max(1, _BITS // max(1, len(self.rows))))
        found: dict[int, Outcome] = {}
        for group in (False, True):  # what touches the return takes longer: kept apart
            members = [k for k, change in enumerate(changes) if self._at_return(change) == group]
            for start in range(0, len(members), size):
                block = members[start : start + size]
                outcomes = self._block([changes[k] for k in block], exact)
                found.update(zip(block, outcomes, strict=True))
        return [found[k] for k in range(len(changes))]

    def _at_return(self, change: Change) -> bool:
        return any(self._whole[self._wires[wire][0]] == self._whole[1] for wire in change.off)

    def _block(self, changes: Sequence[Change], exact: bool) -> list[Outcome]:
        """Outcomes of some changes; the rows of the j-th are bits from `j * len(rows)` on."""
        count = len(self.rows)
        each = sum(1 << j * count for j in range(len(changes)))
        every = self.all * each
        nodes, edges = self._wired(changes, each)
        feed, back = nodes[0], nodes[1]
        ends = {load: (nodes[one], nodes[two]) for load, (one, two) in self._loads.items()}
        if feed == back:
            return [Outcome(dict.fromkeys(ends, 0), {}, self.all) for _ in changes]
        live = _spread({feed: every}, edges)
        home = _spread({back: every}, edges)
        short = live.get(back, 0)
        on = {
            load: (
                live.get(one, 0) & home.get(two, 0) | live.get(two, 0) & home.get(one, 0)
            ) & ~short
            for load, (one, two) in ends.items()
        }  # fmt: skip
        in_series: dict[str, int] = {}
        # While every load has its return, and no contact touches that, none is in series.
        usual = all(
            home.get(two, 0) == every and not home.get(one, 0) for one, two in ends.values()
        )
        if not usual:
            in_series = self._in_series(feed, back, ends, edges, on, every, exact)
        if len(changes) == 1:
            return [Outcome(on, in_series, short)]
        outcomes = []
        for j in range(len(changes)):
            outcomes.append(
                Outcome(
                    {load: rows >> j * count & self.all for load, rows in on.items()},
                    {
                        load: here
                        for load, rows in in_series.items()
                        if (here := rows >> j * count & self.all)
                    },
                    short >> j * count & self.all,
                )
            )
        return outcomes

    def _in_series(
        self,
        feed: int,
        back: int,
        ends: Mapping[str, tuple[int, int]],
        edges: Sequence[_Edge],
        on: Mapping[str, int],
        every: int,
        exact: bool,
    ) -> dict[str, int]:
        meeting = dict.fromkeys([feed, back, *(end for pair in ends.values() for end in pair)])
        joined = {node: self._joined(node, edges, every) for node in meeting}
        conductors = [(one, two, every) for one, two in ends.values()] + [
            (one, two, joined[one][two])
            for one, two in combinations(meeting, 2)
            if joined[one].get(two, 0)
        ]
        short = joined[feed].get(back, 0)
        # More than what is in series, but soon known: what loads pass on short of either rail.
        from_feed = _spread({feed: every}, conductors, without=joined[back])
        from_back = _spread({back: every}, conductors, without=joined[feed])
        found = {}
        for load, (one, two) in ends.items():
            rows = from_feed.get(one, 0) & from_back.get(two, 0)
            rows |= from_feed.get(two, 0) & from_back.get(one, 0)
            rows &= ~(on[load] | short | joined[one].get(two, 0))
            if rows:
                found[load] = rows
        if not (found and exact):
            return found
        for node in meeting:
            taken = joined[node]
            sources = {rail: every & ~taken.get(rail, 0) for rail in (feed, back)}
            reached = _spread(sources, conductors, without=taken)
            for load in found:
                one, two = ends[load]
                found[load] &= reached.get(one, 0) & ~taken.get(one, 0) | (
                    reached.get(two, 0) & ~taken.get(two, 0)
                )
        return {load: rows for load, rows in found.items() if rows}

    def _joined(self, node: int, edges: Sequence[_Edge], every: int) -> dict[int, int]:
        """Rows in which contacts join each node to this one; kept while no contact differs."""
        if edges != self._steady:
            return _spread({node: every}, edges)
        if node not in self._kept:
            self._kept[node] = _spread({node: every}, edges)
        return self._kept[node]

    def _wired(self, changes: Sequence[Change], each: int) -> tuple[list[int], list[_Edge]]:
        """The node of each terminal (feed first, return second), and what joins nodes.

        Args:
            each: the lowest bit of every change's rows.
        """
        count = len(self.rows)
        off: dict[int, int] = {}
        closed: dict[int, int] = {}
        joined: dict[tuple[str, str], int] = {}
        for j, change in enumerate(changes):
            for wire in change.off:
                off[wire] = off.get(wire, 0) | self.all << j * count
            for contact, position in change.contacts.items():
                differs = self._closed[contact] ^ self._when(position, contact)
                closed[contact] = closed.get(contact, 0) ^ differs << j * count
            for pair in change.joined:
                joined[pair] = joined.get(pair, 0) | self.all << j * count
        every = self.all * each
        always = [pair for pair, rows in joined.items() if rows == every]
        nodes = self._nodes(off, always) if off or always else self._whole
        between: dict[tuple[int, int], int] = {}

        def join(one: int, two: int, rows: int) -> None:
            if rows and nodes[one] != nodes[two]:
                pair = (nodes[one], nodes[two])
                between[pair] = between.get(pair, 0) | rows

        for k, (one, two) in enumerate(self._contacts):
            join(one, two, self._closed[k] * each ^ closed.get(k, 0))
        for wire, rows in off.items():
            join(*self._wires[wire], every & ~rows)
        for (start, end), rows in joined.items():
            join(self._index[start], self._index[end], rows)
        return nodes, [(one, two, rows) for (one, two), rows in between.items()]


def _spread(
    sources: Mapping[int, int],
    edges: Sequence[_Edge],
    without: Mapping[int, int] | None = None,
) -> dict[int, int]:
    """Rows in which each node is joined to a source.

    Args:
        sources: nodes to start from, and the rows in which.
        without: nodes that nothing is passed on from, and the rows in which.
    """
    near: dict[int, list[tuple[int, int]]] = {}
    for one, two, rows in edges:
        near.setdefault(one, []).append((two, rows))
        near.setdefault(two, []).append((one, rows))
    joined = dict(sources)
    apart: dict[int, int] = {}  # the rows in which a node is not joined yet
    every = 0
    for _, _, rows in edges:
        every |= rows
    for source, rows in sources.items():
        apart[source] = (every | rows) ^ rows
    waiting = dict(sources)
    while waiting:
        following: dict[int, int] = {}
        for node, here in waiting.items():
            passing = here & ~without.get(node, 0) if without else here
            if not passing:
                continue
            for other, rows in near.get(node, ()):
                new = passing & rows
                if other in apart:
                    new &= apart[other]
                    if new:
                        apart[other] ^= new
                        joined[other] |= new
                        following[other] = following.get(other, 0) | new
                elif new:
                    apart[other] = every ^ new
                    joined[other] = new
                    following[other] = following.get(other, 0) | new
        waiting = following
    return joined
