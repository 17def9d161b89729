"""Decision diagrams as contact networks: starting points for the search.

A decision diagram is a contact network as it stands (Lee 1959, Shannon 1938): a node is a pole, the
node's net its common, the children the nets of its make and its break; the constant 1 is the
supply and the constant 0 is not wired.  In each row every net leads on to one child only, so there
is no sneak path, for every order of the relays, shared by all loads.

Free rows are used level by level: subfunctions that no row tells apart are merged, and a relay
whose two cofactors agree is passed over (Sasao and Matsuura 2005, reduction of the width of
diagrams of incompletely specified functions, here greedy).
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import permutations
from typing import Any

from contactlogic.search.encoding import Ends
from contactlogic.search.mesh import SUPPLY, Mesh, trim
from contactlogic.truth import Target, cofactor

__all__ = ["diagram", "fewest_nodes", "selector", "starts"]

_ALL_ORDERS = 6  # up to this many relays every order is tried; beyond, orders found by sifting

_Want = tuple[int, int]  # rows that must be on, rows that must be off


def diagram(targets: Sequence[Target], order: Sequence[int]) -> Mesh:
    """The shared diagram of all loads, relays read in `order`, as a mesh."""
    n = targets[0].n
    # each want waits with the places that refer to it: (pole number, throw) or (None, load)
    waiting: list[tuple[_Want, list[tuple[int | None, int]]]] = []
    for load, target in enumerate(targets):
        _merge(waiting, (target.on, target.off), [(None, load)])
    feeds: list[int | None] = [None] * len(targets)
    nodes: list[tuple[int, list[int | None]]] = []  # relay, nets of break and make

    def settle(net: int | None, places: list[tuple[int | None, int]]) -> None:
        for pole, slot in places:
            if pole is None:
                feeds[slot] = net
            else:
                nodes[pole][1][slot] = net

    for relay in order:
        below: list[tuple[_Want, list[tuple[int | None, int]]]] = []
        for (on, off), places in waiting:
            if not on:
                settle(None, places)
                continue
            if not off:
                settle(SUPPLY, places)
                continue
            halves = [(cofactor(on, n, relay, v), cofactor(off, n, relay, v)) for v in (0, 1)]
            if not (halves[0][0] & halves[1][1] or halves[0][1] & halves[1][0]):
                both = (halves[0][0] | halves[1][0], halves[0][1] | halves[1][1])
                _merge(below, both, places)
                continue
            nodes.append((relay, [None, None]))
            settle(len(nodes), places)  # node k has net k + 1
            for value, half in enumerate(halves):
                _merge(below, half, [(len(nodes) - 1, value)])
        waiting = below
    for (on, _), places in waiting:
        settle(SUPPLY if on else None, places)
    poles = tuple(
        Ends(relay, net, ends[1], ends[0]) for net, (relay, ends) in enumerate(nodes, start=1)
    )
    return trim(Mesh(poles, tuple(feeds)))


def _merge(
    waiting: list[tuple[_Want, list[tuple[int | None, int]]]],
    want: _Want,
    places: list[tuple[int | None, int]],
) -> None:
    """Put a want with the first one that it does not contradict, else by itself."""
    on, off = want
    for k, ((on_k, off_k), places_k) in enumerate(waiting):
        # a want without on rows or without off rows fits a constant and needs no node: keep it so
        if bool(on) == bool(on_k) and bool(off) == bool(off_k) and not (on & off_k or off & on_k):
            waiting[k] = ((on | on_k, off | off_k), places_k + places)
            return
    waiting.append((want, places))


def selector(targets: Sequence[Target], order: Sequence[int]) -> Mesh | None:
    """A diagram read the other way: from the supply down to the one load that is on.

    For loads of which no row needs two at once (one of ten, exact counts, greater-equal-less).
    For exact counts it is the lattice of Shannon 1938, n(n + 1)/2 poles.  Nets may be reached from
    several sides, so the caller checks the result.  None if some row needs two loads.
    """
    n = targets[0].n
    nodes: list[tuple[int, list[int | None]]] = []
    first = len(targets) + 1  # nets 1 .. len(targets) are the loads'
    waiting: list[tuple[tuple[_Want, ...], list[tuple[int, int]]]] = [
        (tuple((t.on, t.off) for t in targets), [])
    ]

    def settle(net: int | None, places: list[tuple[int, int]]) -> bool:
        for pole, slot in places:
            nodes[pole][1][slot] = net
        return bool(places)

    def demand(wants: tuple[_Want, ...]) -> int | None:
        """The load that may be on in all these rows and serves every need, else None."""
        needs = [k for k, (on, _) in enumerate(wants) if on]
        return needs[0] if len(needs) == 1 and not wants[needs[0]][1] else None

    for relay in [*order, None]:
        below: list[tuple[tuple[_Want, ...], list[tuple[int, int]]]] = []
        for wants, places in waiting:
            if not any(on for on, _ in wants):
                settle(None, places)
                continue
            load = demand(wants)
            if load is not None:
                if not settle(load + 1, places):
                    return None  # a load that may be on in every row: no selection to make
                continue
            if relay is None:
                return None
            halves = [
                tuple((cofactor(on, n, relay, v), cofactor(off, n, relay, v)) for on, off in wants)
                for v in (0, 1)
            ]
            if _agree(halves[0], halves[1]):
                _gather(below, _both(halves[0], halves[1]), places)
                continue
            nodes.append((relay, [None, None]))
            settle(first + len(nodes) - 1, places)
            for value, half in enumerate(halves):
                _gather(below, half, [(len(nodes) - 1, value)])
        waiting = below
    poles = tuple(
        Ends(relay, SUPPLY if k == 0 else first + k, ends[1], ends[0])
        for k, (relay, ends) in enumerate(nodes)
        if ends != [None, None]
    )
    feeds = tuple(k + 1 if target.on else None for k, target in enumerate(targets))
    return trim(Mesh(poles, feeds))


def _agree(one: tuple[_Want, ...], other: tuple[_Want, ...]) -> bool:
    return not any(a & d or b & c for (a, b), (c, d) in zip(one, other, strict=True))


def _both(one: tuple[_Want, ...], other: tuple[_Want, ...]) -> tuple[_Want, ...]:
    return tuple((a | c, b | d) for (a, b), (c, d) in zip(one, other, strict=True))


def _gather(
    waiting: list[tuple[tuple[_Want, ...], list[tuple[int, int]]]],
    wants: tuple[_Want, ...],
    places: list[tuple[int, int]],
) -> None:
    for k, (known, places_k) in enumerate(waiting):
        if _agree(known, wants):
            waiting[k] = (_both(known, wants), places_k + places)
            return
    waiting.append((wants, places))


def starts(targets: Sequence[Target], count: int) -> list[Mesh]:
    """Up to `count` different diagrams of either kind, fewest poles first; selectors unchecked."""
    orders = _orders(targets)
    found: dict[Mesh, None] = {}
    for order in orders:
        found.setdefault(diagram(targets, order))
        chosen = selector(targets, order) if len(targets) > 1 else None
        if chosen is not None:
            found.setdefault(chosen)
    return sorted(found, key=_order)[:count]


def _order(mesh: Mesh) -> tuple[object, ...]:
    """Fewest poles first, then by nets; an unwired end comes before all nets."""
    nets = tuple(tuple(-1 if net is None else net for net in pole) for pole in mesh.poles)
    return len(mesh.poles), nets


def fewest_nodes(targets: Sequence[Target]) -> Mesh:
    """The diagram with the fewest nodes over all orders (sifted beyond `_ALL_ORDERS` relays)."""
    return min(
        (diagram(targets, order) for order in _orders(targets)), key=lambda mesh: len(mesh.poles)
    )


def _orders(targets: Sequence[Target]) -> list[tuple[int, ...]]:
    n = targets[0].n
    return list(permutations(range(n))) if n <= _ALL_ORDERS else [_sifted(targets)]


def _sifted(targets: Sequence[Target]) -> tuple[int, ...]:
    """A good order by Rudell's sifting (1993), by the `dd` library."""
    from dd.autoref import BDD

    n = targets[0].n
    manager = BDD()
    names = [f"r{i}" for i in range(n)]
    manager.declare(*names)
    memo: dict[tuple[int, int], Any] = {}

    def build(table: int, level: int) -> Any:
        if level < 0:
            return manager.true if table else manager.false
        key = (table, level)
        if key not in memo:
            half = 1 << level
            low, high = table & ((1 << half) - 1), table >> half
            memo[key] = manager.ite(
                manager.var(names[level]), build(high, level - 1), build(low, level - 1)
            )
        return memo[key]

    roots = [build(target.on, n - 1) for target in targets]
    manager.reorder()
    order = tuple(sorted(range(n), key=lambda i: manager.level_of_var(names[i])))
    roots.clear()  # the manager complains of nodes that outlive it
    memo.clear()
    return order
