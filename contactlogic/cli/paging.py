"""What `contactlogic page` does: study finished designs, and write all of it as one page."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from contactlogic.cli.buying import Asked, schedules_of_result
from contactlogic.cli.jobs import Wirable, wirable_job
from contactlogic.cli.subject import (
    Source,
    Subject,
    is_design,
    subject,
    wanted_of,
    wired_alone,
)
from contactlogic.design import Result
from contactlogic.errors import LimitError
from contactlogic.job.model import Job

if TYPE_CHECKING:
    from contactlogic.fault import Panel
    from contactlogic.page import Section
    from contactlogic.purchase.schedule import Schedule
    from contactlogic.report.bench import WireList
    from contactlogic.synthesis import Forms

__all__ = ["Request", "run"]


@dataclass(frozen=True)
class Request:
    """The options of one run."""

    source: Path
    job: Path | None = None
    out: Path | None = None
    force: bool = False
    asked: Asked = field(default_factory=Asked)
    quiet: bool = False
    form: Forms = "both"
    seed: int = 0
    seconds: float | None = None
    effort: int | None = None
    loads: str | None = None
    unlisted: str | None = None


@dataclass(frozen=True)
class _Found:
    """What the page tells of; `job` is None where no job was given."""

    seen: Subject
    result: Result
    job: Wirable | None


def run(request: Request) -> bool:
    """Write the page; returns whether the search was stopped early.

    Raises:
        InputError: job, design, parts list or file cannot be used, or nothing can be bought.
    """
    from contactlogic.page import page
    from contactlogic.report.bench import bought_for, wire_list
    from contactlogic.report.facts import facts
    from contactlogic.report.markdown import report
    from contactlogic.report.pagefile import check_page, write_page
    from contactlogic.report.papers import purchase_lines

    out = request.out or Path(f"{request.source.stem}.html")
    check_page(out, force=request.force)
    found = _of_design(request) if is_design(request.source) else _of_job(request)
    result = found.result
    schedules = _schedules(found, request.asked)
    lists = [
        wire_list(
            design,
            result.job,
            repeaters=result.repeaters,
            bought=bought_for(schedules[index]) if schedules else None,
        )
        for index, design in enumerate(result.designs)
    ]
    known = [facts(design, result.repeaters) for design in result.designs]
    text = page(
        result,
        report(result, known, lists, purchase_lines(schedules, None)),
        sections=[list(_sections(each, found.seen)) for each in lists],
        pictures=[_pictures(result, index) for index in range(len(result.designs))],
    )
    write_page(out, text.encode(), force=request.force)
    if not request.quiet:
        print(f"written: {out}")
    return result.interrupted


def _of_design(request: Request) -> _Found:
    """Designs of a file, proved against the job where it is given."""
    form = None if request.form == "both" else request.form
    seen = subject(
        Source(request.source, request.job, form, request.loads, request.unlisted, request.quiet)
    )
    relays = (*seen.job.relays, *seen.repeaters)
    result = Result(seen.job, seen.designs, relays, seen.repeaters)
    if request.job is None:
        return _Found(seen, result, None)
    job = wirable_job(request.job, request.loads, request.unlisted)
    if isinstance(job, Job):
        return _Found(seen, result, job)
    from contactlogic.sequencer import as_sequencer

    return _Found(seen, as_sequencer(result, job), job)


def _of_job(request: Request) -> _Found:
    """Designs of a job, which is wired first."""
    from contactlogic.synthesis import Search

    job, result = wired_alone(
        request.source,
        request.job,
        request.loads,
        request.unlisted,
        Search(request.form, request.seconds, request.effort, request.seed),
        shown=not request.quiet,
    )
    wanted, moves = wanted_of(job)
    return _Found(Subject(wanted, result.designs, result.repeaters, moves), result, job)


def _schedules(found: _Found, asked: Asked) -> list[Schedule]:
    if asked.parts is None:
        return []
    return schedules_of_result(found.job or found.result.job, found.result, asked)


def _pictures(result: Result, index: int) -> dict[str, bytes]:
    """Chart and states of a sequencer."""
    from contactlogic.report.sequencer import pictures, sequence_files
    from contactlogic.sequenced import SequencerResult

    if not isinstance(result, SequencerResult):
        return {}
    files, _ = sequence_files(result, index)
    return pictures(files, result.designs[index].form)


def _sections(wires: WireList, seen: Subject) -> Iterator[Section]:
    """What is told of a design beyond the report; a part beyond its limits says so."""
    from contactlogic.page import Section
    from contactlogic.report.panels import panel_of_design
    from contactlogic.report.text import markdown

    panel = panel_of_design(wires.design, seen.job, seen.repeaters)
    for title, told in _STUDIES:
        try:
            text = told(wires, panel, seen)
        except LimitError as error:
            text = f"Not worked out: {markdown(str(error))}"
        yield Section(title, text)


def _ticks(wires: WireList, panel: Panel, seen: Subject) -> str:
    from contactlogic.report.bench import tick_list

    del panel, seen
    return tick_list(wires).partition("\n")[2]


def _hazards(wires: WireList, panel: Panel, seen: Subject) -> str:
    from contactlogic.hazard import study_hazards
    from contactlogic.report.hazards import hazards_markdown

    del panel
    network = wires.design.network
    return hazards_markdown(study_hazards(network, seen.job, seen.moves, seen.repeaters))


def _faults(wires: WireList, panel: Panel, seen: Subject) -> str:
    from contactlogic.fault import study_faults
    from contactlogic.report.faults import faults_markdown
    from contactlogic.report.panels import wanted_of

    del wires
    return faults_markdown(study_faults(panel, wanted_of(panel, seen.job, seen.repeaters)))


def _plan(wires: WireList, panel: Panel, seen: Subject) -> str:
    from contactlogic.commission import plan_test
    from contactlogic.report.commissioning import commissioning_sheet
    from contactlogic.report.wiring import design_name

    plan = plan_test(panel, seen.job.listed)
    name = design_name(wires.design, seen.job)
    return commissioning_sheet(plan, panel, seen.job, name).partition("\n")[2]


_STUDIES: Sequence[tuple[str, Callable[[WireList, Panel, Subject], str]]] = (
    ("Wires to tick off", _ticks),
    ("Hazards", _hazards),
    ("Single faults", _faults),
    ("Commissioning sheet", _plan),
)
