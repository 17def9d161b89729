"""The cheapest network of one load, ladder or bridge, by SAT with every tie of section 4.

`exact` proves the fewest poles of any job; this goes on for a single load without limits: among
the networks with fewest poles those with the least busy relay, then the fewest springs, then the
fewest nets.  Both orders of things use the encoding of `encoding`, one solver for each way to share
the poles out over the relays.

*Ladders.*  A network is series-parallel between supply and load iff with an edge added between the
two its graph has no four nets joined each to each by separate paths (Duffin 1965), that is, iff its
nets can be eliminated one by one, supply and load last, each with at most two neighbours left when
its turn comes (treewidth two; the order encoding of Samer and Veith 2009).  Contacts on no path
from supply to load can be left out of a ladder, so nothing is lost by asking this of all contacts.
`strike_waste` stays sound: each of its steps contracts or deletes contacts, which keeps treewidth,
or (two changeovers on one common) splits a net of four contacts in two, and a subdivision of four
nets joined each to each survives the joining of any two nets within its paths, so splitting makes
none.  A ladder has at least as many contacts
of every kind as `tallies` says.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import combinations

from contactlogic.search.assemble import tidy
from contactlogic.search.bounds import least_by_kind
from contactlogic.search.classes import RELAYS, automorphisms
from contactlogic.search.encoding import Encoding, Form, Kind
from contactlogic.search.goal import cost
from contactlogic.search.mesh import Mesh
from contactlogic.search.problem import (
    Grouping,
    Problem,
    compositions,
    negations,
    rows_of_grouping,
)
from contactlogic.search.rows import Rows, merged
from contactlogic.search.solver import SOLVER, WINDOW_SOLVER, Session, Status
from contactlogic.search.symmetry import break_symmetry, order_throws, strike_waste
from contactlogic.search.tallies import MOST_ON_A_POLE
from contactlogic.truth import Target

__all__ = ["Cheapest", "Wish", "cheapest"]

_SLICE = 2000  # conflicts of one call; equal slices make a run reproducible
_TIE_SLICES = 2  # slices for one question about ties
_TALLIES = 24  # weightings written as clauses
_LOOSE = 4  # contacts left to choice from which a weighting is not worth its clauses
_SOON = 10  # slices after which a question goes to the solver for long proofs


@dataclass(frozen=True)
class Wish:
    """What to look for.

    Args:
        table: function of four relays, not constant.
        ladder: series-parallel networks only.
        singly: count makes and breaks singly.
        ties: whether to look for the least busy relay, fewest springs and nets (not if `singly`).
        at_least: poles (contacts) proved to be needed already.
        poles: for sets of relays, least poles (contacts, if `singly`) on these relays together.
        contacts: for weightings (see `tallies`), least tally of contacts.
        conflicts: most conflicts spent on one number of poles; None for no limit.
    """

    table: int
    ladder: bool = False
    singly: bool = False
    ties: bool = True
    at_least: int = 0
    poles: Mapping[tuple[int, ...], int] = field(default_factory=dict)
    contacts: Mapping[str, int] = field(default_factory=dict)
    conflicts: int | None = None


@dataclass(frozen=True)
class Cheapest:
    """The outcome: no network has fewer than `at_least`; `mesh` is None if none was found."""

    mesh: Mesh | None
    at_least: int
    conflicts: int


def cheapest(wish: Wish, most: int) -> Cheapest:
    """Search with more and more poles, up to `most` (then every smaller size is refuted)."""
    target = Target(RELAYS, wish.table)
    problem = Problem(
        tuple("ABCD"), {"X": target}, objective="contacts" if wish.singly else "poles"
    )
    way = Grouping((), (), (("X",),), (target,), frozenset())
    least = least_by_kind(problem, way)
    poles = max(sum(least.values()), wish.at_least)
    spent = 0
    while poles <= most:
        level = _Level(wish, problem, way, poles)
        mesh, refuted = level.run()
        spent += level.spent
        if mesh is not None or not refuted:
            return Cheapest(mesh, poles, spent)
        poles += 1
    return Cheapest(None, poles, spent)


class _Level:
    """All networks of one number of poles."""

    def __init__(self, wish: Wish, problem: Problem, way: Grouping, poles: int) -> None:
        self.wish = wish
        self.spent = 0
        self.ties = wish.ties and not wish.singly
        self.rows = Rows(merged(rows_of_grouping(problem, way)), problem.n)
        masks = [] if wish.singly else negations(way.targets, problem.n)
        self.turnable = frozenset((mask & -mask).bit_length() - 1 for mask in masks)
        least = least_by_kind(problem, way)
        shares = _canonical_shares(wish.table, problem.kinds, poles, least)
        self.cases = [_Case(self, kinds) for kinds in shares if self._enough(kinds)]
        self.cases.sort(key=lambda case: case.busiest)

    def _enough(self, kinds: Sequence[Kind]) -> bool:
        """Whether every set of relays has the poles it needs."""
        use = Counter(kind.relay for kind in kinds)
        if any(sum(use[i] for i in relays) < need for relays, need in self.wish.poles.items()):
            return False
        return all(slack >= 0 for _, slack in self.slack(use))

    def slack(self, use: Mapping[int, int]) -> list[tuple[str, int]]:
        """For each weighting how many of the contacts it counts could be left out."""
        return [
            (word, sum(MOST_ON_A_POLE[word[i]] * use[i] for i in range(RELAYS)) - need)
            for word, need in self.wish.contacts.items()
        ]

    def run(self) -> tuple[Mesh | None, bool]:
        """The cheapest mesh found, and whether every case is refuted."""
        open_ = list(self.cases)
        rivals: list[_Case] = []  # cases that were given up, or hold the best
        best: Mesh | None = None
        slices = 1
        limit = self.wish.conflicts
        try:
            while open_:
                still = []
                for case in open_:
                    if best is not None and (not self.ties or case.busiest >= cost(best)[1]):
                        rivals.append(case)
                        continue
                    status, mesh = case.ask((), slices)
                    if status == "unknown":
                        still.append(case)
                    elif status == "sat":
                        rivals.append(case)
                        if best is None or cost(mesh) < cost(best):
                            best = mesh
                    else:
                        case.close()
                open_ = still
                slices *= 2
                if limit is not None and self.spent > limit:
                    break
            refuted = best is None and not open_
            if best is not None and self.ties:
                best = self._settle_ties(best, [*rivals, *open_])
            return best, refuted
        finally:
            for case in self.cases:
                case.close()

    def _settle_ties(self, best: Mesh, rivals: Sequence[_Case]) -> Mesh:
        for case in rivals:
            if case.busiest > cost(best)[1]:
                continue
            while True:
                _, _, springs, nets = cost(best)
                status: Status = "unsat"
                if springs > 2 * len(case.kinds):
                    status, mesh = case.ask(case.at_most(springs - 1, None), _TIE_SLICES)
                if status != "sat":
                    status, mesh = case.ask(case.at_most(springs, nets - 1), _TIE_SLICES)
                if status != "sat":
                    break
                if cost(mesh) >= cost(best):
                    break
                best = mesh
        return best


class _Case:
    """One way to share poles out over the relays, on a solver of its own once it is asked."""

    def __init__(self, level: _Level, kinds: tuple[Kind, ...]) -> None:
        self.level = level
        self.kinds = kinds
        self.busiest = max(sum(k.relay == i for k in kinds) for i in range(RELAYS))
        self.session: Session | None = None
        self.closed = False
        self.slices = 0

    def _open(self) -> Session:
        ends = sum(3 if kind.form == "C" else 2 for kind in self.kinds)
        encoding = Encoding([(kind,) for kind in self.kinds], 2, max(0, (ends - 2) // 2))
        break_symmetry(encoding, ends_alike=True)
        order_throws(encoding, self.level.turnable)
        strike_waste(encoding)
        for row in self.level.rows.rows:
            encoding.add_row(row)
        self.encoding = encoding
        if not self.level.wish.singly:
            double = [_double(encoding, pole) for pole in range(len(self.kinds))]
            self.doubles = _counter(encoding, double)
            self.used = _net_marks(encoding)
            self._keep_tallies(encoding)
        if self.level.wish.ladder:
            _series_parallel(encoding)
        return Session(encoding.clauses, solver=WINDOW_SOLVER)

    def _keep_tallies(self, encoding: Encoding) -> None:
        """Contacts that tallies ask for, those first that leave the least choice."""
        use = Counter(kind.relay for kind in self.kinds)
        tight = sorted((slack, word) for word, slack in self.level.slack(use) if slack < _LOOSE)
        for slack, word in tight[:_TALLIES]:
            missing = []
            for pole, kind in enumerate(self.kinds):
                letter = word[kind.relay]
                missing += [encoding.make[pole].none] if letter in "am" else []
                missing += [encoding.break_[pole].none] if letter in "ab" else []
            if slack < len(missing):
                encoding.clauses.append([-_counter(encoding, missing)[slack]])

    def at_most(self, springs: int, nets: int | None) -> list[int]:
        """Assumptions that keep to so many springs and nets; two springs a pole are the least."""
        if self.session is None:
            self.session = self._open()
        doubles = springs - 2 * len(self.kinds)
        limits = [-self.doubles[doubles]] if doubles < len(self.doubles) else []
        if nets is not None:
            limits += [-mark for mark in self.used[max(0, nets - 2) :]]
        return limits

    def ask(self, limits: Sequence[int], slices: int) -> tuple[Status, Mesh]:
        """Ask with some slices of conflicts."""
        if self.session is None:
            self.session = self._open()
        nothing = Mesh((), (1,))
        for _ in range(slices):
            if self.slices == _SOON:
                self.session.close()
                self.session = Session(self.encoding.clauses, solver=SOLVER)
            self.slices += 1
            before = self.session.conflicts
            status = self.session.solve(limits, conflicts=_SLICE)
            self.level.spent += self.session.conflicts - before
            if status == "sat":
                poles = tidy(self.level.rows, self.encoding.decode(self.session.model()))
                return status, Mesh(poles, (1,))
            if status == "unsat":
                return status, nothing
        return "unknown", nothing

    def close(self) -> None:
        """Free the solver."""
        if self.session is not None and not self.closed:
            self.session.close()
            self.closed = True


def _canonical_shares(
    table: int, kinds: Sequence[Kind], poles: int, least: dict[Kind, int]
) -> Iterator[tuple[Kind, ...]]:
    """Ways to share poles out over the kinds, one of those that the function's symmetries join."""
    place = {kind: k for k, kind in enumerate(kinds)}
    other: dict[Form, Form] = {"C": "C", "A": "B", "B": "A"}
    moves = set()
    for turn in automorphisms(table):
        move = []
        for relay, form in kinds:
            image = other[form] if turn.flips >> relay & 1 else form
            move.append(place[Kind(turn.order[relay], image)])
        moves.add(tuple(move))
    most = dict.fromkeys(kinds, poles)
    for counts in compositions(kinds, poles, least, most):
        if any(tuple(counts[k] for k in move) > counts for move in moves):
            continue
        yield tuple(kind for kind, count in zip(kinds, counts, strict=True) for _ in range(count))


def _double(encoding: Encoding, pole: int) -> int:
    """A literal that holds iff the pole is wired on both throws."""
    both = encoding.new()
    make, break_ = encoding.make[pole].none, encoding.break_[pole].none
    encoding.clauses += [[-both, -make], [-both, -break_], [both, make, break_]]
    return both


def _counter(encoding: Encoding, literals: Sequence[int]) -> list[int]:
    """Literals "more than k of these hold", both ways (the sequential counter of Sinz 2005)."""
    add = encoding.clauses.append
    above: list[int] = []
    for literal in literals:
        next_ = encoding.news(len(above) + 1)
        for k, now in enumerate(next_):
            lower = above[k - 1] if k else None
            same = above[k] if k < len(above) else None
            if same is not None:
                add([-same, now])
            add([-literal, now] if lower is None else [-literal, -lower, now])
            add([-now, literal] if same is None else [-now, same, literal])
            if lower is not None:
                add([-now, lower] if same is None else [-now, same, lower])
        above = next_
    return above


def _net_marks(encoding: Encoding) -> list[int]:
    """A literal for every inner net that must hold if the net is in use."""
    marks = []
    for net in range(encoding.fixed, encoding.nets):
        mark = encoding.new()
        for pole, common in enumerate(encoding.common):
            for side in (common, encoding.make[pole].at, encoding.break_[pole].at):
                if side:
                    encoding.clauses.append([-side[net], mark])
        marks.append(mark)
    return marks


def _series_parallel(encoding: Encoding) -> None:
    """Nets can be eliminated with at most two neighbours each, the two fixed nets last."""
    add = encoding.clauses.append
    nets = range(encoding.nets)
    inner = range(encoding.fixed, encoding.nets)
    touch = {pair: encoding.new() for pair in combinations(nets, 2)}
    for pole, common in enumerate(encoding.common):
        for side in (encoding.make[pole].at, encoding.break_[pole].at):
            for a, b in touch if side else ():
                add([-common[a], -side[b], touch[a, b]])
                add([-common[b], -side[a], touch[a, b]])
    earlier = {}
    for a, b in combinations(inner, 2):
        earlier[a, b] = encoding.new()
        earlier[b, a] = -earlier[a, b]
    for a in inner:
        for b in inner:
            for c in inner:
                if len({a, b, c}) == 3:
                    add([-earlier[a, b], -earlier[b, c], earlier[a, c]])
    left = {(a, b): encoding.new() for a in inner for b in nets if a != b}
    for a, b in left:
        together = touch[min(a, b), max(a, b)]
        add(
            [-together, left[a, b]]
            if b < encoding.fixed
            else [-together, -earlier[a, b], left[a, b]]
        )
        if b >= encoding.fixed:
            add([-left[a, b], earlier[a, b]])
    for a in inner:
        for b, c in combinations([net for net in nets if net != a], 2):
            both = [-left[a, b], -left[a, c]]
            if c < encoding.fixed:
                continue
            if b < encoding.fixed:
                add([*both, left[c, b]])
            else:
                add([*both, -earlier[b, c], left[b, c]])
                add([*both, -earlier[c, b], left[c, b]])
        for three in combinations([net for net in nets if net != a], 3):
            add([-left[a, b] for b in three])
