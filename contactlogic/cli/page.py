"""The command `page` and its options."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from contactlogic.cli.choices import Forms
from contactlogic.cli.schedule import Buy, CoilVolts, Have, NoParallel, Parts, Spares
from contactlogic.cli.status import Status, guarded
from contactlogic.errors import JobFileError

__all__ = ["register"]


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command()(page)


def page(
    source: Annotated[
        Path,
        typer.Argument(
            metavar="JOB_OR_DESIGN", help="A design.json; or a job file, which is wired first."
        ),
    ],
    job: Annotated[
        Path | None,
        typer.Argument(
            metavar="[JOB]",
            help="What the design is to do; without it, whatever it does.",
            show_default=False,
        ),
    ] = None,
    out: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE.html", help="The page; else named after the job, in the current folder."
        ),
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even over a file that is no such page.")
    ] = False,
    parts: Parts = None,
    spares: Spares = 0,
    have: Have = None,
    buy: Buy = None,
    coil_volts: CoilVolts = None,
    no_parallel: NoParallel = False,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="Print errors only.")] = False,
    form: Annotated[Forms, typer.Option(help="Which form or forms.")] = Forms.both,
    seed: Annotated[int, typer.Option(min=0, help="Of the search for a job's wiring.")] = 0,
    seconds: Annotated[
        float | None, typer.Option(min=0.1, metavar="S", help="Search for the wiring so long.")
    ] = None,
    effort: Annotated[
        int | None, typer.Option(min=0, metavar="N", help="Search by N windows instead.")
    ] = None,
    loads: Annotated[
        str | None,
        typer.Option(metavar="A,B", help="Which columns of a .csv or .xlsx table are loads."),
    ] = None,
    unlisted: Annotated[
        str | None,
        typer.Option(metavar="off|free", help="What loads do in rows that a .csv or .xlsx lacks."),
    ] = None,
) -> None:
    """Write one page for the browser: all papers, hazards, faults, test plan, live drawings."""
    from contactlogic.cli import paging
    from contactlogic.cli.buying import Asked

    with guarded(keep=str(source)):
        if seconds is not None and effort is not None:
            raise JobFileError("--seconds and --effort exclude each other", hint="give one of them")
        request = paging.Request(
            source=source,
            job=job,
            out=out,
            force=force,
            asked=Asked(
                parts, spares, coil_volts, not no_parallel, tuple(have or ()), tuple(buy or ())
            ),
            quiet=quiet,
            form=form.value,
            seed=seed,
            seconds=seconds,
            effort=effort,
            loads=loads,
            unlisted=unlisted,
        )
        if paging.run(request):
            raise typer.Exit(Status.STOPPED)
