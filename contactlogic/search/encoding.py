"""Contact networks of a given number of poles as clauses (design.md section 8.1).

Every pole chooses its kind (relay and form), the net of its common, its make and its break.  A
row states which nets must and must not be joined to the source in one setting of the relays;
nets that the world outside joins in that row count as one node, so that whole jobs and windows
of larger networks are written the same way.

Certificates.  *Off*: a 0/1 label per node, equal across every closed contact, 1 at the source and
0 at what must be off; such a labelling exists iff no closed path joins them.  *On*, by way of
`paths`: a set of used poles with one end at the source, one at the load and two or none at every
other node; the handshake lemma puts source and load in one component of it.  *On*, by way of
`steps`: marks "reached within d steps" on nodes, where each marked node names a pole that leads
to a node marked one step earlier.

Literals are non-zero integers as in DIMACS.  Symmetry breaking lives in `symmetry`.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import combinations, pairwise
from typing import Literal, NamedTuple

__all__ = ["Encoding", "Ends", "Form", "Kind", "OnMethod", "Row"]

Form = Literal["C", "A", "B"]
OnMethod = Literal["paths", "steps"]


class Kind(NamedTuple):
    """What a pole may be: a changeover (C), a make alone (A) or a break alone (B) of a relay."""

    relay: int
    form: Form = "C"


class Ends(NamedTuple):
    """One pole of a solution: relay and nets by number, None where nothing is wired."""

    relay: int
    common: int
    make: int | None
    break_: int | None


@dataclass(frozen=True)
class Row:
    """What one setting of the relays asks for.

    Args:
        setting: bit i is 1 where relay i is operated.
        node: for every fixed net the least number of the fixed nets joined to it from outside.
        source: node that carries the supply.
        on: nodes that must be joined to the source.
        off: nodes that must not be.
        apart: pairs of nodes (isolated load, other load) that may be joined only while joined to
            the source.
    """

    setting: int
    node: tuple[int, ...]
    source: int
    on: tuple[int, ...] = ()
    off: tuple[int, ...] = ()
    apart: tuple[tuple[int, int], ...] = ()


class _Side(NamedTuple):
    """Choice of a net for one end of a pole: a literal per net, and one for "not wired"."""

    at: list[int]
    none: int


class Encoding:
    """Clauses for all networks of `len(choices)` poles over `fixed + inner` nets.

    Args:
        choices: kinds that each pole may be.
        fixed: nets 0 .. fixed-1, which the rows speak of.
        inner: further nets.
        method: how "on" is certified.
        spare: whether a pole may stay unwired.
    """

    def __init__(
        self,
        choices: Sequence[Sequence[Kind]],
        fixed: int,
        inner: int,
        *,
        method: OnMethod = "paths",
        spare: bool = False,
    ) -> None:
        self.choices = [tuple(kinds) for kinds in choices]
        self.fixed = fixed
        self.nets = fixed + inner
        self.method = method
        self.clauses: list[list[int]] = []
        self.top = 0
        self.kind: list[dict[Kind, int]] = []
        self.common: list[list[int]] = []
        self.make: list[_Side] = []
        self.break_: list[_Side] = []
        self._true = self.new()
        self.clauses.append([self._true])
        self._ends: dict[tuple[int, int], _Side | None] = {}
        for kinds in self.choices:
            self._add_pole(kinds, spare)

    # -- building blocks

    def new(self) -> int:
        """A fresh variable."""
        self.top += 1
        return self.top

    def news(self, count: int) -> list[int]:
        """`count` fresh variables."""
        first = self.top + 1
        self.top += count
        return list(range(first, self.top + 1))

    def exactly_one(self, literals: Sequence[int]) -> None:
        self.clauses.append(list(literals))
        self.clauses.extend([-a, -b] for a, b in combinations(literals, 2))

    def _add_pole(self, kinds: tuple[Kind, ...], spare: bool) -> None:
        add = self.clauses.append
        if len(kinds) == 1:
            chosen = {kinds[0]: self._true}
        else:
            chosen = {kind: self.new() for kind in kinds}
            self.exactly_one(list(chosen.values()))
        common = self.news(self.nets)
        self.exactly_one(common)
        sides = []
        for idle in ("B", "A"):  # the make's side, which a break alone lacks, then the break's
            if all(kind.form == idle for kind in kinds):
                sides.append(_Side([], self._true))
                continue
            side = _Side(self.news(self.nets), self.new())
            self.exactly_one([*side.at, side.none])
            for kind, literal in chosen.items():
                if kind.form == idle:
                    add([-literal, side.none])
            for here, there in zip(common, side.at, strict=True):
                add([-here, -there])  # a contact from a net to itself does nothing
            sides.append(side)
        make, break_ = sides
        for a, b in zip(make.at, break_.at, strict=False):
            add([-a, -b])  # both throws on one net: the pole would be a plain wire
        if not spare:
            add([-make.none, -break_.none])
        self.kind.append(chosen)
        self.common.append(common)
        self.make.append(make)
        self.break_.append(break_)

    def _closed_end(self, pole: int, setting: int) -> _Side | None:
        """Literals of the net at the far end of a pole's closed contact; None if never closed."""
        key = (pole, setting)
        if key not in self._ends:
            self._ends[key] = self._make_closed_end(pole, setting)
        return self._ends[key]

    def _make_closed_end(self, pole: int, setting: int) -> _Side | None:
        make, break_ = self.make[pole], self.break_[pole]
        operated = [lit for kind, lit in self.kind[pole].items() if setting >> kind.relay & 1]
        if len(operated) == len(self.kind[pole]):
            return make if make.at else None
        if not operated:
            return break_ if break_.at else None
        add = self.clauses.append
        moved = self.new()
        for kind, literal in self.kind[pole].items():
            add([-literal, moved if setting >> kind.relay & 1 else -moved])
        end = _Side(self.news(self.nets), self.new())
        for guard, side in ((-moved, make), (moved, break_)):
            if not side.at:
                add([guard, end.none])
                continue
            for here, there in zip([*side.at, side.none], [*end.at, end.none], strict=True):
                add([guard, -here, there])
                add([guard, here, -there])
        self.exactly_one([*end.at, end.none])
        return end

    # -- rows

    def add_row(self, row: Row) -> None:
        """Demand what a row asks for."""
        if row.off:
            ones = {row.source, *row.on}
            self._cut(row, ones, set(row.off), None)
        if row.on:
            if self.method == "steps":
                self._steps(row, row.source, row.on, None)
            else:
                for load in row.on:
                    self._path(row, row.source, load, None)
        self._keep_apart(row)

    def _keep_apart(self, row: Row) -> None:
        """Isolation: live, or joined to none of the others."""
        others: dict[int, set[int]] = {}
        for load, other in row.apart:
            if load not in row.on and load != row.source:
                others.setdefault(load, set()).add(other)
        for load, rest in others.items():
            if load in row.off:
                self._cut(row, {load}, rest, None)
                continue
            live = self.new()
            self._path(row, row.source, load, live)
            self._cut(row, {load}, rest, -live)

    def _nodes(self, row: Row) -> list[int]:
        """Node of every net: fixed nets as the row says, inner nets their own."""
        return [*row.node, *range(self.fixed, self.nets)]

    def _cut(self, row: Row, ones: set[int], zeros: set[int], guard: int | None) -> None:
        """Labels, equal across closed contacts, 1 on `ones` and 0 on `zeros`, if `guard` holds."""
        add = self.clauses.append
        pre = [] if guard is None else [-guard]
        nodes = self._nodes(row)
        label: dict[int, int] = {}
        for node in nodes:
            if node in ones:
                label[node] = self._true
            elif node in zeros:
                label[node] = -self._true
            elif node not in label:
                label[node] = self.new()
        if ones & zeros:
            add(list(pre))
            return
        true = self._true
        for pole, common in enumerate(self.common):
            end = self._closed_end(pole, row.setting)
            if end is None:
                continue
            across = self.new()
            for literals in (common, end.at):
                for net, here in enumerate(literals):
                    mark = label[nodes[net]]
                    if mark == true:
                        add([*pre, -here, across])
                    elif mark == -true:
                        add([*pre, -here, -across])
                    else:
                        add([*pre, -here, -mark, across])
                        add([*pre, -here, mark, -across])

    def _path(self, row: Row, start: int, goal: int, guard: int | None) -> None:
        """Used poles with degree 1 at start and goal and 0 or 2 at every other node."""
        if start == goal:
            return
        add = self.clauses.append
        nodes = self._nodes(row)
        names = sorted(set(nodes))
        at: dict[int, list[int]] = {node: [] for node in names}
        for pole, common in enumerate(self.common):
            end = self._closed_end(pole, row.setting)
            if end is None:
                continue
            used = self.new()
            add([-used, -end.none])
            touch = dict(zip(names, self.news(len(names)), strict=True))
            members: dict[int, list[int]] = {node: [] for node in names}
            for net, node in enumerate(nodes):
                here, there = common[net], end.at[net]
                add([-used, -here, touch[node]])
                add([-used, -there, touch[node]])
                members[node] += [here, there]
            for node in names:
                add([-touch[node], used])
                add([-touch[node], *members[node]])
                at[node].append(touch[node])
                if len(members[node]) > 2:  # both ends on nets that the outside joins
                    group = [net for net, name in enumerate(nodes) if name == node]
                    for a in group:
                        for b in group:
                            if a != b:
                                add([-used, -common[a], -end.at[b]])
        pre = [] if guard is None else [-guard]
        for node in names:
            touches = at[node]
            if node in (start, goal):
                add([*pre, *touches])
                for a, b in combinations(touches, 2):
                    add([-a, -b])
                continue
            for i, a in enumerate(touches):
                add([-a, *touches[:i], *touches[i + 1 :]])
            for a, b, c in combinations(touches, 3):
                add([-a, -b, -c])

    def _steps(self, row: Row, start: int, goals: Iterable[int], guard: int | None) -> None:
        """Marks "reached within d steps"; every mark names a pole from a node marked before."""
        add = self.clauses.append
        pre = [] if guard is None else [-guard]
        nodes = self._nodes(row)
        names = sorted(set(nodes) - {start})
        ends = [
            (common, end)
            for pole, common in enumerate(self.common)
            if (end := self._closed_end(pole, row.setting)) is not None
        ]
        depth = min(len(names), len(ends))
        reached = {node: self.news(depth) for node in names}  # reached[node][d]: within d+1 steps
        for marks in reached.values():
            for a, b in pairwise(marks):
                add([-a, b])
        supports: dict[int, list[int]] = {node: [] for node in names}
        for common, end in ends:
            for near, far in ((common, end.at), (end.at, common)):
                before = self.news(depth)  # before[d]: the near end is reached within d steps
                for net, node in enumerate(nodes):
                    if node == start:
                        continue
                    add([-before[0], -near[net]])
                    for d in range(1, depth):
                        add([-before[d], -near[net], reached[node][d - 1]])
                lead = {node: self.new() for node in names}
                members: dict[int, list[int]] = {node: [] for node in names}
                for net, node in enumerate(nodes):
                    if node != start:
                        members[node].append(far[net])
                for node in names:
                    supports[node].append(lead[node])
                    add([-lead[node], *members[node]])
                    add([-lead[node], -end.none])
                    for d in range(depth):
                        add([-lead[node], -reached[node][d], before[d]])
        for node in names:
            if depth:
                add([-reached[node][-1], *supports[node]])
        for goal in goals:
            if goal != start:
                add([*pre, reached[goal][-1]] if depth else list(pre))

    # -- answers

    def decode(self, model: Sequence[int]) -> tuple[Ends, ...]:
        """The wired poles of a satisfying assignment; `model[v - 1]` is the literal of v."""

        def chosen(literals: Sequence[int]) -> int | None:
            return next((net for net, lit in enumerate(literals) if model[lit - 1] > 0), None)

        poles = []
        for pole, kinds in enumerate(self.kind):
            relay = next(kind.relay for kind, lit in kinds.items() if model[lit - 1] > 0)
            common = chosen(self.common[pole])
            make, break_ = chosen(self.make[pole].at), chosen(self.break_[pole].at)
            if common is not None and (make is not None or break_ is not None):
                poles.append(Ends(relay, common, make, break_))
        return tuple(poles)
