"""From a job to a proved result: the one place where synthesis and proof meet.

Each finished network is proved by `check`, which shares no code with what built it.  A network
that fails its proof is never returned.
"""

from __future__ import annotations

from time import monotonic

from contactlogic.check import prove
from contactlogic.design import Bound, Design, LoadStatus, Result
from contactlogic.errors import LimitError, Place, ProofFailed
from contactlogic.job.model import Job
from contactlogic.ladder.synthesise import LadderTask, OverBudget, best_ladder
from contactlogic.minimize import Cover, covers

__all__ = ["wire"]

_SECONDS = 60.0
_COVER_SHARE = 0.5  # of the time goes to covers at most, shared out evenly over the loads


def wire(job: Job, *, seconds: float = _SECONDS, seed: int = 0) -> Result:
    """Wire a job as a ladder and prove every row.

    Args:
        job: what to wire.
        seconds: wall-clock limit of the search; small jobs end long before it.
        seed: same job, same seed and enough seconds: same result.

    Raises:
        LimitError: a pole budget that no ladder found keeps.
        ProofFailed: contactlogic built a network that fails its own proof.
    """
    deadline = monotonic() + seconds
    found: dict[str, tuple[Cover, ...]] = {}
    for left, load in zip(range(len(job.loads), 0, -1), job.loads, strict=True):
        share = min(30.0, _COVER_SHARE * (deadline - monotonic()) / left)
        found[load.name] = covers(load.target, seconds=max(share, 0.5), seed=seed)
    task = LadderTask(
        job.relays,
        job.targets,
        found,
        job.limits.contacts,
        job.limits.poles,
        job.isolated,
        job.limits.objective == "contacts",
    )
    try:
        ladder = best_ladder(task, seconds=max(deadline - monotonic(), 1.0), seed=seed)
    except OverBudget as problem:
        raise _over_budget(job, problem) from None
    proof = prove(
        ladder.network,
        job.targets,
        form="ladder",
        isolated=job.isolated,
        pole_limits=job.limits.poles,
        separate=job.limits.contacts,
    )
    if not proof.ok:
        raise ProofFailed(proof.explain())
    at_least = _relays_that_matter(job)
    poles = len(ladder.network.poles)
    design = Design(
        "ladder",
        ladder.network,
        Bound(at_least, at_least == poles),
        proof.rows,
        tuple(_status(job, name, best[0]) for name, best in found.items()),
    )
    return Result(job, (design,), job.relays)


def _relays_that_matter(job: Job) -> int:
    """Poles every network needs: one for each relay without which some load goes wrong."""
    return sum(any(load.target.needs(i) for load in job.loads) for i in range(len(job.relays)))


def _status(job: Job, name: str, cover: Cover) -> LoadStatus:
    return LoadStatus(name, cover.to_text(job.relays), cover.literals, cover.terms, cover.proved)


def _over_budget(job: Job, problem: OverBudget) -> LimitError:
    budgets = dict(job.limits.poles) | {
        name: have.makes + have.breaks for name, have in job.limits.contacts.items()
    }
    short = [name for name, most in budgets.items() if problem.least.get(name, 0) > most]
    if short:
        name = short[0]
        what = (
            f"{name} may use {budgets[name]} poles; the least found for it is {problem.least[name]}"
        )
    else:
        what = "no ladder found keeps all pole budgets at once"
    return LimitError(
        what,
        place=Place(file=job.file, section="limits"),
        expected="budgets that some ladder found can keep",
        hint="raise the budget, or share the work with another relay",
    )
