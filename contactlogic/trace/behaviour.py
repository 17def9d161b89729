"""What a traced circuit does: in which rows loads conduct, and along which terminals.

All rows are worked out at once as truth tables over nets (`contactlogic.network.conduction`); the
path of one row is a shortest one over terminals, wires and closed contacts (breadth first).
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Mapping

from contactlogic.errors import LimitError
from contactlogic.network import Network, Pole, conduction
from contactlogic.trace.circuit import Circuit, TracedLoad
from contactlogic.truth import MAX_INPUTS, all_rows

__all__ = ["Behaviour"]

_MOST_SERIES_ROWS = 4096


class Behaviour:
    """Rows and paths of a circuit.

    Args:
        circuit: what the wires join.
        follows: repeater -> the relay it follows; it adds no rows.

    Attributes:
        relays: the bits of a row number.
        on: rows in which each load is joined to both rails, by load name.
        shorts: rows in which contacts join the rails.

    Raises:
        LimitError: more relays than rows can be worked out for.
    """

    def __init__(self, circuit: Circuit, follows: Mapping[str, str]) -> None:
        self.circuit, self.follows = circuit, follows
        self.relays = tuple(name for name in circuit.relays if name not in follows)
        if len(self.relays) > MAX_INPUTS:
            raise LimitError(
                f"the list has contacts of {len(self.relays)} relays",
                expected=f"at most {MAX_INPUTS}",
                hint="trace the panel in parts",
            )
        self.full = all_rows(len(self.relays))
        self.feed = circuit.net_of[circuit.feed[0]] if circuit.feed else 0  # 0 is no net
        self.back = circuit.net_of[circuit.back[0]] if circuit.back else None
        self._network = self._as_network()
        self._live = self.joined(self.feed)
        self._returned = {} if self.back is None else self.joined(self.back)
        self.on = {load.name: self._on(load) for load in circuit.loads}
        self.shorts = 0 if self.back is None else self._live.get(self.back, 0)

    def joined(self, net: int) -> dict[int, int]:
        """Rows in which each net is joined to `net`."""
        return {int(n): rows for n, rows in conduction(self._network, str(net)).items()}

    def closed(self, row: int, relay: str, make: bool) -> bool:
        """Whether a contact is closed in a row."""
        place = self.relays.index(self.follows.get(relay, relay))
        return bool(row >> place & 1) is make

    def path(self, load: TracedLoad, row: int) -> tuple[str, ...]:
        """Terminals from the feed through the load to the return; empty if it is off.

        Where the list does not say how loads are returned the path ends at the load.
        """
        for first, second in ((load.fed, load.returned), (load.returned, load.fed)):
            if first is None or not self._way_on(load, first, second, row):
                continue
            there = self.way(self.circuit.feed, (first,), row)
            if second is None or not self.circuit.returns_listed:
                return there
            return (*there, *self.way((second,), self.circuit.back, row))
        return ()

    def way(self, starts: Iterable[str], ends: Iterable[str], row: int) -> tuple[str, ...]:
        """A shortest way over terminals joined in a row; empty if there is none."""
        near = self._neighbours(row)
        goal = set(ends)
        came: dict[str, str | None] = dict.fromkeys(starts)
        waiting = deque(came)
        while waiting:
            here = waiting.popleft()
            if here in goal:
                steps = [here]
                while (before := came[steps[-1]]) is not None:
                    steps.append(before)
                return tuple(reversed(steps))
            for other in near.get(here, ()):
                if other not in came:
                    came[other] = here
                    waiting.append(other)
        return ()

    def in_series(self) -> dict[str, int]:
        """Rows in which a load that is not on carries current in series with other loads.

        Such a load is joined to no rail at one end at least.  Of each row the nets joined by
        contacts are taken as one; a load carries current iff it lies on a simple way between the
        rails, that is, in their block once these are joined (Hopcroft and Tarjan 1973).
        """
        fixed = {self.feed, self.back}
        loads = [
            (load, self.circuit.net_of[load.fed], self.circuit.net_of[load.returned])
            for load in self.circuit.loads
            if load.fed is not None and load.returned is not None
        ]
        floating = [load for load, fed, ret in loads if not {fed, ret} & fixed]
        towards = {rail for _, fed, ret in loads for rail in fixed & {fed, ret}}
        if not self.circuit.feed or (not floating and len(towards) < 2):
            return {}
        return self._series_rows(loads)

    def _series_rows(self, loads: list[tuple[TracedLoad, int, int]]) -> dict[str, int]:
        import networkx

        found: dict[str, int] = {}
        for row in range(min(self.full.bit_length(), _MOST_SERIES_ROWS)):
            if self.shorts >> row & 1 or self.back is None:
                continue
            closed = networkx.Graph()
            closed.add_nodes_from(self.circuit.net_of.values())
            net_of = self.circuit.net_of
            for c in self.circuit.contacts:
                if self.closed(row, c.relay, c.make):
                    closed.add_edge(net_of[c.common], net_of[c.throw])
            group = {
                net: i
                for i, nets in enumerate(networkx.connected_components(closed))
                for net in nets
            }
            graph = networkx.Graph([(group[self.feed], group[self.back])])
            graph.add_edges_from((group[fed], group[ret]) for _, fed, ret in loads)
            graph.remove_edges_from(list(networkx.selfloop_edges(graph)))
            block: set[int] = set()
            for nets in networkx.biconnected_components(graph):
                if {group[self.feed], group[self.back]} <= nets:
                    block |= nets
            for load, fed, ret in loads:
                inside = {group[fed], group[ret]} <= block and group[fed] != group[ret]
                if inside and not self.on[load.name] >> row & 1:
                    found[load.name] = found.get(load.name, 0) | 1 << row
        return found

    def _as_network(self) -> Network:
        """The contacts as a network over net numbers, for `conduction` alone."""
        net_of = self.circuit.net_of
        poles: list[Pole] = []
        for contact in self.circuit.contacts:
            relay = self.follows.get(contact.relay, contact.relay)
            throw = str(net_of[contact.throw])
            ends = (throw, None) if contact.make else (None, throw)
            poles.append(Pole(relay, len(poles) + 1, str(net_of[contact.common]), *ends))
        every = {f"net {net}": str(net) for net in sorted(set(net_of.values()))}
        return Network(self.relays, str(self.feed), every, tuple(poles))

    def _on(self, load: TracedLoad) -> int:
        ways = ((load.fed, load.returned), (load.returned, load.fed))
        rows = 0
        for first, second in ways:
            rows |= self._rows(load, first, second)
        return rows

    def _rows(self, load: TracedLoad, first: str | None, second: str | None) -> int:
        """Rows in which `first` is joined to the feed and `second` to the return."""
        if first is None:
            return 0
        live = self._live.get(self.circuit.net_of[first], 0)
        if not self.circuit.returns_listed:
            return live if first == load.fed else 0
        return 0 if second is None else live & self._returned[self.circuit.net_of[second]]

    def _way_on(self, load: TracedLoad, first: str, second: str | None, row: int) -> bool:
        return bool(self._rows(load, first, second) >> row & 1)

    def _neighbours(self, row: int) -> dict[str, list[str]]:
        near: dict[str, list[str]] = {}
        pairs = [*self.circuit.wires, *self.circuit.links]
        for rail in (self.circuit.feed, self.circuit.back):
            pairs += [(rail[0], other) for other in rail[1:]]  # joined off the list
        for contact in self.circuit.contacts:
            if self.closed(row, contact.relay, contact.make):
                pairs.append((contact.common, contact.throw))
        for a, b in pairs:
            near.setdefault(a, []).append(b)
            near.setdefault(b, []).append(a)
        return near
