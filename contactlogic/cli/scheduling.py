"""What `contactlogic schedule` does: contacts per relay, and the cheapest purchase for them."""

from __future__ import annotations

import sys
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from contactlogic.cli.buying import (
    Asked,
    drawer_of,
    moved,
    schedules_of,
    schedules_of_result,
)
from contactlogic.cli.jobs import wirable_job
from contactlogic.cli.subject import Source, is_design, subject, wired_alone
from contactlogic.cli.wiring import screen_width
from contactlogic.errors import DesignFileError, JobFileError, Place
from contactlogic.job.model import Job

if TYPE_CHECKING:
    from contactlogic.purchase.schedule import Schedule
    from contactlogic.synthesis import Forms

__all__ = ["Request", "run"]


@dataclass(frozen=True)
class Request:
    """The options of one run."""

    source: Path
    job: Path | None = None
    asked: Asked = field(default_factory=Asked)
    out: Path | None = None
    force: bool = False
    json: bool = False
    quiet: bool = False
    form: Forms = "both"
    seed: int = 0
    seconds: float | None = None
    effort: int | None = None
    loads: str | None = None
    unlisted: str | None = None


@dataclass(frozen=True)
class _Found:
    title: str
    design_file: bytes
    schedules: list[Schedule]
    interrupted: bool = False


def run(request: Request) -> bool:
    """Do what was asked; returns whether the search was stopped early.

    Raises:
        InputError: job, design, parts list or folder cannot be used, or nothing can be bought.
    """
    from contactlogic.report.folder import check_folder, write_folder
    from contactlogic.report.purchase import purchase_json, purchase_text

    if request.out is not None:
        check_folder(request.out, force=request.force)
    found = _of_design(request) if is_design(request.source) else _of_job(request)
    written = []
    if request.out is not None:
        files = _files(found)
        written = sorted(files, key=lambda name: (name.count("/"), name))
        kept = _kept(request.out, found.design_file)
        write_folder(request.out, kept | files, force=request.force)
    if request.json:
        sys.stdout.write(purchase_json(found.schedules, found.title))
    elif not request.quiet:
        sys.stdout.write(purchase_text(found.schedules, found.title, width=screen_width()))
        if written:
            print(f"written to {request.out}: {', '.join(written)}")
    if found.interrupted and not request.quiet:
        print("contactlogic: stopped early: these are the best designs so far", file=sys.stderr)
    return found.interrupted


def _of_design(request: Request) -> _Found:
    """Schedules of a design file, with the job's facts where it is given."""
    from contactlogic.report.designfile import read_design

    if request.job is None:
        if request.loads is not None or request.unlisted is not None:
            raise JobFileError("--loads and --unlisted go with a job that is a bare table")
        file = read_design(request.source)
        title, designs, repeaters = file.title, file.designs, file.repeaters
        job: Job | None = None
        outside: tuple[str, ...] = ()
        slow: tuple[str, ...] = ()
    else:
        wanted = Source(
            request.source, request.job, None, request.loads, request.unlisted, request.quiet
        )
        found = subject(wanted)  # proves the design against the job
        title, designs, repeaters = found.job.title, found.designs, found.repeaters
        job = found.job
        outside, slow = moved(wirable_job(request.job, request.loads, request.unlisted))
    designs = tuple(each for each in designs if request.form in ("both", each.form))
    if not designs:
        which = "" if request.form == "both" else f"{request.form} "
        what = f"the file holds no {which}design"
        raise DesignFileError(what, place=Place(file=str(request.source)))
    drawer = drawer_of(request.asked, job)
    schedules = schedules_of(designs, repeaters, drawer, job, outside, slow)
    return _Found(title, request.source.read_bytes(), schedules)


def _of_job(request: Request) -> _Found:
    """Schedules of a job, which is wired first."""
    from contactlogic.report.designfile import dumps
    from contactlogic.synthesis import Search

    drawer_of(request.asked, None)  # a fault of the parts list is told before the search
    job, result = wired_alone(
        request.source,
        request.job,
        request.loads,
        request.unlisted,
        Search(request.form, request.seconds, request.effort, request.seed),
        shown=not (request.quiet or request.json),
    )
    schedules = schedules_of_result(job, result, request.asked)
    return _Found(result.job.title, dumps(result).encode(), schedules, result.interrupted)


def _files(found: _Found) -> dict[str, bytes]:
    from contactlogic.report.purchase import purchase_csv, schedule_csv

    files = {"design.json": found.design_file}
    for schedule in found.schedules:
        form = schedule.design.form
        files[f"{form}/schedule.csv"] = schedule_csv(schedule, found.title).encode()
        if schedule.purchase is not None:
            files[f"{form}/purchase.csv"] = purchase_csv(schedule, found.title).encode()
    return files


def _kept(folder: Path, design_file: bytes) -> dict[str, bytes]:
    """Papers of the very same designs that lie in the folder already: they stay."""
    from contactlogic.report.folder import FORMS

    try:
        if (folder / "design.json").read_bytes() != design_file:
            return {}
    except OSError:
        return {}
    places = [folder, *(folder / form for form in FORMS)]
    files = [file for place in places if place.is_dir() for file in place.iterdir()]
    return {
        file.relative_to(folder).as_posix(): file.read_bytes()
        for file in sorted(files)
        if file.is_file() and not file.is_symlink()
    }
