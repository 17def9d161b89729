"""Rings of relays slow to release, two neighbours operated at a time, in one more pole than relays.

The listed steps ask relay k+1 to be fed while relay k is operated and k-1 is not.  Wired one by one
that takes two contacts a relay, and lets a second pair of operated relays run round for ever.
Here relays 1 .. n-2 form one selecting chain instead: from the supply through the break of relay 1
to the break of relay 2 and so on, with the make of each relay on the same pole leading to the coil
of the next; what is left at the chain's end feeds relay 0.  So the first operated relay of the
chain alone decides, a further pair that runs ahead is caught up with, and relay 0 waits until all
others have released.  No two coils that are off are ever joined: a coil's net leads back to the
joint of the first operated relay at most.
"""

from __future__ import annotations

from contactlogic.ladder.plan import Branch, Plan
from contactlogic.ladder.tree import Leaf, Tree, series
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.wants import ways

__all__ = ["ring_order", "selecting_chain"]


def ring_order(expansion: Expansion) -> tuple[int, ...] | None:
    """The columns in the order in which they operate, if the steps are those of such a ring."""
    n = len(expansion.columns)
    timing = expansion.timing
    if n < 3 or expansion.inputs or not expansion.repeat or timing.slow_operate:
        return None
    if set(timing.slow_release) != set(expansion.columns):
        return None
    movers = {step.state: step.movers for step in expansion.steps}
    order = [
        movers[step.state][0] for step in expansion.steps if step.movers and expansion.dwells(step)
    ]
    if sorted(order) != list(range(n)):
        return None
    around: dict[int, tuple[int, ...]] = {}
    for k, relay in enumerate(order):
        after, next_but_one = order[(k + 1) % n], order[(k + 2) % n]
        around[1 << relay | 1 << after] = (1 << after,)
        around[1 << after] = (1 << after | 1 << next_but_one,)
    return tuple(order) if around == ways(expansion) else None


def selecting_chain(order: tuple[int, ...]) -> Plan:
    """The coils' branches; `loads` of the plan are the coils in column order."""
    n = len(order)
    branches: list[Branch] = []
    fed: list[int | None] = [None] * n

    def add(start: int, *contacts: Tree) -> int:
        branches.append(Branch(start, len(branches) + 1, series(contacts)))
        return len(branches)

    # Relay 1 stands beside relay 0 in the ring's one step that the chain does not tell apart.
    fed[order[1]] = add(0, Leaf(order[n - 1], False), Leaf(order[0], True))
    fed[order[2]] = add(0, Leaf(order[1], True), Leaf(order[0], False))
    joint = add(0, Leaf(order[1], False))
    for k in range(2, n - 1):
        fed[order[k + 1]] = add(joint, Leaf(order[k], True))
        joint = add(joint, Leaf(order[k], False))
    fed[order[0]] = joint
    return Plan(tuple(branches), tuple(fed))
