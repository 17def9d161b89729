"""Better networks by re-synthesis of small windows (design.md section 8.2).

A few neighbouring poles are taken out of a correct network.  In each row the rest joins the nets
it touches into a few nodes; the SAT encoding of `encoding` is asked for fewer poles (or as many,
wired differently, to wander) that restore what every load needs.  Rows that look alike from inside
the window are one row, and rows are added only when an answer gets them wrong.

Between windows the walk drifts: single poles are replaced by others that do as well, found by
look-up (`swaps`), and pairs by one pole where that is possible.  That costs a hundredth of a window
and leads it past networks that no small window leaves.

Every network that `Walk` holds has been checked over all rows by bit-parallel conduction.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass
from itertools import count
from random import Random

from contactlogic.search.encoding import Ends, Row
from contactlogic.search.goal import Goal
from contactlogic.search.mesh import SUPPLY, Mesh, live_rows, trim
from contactlogic.search.resynthesis import WindowProblem, resynthesise
from contactlogic.search.swaps import bystander, stand_in

__all__ = ["Found", "Walk", "wander"]

_CONFLICTS = 2000  # for one question; windows that need more are left
_PATIENCE = 12  # windows without gain, for each pole, before a walk starts afresh
_POLISH = 8  # windows for ties once the poles are known to be fewest
_SIGN_OF_LIFE = 10  # windows between signs of life
_DEARER = 0.25  # of the windows with as many poles are tried with one more where the price counts
_DRIFT = 30  # poles replaced one by one before each window
_DRIFT_JUDGED = 5  # the same where a judgement from outside is to be asked every time
_DETOUR = 0.5  # how often a walk takes a pole more before it drifts
_PAIRS = 4  # pairs of poles looked at after each of them
_TRIES = 6  # different answers looked at where a filter may reject them


class Walk:
    """One walk through correct networks from a start, by windows chosen at random.

    Attributes:
        here: the network the walk stands at.
        best: the cheapest one it has met.
        windows: questions asked so far.
    """

    def __init__(self, start: Mesh, goal: Goal, *, seed: int) -> None:
        self.goal = goal
        self.here = self.best = trim(start)
        self.random = Random(seed)
        self.windows = 0

    def step(self) -> None:
        """Drift, then try one window: first with a pole fewer, else as many, to wander.

        Where the price counts, one more pole is tried now and then: it may cost less.
        """
        if len(self.here.poles) < 2:
            return
        self._drift()
        if len(self.here.poles) < 2:
            return
        size = self.random.choice((2, 3, 3, 4, 4, 4, 5))
        chosen = self._choose(min(size, len(self.here.poles)))
        self.windows += 1
        fewer = self.random.random() < 0.6
        found = self._resynthesise(chosen, len(chosen) - 1) if fewer else None
        if found is None:
            more = self.goal.price is not None and self.random.random() < _DEARER
            found = self._resynthesise(chosen, len(chosen) + more)
        if found is not None:
            self.here = found
            self._keep()

    def _keep(self) -> None:
        """Take note of the best; contacts that nothing needs are left out of it."""
        goal = self.goal
        more = len(self.here.poles) > len(self.best.poles) and goal.price is None
        if more and goal.weight(self.here) >= goal.weight(self.best):
            return
        if goal.cost(bare := self._bare(self.here)) < goal.cost(self.best):
            self.best = bare

    def _bare(self, mesh: Mesh) -> Mesh:
        weight = self.goal.weight(mesh)
        for k, pole in enumerate(mesh.poles):
            if None in (pole.make, pole.break_):
                continue
            for less in (pole._replace(make=None), pole._replace(break_=None)):
                fewer = Mesh((*mesh.poles[:k], less, *mesh.poles[k + 1 :]), mesh.feeds)
                if self.goal.accepts(fewer) and self.goal.weight(fewer) <= weight:
                    mesh = fewer
                    break
        return trim(mesh)

    def _drift(self) -> None:
        goal = self.goal
        judged = goal.penalty is not None or goal.price is not None
        if len(self.here.poles) <= len(self.best.poles) and self.random.random() < _DETOUR:
            self._detour()
        for _ in range(_DRIFT_JUDGED if judged else _DRIFT):
            if len(self.here.poles) < 2:
                break
            if self._stand_in([self.random.randrange(len(self.here.poles))]):
                for _ in range(_PAIRS):
                    if len(self.here.poles) > 2:
                        self._stand_in(self._choose(2))
        self._keep()

    def _detour(self) -> None:
        """Take a pole more than the best has, which nothing needs as yet."""
        mesh, goal = self.here, self.goal
        more = bystander(mesh, goal.targets, self.random, single=self._single())
        if more is None:
            return
        candidate = Mesh((*mesh.poles, more), mesh.feeds)
        if goal.accepts(candidate) and goal.weight(candidate) <= goal.weight(mesh):
            self.here = candidate

    def _single(self) -> Collection[int]:
        return range(self.goal.n) if self.goal.singly else self.goal.separate.keys()

    def _stand_in(self, out: Sequence[int]) -> bool:
        """Whether one pole, or none, could take the place of these."""
        mesh, goal = self.here, self.goal
        made = stand_in(mesh, out, goal.targets, self.random, single=self._single())
        if made is None:
            return False
        rest = [pole for k, pole in enumerate(mesh.poles) if k not in out]
        candidate = trim(Mesh((*rest, *made), mesh.feeds))
        if not goal.accepts(candidate) or goal.weight(candidate) > goal.weight(mesh):
            return False
        self.here = candidate
        return True

    def _choose(self, size: int) -> list[int]:
        """Indices of `size` poles that hang together by shared nets."""
        poles = self.here.poles
        chosen = [self.random.randrange(len(poles))]
        while len(chosen) < size:
            nets = {net for k in chosen for net in poles[k][1:] if net is not None} - {SUPPLY}
            near = [k for k in range(len(poles)) if k not in chosen and nets & {*poles[k][1:]}]
            if not near or self.random.random() < 0.1:
                near = [k for k in range(len(poles)) if k not in chosen]
            chosen.append(self.random.choice(near))
        return sorted(chosen)

    def _resynthesise(self, chosen: Sequence[int], poles: int) -> Mesh | None:
        """A correct network with `poles` poles in place of the chosen ones, None if none found."""
        mesh, goal = self.here, self.goal
        taken = [mesh.poles[k] for k in chosen]
        rest = [pole for k, pole in enumerate(mesh.poles) if k not in chosen]
        nets = self._open_nets(taken, rest)
        relays = self._open_relays(taken)
        window = WindowProblem(
            len(relays),
            len(nets),
            tuple(self._rows(rest, nets, relays)),
            frozenset(k for k, r in enumerate(relays) if goal.singly or r in goal.separate),
        )
        for _ in range(_TRIES if goal.ladder else 1):
            answer = resynthesise(
                window,
                poles,
                self.random.choice((1, 2, 2)),
                conflicts=_CONFLICTS,
                seed=self.random.getrandbits(32),
            )
            if answer.status != "sat":
                return None
            made = [self._place(ends, nets, relays, mesh) for ends in answer.poles]
            candidate = trim(Mesh((*rest, *made), mesh.feeds))
            if set(candidate.poles) == set(mesh.poles) or not goal.accepts(candidate):
                continue
            if goal.weight(candidate) <= goal.weight(mesh):
                return candidate
        return None

    def _open_nets(self, taken: Sequence[Ends], rest: Sequence[Ends]) -> list[int]:
        """Fixed nets the window may use: its own, the supply, and a few others."""
        feeds = {feed for feed in self.here.feeds if feed is not None}
        outside = {SUPPLY} | feeds
        for pole in rest:
            outside |= {net for net in pole[1:] if net is not None}
        own = {net for pole in taken for net in pole[1:] if net is not None}
        nets = {SUPPLY} | (own & outside)
        others = sorted(outside - nets)
        self.random.shuffle(others)
        nets.update(others[: self.random.choice((0, 1, 2, 3))])
        return sorted(nets)

    def _open_relays(self, taken: Sequence[Ends]) -> list[int]:
        own = {pole.relay for pole in taken}
        others = [i for i in range(self.goal.n) if i not in own]
        self.random.shuffle(others)
        return sorted([*own, *others[: self.random.choice((0, 1, 2))]])

    def _rows(
        self, rest: Sequence[Ends], nets: Sequence[int], relays: Sequence[int]
    ) -> Iterator[Row]:
        """What each row asks of the window, rows that look alike from inside only once."""
        goal = self.goal
        joined = _joins(rest, nets, goal.n)
        wishes = {
            load: (feed, target, _joins(rest, [feed], goal.n, nets)[0])
            for load, (feed, target) in enumerate(zip(self.here.feeds, goal.targets, strict=True))
            if feed is not None and feed != SUPPLY
        }
        seen: dict[Row, None] = {}
        for row in range(1 << goal.n):
            bit = 1 << row
            node = tuple(
                next(b for b in range(a + 1) if b == a or joined[a][b] & bit)
                for a in range(len(nets))
            )
            source = node[nets.index(SUPPLY)]
            on: set[int] = set()
            off: set[int] = set()
            at: dict[int, int] = {}  # load -> its node, where the window's nets can reach it
            for load, (_, target, reach) in wishes.items():
                here = next((node[k] for k in range(len(nets)) if reach[k] & bit), None)
                if here is None:
                    continue
                at[load] = here
                if not target.free & bit:
                    (on if target.on & bit else off).add(here)
            apart = set()
            for load in goal.isolated & at.keys():
                for other in at.keys() - {load}:
                    if wishes[other][0] == wishes[load][0]:
                        continue
                    if at[other] == at[load]:  # joined outside already: allowed only when on
                        on.add(at[load])
                    else:
                        apart.add((at[load], at[other]))
            on.discard(source)
            if on or off or apart:
                setting = sum((row >> relay & 1) << k for k, relay in enumerate(relays))
                asked = (tuple(sorted(on)), tuple(sorted(off)), tuple(sorted(apart)))
                seen.setdefault(Row(setting, node, source, *asked))
        return iter(seen)

    def _place(self, ends: Ends, nets: Sequence[int], relays: Sequence[int], mesh: Mesh) -> Ends:
        """A pole of an answer on the mesh's nets; inner nets get numbers of their own."""
        fresh = max(mesh.nets()) + 1

        def at(net: int | None) -> int | None:
            if net is None:
                return None
            return nets[net] if net < len(nets) else fresh + net - len(nets)

        common = at(ends.common)
        assert common is not None
        return Ends(relays[ends.relay], common, at(ends.make), at(ends.break_))


def _joins(
    poles: Sequence[Ends], sources: Sequence[int], n: int, ends: Sequence[int] | None = None
) -> list[list[int]]:
    """Rows in which each source is joined to each end (default: the sources), as tables."""
    goals = sources if ends is None else ends
    return [
        [live.get(goal, 0) for goal in goals]
        for live in (live_rows(poles, n, source) for source in sources)
    ]


@dataclass(frozen=True)
class Found:
    """News from a walk: windows tried so far and, if it is new, the cheapest network."""

    windows: int
    best: Mesh | None = None


def wander(
    starts: Sequence[Mesh], goal: Goal, seed: int, effort: int | None, enough: int = 0
) -> Iterator[Found]:
    """Walk again and again, from the starts in turn and from the best, for `effort` windows.

    Endless if `effort` is None, but for a few windows more once the best has no more than `enough`
    poles.  Yields every better network as it comes, and a sign of life
    every few windows.  Starts that the goal does not accept are left out.
    """
    random = Random(seed)
    usable = [start for start in map(trim, starts) if goal.accepts(start)]
    if not usable:
        return
    random.shuffle(usable)
    usable.sort(key=goal.cost)
    best = usable[0]
    yield Found(0, best)
    windows, polish = 0, _POLISH
    for attempt in count():
        fresh = attempt < len(usable) or random.random() < 0.5
        walk = Walk(
            usable[attempt % len(usable)] if fresh else best, goal, seed=random.getrandbits(32)
        )
        patience = _PATIENCE * len(walk.here.poles)
        idle, known = 0, goal.cost(walk.best)
        while idle < patience and polish and (effort is None or windows < effort):
            walk.step()
            windows += 1
            idle += 1
            polish -= goal.reached(best, enough)
            if goal.cost(walk.best) < known:
                known, idle = goal.cost(walk.best), 0
            if known < goal.cost(best):
                best = walk.best
                yield Found(windows, best)
            elif windows % _SIGN_OF_LIFE == 0:
                yield Found(windows)
        if len(walk.here.poles) < 2 or not polish or (effort is not None and windows >= effort):
            yield Found(windows)
            return
