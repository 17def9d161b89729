"""A single pole that may stand in for a few of a network, by bit-parallel look-up.

Take some poles out of a correct network.  In each row the rest joins nets into pieces; for every
net three tables say in which rows its piece is fed, in which it holds a load that must be off, and
in which it holds a load that has lost its feed.  A contact between two nets does harm in just the
rows in which it is closed, one net is fed and the other holds a load that must be off; it mends a
load in the rows in which one is fed and the other holds that load.  The make and the break of a
pole are closed in different rows, so each is looked at by itself.  All poles that restore what is
lost are thus gone through in well under a millisecond, where a SAT question takes tens.

One pole for two is a gain; one for one lets a walk wander at hundreds of steps a second.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from itertools import combinations
from random import Random

from contactlogic.search.encoding import Ends
from contactlogic.search.mesh import SUPPLY, Mesh, joins, spread
from contactlogic.truth import Target, all_rows, literal

__all__ = ["bystander", "stand_in"]

_Rows = Mapping[int, int]  # by net, rows in which it has some property
_SPARE = 0.9  # how often a throw that nothing needs is wired where it does no harm
_TRIES = 8  # nets looked at for such a throw


def stand_in(
    mesh: Mesh,
    out: Collection[int],
    targets: Sequence[Target],
    random: Random,
    *,
    single: Collection[int] = (),
) -> tuple[Ends, ...] | None:
    """A random pole that does what those taken out did; () if nothing need, None if none can.

    It is none of those taken out.  Isolation, form and limits are for the caller to check.

    Args:
        out: indices of the poles taken out.
        targets: what each load must do.
        single: relays that have single contacts only.
    """
    n = targets[0].n
    nets = mesh.nets()
    beside = joins([pole for k, pole in enumerate(mesh.poles) if k not in out], n, nets)
    live = spread(beside, {SUPPLY: all_rows(n)})
    lost: dict[int, int] = {}
    off: dict[int, int] = {}
    for feed, target in zip(mesh.feeds, targets, strict=True):
        if feed is None:
            continue
        if gone := target.on & ~live[feed]:
            lost[feed] = lost.get(feed, 0) | gone
        if target.off:
            off[feed] = off.get(feed, 0) | target.off
    if not lost:
        return ()
    state = _State(
        live,
        spread(beside, off),
        [(gone, spread(beside, {feed: gone})) for feed, gone in lost.items()],
    )
    taken = {mesh.poles[k] for k in out}
    relays = list(range(n))
    random.shuffle(relays)
    for relay in relays:
        made = _pole(state, relay, n, random, relay in single, taken)
        if made is not None:
            return (made,)
    return None


def bystander(
    mesh: Mesh, targets: Sequence[Target], random: Random, *, single: Collection[int] = ()
) -> Ends | None:
    """A random pole that nothing needs and that does no harm; None if none was met.

    Added, it gives a walk room: two others may now become one.
    """
    n = targets[0].n
    beside = joins(mesh.poles, n, mesh.nets())
    off: dict[int, int] = {}
    for feed, target in zip(mesh.feeds, targets, strict=True):
        if feed is not None and target.off:
            off[feed] = off.get(feed, 0) | target.off
    state = _State(spread(beside, {SUPPLY: all_rows(n)}), spread(beside, off), [])
    for _ in range(_TRIES):
        relay, common = random.randrange(n), random.choice(state.nets)
        throws = [_spare(state, common, literal(n, relay, make), random) for make in (True, False)]
        if relay in single:
            throws[random.randrange(2)] = None
        make_net, break_net = throws
        if make_net != break_net:
            return Ends(relay, common, make_net, break_net)
    return None


class _State:
    """What the rest of a network does.

    Args:
        live: rows in which each net is fed.
        bad: rows in which its piece holds a load that must be off.
        lost: for each load that has lost its feed, the rows, and the nets joined to it there.
    """

    def __init__(self, live: _Rows, bad: _Rows, lost: Sequence[tuple[int, _Rows]]) -> None:
        self.live, self.bad, self.lost = live, bad, lost
        self.nets = sorted(live)

    def harmless(self, a: int, b: int, rows: int) -> bool:
        """Whether a contact closed in these rows may join two nets."""
        return not rows & (self.live[a] & self.bad[b] | self.live[b] & self.bad[a])

    def mending(self, rows: int) -> list[tuple[int, int]] | None:
        """Pairs of nets that it may join to mend all that is lost there; None if nothing is."""
        live = self.live
        need = [(gone & rows, reach) for gone, reach in self.lost if gone & rows]
        if not need:
            return None
        ends = [
            net
            for net in self.nets
            if not any(gone & ~(live[net] | reach[net]) for gone, reach in need)
        ]
        return [
            (a, b)
            for a, b in combinations(ends, 2)
            if not any(gone & ~(live[a] & reach[b] | live[b] & reach[a]) for gone, reach in need)
            and self.harmless(a, b, rows)
        ]


def _pole(
    state: _State, relay: int, n: int, random: Random, single: bool, taken: Collection[Ends]
) -> Ends | None:
    operated, released = literal(n, relay, True), literal(n, relay, False)
    makes = state.mending(operated)
    if makes == []:
        return None
    breaks = state.mending(released)
    if breaks == [] or (single and None not in (makes, breaks)):
        return None
    made = _far_ends(makes)
    broken = _far_ends(breaks)
    commons = sorted(
        made.keys() & broken.keys() if made and broken else made.keys() | broken.keys()
    )
    random.shuffle(commons)
    for common in commons:
        make = random.choice(made[common]) if made else None
        break_ = random.choice(broken[common]) if broken else None
        if not single and random.random() < _SPARE:
            if make is None:
                make = _spare(state, common, operated, random)
            elif break_ is None:
                break_ = _spare(state, common, released, random)
        pole = Ends(relay, common, make, break_)
        if make != break_ and pole not in taken:
            return pole
    return None


def _far_ends(pairs: Iterable[tuple[int, int]] | None) -> dict[int, list[int]]:
    found: dict[int, list[int]] = {}
    for a, b in pairs or ():
        found.setdefault(a, []).append(b)
        found.setdefault(b, []).append(a)
    return found


def _spare(state: _State, common: int, rows: int, random: Random) -> int | None:
    for _ in range(_TRIES):
        net = random.choice(state.nets)
        if net != common and state.harmless(common, net, rows):
            return net
    return None
