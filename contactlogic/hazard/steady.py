"""Ladders without hazards to start a search from.

A sum of products has no hazard while one relay moves if each two neighbouring rows of the moves
looked at, in which the load must be on, lie in one product (Huffman 1957): that product holds the
load whatever the relay's contacts do.  With a rung of its own for each product no path uses two
contacts of one relay, so nothing flashes.
"""

from __future__ import annotations

from contactlogic.hazard.moves import Moves, stays_on
from contactlogic.job.model import Job
from contactlogic.ladder.build import build
from contactlogic.ladder.plan import plan_rungs
from contactlogic.ladder.tree import Leaf, Tree, parallel, series
from contactlogic.minimize.cube import Cube
from contactlogic.minimize.primes import primes
from contactlogic.network import Network
from contactlogic.truth import Target

__all__ = ["steady_ladder"]


def steady_ladder(job: Job, moves: Moves) -> Network:
    """A correct ladder in which no load drops out or flashes in any of the moves."""
    trees = [_tree(_products(load.target, moves)) for load in job.loads]
    plan = plan_rungs(trees, share=False)
    names = [load.name for load in job.loads]
    return build(plan, job.relays, names, job.limits.contacts)


def _products(target: Target, moves: Moves) -> list[Cube]:
    """Prime products, chosen greedily, that hold every on row and every move through two."""
    width = 1 << target.n
    held = [stays_on(target, i, moves.released[name]) for i, name in enumerate(moves.relays)]
    left = target.on
    for i, rows in enumerate(held):
        left |= rows << width * (i + 1)
    offers = []
    for cube in primes(target):
        table = cube.table(target.n)
        holds = table & target.on
        for i, rows in enumerate(held):
            holds |= (table & table >> (1 << i) & rows) << width * (i + 1)
        offers.append((cube, holds))
    chosen = []
    while left:
        cube, holds = max(
            offers, key=lambda one: ((one[1] & left).bit_count(), -one[0].literals, one[0])
        )
        chosen.append(cube)
        left &= ~holds
    return chosen


def _tree(products: list[Cube]) -> Tree | bool:
    if not products:
        return False
    if not all(cube.care for cube in products):
        return True
    return parallel(
        series(Leaf(relay, make) for relay, make in cube.contacts()) for cube in products
    )
