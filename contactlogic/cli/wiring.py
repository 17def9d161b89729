"""What `contactlogic wire` does: read the job, wire it, print the summary, write the papers."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field, replace
from pathlib import Path
from time import monotonic
from typing import TYPE_CHECKING

from contactlogic.cli.buying import Asked, priced, priced_text
from contactlogic.cli.jobs import Wirable, wirable_job
from contactlogic.design import Result
from contactlogic.errors import JobFileError, Place
from contactlogic.job.model import Job, PatternJob

if TYPE_CHECKING:
    from contactlogic.report.papers import Papers
    from contactlogic.synthesis import Forms, Search

__all__ = ["Request", "papers_time", "run", "screen_width", "searching", "wired"]

_STOPPED = "stopped early: this is the best found so far"

# Seconds: from the user's return key until a request is there; for the papers of one form, for
# each pole, and for each two of them.
_STARTING, _PAPERS, _A_POLE, _A_PAIR = 0.2, 0.3, 0.008, 2.5e-5


@dataclass(frozen=True)
class Request:
    """The options of one run."""

    job: Path
    out: Path | None = None
    force: bool = False
    json: bool = False
    quiet: bool = False
    verbose: bool = False
    seed: int = 0
    form: Forms = "both"
    seconds: float | None = None
    effort: int | None = None
    workers: int = 2
    poles_per_relay: int | None = None
    repeaters: bool = False
    per_terminal: int = 2
    page: bool = False
    buying: Asked = field(default_factory=Asked)
    cheapest: bool = False
    hazard_free: bool = False
    fail_off: str | None = None
    loads: str | None = None
    unlisted: str | None = None
    began: float = field(default_factory=monotonic)


def run(request: Request) -> Result:
    """Do what was asked; tells by `Result.interrupted` whether the search was stopped early.

    Raises:
        InputError: the job or the folder cannot be used; nothing was written.
        InternalError: the proof failed; nothing was printed or written.
    """
    from contactlogic.cli.progress import live
    from contactlogic.report.folder import check_folder, write_folder
    from contactlogic.synthesis import Search

    job = _limited(wirable_job(request.job, request.loads, request.unlisted), request)
    folder = request.out or Path(request.job.stem)
    if not request.json:
        check_folder(folder, force=request.force)  # before the search, which takes time
    with live(not request.quiet) as watch:
        search = Search(
            request.form,
            searching(request, monotonic()),
            request.effort,
            request.seed,
            request.workers,
            request.repeaters,
            watch,
            keep_back=papers_time(request),
        )
        found = priced(job, search, _wirer(request), request.buying, cheapest=request.cheapest)
        result = found.result
    if request.json:
        from contactlogic.report.designfile import dumps

        if request.out and not request.quiet:
            print("contactlogic: --json writes no files, so --out is not used", file=sys.stderr)
        sys.stdout.write(dumps(result))
        if result.interrupted and not request.quiet:
            print(f"contactlogic: {_STOPPED}", file=sys.stderr)
        return result

    from contactlogic.report.facts import facts
    from contactlogic.report.papers import papers
    from contactlogic.report.summary import summary

    known = [facts(design, result.repeaters) for design in result.designs]
    made = papers(
        result,
        known,
        per_terminal=request.per_terminal,
        schedules=found.schedules,
        cheapest=found.cheapest,
    )
    files = dict(made.files)
    if request.page:
        files["report.html"] = _page(result, made)
    said = summary(result, known, width=screen_width(), verbose=request.verbose)
    said += priced_text(found, width=screen_width())
    write_folder(folder, files, force=request.force)  # last, so that a fault leaves nothing
    if request.quiet:
        return result
    sys.stdout.write(said)
    for note in made.notes:
        print(f"note: {note}")
    if result.interrupted:
        print(_STOPPED)
    print(f"written to {folder}: {', '.join(_tidy(files))}")
    return result


def _page(result: Result, made: Papers) -> bytes:
    """The papers as one page."""
    from contactlogic.page import page
    from contactlogic.report.sequencer import pictures

    shown = [pictures(made.files, design.form) for design in result.designs]
    text = made.files["report.md"].decode()
    return page(result, text, sheets=made.sheets, pictures=shown).encode()


def searching(request: Request, now: float) -> float | None:
    """Seconds left for search and drawing at `now`, so that the command keeps to `--seconds`."""
    if request.seconds is None:
        return None
    return max(0.1 * request.seconds, request.seconds - _STARTING - (now - request.began))


def papers_time(request: Request) -> Callable[[int], float] | None:
    """How long the papers take, from the poles of the first ladder."""
    if request.json:
        return None
    forms = 2 if request.form == "both" else 1
    # the bridge of a crowded network is drawn with ever more crossings
    return lambda poles: forms * (_PAPERS + _A_POLE * poles + _A_PAIR * poles**2)


def _wirer(request: Request) -> Callable[[Wirable, Search], Result]:
    """What wires the job: the plain search, or one that keeps to what was asked beside."""
    if not (request.hazard_free or request.fail_off):
        return wired

    def keeping(job: Wirable, search: Search) -> Result:
        if not isinstance(job, Job):
            option = "--hazard-free" if request.hazard_free else "--fail-off"
            raise JobFileError(
                f"{option} is for jobs with a table or formulas",
                place=Place(file=job.file),
                hint="contactlogic hazards and faults judge the wiring of a sequence",
            )
        if request.hazard_free:
            from contactlogic.hazardfree import wire_hazard_free

            return wire_hazard_free(job, search)
        from contactlogic.cli.faulting import split_loads
        from contactlogic.failoff import wire_fail_off

        known = tuple(load.name for load in job.loads)
        return wire_fail_off(job, search, split_loads(request.fail_off, known))

    return keeping


def wired(job: Wirable, search: Search) -> Result:
    if isinstance(job, Job):
        from contactlogic.synthesis import synthesise

        return synthesise(job, search)
    from contactlogic.sequencer import wire_sequence

    return wire_sequence(job, search)


def _limited(job: Wirable, request: Request) -> Wirable:
    """The job with the budget of `--poles-per-relay` for every relay that has none of its own."""
    if request.poles_per_relay is None:
        return job
    if isinstance(job, PatternJob):
        from contactlogic.sequence.pattern import choose_relays

        relays = choose_relays(job.pattern).table.columns
    else:
        relays = job.relays if isinstance(job, Job) else job.table.columns
    free = (name for name in relays if name not in job.limits.contacts)
    poles = dict.fromkeys(free, request.poles_per_relay) | dict(job.limits.poles)
    return replace(job, limits=replace(job.limits, poles=poles))


def screen_width() -> int | None:
    """Columns to fold to: the terminal's; nothing is folded in a pipe or a file."""
    return max(40, shutil.get_terminal_size().columns) if sys.stdout.isatty() else None


def _tidy(files: Iterable[str]) -> list[str]:
    """File names for one line: the folder's own first, then those of each form."""
    return sorted(files, key=lambda name: (name.count("/"), name))
