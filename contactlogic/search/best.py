"""The best ladder and the best bridge for a job: starts, proof and walks put together."""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, field

from contactlogic.child import Spares
from contactlogic.design import Form
from contactlogic.job.model import Objective, SeparateContacts
from contactlogic.ladder.build import Edge, pair
from contactlogic.network import Network
from contactlogic.search.diagrams import starts
from contactlogic.search.encoding import Ends
from contactlogic.search.goal import Goal
from contactlogic.search.mesh import Mesh, from_network, live_rows, to_network
from contactlogic.search.portfolio import Errand, Progress, Proving, explore
from contactlogic.search.problem import Problem
from contactlogic.search.shares import least_at_once
from contactlogic.truth import Target, all_rows

__all__ = ["Best", "Task", "best_networks"]

_STARTS = 12
_MORE_FOR_BUDGETS = 2  # poles beyond a network that breaks them, in proving that none keeps them
_MOST_RELAYS = 12  # above this a window's rows are too many for Python; starts stand as they are


@dataclass(frozen=True)
class Task:
    """What to search for, by name: everything of a job that the search depends on.

    `budgets` are most poles of a relay; with `repeaters` a relay over its budget is given
    repeaters of as many poles, as few as possible.  `penalty`,
    `blemishes`, `price` and `bargain` as in `Goal`.
    """

    relays: tuple[str, ...]
    targets: Mapping[str, Target]
    budgets: Mapping[str, int] = field(default_factory=dict)
    separate: Mapping[str, SeparateContacts] = field(default_factory=dict)
    isolated: frozenset[str] = frozenset()
    objective: Objective = "poles"
    repeaters: bool = False
    penalty: Callable[[Network], int] | None = None
    blemishes: Callable[[Network], int] | None = None
    price: Callable[[Network], int] | None = None
    bargain: int = 0


@dataclass(frozen=True)
class Best:
    """Outcome of a search.

    Args:
        networks: the cheapest network of each form asked for; one may still break a budget.
        over: by how much each breaks its budgets (repeaters needed where allowed), 0 if it keeps
            them.
        at_least: proved for every network, in what the objective counts.
        feasible: False if proved that no network keeps the budgets.
        progress: how far the search went.
    """

    networks: Mapping[Form, Network]
    over: Mapping[Form, int]
    at_least: int
    feasible: bool
    progress: Progress


def best_networks(
    task: Task,
    known: Mapping[Form, Sequence[Network]],
    forms: Sequence[Form],
    *,
    seconds: float | None,
    effort: int | None,
    conflicts: int,
    seed: int,
    workers: int,
    at_least: int = 0,
    home: Mapping[str, Target] | None = None,
    watch: Callable[[Progress], None] | None = None,
    spares: Spares | None = None,
) -> Best:
    """Improve known networks, and prove how far they can be improved.

    Args:
        task: what is wanted.
        known: correct networks to start from, for each form at least one.
        forms: what to search for.
        seconds, effort, seed, workers, watch, spares: as in `portfolio.explore`.
        conflicts: budget of the proof when running by effort.
        at_least: a bound known beforehand.
        home: narrower wants, in the order of the task's, that the diagrams to start from are made
            for; None for the task's own.
    """
    problem = Problem(
        task.relays,
        task.targets,
        {} if task.repeaters else task.budgets,
        task.separate,
        task.isolated,
        task.objective,
    )
    loads = list(task.targets)
    errands = []
    for form in forms:
        goal = _goal(task, ladder=form == "ladder")
        meshes = [from_network(network) for network in known[form]]
        if len(task.relays) <= _MOST_RELAYS:
            meshes += starts(list((home or task.targets).values()), _STARTS)
        if goal.singly or goal.separate:
            meshes = [_split(mesh, goal) for mesh in meshes]
        errands.append(Errand(tuple(meshes), goal))
    if len(task.relays) > _MOST_RELAYS:
        effort = 0
    any_form = _goal(task, ladder=False)
    smallest = min(
        (mesh for errand in errands for mesh in errand.starts if any_form.accepts(mesh)),
        key=any_form.cost,
    )
    kept = not any_form.excess(smallest)
    progress = explore(
        errands,
        proving=Proving(
            problem,
            _named(smallest, task, loads) if kept else None,
            conflicts,
            None if kept else len(smallest.poles) + _MORE_FOR_BUDGETS,
            max(at_least, least_at_once(problem)),
        ),
        seconds=seconds,
        effort=effort,
        seed=seed,
        workers=workers,
        watch=watch,
        spares=spares,
    )
    networks: dict[Form, Network] = {}
    over: dict[Form, int] = {}
    ladders = [
        standing.best
        for form, standing in zip(forms, progress.standings, strict=True)
        if form == "ladder" and standing.best is not None
    ]
    for form, errand, standing in zip(forms, errands, progress.standings, strict=True):
        mesh = standing.best
        if mesh is None:  # every walker was lost: what was known still stands
            mesh = min(
                (start for start in errand.starts if errand.goal.accepts(start)),
                key=errand.goal.cost,
            )
        # a ladder is a bridge as well, and its walkers may have come further
        mesh = min((mesh, *ladders), key=errand.goal.cost) if form == "bridge" else mesh
        over[form] = errand.goal.over_budget(mesh)
        networks[form] = _named(_settled(mesh, task), task, loads)
    return Best(networks, over, progress.at_least, progress.feasible, progress)


def _goal(task: Task, *, ladder: bool) -> Goal:
    place = {name: i for i, name in enumerate(task.relays)}
    order = {name: k for k, name in enumerate(task.targets)}
    return Goal(
        len(task.relays),
        tuple(task.targets.values()),
        ladder,
        frozenset(order[name] for name in task.isolated),
        {place[name]: (have.makes, have.breaks) for name, have in task.separate.items()},
        {place[name]: most for name, most in task.budgets.items()},
        task.repeaters,
        task.objective == "contacts",
        task.penalty,
        task.blemishes,
        task.price,
        task.bargain,
        (task.relays, tuple(task.targets)),
    )


def _split(mesh: Mesh, goal: Goal) -> Mesh:
    """Changeovers taken apart where makes and breaks are counted singly or never pair."""
    poles: list[Ends] = []
    for pole in mesh.poles:
        if None in (pole.make, pole.break_) or not (goal.singly or pole.relay in goal.separate):
            poles.append(pole)
        else:
            poles += [pole._replace(break_=None), pole._replace(make=None)]
    return Mesh(tuple(poles), mesh.feeds)


def _settled(mesh: Mesh, task: Task) -> Mesh:
    """Loads that turn out always on put on the supply, those never on on no net."""
    live = live_rows(mesh.poles, len(task.relays))
    feeds: list[int | None] = []
    for feed in mesh.feeds:
        rows = 0 if feed is None else live.get(feed, 0)
        feeds.append(None if not rows else 0 if rows == all_rows(len(task.relays)) else feed)
    return Mesh(mesh.poles, tuple(feeds))


def _named(mesh: Mesh, task: Task, loads: Collection[str]) -> Network:
    """The network, makes and breaks paired as far as their nets allow, idle contacts gone."""
    network = to_network(mesh, task.relays, list(loads))
    edges = [Edge(c.relay, c.make, c.common, c.throw) for c in network.contacts()]
    poles = pair(edges, task.relays, frozenset(task.separate))
    if len(poles) < len(network.poles):
        network = Network(network.relays, network.supply, network.loads, poles)
    return network
