"""The command `page` and its options."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from contactlogic.cli import options
from contactlogic.cli.choices import Forms
from contactlogic.cli.status import Status, guarded

__all__ = ["register"]


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command()(page)


def page(
    source: options.JobOrDesign,
    job: options.JobOfDesign = None,
    out: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE.html", help="The page; else named after the job, in the current folder."
        ),
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even over a file that is no such page.")
    ] = False,
    parts: options.Parts = None,
    spares: options.Spares = 0,
    have: options.Have = None,
    buy: options.Buy = None,
    coil_volts: options.CoilVolts = None,
    no_parallel: options.NoParallel = False,
    quiet: options.Quiet = False,
    form: options.AnyForm = Forms.both,
    seed: options.Seed = 0,
    seconds: options.Seconds = None,
    effort: options.Effort = None,
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Write one page for the browser: all papers, hazards, faults, test plan, live drawings."""
    from contactlogic.cli import paging

    with guarded(keep=str(source)):
        options.check_limits(seconds, effort)
        request = paging.Request(
            source=source,
            job=job,
            out=out,
            force=force,
            asked=options.asked(parts, spares, have, buy, coil_volts, no_parallel),
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
