"""Contacts as edges between nets, and what joins what, over all rows at once.

Reachability is propagated by rounds: each round hands only the rows that a net gained in the
round before to its neighbours, so a row travels every contact at most once each way.  All `2**n`
rows move together as the bits of Python integers.  A single row's path is found by plain
breadth-first search.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Collection, Mapping
from dataclasses import dataclass

from contactlogic.network import Network
from contactlogic.terminals import pole_marks
from contactlogic.truth import all_rows, variable

__all__ = ["Edge", "Wiring"]


@dataclass(frozen=True)
class Edge:
    """One make or break: the rows in which it joins `common` to `throw`, and its terminals."""

    common: str
    throw: str
    closed: int
    at_common: str
    at_throw: str

    @property
    def name(self) -> str:
        """The contact by its terminals, `UP:11-14`."""
        return f"{self.at_common}-{self.at_throw.rpartition(':')[2]}"


class Wiring:
    """The contacts of a network, looked up by net.

    Args:
        network: any network, consistent or not.
        inputs: the relays that stand for the bits of a row number, in bit order.
        repeaters: relays that follow an input, by name.
        separate: relays with separate makes and breaks (they have other terminal marks).

    A contact of a relay that is neither is left open in every row; `structure` reports it.
    """

    def __init__(
        self,
        network: Network,
        inputs: tuple[str, ...],
        repeaters: Mapping[str, str],
        separate: Collection[str],
    ) -> None:
        n = len(inputs)
        self.full = all_rows(n)
        position = {name: i for i, name in enumerate(inputs)}
        self.edges: list[Edge] = []
        self.at: dict[str, list[Edge]] = {}
        for pole in network.poles:
            place = position.get(repeaters.get(pole.relay, pole.relay))
            made = 0 if place is None else variable(n, place)
            broken = 0 if place is None else self.full ^ made
            marks = pole_marks(pole, separate)
            for throw, mark, closed in (
                (pole.make, marks.make, made),
                (pole.break_, marks.break_, broken),
            ):
                if throw is not None:
                    start, end = f"{pole.relay}:{marks.common}", f"{pole.relay}:{mark}"
                    edge = Edge(pole.common, throw, closed, start, end)
                    self.edges.append(edge)
                    self.at.setdefault(pole.common, []).append(edge)
                    self.at.setdefault(throw, []).append(edge)

    def joined(self, start: str) -> dict[str, int]:
        """Rows in which each net is joined to net `start`; nets never joined are left out."""
        reached = {start: self.full}
        gained = {start: self.full}
        while gained:
            arriving: dict[str, int] = {}
            for net, rows in gained.items():
                for edge in self.at.get(net, ()):
                    other = edge.throw if net == edge.common else edge.common
                    known = reached.get(other, 0)
                    new = rows & edge.closed & ~known
                    if new:
                        reached[other] = known | new
                        arriving[other] = arriving.get(other, 0) | new
            gained = arriving
        return reached

    def path(self, start: str, end: str, row: int) -> tuple[str, ...]:
        """Terminals passed on a shortest closed path between two nets in one row."""
        came: dict[str, tuple[str, tuple[str, str]] | None] = {start: None}
        waiting = deque([start])
        while waiting and end not in came:
            net = waiting.popleft()
            for edge in self.at.get(net, ()):
                if not edge.closed >> row & 1:
                    continue
                forward = (edge.throw, (edge.at_common, edge.at_throw))
                backward = (edge.common, (edge.at_throw, edge.at_common))
                other, passed = forward if net == edge.common else backward
                if other not in came:
                    came[other] = (net, passed)
                    waiting.append(other)
        steps: list[str] = []
        here = came.get(end)
        while here is not None:
            before, passed = here
            steps[:0] = passed
            here = came[before]
        return tuple(steps)
