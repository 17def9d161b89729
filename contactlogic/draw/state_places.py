"""Where the states of a state graph stand: rings, and round each ring the states that lead to it.

Every island is a ring of states (a cycle, a trap, a hunting loop) or a single one.  The states
that lead into it stand outside on further rings, one for each move more: the radial drawing of
trees (Eades, "Drawing free trees", 1992), with the order on each ring improved by barycentres
(Sugiyama, Tagawa and Toda, 1981) and spacing by pooling neighbours that are too close.  Islands
are then packed on shelves.  Distances are in units of one state's width; `y` is down.
"""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Generic, TypeVar

__all__ = ["Island", "Placed", "place_islands"]

N = TypeVar("N", bound=Hashable)

_SPACE = 1.12  # least distance of neighbours on a ring
_LAYER = 1.4  # least distance of rings
_APART = 0.3  # by which the ring itself stands apart
_WIND = 0.3  # least distance of rings that have one state each
_SWEEPS = 24

Point = tuple[float, float]


@dataclass(frozen=True)
class Island(Generic[N]):
    """A ring of states in order, and the layers of states outside it, the nearest first.

    Args:
        room: least radius of a ring of several states, so that a caption fits inside; of the
            first layer if there is a single one, so that a caption fits beside it.
        wide, tall: what the caption of a single state takes of width and height, both ways from
            the centre.
    """

    ring: tuple[N, ...]
    layers: tuple[tuple[N, ...], ...]
    room: float = 0.0
    wide: float = 0.0
    tall: float = 0.0


@dataclass(frozen=True)
class Placed(Generic[N]):
    """Positions of states, and for each island its centre, and the radius and turn of its ring."""

    at: Mapping[N, Point]
    centres: tuple[Point, ...]
    rings: tuple[float, ...]
    turns: tuple[float, ...]


def place_islands(
    islands: Sequence[Island[N]],
    moves: Sequence[tuple[N, N]],
    *,
    aspect: float = 1.0,
    margin: float = 0.5,
) -> Placed[N]:
    """Positions of all states: no two are nearer to each other than one unit.

    Args:
        moves: pull states towards each other.
        aspect: wanted width of the whole by its height.
        margin: room left between islands.
    """
    beside: dict[N, list[N]] = {}
    for one, two in moves:
        if one != two:
            beside.setdefault(one, []).append(two)
            beside.setdefault(two, []).append(one)
    shapes = [_placed_apart(island, beside) for island in islands]
    # In the order given, but lone states last, where they fill a shelf.
    order = sorted(range(len(islands)), key=lambda k: (len(shapes[k][0]) == 1, k))
    turns = [0.0] * len(islands)
    at, centres = _packed(islands, shapes, turns, order, aspect, margin)
    for _ in range(2):  # islands are turned so that moves between them are short, and packed anew
        for k in range(1, len(islands)):
            turns[k] = _best_turn(islands[k], shapes[k][0], centres[k], at, beside, turns[k])
            at.update(_points(shapes[k][0], turns[k], centres[k]))
        at, centres = _packed(islands, shapes, turns, order, aspect, margin)
    rings = tuple(ring for _, ring in shapes)
    return Placed(at, tuple(centres), rings, tuple(turns))


def _packed(
    islands: Sequence[Island[N]],
    shapes: Sequence[tuple[Mapping[N, Point], float]],
    turns: Sequence[float],
    order: Sequence[int],
    aspect: float,
    margin: float,
) -> tuple[dict[N, Point], list[Point]]:
    """Positions of all states and the centres of islands, turned as they are."""
    sizes = [
        _extent(island, polar, turn)
        for island, (polar, _), turn in zip(islands, shapes, turns, strict=True)
    ]
    centres = _shelves(sizes, order, aspect, margin)
    at: dict[N, Point] = {}
    for (polar, _), turn, centre in zip(shapes, turns, centres, strict=True):
        at.update(_points(polar, turn, centre))
    return at, centres


def _points(polar: Mapping[N, Point], turn: float, centre: Point) -> dict[N, Point]:
    """From angle and radius to `x` and `y`; angles go clockwise from the top, as on a dial."""
    return {
        node: (
            centre[0] + radius * math.sin(angle + turn),
            centre[1] - radius * math.cos(angle + turn),
        )
        for node, (angle, radius) in polar.items()
    }


def _extent(
    island: Island[N], polar: Mapping[N, Point], turn: float
) -> tuple[float, float, float, float]:
    """Left, top, right and bottom of an island round its centre, states' own size included."""
    points = _points(polar, turn, (0.0, 0.0)).values()
    return (
        min(min(x for x, _ in points) - 0.5, -island.wide),
        min(min(y for _, y in points) - 0.5, -island.tall),
        max(max(x for x, _ in points) + 0.5, island.wide),
        max(max(y for _, y in points) + 0.5, island.tall),
    )


def _best_turn(
    island: Island[N],
    polar: Mapping[N, Point],
    centre: Point,
    at: Mapping[N, Point],
    beside: Mapping[N, Sequence[N]],
    now: float,
) -> float:
    """The turn of an island that makes its moves to others shortest."""
    outward = [
        (node, at[other]) for node in polar for other in beside.get(node, ()) if other not in polar
    ]
    if not outward:
        return now
    step = 2 * math.pi / (4 * max(len(island.ring), 3))

    def length(turn: float) -> float:
        points = _points(polar, turn, centre)
        return sum(math.dist(points[node], there) for node, there in outward)

    return min((k * step for k in range(4 * max(len(island.ring), 3))), key=length)


def _placed_apart(
    island: Island[N], beside: Mapping[N, Sequence[N]]
) -> tuple[dict[N, Point], float]:
    """As `_place`; a single run sticks out where winding it round would meet another state."""
    for wind in (_WIND, _LAYER):
        polar, ring = _place(island, beside, wind)
        points = _points(polar, 0.0, (0.0, 0.0)).values()
        if all(math.dist(a, b) >= 1.0 for a, b in combinations(points, 2)):
            break
    return polar, ring


def _place(
    island: Island[N], beside: Mapping[N, Sequence[N]], wind: float
) -> tuple[dict[N, Point], float]:
    """Angle and radius of each state of an island, and the radius of its ring.

    `wind` is the least distance of rings that have one state each.
    """
    count = len(island.ring)
    ring = 0.0
    if count > 1:
        ring = max(island.room, _SPACE * 1.1 / (2 * math.sin(math.pi / count)))
    radii = [ring]
    for layer in island.layers:
        need = _SPACE / (2 * math.sin(math.pi / len(layer))) if len(layer) > 1 else 0.0
        least = radii[-1] + _LAYER
        if _lone(island, len(radii) - 1):
            least = radii[-1] + wind
        if len(radii) == 1:
            least = max(least, island.room) if count == 1 else least + _APART
        radii.append(max(least, need * 1.03))
    angles: dict[N, float] = {node: 2 * math.pi * k / count for k, node in enumerate(island.ring)}
    depth = dict.fromkeys(island.ring, 0)
    for k, layer in enumerate(island.layers, start=1):
        depth.update(dict.fromkeys(layer, k))
    for k, layer in enumerate(island.layers, start=1):
        wanted = {
            node: _mean(angles, [n for n in beside.get(node, ()) if depth.get(n, k) < k], i, layer)
            for i, node in enumerate(layer)
        }
        angles.update(_spread(layer, wanted, radii[k]))
    best, least = dict(angles), _tension(angles, beside, depth, radii)
    for _ in range(_SWEEPS):
        for k, layer in enumerate(island.layers, start=1):
            wanted = {}
            for node in layer:
                pulls = [n for n in beside.get(node, ()) if n in depth]
                near = [n for n in pulls if depth[n] < k]  # the way in counts twice
                wanted[node] = _pull(angles, pulls + near, angles[node])
            angles.update(_spread(layer, wanted, radii[k]))
        tension = _tension(angles, beside, depth, radii)
        if tension < least - 1e-9:
            best, least = dict(angles), tension
    shifts = [0.0] * len(radii)
    for k in range(1, len(radii)):  # a long single run winds round instead of sticking out
        shifts[k] = shifts[k - 1] + (_LAYER / radii[k] if _lone(island, k - 1) else 0.0)
    places = {node: (best[node] - shifts[k], radii[k]) for node, k in depth.items()}
    return places, ring


def _lone(island: Island[N], index: int) -> bool:
    """Whether a layer and the one before it have one state each."""
    return index > 0 and len(island.layers[index]) == len(island.layers[index - 1]) == 1


def _mean(angles: Mapping[N, float], pulls: Sequence[N], number: int, layer: Sequence[N]) -> float:
    """First angle of a state: towards its neighbours, else its share of the circle."""
    return _pull(angles, [n for n in pulls if n in angles], 2 * math.pi * number / len(layer))


def _pull(angles: Mapping[N, float], pulls: Sequence[N], otherwise: float) -> float:
    x = sum(math.cos(angles[n]) for n in pulls)
    y = sum(math.sin(angles[n]) for n in pulls)
    if math.hypot(x, y) < 1e-6:
        return otherwise
    return math.atan2(y, x) % (2 * math.pi)


def _tension(
    angles: Mapping[N, float],
    beside: Mapping[N, Sequence[N]],
    depth: Mapping[N, int],
    radii: Sequence[float],
) -> float:
    """Sum of the squared lengths of all moves inside an island."""
    total = 0.0
    for node, others in beside.items():
        if node not in depth:
            continue
        r, a = radii[depth[node]], angles[node]
        for other in others:
            if other in depth:
                s, b = radii[depth[other]], angles[other]
                total += r * r + s * s - 2 * r * s * math.cos(a - b)
    return total


def _spread(layer: Sequence[N], wanted: Mapping[N, float], radius: float) -> dict[N, float]:
    """Angles as near to the wanted ones as the spacing allows, in the order of these.

    Neighbours that would be too close form a block, which stands centred on the mean of what its
    members want; blocks that touch are pooled, until none do.
    """
    count = len(layer)
    if count == 1:
        return {layer[0]: wanted[layer[0]]}
    full = 2 * math.pi
    step = min(full / count, 2 * math.asin(min(1.0, _SPACE / (2 * radius))))
    rank = {node: i for i, node in enumerate(layer)}
    order = sorted(layer, key=lambda node: (round(wanted[node], 9), rank[node]))
    # The circle is cut open at the widest gap between wanted angles.
    gaps = [
        ((wanted[order[i]] - wanted[order[i - 1]]) % full if i else
         (wanted[order[0]] - wanted[order[-1]]) % full, -i)
        for i in range(count)
    ]  # fmt: skip
    cut = -max(gaps)[1]
    order = order[cut:] + order[:cut]
    base = wanted[order[0]]
    goal = [(wanted[node] - base) % full for node in order]
    blocks: list[list[float]] = []  # [sum of wanted starts, members]
    for k, value in enumerate(goal):
        blocks.append([value - k * step, 1])
        while len(blocks) > 1 and (blocks[-1][0] / blocks[-1][1] < blocks[-2][0] / blocks[-2][1]):
            total, members = blocks.pop()
            blocks[-1][0] += total
            blocks[-1][1] += members
    spots: list[float] = []
    for total, members in blocks:
        spots += [total / members] * int(members)
    spots = [spot + k * step for k, spot in enumerate(spots)]
    over = spots[-1] - spots[0] + step - full
    if over > 1e-12:  # the ends meet across the cut: even out
        spots = [spots[0] + full * k / count for k in range(count)]
    return {node: (base + spot) % full for node, spot in zip(order, spots, strict=True)}


def _shelves(
    sizes: Sequence[tuple[float, float, float, float]],
    order: Sequence[int],
    aspect: float,
    margin: float,
) -> list[Point]:
    """Centres of islands of given extents, put on shelves in order."""
    wide = [right - left + margin for left, _, right, _ in sizes]
    tall = [bottom - top + margin for _, top, _, bottom in sizes]
    area = sum(w * h for w, h in zip(wide, tall, strict=True))
    width = max(*wide, math.sqrt(area * aspect) * 1.15, 0.0)
    shelves: list[list[int]] = []
    x = math.inf
    for i in order:
        if x + wide[i] > width + 1e-9:
            shelves.append([])
            x = 0.0
        shelves[-1].append(i)
        x += wide[i]
    broadest = max(sum(wide[i] for i in shelf) for shelf in shelves)
    centres: list[Point] = [(0.0, 0.0)] * len(sizes)
    y = 0.0
    for shelf in shelves:
        x = (broadest - sum(wide[i] for i in shelf)) / 2
        height = max(tall[i] for i in shelf)
        for i in shelf:
            left, top, _, _ = sizes[i]
            centres[i] = (x - left, y + (height - tall[i]) / 2 - top)
            x += wide[i]
        y += height
    return centres
