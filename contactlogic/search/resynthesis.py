"""Replacement of a few poles of a larger network, by SAT (design.md section 8.2).

A window is a set of poles taken out of a network.  What remains joins the window's boundary nets
in some way in each row; those joins, and what must and must not be joined to the supply, are the
rows of the window.  Few rows decide most windows, so rows enter the clauses only once a candidate
gets them wrong (counterexample-guided abstraction).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from itertools import combinations
from random import Random
from time import monotonic

from contactlogic.search.encoding import Encoding, Ends, Kind, OnMethod, Row
from contactlogic.search.rows import Rows, merged
from contactlogic.search.solver import WINDOW_SOLVER, Session, Status
from contactlogic.search.symmetry import break_symmetry, strike_waste

__all__ = ["Replacement", "WindowProblem", "resynthesise"]


@dataclass(frozen=True)
class WindowProblem:
    """What the poles of a window must do.

    Args:
        relays: number of relays; bit i of a row's setting is relay i.
        nets: number of boundary nets, numbered from 0.
        rows: wants, each over the boundary nets: `row.node[v]` is the least boundary net that
            the rest of the network joins to net v in that row, `row.source` the one joined to
            the supply.  Rows in which the rest joins the supply to no boundary net ask for
            nothing and are left out (unless isolation matters there).
        separate: relays whose makes and breaks never pair.
        poles: most poles of a relay within the window (makes and breaks of a separate relay
            together); relays left out have no limit.
        makes, breaks: most makes and breaks of a separate relay within the window.
    """

    relays: int
    nets: int
    rows: tuple[Row, ...]
    separate: frozenset[int] = frozenset()
    poles: Mapping[int, int] = field(default_factory=dict)
    makes: Mapping[int, int] = field(default_factory=dict)
    breaks: Mapping[int, int] = field(default_factory=dict)


@dataclass(frozen=True)
class Replacement:
    """Outcome: "sat" with the poles, "unsat", or "unknown".

    "unsat" is no proof: poles that join two boundary nets for good are not all looked at.
    Nets from `WindowProblem.nets` upwards are new.
    """

    status: Status
    poles: tuple[Ends, ...] = ()
    rounds: int = 0


def resynthesise(
    window: WindowProblem,
    poles: int,
    new_nets: int,
    *,
    conflicts: int | None = None,
    seconds: float | None = None,
    seed: int | None = None,
    solver: str = WINDOW_SOLVER,
    method: OnMethod = "paths",
) -> Replacement:
    """At most `poles` poles over the boundary and `new_nets` more nets that do what `window` asks.

    Args:
        conflicts: budget of the solver over all rounds; reproducible, unlike `seconds`.
        seconds: wall-clock budget.
        seed: nets and relays are renumbered at random before the search, so that different
            seeds give different answers; None leaves them.
        solver: name of the python-sat solver.
        method: how the clauses certify what is on.
    """
    shuffle = _Shuffle(window, seed)
    rows = Rows(merged(shuffle.row(row) for row in window.rows), window.relays)
    if not rows.wrong(()):
        return Replacement("sat")
    if poles <= 0:
        return Replacement("unsat")
    deadline = None if seconds is None else monotonic() + seconds
    kinds = sorted(
        Kind(relay, form)
        for relay in range(window.relays)
        for form in (("A", "B") if shuffle.relay_of[relay] in window.separate else ("C",))
    )
    encoding = Encoding([kinds] * poles, window.nets, new_nets, spare=True, method=method)
    break_symmetry(encoding)
    strike_waste(encoding)
    _limit(encoding, window, shuffle)
    written = 0
    pending = rows.wrong(())
    candidate: tuple[Ends, ...] = ()
    round_ = 0
    with Session(solver=solver) as session:
        while pending:
            round_ += 1
            encoding.add_row(rows.rows[shuffle.pick(pending)])
            session.add(encoding.clauses[written:])
            written = len(encoding.clauses)
            left = None if deadline is None else deadline - monotonic()
            if left is not None and left <= 0:
                return Replacement("unknown", rounds=round_)
            if conflicts is not None and session.conflicts >= conflicts:
                return Replacement("unknown", rounds=round_)
            status = session.solve(
                conflicts=None if conflicts is None else conflicts - session.conflicts, seconds=left
            )
            if status != "sat":
                return Replacement(status, rounds=round_)
            candidate = encoding.decode(session.model())
            pending = rows.wrong(candidate)
    return Replacement("sat", tuple(shuffle.back(pole) for pole in candidate), round_)


def _limit(encoding: Encoding, window: WindowProblem, shuffle: _Shuffle) -> None:
    """Budgets: of any k + 1 poles one is of another relay, or is not wired."""
    limits = [(relay, "ABC", most) for relay, most in sorted(window.poles.items())]
    limits += [(relay, "A", most) for relay, most in sorted(window.makes.items())]
    limits += [(relay, "B", most) for relay, most in sorted(window.breaks.items())]
    for relay, forms, most in limits:
        if most >= len(encoding.kind):
            continue
        here = shuffle.relay_at[relay]
        taken = []
        for pole, kinds in enumerate(encoding.kind):
            uses = encoding.new()
            taken.append(uses)
            for kind, literal in kinds.items():
                if kind.relay == here and kind.form in forms:
                    for side in (encoding.make[pole], encoding.break_[pole]):
                        encoding.clauses.append([-literal, side.none, uses])
        encoding.clauses.extend([-lit for lit in group] for group in combinations(taken, most + 1))


class _Shuffle:
    """Renumbering of a window's nets and relays; row order drawn from the same seed."""

    def __init__(self, window: WindowProblem, seed: int | None) -> None:
        self.nets = list(range(window.nets))  # position in the search of each boundary net
        self.relay_of = list(range(window.relays))  # relay at each position in the search
        self._random = Random(seed) if seed is not None else None
        if self._random:
            self._random.shuffle(self.nets)
            self._random.shuffle(self.relay_of)
        self.relay_at = {relay: place for place, relay in enumerate(self.relay_of)}
        self._net_at = {place: net for net, place in enumerate(self.nets)}

    def row(self, row: Row) -> Row:
        """The row in the numbering of the search."""
        least: dict[int, int] = {}  # node -> least new number of its nets
        for net, node in enumerate(row.node):
            least[node] = min(least.get(node, self.nets[net]), self.nets[net])
        nodes = [0] * len(row.node)
        for net, old in enumerate(row.node):
            nodes[self.nets[net]] = least[old]
        return replace(
            row,
            setting=sum((row.setting >> relay & 1) << i for i, relay in enumerate(self.relay_of)),
            node=tuple(nodes),
            source=least[row.source],
            on=tuple(least[load] for load in row.on),
            off=tuple(least[load] for load in row.off),
            apart=tuple((least[a], least[b]) for a, b in row.apart),
        )

    def pick(self, rows: int) -> int:
        """One of the rows in a bit set: the first, or a random one if there is a seed."""
        if self._random is None:
            return (rows & -rows).bit_length() - 1
        chosen = self._random.randrange(rows.bit_count())
        for _ in range(chosen):
            rows &= rows - 1
        return (rows & -rows).bit_length() - 1

    def back(self, pole: Ends) -> Ends:
        """A pole in the window's own numbering."""

        def net(number: int | None) -> int | None:
            return self._net_at.get(number, number) if number is not None else None

        common = net(pole.common)
        assert common is not None
        return Ends(self.relay_of[pole.relay], common, net(pole.make), net(pole.break_))
