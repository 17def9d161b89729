"""Wiring of a sequence made from its listed states: what a search starts from, or all there is.

Coils by a selecting chain where the relays form a ring (`ring`), otherwise by drives that grow
until they recover (`growing`), each on a rung of its own, so that no two coils are ever joined
through contacts.  Loads by the better cover of the listed states, factored; they share what they
have in common unless they must be isolated.  Nothing here looks at a row that is not listed except
the search for traps, so that the number of relays hardly matters.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.design import LoadStatus
from contactlogic.job.model import Job
from contactlogic.ladder.arrange import Rules, arrange
from contactlogic.ladder.build import build
from contactlogic.ladder.candidates import tree_of_cover
from contactlogic.ladder.plan import Branch, Plan, plan_rungs
from contactlogic.ladder.tree import Tree, contact_count
from contactlogic.minimize.cube import Cover
from contactlogic.minimize.listed import Wants, listed_covers
from contactlogic.network import Network
from contactlogic.sequence.growing import grow
from contactlogic.sequence.recovery import Recovery
from contactlogic.sequence.ring import ring_order, selecting_chain
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.wants import listed_drives, listed_loads

__all__ = ["Started", "needed_relays", "start"]

_EFFORT = 4.0  # deterministic seconds for ordering contacts
_SECONDS = 60.0  # wall clock for the same, should the engine lose itself


@dataclass(frozen=True)
class Started:
    """Wiring from the listed states.

    Args:
        network: a ladder.
        covers: of each coil and load; those of coils in a chain are what the sequence asks for,
            not how they are wired.
        failed: None if the drives recover, otherwise what comes of them.
    """

    network: Network
    covers: Mapping[str, tuple[Cover, ...]]
    failed: Recovery | None = None

    def statuses(self, relays: Sequence[str]) -> tuple[LoadStatus, ...]:
        """How each cover was found, as in `Design.covers`."""
        return tuple(
            LoadStatus(name, best.to_text(relays), best.literals, best.terms, best.proved)
            for name, (best, *_) in self.covers.items()
        )


def start(job: Job, expansion: Expansion, *, seconds: float | None, seed: int = 0) -> Started:
    """Wire coils and loads from the listed states.

    Args:
        job: the sequence as a table job, for names and limits; its tables are not looked at.
        expansion: unambiguous.
        seconds: wall-clock limit, None for none but that of the work itself.
        seed: of the engine that orders contacts.
    """
    n = len(expansion.columns)
    loads = _covers(n, listed_loads(expansion))
    order = ring_order(expansion)
    failed = None
    if order is not None:
        coils = _covers(n, listed_drives(expansion))
        plan = selecting_chain(order)
        plan = Plan(plan.branches, tuple(plan.loads[expansion.columns.index(c)] for c in coils))
    else:
        grown = grow(expansion, seconds=seconds)
        coils = {name: (cover,) for name, cover in grown.covers.items()}
        plan = plan_rungs(list(grown.trees.values()), share=False)
        failed = None if grown.recovery.verdict == "recovers" else grown.recovery
    share = not set(loads) & job.isolated
    plan = _joined(plan, plan_rungs([_tree(found) for found in loads.values()], share))
    network = _built(plan, job, [*coils, *loads], seed)
    return Started(network, coils | loads, failed)


def needed_relays(expansion: Expansion) -> int:
    """Poles that every network needs: one for each relay that some listed states tell apart."""
    needed = 0
    wants = [*listed_drives(expansion).values(), *listed_loads(expansion).values()]
    for i in range(len(expansion.columns)):
        bit = 1 << i
        needed += any(
            value != values.get(state ^ bit, value)
            for values in wants
            for state, value in values.items()
        )
    return needed


def _covers(n: int, wanted: Mapping[str, Mapping[int, int]]) -> dict[str, tuple[Cover, ...]]:
    wants = [
        Wants(
            tuple(state for state, value in values.items() if value),
            tuple(state for state, value in values.items() if not value),
        )
        for values in wanted.values()
    ]
    return dict(zip(wanted, listed_covers(n, wants), strict=True))


def _tree(found: Sequence[Cover]) -> Tree | bool:
    """The factored cover of fewest contacts."""
    trees = [tree_of_cover(cover) for cover in found]
    constant = [tree for tree in trees if isinstance(tree, bool)]
    if constant:
        return constant[0]
    return min((tree for tree in trees if not isinstance(tree, bool)), key=contact_count)


def _joined(one: Plan, other: Plan) -> Plan:
    """Two plans on one supply."""
    shift = max((branch.end for branch in one.branches), default=0)

    def moved(node: int) -> int:
        return node + shift if node else 0

    branches = tuple(Branch(moved(b.start), moved(b.end), b.tree) for b in other.branches)
    loads = tuple(None if node is None else moved(node) for node in other.loads)
    return Plan(one.branches + branches, one.loads + loads)


def _built(plan: Plan, job: Job, names: Sequence[str], seed: int) -> Network:
    """The plan in the order of fewest poles, or as it stands where the engine finds none."""
    place = {name: i for i, name in enumerate(job.relays)}
    rules = Rules(frozenset(place[name] for name in job.limits.contacts))
    try:
        ordered = run(_arranged, plan, rules, seed, seconds=_SECONDS)
    except (ChildCrashed, ChildTimedOut):
        ordered = plan
    return build(ordered, job.relays, names, job.limits.contacts)


def _arranged(plan: Plan, rules: Rules, seed: int) -> Plan:
    found = arrange(plan, rules, effort=_EFFORT, seed=seed)
    return plan if found is None else found.plan
