"""Wiring in which no load drops out or flashes while one relay moves."""

from __future__ import annotations

from dataclasses import replace

from contactlogic.design import Design, Result
from contactlogic.errors import LimitError, Place
from contactlogic.hazard import HazardPenalty, hazards, listed_moves
from contactlogic.hazard.steady import steady_ladder
from contactlogic.job.model import Job
from contactlogic.synthesis import Search, synthesise

__all__ = ["wire_hazard_free"]


def wire_hazard_free(job: Job, search: Search) -> Result:
    """Wire a job without hazards in the moves it lists; notes say what that costs in poles.

    The ordinary wiring is searched first, with half the seconds, for comparison; where it has no
    hazard it stands.

    Raises:
        LimitError: no network found does without hazards within the budgets.
        ProofFailed: contactlogic built a network that fails its own proof.
    """
    moves = listed_moves(job)
    half = search if search.seconds is None else replace(search, seconds=search.seconds / 2)
    plain = synthesise(job, half)
    penalty = HazardPenalty(moves, job.targets, weight=1000)
    if not any(_hazards(plain, design) for design in plain.designs):
        notes = ("no load drops out or flashes while one relay moves",)
        noted = tuple(replace(design, notes=design.notes + notes) for design in plain.designs)
        return replace(plain, designs=noted)
    result = synthesise(job, half, penalty=penalty, starts=(steady_ladder(job, moves),))
    poles = {design.form: len(design.network.poles) for design in plain.designs}
    designs = []
    for design in result.designs:
        left = _hazards(result, design)
        if left:
            raise LimitError(
                f"no {design.form} found does without hazards within the limits ({left} left)",
                place=Place(file=job.file, section="limits"),
                hint="raise the pole budgets",
            )
        note = "no load drops out or flashes while one relay moves"
        if design.form in poles:
            most, least = len(design.network.poles), poles[design.form]
            note += f": {most} poles, {most - least} more than the {least} found with hazards"
        designs.append(replace(design, notes=(*design.notes, note)))
    return replace(
        result,
        designs=tuple(designs),
        interrupted=plain.interrupted or result.interrupted,
    )


def _hazards(result: Result, design: Design) -> int:
    job = result.job
    found = hazards(design.network, listed_moves(job), job.targets, result.repeaters)
    return sum(hazard.moves for hazard in found)
