"""What `contactlogic recover` does: prove where relays end up from every power-on state."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from contactlogic.errors import DesignFileError, JobFileError, Place
from contactlogic.job.model import DrivesJob, Job, PatternJob, SequenceJob
from contactlogic.job.sequence import SequenceTable, Timing

if TYPE_CHECKING:
    from contactlogic.design import Design
    from contactlogic.repair import NoRepair, Repair
    from contactlogic.report.designfile import DesignFile
    from contactlogic.sequence.recovery import Recovery
    from contactlogic.sequence.space import Watch
    from contactlogic.sequence.steps import Expansion
    from contactlogic.sequence.transit import Transit

__all__ = ["Outcome", "Request", "run"]

_MOST_IN_TRANSIT = 24  # columns up to which contacts in transit are looked at


@dataclass(frozen=True)
class Request:
    """The options of one run; `memory` in bytes."""

    job: Path
    design: Path | None = None
    form: Literal["ladder", "bridge"] | None = None
    moves: Literal["single", "together"] = "single"
    json: bool = False
    quiet: bool = False
    memory: int = 4 << 30


@dataclass(frozen=True)
class Outcome:
    """Whether all that was looked at recovers, and whether the search was stopped early."""

    recovers: bool
    stopped: bool


@dataclass(frozen=True)
class _Judged:
    """One wiring or set of drives with what was found of it."""

    recovery: Recovery
    design: Design | None = None
    transits: tuple[Transit, ...] | None = None
    repair: Repair | NoRepair | None = None
    stopped: bool = False


def run(request: Request) -> Outcome:
    """Prove what was asked and print it.

    Raises:
        InputError: the job or the design file cannot be used, or memory does not suffice.
    """
    from contactlogic.cli.progress import watching
    from contactlogic.job import load_job
    from contactlogic.sequence.memory import resolve
    from contactlogic.sequence.space import Stopped

    job = load_job(request.job)
    if isinstance(job, Job):
        raise JobFileError(
            "this job has no relays that drive each other",
            place=Place(file=job.file),
            expected="a job with [sequence], [pattern] or [drives]",
        )
    table, timing = _table(job)
    if not isinstance(job, DrivesJob) and request.design is None:
        raise JobFileError(
            "which wiring of this sequence is to be proved is not said",
            place=Place(file=job.file),
            expected="--design with the design file of a wiring",
            hint=f"contactlogic wire {request.job} makes {request.job.stem}/design.json",
        )
    if request.form is not None and request.design is None:
        raise JobFileError("--form chooses among the designs of a file", hint="give --design")
    expansion = None if table is None else resolve(table, wired=isinstance(job, DrivesJob))
    judged: list[_Judged] = []
    cut = False
    with watching(not request.quiet) as watch:
        try:
            if request.design is not None:
                for one in _designs(request, request.design, job, timing, expansion, watch):
                    judged.append(one)
            else:
                assert isinstance(job, DrivesJob)
                judged.append(_drives(request, job, expansion, watch))
        except Stopped:
            if not judged:
                raise KeyboardInterrupt from None  # before anything was known
            cut = True
    if request.json:
        worst = min(judged, key=lambda one: one.recovery.verdict == "recovers")
        sys.stdout.write(json.dumps(_contract(worst), indent=1) + "\n")
    elif not request.quiet:
        sys.stdout.write("\n".join(_text(one, expansion) for one in judged))
    return Outcome(
        all(one.recovery.verdict == "recovers" for one in judged),
        cut or any(one.stopped for one in judged),
    )


def _table(job: DrivesJob | PatternJob | SequenceJob) -> tuple[SequenceTable | None, Timing]:
    if isinstance(job, DrivesJob):
        return job.table, job.timing
    if isinstance(job, SequenceJob):
        return job.table, job.table.timing
    from contactlogic.sequence.pattern import sequence_of

    table = sequence_of(job)[0].table
    return table, table.timing


def _drives(request: Request, job: DrivesJob, expansion: Expansion | None, watch: Watch) -> _Judged:
    from contactlogic.repair import cheapest_repair
    from contactlogic.sequence.drives import formula_drive
    from contactlogic.sequence.prove import prove_drives
    from contactlogic.sequence.space import Stopped

    recovery = prove_drives(
        job.columns,
        {name: formula_drive(drive) for name, drive in job.drives.items()},
        job.timing,
        expansion,
        moves=request.moves,
        inputs_return=job.table is None or job.table.inputs_return,
        memory=request.memory,
        watch=watch,
    )
    repair, stopped = None, not recovery.complete
    if recovery.complete and recovery.verdict != "recovers":
        try:
            repair = cheapest_repair(job, recovery, expansion, watch=watch)
        except Stopped:
            stopped = True
    return _Judged(recovery, repair=repair, stopped=stopped)


def _designs(
    request: Request,
    path: Path,
    job: DrivesJob | PatternJob | SequenceJob,
    timing: Timing,
    expansion: Expansion | None,
    watch: Watch,
) -> Iterator[_Judged]:
    from contactlogic.network import folded
    from contactlogic.report.designfile import read_design
    from contactlogic.sequence.fitting import fitted
    from contactlogic.sequence.prove import network_motion, prove_network
    from contactlogic.sequence.space import Stopped
    from contactlogic.sequence.transit import transits

    file = read_design(path)
    place = Place(file=str(path))
    for design in _chosen(file, request.form, place):
        if expansion is not None:
            columns, inputs = expansion.columns, expansion.inputs
        else:
            assert isinstance(job, DrivesJob)
            columns, inputs = job.columns, job.inputs
        network = fitted(folded(design.network, file.repeaters), columns, inputs, place)
        recovery = prove_network(
            network,
            timing,
            expansion,
            moves=request.moves,
            inputs_return=expansion is None or expansion.inputs_return,
            memory=request.memory,
            watch=watch,
        )
        found, stopped = None, not recovery.complete
        if recovery.complete and len(columns) <= _MOST_IN_TRANSIT:
            states = [] if expansion is None else [step.state for step in expansion.steps]
            try:
                motion = network_motion(
                    network, timing, expansion, memory=request.memory, watch=watch
                )
                found = transits(network, motion, states)
            except Stopped:
                stopped = True
        yield _Judged(recovery, design, found, stopped=stopped)
        if stopped:
            return


def _chosen(file: DesignFile, form: str | None, place: Place) -> Sequence[Design]:
    if not file.designs:
        raise DesignFileError("the file holds no design", place=place)
    chosen = [design for design in file.designs if form in (None, design.form)]
    if not chosen:
        raise DesignFileError(
            f"the file holds no {form}",
            place=place,
            expected="one of " + ", ".join(design.form for design in file.designs),
        )
    return chosen


def _contract(judged: _Judged) -> dict[str, object]:
    from contactlogic.repair import repair_json
    from contactlogic.sequence.record import recovery_json

    contract = recovery_json(judged.recovery, judged.transits)
    if judged.design is not None:
        contract["form"] = judged.design.form
        contract["fingerprint"] = judged.design.fingerprint
    else:
        contract["repair"] = None if judged.repair is None else repair_json(judged.repair)
    return contract


def _text(judged: _Judged, expansion: Expansion | None) -> str:
    from contactlogic.report.recovery import recovery_text, repair_lines

    wanted = expansion is not None
    said = recovery_text(judged.recovery, wanted=wanted, transits=judged.transits)
    if judged.design is not None:
        said = f"{judged.design.form} {judged.design.fingerprint}\n{said}"
    if judged.repair is not None:
        said += "\n" + "\n".join(repair_lines(judged.repair)) + "\n"
    return said
