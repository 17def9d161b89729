"""The best ladder for a job: several decompositions, each arranged, the best one kept.

Trees for each load (`candidates`), put on rungs apart, with shared branches (`plan`) and as a
selecting tree (`selecting`), ordered and paired by an exact engine (`arrange`), then loads tapped
from nets that are there already (`taps`).  Everything here keeps the ladder definition; the proof
is done again, by other code, in `check`.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from time import monotonic

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.job.model import SeparateContacts
from contactlogic.ladder.arrange import Arrangement, Rules, arrange
from contactlogic.ladder.build import build
from contactlogic.ladder.candidates import candidate_trees, combine, least_tree, plain_tree
from contactlogic.ladder.plan import Plan, plan_rungs
from contactlogic.ladder.selecting import selecting_tree
from contactlogic.ladder.taps import tap_loads
from contactlogic.ladder.tree import contact_count, fewest_poles
from contactlogic.minimize.cube import Cover
from contactlogic.network import Network, back_feeds
from contactlogic.truth import Target

__all__ = ["Ladder", "LadderTask", "best_ladder", "plain_ladder"]

_TREES = 12  # kept for each load
_SELECTIONS = 6  # selections of one tree a load that are arranged
_EFFORT = 4.0  # deterministic seconds of the engine for one arrangement
_SMALL = 30  # contacts up to which the engine takes milliseconds
_LARGE = 160  # contacts above which only the most promising plans are arranged


@dataclass(frozen=True)
class LadderTask:
    """What to wire, by name: everything of a job that the ladder depends on."""

    relays: tuple[str, ...]
    targets: Mapping[str, Target]
    covers: Mapping[str, Sequence[Cover]]
    separate: Mapping[str, SeparateContacts] = field(default_factory=dict)
    poles: Mapping[str, int] = field(default_factory=dict)
    isolated: frozenset[str] = frozenset()
    contacts_first: bool = False


@dataclass(frozen=True)
class Ladder:
    """The best ladder found.

    `least_pairing` tells whether the engine proved that no order of its decomposition takes fewer
    poles (before loads were tapped).
    """

    network: Network
    least_pairing: bool


def best_ladder(task: LadderTask, *, seconds: float = 60.0, seed: int = 0) -> Ladder:
    """The ladder of least cost (section 4) among the decompositions tried.

    Args:
        seconds: wall-clock limit for the exact arrangement; what is done by then counts.
        seed: of the choice of decompositions and of the engine.

    Where no ladder found keeps the budgets, the one that breaks them least comes back.
    """
    deadline = monotonic() + seconds
    place = {name: i for i, name in enumerate(task.relays)}
    rules = Rules(
        frozenset(place[name] for name in task.separate),
        {place[name]: most for name, most in task.poles.items()},
    )
    best: Ladder | None = None
    plans = list(_plans(task, rules, seed))
    for plan, ordered in zip(plans, _arranged(task, plans, rules, seed, deadline), strict=True):
        network = build(
            plan if ordered is None else ordered.plan,
            task.relays,
            list(task.targets),
            task.separate,
        )
        if task.isolated and back_feeds(network, task.isolated):
            continue
        network = tap_loads(network, task.targets, lambda net: _allowed(net, task), task.separate)
        if best is None or _cost(network, task) < _cost(best.network, task):
            best = Ladder(network, ordered is not None and ordered.least)
    assert best is not None  # rungs apart are among the plans and never feed back
    return best


def plain_ladder(task: LadderTask) -> Network:
    """A correct ladder in little time: factored covers on rungs apart, in the order they come."""
    trees = [plain_tree(target, task.covers[name]) for name, target in task.targets.items()]
    return build(plan_rungs(trees, share=False), task.relays, list(task.targets), task.separate)


def _over_budget(network: Network, task: LadderTask) -> int:
    """Poles, separate makes and separate breaks beyond what the relays have."""
    use = network.per_relay()
    over = sum(max(0, use[name].poles - most) for name, most in task.poles.items())
    for name, have in task.separate.items():
        over += max(0, use[name].makes - have.makes) + max(0, use[name].breaks - have.breaks)
    return over


def _allowed(network: Network, task: LadderTask) -> bool:
    return not (task.isolated and back_feeds(network, task.isolated))


def _cost(network: Network, task: LadderTask) -> tuple[int, ...]:
    first = (_over_budget(network, task),)
    if task.contacts_first:
        return (*first, sum(1 for _ in network.contacts()), *network.cost())
    return (*first, *network.cost())


def _plans(task: LadderTask, rules: Rules, seed: int) -> Iterator[Plan]:
    """Plans worth arranging, each once, the most promising first."""
    targets = list(task.targets.values())
    choices = [
        candidate_trees(target, task.covers.get(name, ()), _TREES)
        for name, target in task.targets.items()
    ]
    found: dict[Plan, None] = {}
    for selection in combine(choices, _SELECTIONS, rules.separate, seed):
        for share in (False, True):
            found.setdefault(plan_rungs(selection, share))
    if len(targets) > 1:
        found.setdefault(selecting_tree(targets, least_tree))

    def promise(plan: Plan) -> tuple[int, int]:
        trees = [branch.tree for branch in plan.branches]
        return fewest_poles(trees, rules.separate), sum(map(contact_count, trees))

    ranked = sorted(found, key=promise)
    if ranked and promise(ranked[0])[1] > _LARGE:
        del ranked[2:]
    if task.isolated:  # rungs apart meet at the supply alone: they can always be isolated
        apart = next(plan for plan in found if all(b.start == 0 for b in plan.branches))
        if apart not in ranked:
            ranked.append(apart)
    yield from ranked


def _arranged(
    task: LadderTask, plans: Sequence[Plan], rules: Rules, seed: int, deadline: float
) -> list[Arrangement | None]:
    """Each plan in its best order; None where the engine gave nothing.

    A plan whose order as it stands meets the bound of `fewest_poles` needs no engine.  The engine
    runs in a child process, so that a crash costs no more than the better order; but for plans so
    small that a child would take longer to start than the engine to answer.
    """
    found: dict[int, Arrangement | None] = {}
    for k, plan in enumerate(plans):
        poles = len(build(plan, task.relays, list(task.targets), task.separate).poles)
        if poles == fewest_poles((branch.tree for branch in plan.branches), rules.separate):
            found[k] = Arrangement(plan, poles, True)
    open_plans = [k for k in range(len(plans)) if k not in found]
    seconds = deadline - monotonic()
    if open_plans and seconds > 0:
        todo = [plans[k] for k in open_plans]
        if max(sum(contact_count(b.tree) for b in plan.branches) for plan in todo) <= _SMALL:
            orders = _arrange_all(todo, rules, seed, seconds)
        else:
            try:
                orders = run(_arrange_all, todo, rules, seed, 0.8 * seconds, seconds=seconds)
            except (ChildCrashed, ChildTimedOut):
                orders = [None] * len(todo)
        found.update(zip(open_plans, orders, strict=True))
    return [found.get(k) for k in range(len(plans))]


def _arrange_all(
    plans: Sequence[Plan], rules: Rules, seed: int, seconds: float
) -> list[Arrangement | None]:
    """Arrange one plan after another; those not begun within `seconds` are left as they stand."""
    deadline = monotonic() + seconds
    return [
        arrange(plan, rules, effort=_EFFORT, seed=seed) if monotonic() < deadline else None
        for plan in plans
    ]
