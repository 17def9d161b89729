"""What `contactlogic wire` does: read the job, wire it, print the summary, write the papers."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from contactlogic.errors import JobFileError, Place
from contactlogic.job.model import Job
from contactlogic.job.table import Unlisted

__all__ = ["Request", "run"]

_TABLES = (".csv", ".xlsx")
_UNLISTED: dict[str, Unlisted] = {"off": "off", "free": "free"}


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
    seconds: float = 45.0
    loads: str | None = None
    unlisted: str | None = None


def run(request: Request) -> None:
    """Do what was asked.

    Raises:
        InputError: the job or the folder cannot be used; nothing was written.
        InternalError: the proof failed; nothing was printed or written.
    """
    from contactlogic.report.folder import check_folder, write_folder
    from contactlogic.synthesis import wire

    job = _read(request)
    folder = request.out or Path(request.job.stem)
    if not request.json:
        check_folder(folder, force=request.force)  # before the search, which takes time
    result = wire(job, seconds=request.seconds, seed=request.seed)
    if request.json:
        from contactlogic.report.designfile import dumps

        if request.out and not request.quiet:
            print("contactlogic: --json writes no files, so --out is not used", file=sys.stderr)
        sys.stdout.write(dumps(result))
        return

    from contactlogic.report.facts import facts
    from contactlogic.report.papers import papers
    from contactlogic.report.summary import summary

    known = [facts(design) for design in result.designs]
    made = papers(result, known)
    said = summary(result, known, width=_width(), verbose=request.verbose)
    write_folder(folder, made.files, force=request.force)  # last, so that a fault leaves nothing
    if request.quiet:
        return
    sys.stdout.write(said)
    for note in made.notes:
        print(f"note: {note}")
    print(f"written to {folder}: {', '.join(_tidy(made.files))}")


def _read(request: Request) -> Job:
    """The job of a TOML file, or of a bare table with the loads named on the command line."""
    from contactlogic.job import load_job, load_table_job

    place = Place(file=str(request.job))
    kind = request.job.suffix.lower()
    if kind in _TABLES:
        if not request.loads or not request.loads.strip(", "):
            raise JobFileError(
                "which columns of this table are loads is not said",
                place=place,
                expected="their names after --loads",
                hint=f"contactlogic wire {request.job} --loads LAMP,HORN",
            )
        names = tuple(name.strip() for name in request.loads.split(",") if name.strip())
        return load_table_job(request.job, names, _unlisted(request))
    for option, value in (("--loads", request.loads), ("--unlisted", request.unlisted)):
        if value is not None:
            raise JobFileError(
                f"{option} is for a bare table (.csv or .xlsx)",
                place=place,
                hint="a job file says this itself, in its [table]",
            )
    return load_job(request.job)


def _unlisted(request: Request) -> Unlisted | None:
    if request.unlisted is None:
        return None
    if request.unlisted not in _UNLISTED:
        raise JobFileError(f"--unlisted {request.unlisted} is not known", expected="off or free")
    return _UNLISTED[request.unlisted]


def _width() -> int | None:
    """Columns to fold to: the terminal's; nothing is folded in a pipe or a file."""
    return max(40, shutil.get_terminal_size().columns) if sys.stdout.isatty() else None


def _tidy(files: Iterable[str]) -> list[str]:
    """File names for one line: the folder's own first, then those of each form."""
    return sorted(files, key=lambda name: (name.count("/"), name))
