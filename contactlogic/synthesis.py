"""From a job to a proved result: the one place where synthesis and proof meet.

Covers, a ladder from them, then the search: windows and exact search improve the ladder and find
the best bridge beside it.  Each finished network is proved by `check`, which shares no code with
what built it.  A network that fails its proof is never returned.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from time import monotonic
from typing import Literal

from contactlogic.check import prove
from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.design import Bound, Design, Form, LoadStatus, Result
from contactlogic.errors import LimitError, Place, ProofFailed
from contactlogic.job.model import Job
from contactlogic.ladder.build import build
from contactlogic.ladder.candidates import candidate_trees
from contactlogic.ladder.plan import plan_rungs
from contactlogic.ladder.synthesise import LadderTask, best_ladder, plain_ladder
from contactlogic.minimize import Cover, covers
from contactlogic.naming import free_name
from contactlogic.network import Network, Pole
from contactlogic.search.best import Best, Task, best_networks
from contactlogic.search.catalogue import Entry, least_bridge, least_contacts, least_ladder
from contactlogic.search.mesh import to_network
from contactlogic.search.portfolio import Progress
from contactlogic.truth import Target

__all__ = ["EFFORT", "Forms", "Search", "synthesise", "wire"]

Forms = Literal["ladder", "bridge", "both"]

EFFORT = 40
"""Windows for each walker where neither effort nor seconds are given."""

_CEILING = 600.0  # seconds for covers and ladder where only an effort is given
_CONFLICTS = 2000  # of the proof, for each window of effort
_COVER_SHARE = 0.3  # of the time goes to covers at most, shared out evenly over the loads
_LADDER_SHARE = 0.4
_TREES = 40  # of fewest contacts, looked at beside the catalogue's ladder
_FEW_RELAYS = 5  # up to here a ladder takes a second or so


def wire(
    job: Job,
    *,
    form: Forms = "both",
    seconds: float | None = None,
    effort: int | None = None,
    seed: int = 0,
    workers: int = 2,
    repeaters: bool = False,
    watch: Callable[[Sequence[Form], Progress], None] | None = None,
) -> Result:
    """Wire a job and prove every row.

    Args:
        job: what to wire.
        form: "ladder", "bridge" or "both"; the ladder comes first.
        seconds: wall-clock limit; the search uses it up unless the least is proved before.
        effort: windows for each walker instead; equal job, seed and effort give equal results.
            `EFFORT` if neither is given.
        seed: another seed searches in another order.
        workers: walking processes at a time.
        repeaters: whether a relay over its pole budget may be given repeaters (a second relay
            whose coil is in parallel), as few as possible.
        watch: called now and then with the forms searched and the progress.

    Ctrl-C during the search ends it; the result then holds the best proved networks so far and
    is marked `interrupted`.

    Raises:
        LimitError: a pole budget that no network found keeps (a form that alone cannot keep it is
            left out, with a note).
        ProofFailed: contactlogic built a network that fails its own proof.
    """
    return synthesise(job, Search(form, seconds, effort, seed, workers, repeaters, watch))


@dataclass(frozen=True)
class Search:
    """How to search; the arguments of `wire`, and what is to be cheap.

    Args:
        price: what a network costs; weighs before the number of poles, picklable. None for none.
        bargain: a price that no network is known to go below.
    """

    form: Forms = "both"
    seconds: float | None = None
    effort: int | None = None
    seed: int = 0
    workers: int = 2
    repeaters: bool = False
    watch: Callable[[Sequence[Form], Progress], None] | None = None
    price: Callable[[Network], int] | None = None
    bargain: int = 0


def synthesise(
    job: Job,
    search: Search,
    *,
    home: Mapping[str, Target] | None = None,
    penalty: Callable[[Network], int] | None = None,
    blemishes: Callable[[Network], int] | None = None,
) -> Result:
    """`wire` with a judgement of its own.

    Args:
        job: what to wire.
        search: how.
        home: narrower wants, load by load, whose plain wiring the penalty approves of; the search
            starts there.  None for the job's own.
        penalty: weighs before all cost, 0 where all is well; picklable.
        blemishes: counts what is to be avoided among networks of equal poles; picklable.
    """
    seconds, effort, seed = search.seconds, search.effort, search.seed
    if seconds is None and effort is None:
        effort = EFFORT
    deadline = monotonic() + (_CEILING if seconds is None else seconds)
    forms: list[Form] = ["ladder", "bridge"] if search.form == "both" else [search.form]
    found = _covers(job, deadline, seed)
    statuses = tuple(_status(job, name, least[0]) for name, least in found.items())
    if (
        penalty is None
        and search.price is None
        and (shelf := _from_catalogue(job, forms)) is not None
    ):
        designs = (
            _proved(job, form, _taken(form, entry, job), {}, entry.at_least, statuses)
            for form, entry in shelf.items()
        )
        return Result(job, tuple(designs), job.relays)
    at_home = job
    if home is not None:
        loads = tuple(replace(load, target=home[load.name]) for load in job.loads)
        at_home = replace(job, loads=loads)
    narrow = found if home is None else _covers(at_home, deadline, seed)
    ladder = _ladder(at_home, narrow, deadline, seed, timed=seconds is not None)
    watch = search.watch
    best = best_networks(
        replace(
            _task(job, search.repeaters),
            penalty=penalty,
            blemishes=blemishes,
            price=search.price,
            bargain=search.bargain,
        ),
        {name: [ladder] for name in forms},
        forms,
        seconds=None if seconds is None else max(0.0, deadline - monotonic()),
        effort=effort,
        conflicts=_CONFLICTS * (effort or 0),
        seed=seed,
        workers=search.workers,
        at_least=_relays_that_matter(job),
        home=home,
        watch=None if watch is None else lambda progress: watch(forms, progress),
    )
    missing = [] if search.repeaters else [form for form in forms if best.over[form]]
    if len(missing) == len(forms):
        raise _over_budget(job, best)
    forms = [form for form in forms if form not in missing]
    notes = tuple(f"no {form} found keeps the pole budgets" for form in missing)
    if search.repeaters:
        networks, added = _with_repeaters(job, best.networks)
    else:
        networks, added = dict(best.networks), {}
    return Result(
        job,
        tuple(
            _proved(job, form, networks[form], added, best.at_least, statuses, notes)
            for form in forms
        ),
        (*job.relays, *added),
        added,
        interrupted=best.progress.interrupted,
    )


def _from_catalogue(job: Job, forms: Sequence[Form]) -> dict[Form, Entry] | None:
    """Entries for a job of one load that the catalogue answers, None for any other job."""
    if len(job.loads) != 1 or job.limits.poles or job.limits.contacts:
        return None
    target = job.loads[0].target
    found: dict[Form, Entry] = {}
    for form in forms:
        if form == "bridge":
            by_contacts = job.limits.objective == "contacts"
            entry = least_contacts(target) if by_contacts else least_bridge(target)
        elif job.limits.objective == "poles":
            entry = least_ladder(target)
        else:
            return None
        if entry is None:
            return None
        found[form] = entry
    return found


def _taken(form: Form, entry: Entry, job: Job) -> Network:
    """The catalogue's network; of ladders one of fewest contacts where that has as few poles."""
    name = job.loads[0].name
    network = to_network(entry.mesh, job.relays, [name])
    if form == "bridge":
        return network
    plain = (
        build(plan_rungs([tree], share=False), job.relays, [name])
        for tree in candidate_trees(job.loads[0].target, (), _TREES)
    )
    fewest = min(plain, key=Network.cost)
    return fewest if len(fewest.poles) <= len(network.poles) else network


def _covers(job: Job, deadline: float, seed: int) -> dict[str, tuple[Cover, ...]]:
    found: dict[str, tuple[Cover, ...]] = {}
    for left, load in zip(range(len(job.loads), 0, -1), job.loads, strict=True):
        share = min(30.0, _COVER_SHARE * (deadline - monotonic()) / left)
        found[load.name] = covers(load.target, seconds=max(share, 0.2), seed=seed)
    return found


def _ladder(
    job: Job, found: Mapping[str, Sequence[Cover]], deadline: float, seed: int, timed: bool
) -> Network:
    """The ladder that the search starts from; budgets are left to the search.

    By the clock, a job of many relays is worked on in a child process that can be cut short; what
    it leaves then is the plain ladder of the covers.
    """
    task = LadderTask(
        job.relays,
        job.targets,
        found,
        job.limits.contacts,
        job.limits.poles,
        job.isolated,
        job.limits.objective == "contacts",
    )
    seconds = max(0.3, _LADDER_SHARE * (deadline - monotonic()))
    if not timed or len(job.relays) <= _FEW_RELAYS:
        return best_ladder(task, seconds=seconds, seed=seed).network
    try:
        return run(_improved, task, 0.8 * seconds, seed, seconds=seconds)
    except (ChildCrashed, ChildTimedOut):
        return plain_ladder(task)


def _improved(task: LadderTask, seconds: float, seed: int) -> Network:
    return best_ladder(task, seconds=seconds, seed=seed).network


def _task(job: Job, repeaters: bool) -> Task:
    return Task(
        job.relays,
        job.targets,
        job.limits.poles,
        job.limits.contacts,
        job.isolated,
        job.limits.objective,
        repeaters,
    )


def _proved(
    job: Job,
    form: Form,
    network: Network,
    repeaters: Mapping[str, str],
    at_least: int,
    statuses: tuple[LoadStatus, ...],
    said: tuple[str, ...] = (),
) -> Design:
    """The design of a network that passes its proof; `at_least` is what the objective counts."""
    budgets = dict(job.limits.poles)
    for name, relay in repeaters.items():
        budgets[name] = budgets[relay]
    proof = prove(
        network,
        job.targets,
        form=form,
        isolated=job.isolated,
        pole_limits=budgets,
        separate=job.limits.contacts,
        repeaters=repeaters,
    )
    if not proof.ok:
        raise ProofFailed(proof.explain())
    poles = len(network.poles)
    contacts = sum(count.contacts for count in network.per_relay().values())
    notes = list(said)
    if job.limits.objective == "contacts":
        proved = contacts == at_least
        notes.append(
            f"{contacts} contacts, "
            + ("the least there are: proved" if proved else f"at least {at_least} are needed")
        )
        at_least = _relays_that_matter(job)
    notes += [
        f"{name} is a repeater of {relay}: its coil in parallel with {relay}'s"
        for name, relay in repeaters.items()
    ]
    bound = Bound(at_least, at_least == poles)
    return Design(form, network, bound, proof.rows, statuses, tuple(notes))


def _relays_that_matter(job: Job) -> int:
    """Poles every network needs: one for each relay without which some load goes wrong."""
    return sum(any(load.target.needs(i) for load in job.loads) for i in range(len(job.relays)))


def _status(job: Job, name: str, cover: Cover) -> LoadStatus:
    return LoadStatus(name, cover.to_text(job.relays), cover.literals, cover.terms, cover.proved)


def _with_repeaters(
    job: Job, networks: Mapping[Form, Network]
) -> tuple[dict[Form, Network], dict[str, str]]:
    """Poles over budget moved to repeaters; the same repeaters for every form."""
    need: dict[str, int] = {}
    for network in networks.values():
        for relay, count in network.per_relay().items():
            most = job.limits.poles.get(relay)
            if most:
                need[relay] = max(need.get(relay, 0), -(-count.poles // most) - 1)
    taken = [*job.relays, *(load.name for load in job.loads)]
    added: dict[str, str] = {}
    names: dict[str, list[str]] = {}
    for relay, more in need.items():
        names[relay] = [relay]
        for _ in range(more):
            name = free_name(relay, [*taken, *added])
            added[name] = relay
            names[relay].append(name)
    moved: dict[Form, Network] = {}
    for form, network in networks.items():
        poles = []
        for pole in network.poles:
            most = job.limits.poles.get(pole.relay)
            if most:
                turn, place = divmod(pole.number - 1, most)
                pole = Pole(names[pole.relay][turn], place + 1, pole.common, pole.make, pole.break_)
            poles.append(pole)
        order = {name: k for k, name in enumerate((*job.relays, *added))}
        poles.sort(key=lambda pole: (order[pole.relay], pole.number))
        moved[form] = replace(network, relays=(*job.relays, *added), poles=tuple(poles))
    return moved, added


def _over_budget(job: Job, best: Best) -> LimitError:
    """What the least is, and for which relay."""
    network = next(best.networks[form] for form, over in best.over.items() if over)
    use = network.per_relay()
    short = [name for name, most in job.limits.poles.items() if use[name].poles > most]
    if short:
        name = short[0]
        most, least = job.limits.poles[name], use[name].poles
        poles = "pole" if most == 1 else "poles"
        what = f"{name} may use {most} {poles}; the least found for it is {least}"
    else:
        name, have = next(
            (name, have)
            for name, have in job.limits.contacts.items()
            if use[name].makes > have.makes or use[name].breaks > have.breaks
        )
        what = (
            f"{name} has {have.makes} makes and {have.breaks} breaks; the least found for it is"
            f" {use[name].makes} makes and {use[name].breaks} breaks"
        )
    if not best.feasible:
        what += " (proved: no network keeps all budgets)"
    return LimitError(
        what,
        place=Place(file=job.file, section="limits"),
        expected="budgets that a network found can keep",
        hint="raise the budget, or allow repeaters with --repeaters",
    )
