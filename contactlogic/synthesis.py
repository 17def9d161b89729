"""From a job to a proved result: the one place where synthesis and proof meet.

Covers, a ladder from them, then the search: windows and exact search improve the ladder and find
the best bridge beside it.  Each finished network is proved by `check`, which shares no code with
what built it.  A network that fails its proof is never returned.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from contextlib import ExitStack
from dataclasses import dataclass, replace
from time import monotonic
from types import MappingProxyType
from typing import Literal

from contactlogic.check import prove
from contactlogic.child import ChildCrashed, ChildTimedOut, Spares, run
from contactlogic.design import Bound, Design, Form, LoadStatus, Result
from contactlogic.errors import ProofFailed
from contactlogic.job.model import Job
from contactlogic.ladder.synthesise import LadderTask, best_ladder, plain_ladder
from contactlogic.minimize import Cover, covers
from contactlogic.network import Network
from contactlogic.search.best import Task, best_networks
from contactlogic.search.budgets import excess, over_budget, refuse_at_once, with_repeaters
from contactlogic.search.catalogue import Entry, least_bridge, least_contacts, least_ladder
from contactlogic.search.mesh import to_network
from contactlogic.search.portfolio import Progress
from contactlogic.truth import Target

__all__ = ["EFFORT", "Forms", "Search", "finish", "proved_rows", "synthesise", "wire"]

Forms = Literal["ladder", "bridge", "both"]

EFFORT, SMALL_EFFORT = 40, 6
"""Windows for each walker where neither effort nor seconds are given; the second with few relays,
where a user waits for the whole job no longer than for the program to start."""

_CEILING = 600.0  # seconds for covers and ladder where only an effort is given
_CONFLICTS = 2000  # of the proof, for each window of effort
_SMALL_CONFLICTS = 15_000  # of the proof with the least effort: half a second
_WALKERS_LOAD = ("contactlogic.search.portfolio", "pysat.solvers")
_COVER_SHARE = 0.3  # of the time goes to covers at most, shared out evenly over the loads
_LADDER_SHARE, _LADDER_MOST = 0.4, 20.0  # of the time, and seconds: walks improve a ladder faster
_LEAST_SHARE = 0.05  # goes to the search, however long the papers will take
_SMALL_RELAYS = 4  # up to here the least effort is the default
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
            `EFFORT` if neither is given, `SMALL_EFFORT` up to four relays.
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
        keep_back: seconds of `seconds` that what follows the search will take, from the poles of
            the ladder it starts with (drawing takes longer where there is more to draw).
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
    keep_back: Callable[[int], float] | None = None
    price: Callable[[Network], int] | None = None
    bargain: int = 0

    @property
    def forms(self) -> tuple[Form, ...]:
        """What to search for, the ladder first."""
        return ("ladder", "bridge") if self.form == "both" else (self.form,)


def synthesise(
    job: Job,
    search: Search,
    *,
    home: Mapping[str, Target] | None = None,
    penalty: Callable[[Network], int] | None = None,
    blemishes: Callable[[Network], int] | None = None,
    starts: Sequence[Network] = (),
    covered: Mapping[str, tuple[Cover, ...]] | None = None,
) -> Result:
    """`wire` with a judgement of its own.

    Args:
        job: what to wire.
        search: how.
        home: narrower wants, load by load, whose plain wiring the penalty approves of; the search
            starts there.  None for the job's own.
        penalty: weighs before all cost, 0 where all is well; picklable.
        blemishes: counts what is to be avoided among networks of equal poles; picklable.
        starts: ladders that do what the job wants, to start from as well.
        covered: covers of every load, best first, if they are known; the search then begins with
            `starts` alone.
    """
    seconds, effort, seed = search.seconds, search.effort, search.seed
    conflicts = _CONFLICTS * (effort or 0)
    if seconds is None and effort is None:
        small = len(job.relays) <= _SMALL_RELAYS
        effort = SMALL_EFFORT if small else EFFORT
        conflicts = _SMALL_CONFLICTS if small else _CONFLICTS * EFFORT
    deadline = monotonic() + (_CEILING if seconds is None else seconds)
    forms = search.forms
    refuse_at_once(job, search.repeaters)
    with ExitStack() as ending:
        try:
            found = covered or _covers(job, deadline, seed)
            if (
                penalty is None
                and search.price is None
                and (shelf := _from_catalogue(job, forms)) is not None
            ):
                return _shelved(job, shelf, found)
            spares = ending.enter_context(Spares(len(forms) + 1, _WALKERS_LOAD))
            known = list(starts)
            if covered is None:
                at_home = job
                if home is not None:
                    loads = tuple(replace(load, target=home[load.name]) for load in job.loads)
                    at_home = replace(job, loads=loads)
                narrow = found if home is None else _covers(at_home, deadline, seed)
                known.insert(0, _ladder(at_home, narrow, deadline, seed, timed=seconds is not None))
        except KeyboardInterrupt:
            return _plain(job, search, home)
        statuses = _statuses(job, found)
        if search.keep_back is not None:
            late = deadline - search.keep_back(len(known[0].poles))
            deadline = max(late, min(deadline, monotonic() + _LEAST_SHARE * (seconds or 0.0)))
        watch = search.watch
        best = best_networks(
            replace(
                _task(job, search.repeaters),
                penalty=penalty,
                blemishes=blemishes,
                price=search.price,
                bargain=search.bargain,
            ),
            dict.fromkeys(forms, known),
            forms,
            seconds=None if seconds is None else max(0.0, deadline - monotonic()),
            effort=effort,
            # the fewest poles are not what a search for the price is after
            conflicts=0 if search.price is not None else conflicts,
            seed=seed,
            workers=search.workers,
            at_least=_relays_that_matter(job),
            home=home,
            watch=None if watch is None else lambda progress: watch(forms, progress),
            spares=spares,
        )
    return finish(
        job,
        search,
        best.networks,
        at_least=best.at_least,
        over=best.over,
        feasible=best.feasible,
        statuses=statuses,
        interrupted=best.progress.interrupted,
    )


def finish(
    job: Job,
    search: Search,
    found: Mapping[Form, Network],
    *,
    at_least: int,
    over: Mapping[Form, int] | None = None,
    feasible: bool = True,
    statuses: tuple[LoadStatus, ...] = (),
    interrupted: bool = False,
) -> Result:
    """The proved result of networks found: budgets kept, or repeaters added, or refused.

    Args:
        found: the network of each form asked for.
        at_least: proved for every network, in what the objective counts.
        over: by how much each breaks its budgets, 0 if it keeps them; None to count it here.
        feasible: False if proved that no network keeps the budgets.

    Raises:
        LimitError, ProofFailed: as `wire`.
    """
    if over is None:
        over = {form: excess(job, network) for form, network in found.items()}
    missing = [] if search.repeaters else [form for form in found if over[form]]
    if len(missing) == len(found):
        raise over_budget(job, found, over, feasible)
    forms = [form for form in found if form not in missing]
    notes = tuple(f"no {form} found keeps the pole budgets" for form in missing)
    if search.repeaters:
        networks, added = with_repeaters(job, found)
    else:
        networks, added = dict(found), {}
    return Result(
        job,
        tuple(
            _proved(job, form, networks[form], added, at_least, statuses, notes) for form in forms
        ),
        (*job.relays, *added),
        added,
        interrupted=interrupted,
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


def _shelved(job: Job, shelf: Mapping[Form, Entry], found: Mapping[str, Sequence[Cover]]) -> Result:
    """The catalogue's answer."""
    names = [load.name for load in job.loads]
    designs = (
        _proved(
            job,
            form,
            to_network(entry.mesh, job.relays, names),
            {},
            entry.at_least,
            _statuses(job, found),
        )
        for form, entry in shelf.items()
    )
    return Result(job, tuple(designs), job.relays)


def _plain(job: Job, search: Search, home: Mapping[str, Target] | None) -> Result:
    """What can be had at once where the user stops before the search: plain covers, rungs apart."""
    wanted = job.targets if home is None else home
    quick = {name: covers(wanted[name], seconds=0.0) for name in job.targets}
    network = plain_ladder(_ladder_task(job, quick))
    return finish(
        job,
        search,
        dict.fromkeys(search.forms, network),
        at_least=_relays_that_matter(job),
        statuses=_statuses(job, quick),
        interrupted=True,
    )


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
    task = _ladder_task(job, found)
    seconds = min(_LADDER_MOST, max(0.3, _LADDER_SHARE * (deadline - monotonic())))
    if not timed or len(job.relays) <= _FEW_RELAYS:
        return best_ladder(task, seconds=seconds, seed=seed).network
    try:
        return run(_improved, task, 0.8 * seconds, seed, seconds=seconds)
    except (ChildCrashed, ChildTimedOut):
        return plain_ladder(task)


def _ladder_task(job: Job, found: Mapping[str, Sequence[Cover]]) -> LadderTask:
    return LadderTask(
        job.relays,
        job.targets,
        found,
        job.limits.contacts,
        job.limits.poles,
        job.isolated,
        job.limits.objective == "contacts",
    )


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


def proved_rows(
    job: Job, form: Form, network: Network, repeaters: Mapping[str, str] = MappingProxyType({})
) -> int:
    """Rows proved of a network that is to do what a job wants; a repeater has its relay's budget.

    Raises:
        ProofFailed: it does not.
    """
    budgets = dict(job.limits.poles)
    for name, relay in repeaters.items():
        if relay in budgets:
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
    return proof.rows


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
    rows = proved_rows(job, form, network, repeaters)
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
    return Design(form, network, bound, rows, statuses, tuple(notes))


def _relays_that_matter(job: Job) -> int:
    """Poles every network needs: one for each relay without which some load goes wrong."""
    return sum(any(load.target.needs(i) for load in job.loads) for i in range(len(job.relays)))


def _statuses(job: Job, found: Mapping[str, Sequence[Cover]]) -> tuple[LoadStatus, ...]:
    best = {name: covers[0] for name, covers in found.items()}
    return tuple(
        LoadStatus(name, cover.to_text(job.relays), cover.literals, cover.terms, cover.proved)
        for name, cover in best.items()
    )
