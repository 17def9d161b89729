"""Reading the job that a command names."""

from __future__ import annotations

from pathlib import Path

from contactlogic.errors import JobFileError, Place
from contactlogic.job.model import AnyJob, DrivesJob, Job, PatternJob, SequenceJob
from contactlogic.job.table import Unlisted

__all__ = ["Wirable", "read_job", "wirable_job"]

Wirable = Job | SequenceJob | PatternJob

_TABLES = (".csv", ".xlsx")
_UNLISTED: dict[str, Unlisted] = {"off": "off", "free": "free"}


def wirable_job(path: Path, loads: str | None, unlisted: str | None) -> Wirable:
    """As `read_job`, for commands that want wiring: not for drives that are wired already."""
    job = read_job(path, loads, unlisted)
    if isinstance(job, DrivesJob):
        raise JobFileError(
            "the drives of this job are wired already",
            place=Place(file=str(path)),
            expected="[table], [formulas], [sequence] or [pattern]",
            hint=f"contactlogic recover {path} proves where they lead",
        )
    return job


def read_job(path: Path, loads: str | None, unlisted: str | None) -> AnyJob:
    """The job of a TOML file, or of a bare table with the loads named on the command line.

    Args:
        path: .toml, .csv or .xlsx.
        loads: for a bare table, the names of its load columns, separated by commas.
        unlisted: for a bare table, what loads do in rows it lacks: "off" or "free".

    Raises:
        JobError: the job cannot be used, or an option does not go with it.
    """
    from contactlogic.job import load_job, load_table_job

    place = Place(file=str(path))
    kind = path.suffix.lower()
    if kind in _TABLES:
        if not loads or not loads.strip(", "):
            raise JobFileError(
                "which columns of this table are loads is not said",
                place=place,
                expected="their names after --loads",
                hint=f"contactlogic wire {path} --loads LAMP,HORN",
            )
        names = tuple(name.strip() for name in loads.split(",") if name.strip())
        return load_table_job(path, names, _unlisted(unlisted))
    for option, value in (("--loads", loads), ("--unlisted", unlisted)):
        if value is not None:
            raise JobFileError(
                f"{option} is for a bare table (.csv or .xlsx)",
                place=place,
                hint="a job file says this itself, in its [table]",
            )
    return load_job(path)


def _unlisted(unlisted: str | None) -> Unlisted | None:
    if unlisted is None:
        return None
    if unlisted not in _UNLISTED:
        raise JobFileError(f"--unlisted {unlisted} is not known", expected="off or free")
    return _UNLISTED[unlisted]
