"""What the commands for the bench look at: finished, proved designs and what is wanted of them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from contactlogic.cli.jobs import Wirable, wirable_job
from contactlogic.design import Design, Result
from contactlogic.errors import DesignFileError, JobFileError, Place
from contactlogic.job.model import Job

if TYPE_CHECKING:
    from contactlogic.hazard import Moves
    from contactlogic.report.designfile import DesignFile
    from contactlogic.synthesis import Search

__all__ = ["Source", "Subject", "is_design", "subject", "wanted_of", "wired_alone"]


@dataclass(frozen=True)
class Source:
    """Which designs a command is to look at.

    Args:
        path: a design file, or a job that is wired first.
        job: what a design file's designs are to do; None for whatever they do.
        form: which designs; None for all.
    """

    path: Path
    job: Path | None = None
    form: Literal["ladder", "bridge"] | None = None
    loads: str | None = None
    unlisted: str | None = None
    quiet: bool = False


@dataclass(frozen=True)
class Subject:
    """Designs over the job's relays, each proved to do what the job wants.

    Args:
        job: what is wanted; of a sequence its coils and loads over all states of its relays.
        designs: relays in the job's order, repeaters last.
        repeaters: relays of the designs that follow another.
        moves: moves of one relay that the job lists: pairs of rows, or steps of its sequence.
    """

    job: Job
    designs: tuple[Design, ...]
    repeaters: Mapping[str, str]
    moves: Moves


def subject(source: Source) -> Subject:
    """Read, wire where only a job is given, and prove.

    Raises:
        InputError: the job or the design file cannot be used, or a design is not as wanted.
    """
    if not is_design(source.path):
        from contactlogic.synthesis import Search

        wanted, result = wired_alone(
            source.path,
            source.job,
            source.loads,
            source.unlisted,
            Search(source.form or "both"),
            shown=not source.quiet,
        )
        job, moves = wanted_of(wanted)
        return Subject(job, result.designs, result.repeaters, moves)
    from contactlogic.report.designfile import read_design

    file = read_design(source.path)
    place = Place(file=str(source.path))
    designs = tuple(each for each in file.designs if source.form in (None, each.form))
    if not designs:
        what = f"no {source.form}" if source.form and file.designs else "no design"
        raise DesignFileError(f"the file holds {what}", place=place)
    if source.job is None:
        if source.loads is not None or source.unlisted is not None:
            raise JobFileError("--loads and --unlisted go with a job that is a bare table")
        job, moves = _as_built(file, designs[0])
    else:
        job, moves = wanted_of(wirable_job(source.job, source.loads, source.unlisted))
    return _proved(job, moves, designs, file.repeaters, place)


def is_design(path: Path) -> bool:
    """Whether a file is taken for a design file, not for a job."""
    return path.suffix.lower() == ".json"


def wired_alone(
    path: Path,
    second: Path | None,
    loads: str | None,
    unlisted: str | None,
    search: Search,
    *,
    shown: bool,
) -> tuple[Wirable, Result]:
    """A job that stands where a design may, and what it is wired to.

    Args:
        path: the job.
        second: what was given after it; a job is wired by itself.
        search: how to search; its progress is shown if `shown`.

    Raises:
        InputError: the job cannot be used, or a second file was given.
    """
    from contactlogic.cli.progress import live
    from contactlogic.cli.wiring import wired

    if second is not None:
        raise JobFileError(
            f"{path} is no design file",
            expected="a design file (.json), then the job; or a job alone, which is wired",
        )
    job = wirable_job(path, loads, unlisted)
    with live(shown) as watch:
        return job, wired(job, replace(search, watch=watch))


def wanted_of(job: Wirable) -> tuple[Job, Moves]:
    """What a job wants of its wiring, row by row, and the moves that it lists."""
    from contactlogic.hazard import listed_moves, step_moves

    if isinstance(job, Job):
        return job, listed_moves(job)
    from contactlogic.sequencer import expanded

    table, expansion = expanded(job)
    steps = [(step.state, mover) for step in expansion.steps for mover in step.movers]
    return table, step_moves(expansion.columns, steps)


def _as_built(file: DesignFile, design: Design) -> tuple[Job, Moves]:
    """A job that wants just what the first design does, in every row."""
    from contactlogic.hazard import listed_moves
    from contactlogic.job.model import Limits, Load
    from contactlogic.network import folded
    from contactlogic.report.facts import as_built
    from contactlogic.truth import MAX_INPUTS, Target, all_rows

    network = folded(design.network, file.repeaters)
    n = len(network.relays)
    if n > MAX_INPUTS:
        raise DesignFileError(
            f"the design has {n} relays", expected=f"at most {MAX_INPUTS}, repeaters not counted"
        )
    loads = tuple(Load(name, Target(n, table)) for name, table in as_built(network).items())
    limits = Limits(isolate="none")
    job = Job(file.title, network.relays, loads, all_rows(n), limits=limits)
    return job, listed_moves(job)


def _proved(
    job: Job,
    moves: Moves,
    designs: tuple[Design, ...],
    repeaters: Mapping[str, str],
    place: Place,
) -> Subject:
    from contactlogic.check import verify

    found = []
    for design in designs:
        proof = verify(design, job, repeaters=repeaters)
        if not proof.ok:
            raise DesignFileError(
                f"the {design.form} {design.fingerprint} is not as the job wants it",
                place=place,
                expected="a design that contactlogic verify finds right",
                hint=proof.explain().splitlines()[0],
            )
        found.append(_in_order(design, job, repeaters))
    return Subject(job, tuple(found), repeaters, moves)


def _in_order(design: Design, job: Job, repeaters: Mapping[str, str]) -> Design:
    """The design with its relays and loads in the job's order."""
    network = design.network
    relays = job.relays + tuple(name for name in network.relays if name in repeaters)
    order = {name: i for i, name in enumerate(relays)}
    poles = sorted(network.poles, key=lambda pole: (order[pole.relay], pole.number))
    return replace(design, network=replace(network, relays=relays, poles=tuple(poles)))
