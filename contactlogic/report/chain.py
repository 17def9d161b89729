"""The least wire that joins the terminals of one net.

Terminals are chained, so that none carries more wires than it may.  Where the job states positions
the least length is found as an integer program: a spanning tree in which no place has more wires
than its terminals can take, circles being forbidden one by one as they come up (Dantzig, Fulkerson
and Johnson 1954).  With two wires to a terminal the tree is a path.  Terminals at one place are
chained there, at no length.  Lengths are steps along rows and columns, as wires lie in ducts.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import combinations, pairwise

from contactlogic.job.model import Position

__all__ = ["EXACT_PLACES", "joined", "length_of"]

EXACT_PLACES = 18
"""Places up to which the least length is searched for; more are chained by a heuristic."""

_EFFORT = 20.0  # deterministic seconds of the engine, far more than it needs
_FINE = 1000  # lengths are compared to a thousandth of a step
_Pair = tuple[str, str]


def joined(
    terminals: Sequence[str],
    places: Mapping[str, Position] | None = None,
    *,
    per_terminal: int = 2,
) -> tuple[_Pair, ...]:
    """Wires that join the terminals of one net.

    Args:
        terminals: in the order of the panel; they are chained so where no positions are known.
        places: position of terminals, as far as known.  Others are put at the ends of the chain.
        per_terminal: most wires on one terminal, at least 2.

    Raises:
        ValueError: fewer than two wires allowed on a terminal.
    """
    if per_terminal < 2:
        raise ValueError("a net of three terminals needs two wires on one of them")
    known = places or {}
    stops: dict[Position, list[str]] = {}
    for terminal in terminals:
        if terminal in known:
            stops.setdefault(known[terminal], []).append(terminal)
    if len(stops) < 2:
        return tuple(pairwise(terminals))
    first = next(i for i, t in enumerate(terminals) if t in known)
    before = [t for t in terminals[:first] if t not in known]
    after = [t for t in terminals[first:] if t not in known]
    seats = list(stops)
    room = [(per_terminal - 2) * len(stops[seat]) + 2 for seat in seats]
    edges = _tree(seats, room) if len(seats) <= EXACT_PLACES else _path(seats)
    if all(sum(i in edge for edge in edges) <= 2 for i in range(len(seats))):
        chain = [terminal for i in _along(edges) for terminal in stops[seats[i]]]
        return tuple(pairwise([*before, *chain, *after]))
    return _branched(edges, [stops[seat] for seat in seats], before, after, per_terminal)


def length_of(pairs: Sequence[_Pair], places: Mapping[str, Position]) -> float | None:
    """Length of wires in steps of rows and columns; None where an end has no position."""
    total = 0.0
    for a, b in pairs:
        if a not in places or b not in places:
            return None
        total += _steps(places[a], places[b])
    return total


def _steps(a: Position, b: Position) -> float:
    return abs(a.row - b.row) + abs(a.column - b.column)


def _weight(seats: Sequence[Position], i: int, j: int) -> int:
    """Length to be made least; of equal lengths the order of the panel is kept."""
    return round(_steps(seats[i], seats[j]) * _FINE) * len(seats) ** 2 + abs(i - j)


def _tree(seats: Sequence[Position], room: Sequence[int]) -> list[tuple[int, int]]:
    """The least spanning tree with at most `room` edges at each place, edges ascending."""
    import networkx

    from contactlogic.integer import Program

    pairs = list(combinations(range(len(seats)), 2))
    program = Program(seed=0, effort=_EFFORT)
    chosen = {pair: program.binary() for pair in pairs}
    program.add(sum(chosen.values()) == len(seats) - 1)
    for i, most in enumerate(room):
        mine = [chosen[pair] for pair in pairs if i in pair]
        program.add(sum(mine) >= 1)
        program.add(sum(mine) <= most)
    program.minimize(sum(_weight(seats, *pair) * chosen[pair] for pair in pairs))
    while program.solve():
        edges = [pair for pair in pairs if program.value(chosen[pair])]
        graph = networkx.Graph(edges)
        islands = sorted(map(sorted, networkx.connected_components(graph)))
        if len(islands) == 1:
            return edges
        for island in islands:
            inside = [chosen[pair] for pair in pairs if set(pair) <= set(island)]
            program.add(sum(inside) <= len(island) - 1)
            leaving = [chosen[pair] for pair in pairs if len(set(pair) & set(island)) == 1]
            program.add(sum(leaving) >= 1)
    return _path(seats)


def _path(seats: Sequence[Position]) -> list[tuple[int, int]]:
    """A short path by threshold accepting from a greedy tour (networkx), opened where longest."""
    import networkx
    from networkx.algorithms.approximation import threshold_accepting_tsp

    graph = networkx.Graph()
    for i, j in combinations(range(len(seats)), 2):
        graph.add_edge(i, j, weight=_weight(seats, i, j))
    hub = len(seats)  # as far from all: where the tour passes it the path is open
    for i in range(hub):
        graph.add_edge(i, hub, weight=0)
    tour = threshold_accepting_tsp(graph, "greedy", seed=0, source=hub)
    return sorted((min(a, b), max(a, b)) for a, b in pairwise(tour) if hub not in (a, b))


def _along(edges: Sequence[tuple[int, int]]) -> list[int]:
    """Places along a path, from its end that comes first on the panel."""
    near: dict[int, list[int]] = {}
    for a, b in edges:
        near.setdefault(a, []).append(b)
        near.setdefault(b, []).append(a)
    here = min(i for i, others in near.items() if len(others) == 1)
    way = [here]
    while len(way) < len(near):
        here = next(i for i in near[here] if i not in way[-2:])
        way.append(here)
    return way


def _branched(
    edges: Sequence[tuple[int, int]],
    stops: Sequence[Sequence[str]],
    before: Sequence[str],
    after: Sequence[str],
    per_terminal: int,
) -> tuple[_Pair, ...]:
    """Wires of a tree: those inside a place first, each other one where there is room for it."""
    pairs = [pair for stop in stops for pair in pairwise(stop)]
    load: dict[str, int] = {}
    for pair in pairs:
        for end in pair:
            load[end] = load.get(end, 0) + 1

    def least(stop: Sequence[str]) -> str:
        end = min(stop, key=lambda t: load.get(t, 0))
        load[end] = load.get(end, 0) + 1
        return end

    pairs += [(least(stops[a]), least(stops[b])) for a, b in edges]
    ends = [terminal for stop in stops for terminal in stop]
    for group in (list(reversed(before)), list(after)):
        if group:
            free = [t for t in ends if load.get(t, 0) < per_terminal]
            pairs += pairwise([least(free), *group])
    return tuple(pairs)
