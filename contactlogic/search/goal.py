"""What a searched network must do and keep to, and which of two is the better one."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from contactlogic.ladder.recognise import series_parallel
from contactlogic.network import Network, back_feeds
from contactlogic.search.mesh import Mesh, live_rows, to_network
from contactlogic.truth import Target

__all__ = ["Goal", "cost"]

_INCURABLE = 1000  # excess that no repeater can take off


@dataclass(frozen=True)
class Goal:
    """What a mesh must do and keep to; loads in the order of `Mesh.feeds`, all by number.

    Args:
        n: number of relays.
        targets: what each load must do.
        ladder: whether every load's paths must be series-parallel.
        isolated: loads that may not be joined to another load that is off, while off themselves.
        separate: relays whose makes and breaks never pair, with the most of each.
        budgets: most poles of a relay.
        repeaters: whether a relay over its budget may be given repeaters of as many poles.
        singly: count makes and breaks singly; the meshes then hold single contacts only.
        penalty: a further judgement that weighs before all cost, 0 where all is well; it gets the
            network under the names of `names` and must be picklable.
        blemishes: counts what is to be avoided among networks of equal poles, likewise.
        price: what a network costs, likewise; weighs before the number of poles. None for none.
        bargain: a price that no network is known to go below.
        names: relays and loads, for `penalty`, `blemishes` and `price`.
    """

    n: int
    targets: tuple[Target, ...]
    ladder: bool = False
    isolated: frozenset[int] = frozenset()
    separate: Mapping[int, tuple[int, int]] = field(default_factory=dict)
    budgets: Mapping[int, int] = field(default_factory=dict)
    repeaters: bool = False
    singly: bool = False
    penalty: Callable[[Network], int] | None = None
    blemishes: Callable[[Network], int] | None = None
    price: Callable[[Network], int] | None = None
    bargain: int = 0
    names: tuple[tuple[str, ...], tuple[str, ...]] = ((), ())

    def accepts(self, mesh: Mesh) -> bool:
        """Whether a mesh does all this, every row checked, budgets aside (see `excess`)."""
        for pole in mesh.poles:
            if None not in (pole.make, pole.break_) and (
                self.singly or pole.relay in self.separate
            ):
                return False
        live = live_rows(mesh.poles, self.n)
        for feed, target in zip(mesh.feeds, self.targets, strict=True):
            if not target.accepts(0 if feed is None else live.get(feed, 0)):
                return False
        if not (self.isolated or self.ladder):
            return True
        relays = tuple(f"R{k}" for k in range(self.n))
        loads = tuple(f"Z{k}" for k in range(len(self.targets)))
        network = to_network(mesh, relays, loads)
        if self.isolated and back_feeds(network, [loads[k] for k in self.isolated]):
            return False
        return not self.ladder or series_parallel(network)

    def excess(self, mesh: Mesh) -> int:
        """What weighs before all cost: poles over budget and the penalty; 0 if all is well."""
        over = self.over_budget(mesh)
        if self.penalty is not None:
            over += self.penalty(to_network(mesh, *self.names))
        return over

    def over_budget(self, mesh: Mesh) -> int:
        """Poles over budget, or repeaters needed where they are allowed; 0 if all is kept."""
        total = 0
        for relay, most in self.budgets.items():
            use = self._use(mesh, relay)
            if use <= most:
                continue
            if not most:
                total += _INCURABLE * use
            else:
                total += -(-use // most) - 1 if self.repeaters else use - most
        for relay, limits in self.separate.items():
            own = [pole for pole in mesh.poles if pole.relay == relay]
            makes = sum(pole.make is not None for pole in own)
            for count, most in zip((makes, len(own) - makes), limits, strict=True):
                total += _INCURABLE * max(0, count - most)
        return total

    def _use(self, mesh: Mesh, relay: int) -> int:
        """Poles of a relay; of single contacts the fewest that pairing could leave."""
        own = [pole for pole in mesh.poles if pole.relay == relay]
        if not self.singly or relay in self.separate:
            return len(own)
        makes = sum(pole.make is not None for pole in own)
        return max(makes, len(own) - makes)

    def weight(self, mesh: Mesh) -> tuple[int, ...]:
        """What weighs before the number of poles: a walk never makes it more."""
        if self.price is None:
            return (self.excess(mesh),)
        return self.excess(mesh), self.price(to_network(mesh, *self.names))

    def cost(self, mesh: Mesh) -> tuple[int, ...]:
        """Excess first, then the price if it is asked for, then the order of section 4."""
        poles, *ties = cost(mesh)
        if self.blemishes is not None:
            ties.insert(0, self.blemishes(to_network(mesh, *self.names)))
        return (*self.weight(mesh), poles, *ties)

    def reached(self, mesh: Mesh, enough: int) -> bool:
        """Whether a mesh keeps every budget with no more than `enough` poles, and is a bargain."""
        return len(mesh.poles) <= enough and self.weight(mesh) <= (0, self.bargain)


def cost(mesh: Mesh) -> tuple[int, int, int, int]:
    """Poles, busiest relay, springs, nets: the order of section 4."""
    use = Counter(pole.relay for pole in mesh.poles)
    springs = sum(2 if None in (pole.make, pole.break_) else 3 for pole in mesh.poles)
    return len(mesh.poles), max(use.values(), default=0), springs, len(mesh.nets())
