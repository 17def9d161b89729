"""What `contactlogic trace` does: read a list of wires, say what it does, compare it with a job."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from contactlogic.errors import WiringError
from contactlogic.job.model import DrivesJob, Job, Load

if TYPE_CHECKING:
    from contactlogic.trace import Trace

__all__ = ["Request", "run"]


@dataclass(frozen=True)
class Request:
    """The options of one run."""

    wires: Path
    job: Path | None = None
    feed: tuple[str, ...] = ()
    back: tuple[str, ...] = ()
    names: tuple[str, ...] = ()
    follows: tuple[str, ...] = ()
    row: str | None = None
    json: bool = False
    loads: str | None = None
    unlisted: str | None = None


def run(request: Request) -> bool:
    """Do what was asked and print it; tells whether the wiring agrees with the job.

    Raises:
        InputError: the list, the job or an option cannot be used; nothing was printed.
    """
    from contactlogic.report.tracing import dumps, row_json, row_text, trace_json, trace_text
    from contactlogic.report.wiring import rail_terminals
    from contactlogic.trace import Behaviour, Known, circuit_of, read_wires, trace

    job = None if request.job is None else _job(request.job, request.loads, request.unlisted)
    names = dict(_pair(text, "--name", "big lamp=LAMP") for text in request.names)
    follows = dict(_pair(text, "--follows", "UP_2=UP") for text in request.follows)
    known = Known(feed=request.feed, back=request.back, names=names, follows=follows)
    if job is not None:
        known = Known(
            relays=job.relays,
            loads=tuple(load.name for load in job.loads),
            separate=frozenset(job.limits.contacts),
            rails=rail_terminals(job),
            feed=request.feed,
            back=request.back,
            names=names,
            follows=follows,
        )
    found = trace(circuit_of(read_wires(request.wires), known), job, known)
    data = trace_json(found) if request.json else None
    text = "" if request.json else trace_text(found)
    if request.row is not None:
        does = Behaviour(found.circuit, found.follows)
        row = _row(request.row, found)
        if data is not None:
            data["row"] = row_json(found, does, row)
        text = row_text(found, does, row)
    sys.stdout.write(text if data is None else dumps(data))
    return found.agrees


def _job(path: Path, loads: str | None, unlisted: str | None) -> Job:
    """The job as rows of relays: of a sequence its coils and loads, of drives their coils."""
    from contactlogic.cli.jobs import read_job

    job = read_job(path, loads, unlisted)
    if isinstance(job, Job):
        return job
    if isinstance(job, DrivesJob):
        return _drives(job)
    from contactlogic.sequencer import as_table_job

    return as_table_job(job)


def _drives(job: DrivesJob) -> Job:
    from contactlogic.algebra import evaluate
    from contactlogic.errors import LimitError
    from contactlogic.truth import MAX_INPUTS, Target, all_rows

    n = len(job.columns)
    if n > MAX_INPUTS:
        raise LimitError(f"the job has {n} relays and inputs", expected=f"at most {MAX_INPUTS}")
    loads = tuple(
        Load(name, Target(n, evaluate(drive, job.columns)), "coil")
        for name, drive in job.drives.items()
    )
    return Job(job.title, job.columns, loads, all_rows(n), job.supply, job.limits, job.file)


def _pair(text: str, option: str, example: str) -> tuple[str, str]:
    name, equals, meant = (part.strip() for part in text.rpartition("="))
    if not equals or not name or not meant:
        raise WiringError(f"{option} {text} names no two things", expected=f'"{example}"')
    return (name, meant)


def _row(text: str, found: Trace) -> int:
    """A row number from `UP=1 DOWN=0`; relays not named are released."""
    from contactlogic.naming import did_you_mean, listed, shortened

    spelt = {name.casefold(): i for i, name in enumerate(found.relays)}
    row, named = 0, set[int]()
    for entry in text.replace(",", " ").split():
        name, equals, value = entry.partition("=")
        place = spelt.get(name.casefold())
        if place is None:
            raise WiringError(
                f"--row: there is no relay {shortened(name)}",
                expected=listed(found.relays),
                hint=did_you_mean(name, found.relays),
            )
        if not equals or value not in ("0", "1"):
            raise WiringError(
                f"--row: {shortened(entry)} is no setting", expected=f"{found.relays[place]}=0 or 1"
            )
        if place in named:
            raise WiringError(f"--row: {found.relays[place]} is set twice", expected="once")
        named.add(place)
        row |= int(value) << place
    return row
