"""From a ladder network to rungs: series-parallel parts, taps, and what hangs on which joint.

The contacts of a network fall into blocks (biconnected components; Hopcroft and Tarjan 1973).
Rooted at the supply, each block has one net it is fed from, and every load fed through it lies
at or beyond one of its *exits*.  In a ladder each block is series-parallel between its feed and
each exit, so one exit is chosen for the rung itself and the block is taken apart between the two
by series and parallel reductions (Duffin 1965).  The other exits are taps: a tap can be drawn
straight down, without crossing, iff its joint lies on the lower edge of the rung, so in every
parallel group the branch with most taps is put lowest.  If all exits can lie on the outer edge of
the block at all, taking the exit next to the feed as the rung's own leaves every other one on
the lower edge; all exits are tried and the one with fewest taps out of reach is taken.  A tap out
of reach (no crossing-free drawing exists for it) becomes a rung of its own that starts with a
reference to the wire.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from contactlogic.errors import NotALadder
from contactlogic.network import Contact, Network

__all__ = ["Leaf", "Parallel", "Part", "Rung", "Series", "rungs_of"]


@dataclass(frozen=True)
class Leaf:
    """One contact, `left` being the net nearer the supply on its rung."""

    contact: Contact
    left: str
    right: str
    width: int = 1
    height: int = 1


@dataclass(frozen=True)
class Series:
    """Parts one after the other."""

    parts: tuple[Part, ...]

    @property
    def left(self) -> str:
        return self.parts[0].left

    @property
    def right(self) -> str:
        return self.parts[-1].right

    @property
    def width(self) -> int:
        return sum(part.width for part in self.parts)

    @property
    def height(self) -> int:
        return max(part.height for part in self.parts)


@dataclass(frozen=True)
class Parallel:
    """Branches between the same two joints, the first on the rung's line, the others below."""

    parts: tuple[Part, ...]

    @property
    def left(self) -> str:
        return self.parts[0].left

    @property
    def right(self) -> str:
        return self.parts[0].right

    @property
    def width(self) -> int:
        return max(part.width for part in self.parts)

    @property
    def height(self) -> int:
        return sum(part.height for part in self.parts)


Part = Leaf | Series | Parallel


@dataclass(frozen=True)
class Rung:
    """The line of one load.

    Args:
        load: the load at its end.
        start: net it starts from: the supply, or the net of the joint it is tapped from.
        net: net of the load, None if it is never on.
        part: contacts between `start` and `net`, None if there are none.
        taps: rungs tapped from joints of this one, in the order in which they are drawn below it
            (rightmost joint first, so that no line crosses another).
        reference: starts at the left with a reference to its wire.
    """

    load: str
    start: str
    net: str | None
    part: Part | None = None
    taps: tuple[Rung, ...] = ()
    reference: bool = False


def rungs_of(network: Network) -> tuple[Rung, ...]:
    """Rungs that start at the rail or from a reference, top to bottom; taps hang inside them.

    Raises:
        NotALadder: a contact that no load is fed through, a net without supply, or a block that
            is not series-parallel.
    """
    builder = _Builder(network)
    found = builder.rail_rungs()
    for load, net in network.loads.items():
        if net is None:
            found.append(Rung(load, network.supply, None))
    return tuple(found)


@dataclass
class _Block:
    contacts: list[Contact]
    feed: str
    exits: dict[str, int] = field(default_factory=dict)  # exit net -> first load beyond it
    first: int = 0


@dataclass
class _Builder:
    network: Network
    hanging: dict[str, list[tuple[int, str | _Block]]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """Hang loads and blocks on the net they are fed from, by first load beyond them."""
        network = self.network
        here: dict[str, list[int]] = {}
        for i, net in enumerate(network.loads.values()):
            if net is not None:
                here.setdefault(net, []).append(i)
        names = list(network.loads)
        pending = _blocks(network)
        for block in reversed(pending):  # blocks further from the supply first
            for net in _nets(block.contacts):
                if net == block.feed:
                    continue
                beyond = [i for i, _ in self.hanging.get(net, [])] + here.get(net, [])
                if beyond:
                    block.exits[net] = min(beyond)
            if not block.exits:
                contact = block.contacts[0]
                raise NotALadder(f"no load is fed through {contact.relay} {contact.pole.number}")
            block.first = min(block.exits.values())
            self.hanging.setdefault(block.feed, []).append((block.first, block))
        fed = {network.supply} | {net for block in pending for net in block.exits}
        for net, loads in here.items():
            if net not in fed:
                raise NotALadder(f"load {names[loads[0]]} hangs on net {net}, which has no supply")
            self.hanging.setdefault(net, []).extend((i, names[i]) for i in loads)
        for items in self.hanging.values():
            items.sort(key=lambda item: (item[0], isinstance(item[1], _Block)))

    def rail_rungs(self) -> list[Rung]:
        """A rung, with all that hangs on it, for each load or block at the supply."""
        found: list[Rung] = []
        for item in self.hanging.get(self.network.supply, []):
            waiting: list[str] = []
            found.append(self._rung(self.network.supply, [item], waiting))
            while waiting:  # a referenced rung may itself leave taps out of reach
                net = waiting.pop(0)
                found.append(self._rung(net, self.hanging[net], waiting, reference=True))
        return found

    def _rung(
        self,
        start: str,
        items: list[tuple[int, str | _Block]],
        waiting: list[str],
        reference: bool = False,
    ) -> Rung:
        parts: list[Part] = []
        taps: list[tuple[str, list[tuple[int, str | _Block]]]] = []
        if items[1:]:
            taps.append((start, items[1:]))
        onward = items[0][1]
        net = start
        while isinstance(onward, _Block):
            part, own = _best_part(onward)
            reached = list(_lower_joints(part))
            taps += [(joint, self.hanging[joint]) for joint in reached if joint in onward.exits]
            waiting += [net for net in onward.exits if net != own and net not in reached]
            parts += part.parts if isinstance(part, Series) else (part,)
            net = own
            items = self.hanging[own]
            if items[1:]:
                taps.append((own, items[1:]))
            onward = items[0][1]
        return Rung(
            load=onward,
            start=start,
            net=net,
            part=None if not parts else parts[0] if len(parts) == 1 else Series(tuple(parts)),
            taps=tuple(self._rung(joint, hung, waiting) for joint, hung in reversed(taps)),
            reference=reference,
        )


def _nets(contacts: list[Contact]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(net for c in contacts for net in (c.common, c.throw)))


def _blocks(network: Network) -> list[_Block]:
    """Blocks with the net each is fed from, those nearer the supply first."""
    import networkx

    edges: dict[frozenset[str], list[Contact]] = {}
    graph = networkx.Graph()
    graph.add_node(network.supply)
    for contact in network.contacts():
        if contact.common == contact.throw:
            raise NotALadder(f"{contact.relay} {contact.pole.number} joins a net to itself")
        edges.setdefault(frozenset((contact.common, contact.throw)), []).append(contact)
        graph.add_edge(contact.common, contact.throw)
    order = {contact: i for i, contact in enumerate(network.contacts())}
    groups = [
        sorted((c for a, b in component for c in edges[frozenset((a, b))]), key=order.__getitem__)
        for component in networkx.biconnected_component_edges(graph)
    ]
    groups.sort(key=lambda group: order[group[0]])
    found: list[_Block] = []
    reached = [network.supply]
    for net in reached:  # grows while it is walked: breadth first from the supply
        for group in [g for g in groups if net in _nets(g)]:
            groups.remove(group)
            found.append(_Block(group, net))
            reached += [other for other in _nets(group) if other != net]
    if groups:
        contact = groups[0][0]
        raise NotALadder(f"{contact.relay} {contact.pole.number} has no supply")
    return found


def _best_part(block: _Block) -> tuple[Part, str]:
    """The block taken apart towards the exit that leaves fewest other exits out of reach."""
    best: tuple[tuple[int, int], Part, str] | None = None
    for own, first in block.exits.items():
        part = _arranged(_decompose(block.contacts, block.feed, own), block.exits)[1]
        reached = sum(1 for net in _lower_joints(part) if net in block.exits)
        rank = (len(block.exits) - 1 - reached, first)
        if best is None or rank < best[0]:
            best = (rank, part, own)
    if best is None:
        raise NotALadder("a block without an exit")
    return best[1], best[2]


def _lower_joints(part: Part) -> Iterator[str]:
    """Inner joints on the lower edge of a part, left to right: a tap can leave these downwards."""
    if isinstance(part, Parallel):
        yield from _lower_joints(part.parts[-1])
    elif isinstance(part, Series):
        for i, inner in enumerate(part.parts):
            if i:
                yield inner.left
            yield from _lower_joints(inner)


def _arranged(part: Part, exits: Mapping[str, int]) -> tuple[int, Part]:
    """The part with its branches in drawing order, and how many exits its lower edge reaches."""
    if isinstance(part, Leaf):
        return 0, part
    inner = [_arranged(p, exits) for p in part.parts]
    if isinstance(part, Series):
        joints = sum(1 for p in part.parts[1:] if p.left in exits)
        return joints + sum(count for count, _ in inner), Series(tuple(p for _, p in inner))
    inner.sort(key=lambda item: -item[1].width)  # stable: the longest branch stays on the line
    most = max(count for count, _ in inner)
    lowest = max(i for i, (count, _) in enumerate(inner) if count == most)
    inner.append(inner.pop(lowest))
    return most, Parallel(tuple(p for _, p in inner))


def _decompose(contacts: list[Contact], start: str, end: str) -> Part:
    """Series and parallel reductions between two nets until one part is left."""
    edges: list[Part] = [Leaf(c, c.common, c.throw) for c in contacts]
    while len(edges) > 1:
        reduced = _join_parallel(edges)
        reduced = _join_series(reduced, start, end)
        if len(reduced) == len(edges):
            raise NotALadder(f"contacts between nets {start} and {end} are not series-parallel")
        edges = reduced
    return edges[0] if edges[0].left == start else _reversed(edges[0])


def _join_parallel(edges: list[Part]) -> list[Part]:
    groups: dict[frozenset[str], list[Part]] = {}
    for edge in edges:
        groups.setdefault(frozenset((edge.left, edge.right)), []).append(edge)
    joined: list[Part] = []
    for group in groups.values():
        left = group[0].left
        turned = [edge if edge.left == left else _reversed(edge) for edge in group]
        flat = [p for e in turned for p in (e.parts if isinstance(e, Parallel) else (e,))]
        joined.append(turned[0] if len(turned) == 1 else Parallel(tuple(flat)))
    return joined


def _join_series(edges: list[Part], start: str, end: str) -> list[Part]:
    """Join the first pair of parts that meet alone at a net."""
    touching: dict[str, list[Part]] = {}
    for edge in edges:
        touching.setdefault(edge.left, []).append(edge)
        touching.setdefault(edge.right, []).append(edge)
    for net, both in touching.items():
        if net in (start, end) or len(both) != 2:
            continue
        first, second = both
        if first.right != net:
            first = _reversed(first)
        if second.left != net:
            second = _reversed(second)
        flat = [p for e in (first, second) for p in (e.parts if isinstance(e, Series) else (e,))]
        at = min(edges.index(both[0]), edges.index(both[1]))
        rest = [e for e in edges if e is not both[0] and e is not both[1]]
        return [*rest[:at], Series(tuple(flat)), *rest[at:]]
    return edges


def _reversed(part: Part) -> Part:
    if isinstance(part, Leaf):
        return Leaf(part.contact, part.right, part.left)
    if isinstance(part, Series):
        return Series(tuple(_reversed(p) for p in reversed(part.parts)))
    return Parallel(tuple(_reversed(p) for p in part.parts))
