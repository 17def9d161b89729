"""The command `schedule` and its options."""

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
    app.command()(schedule)


def schedule(
    source: options.JobOrDesign,
    job: Annotated[
        Path | None,
        typer.Argument(
            metavar="[JOB]",
            help="What a design is for: currents, coil voltage, push-buttons.",
            show_default=False,
        ),
    ] = None,
    parts: options.Parts = None,
    spares: options.Spares = 0,
    have: options.Have = None,
    buy: options.Buy = None,
    coil_volts: options.CoilVolts = None,
    no_parallel: options.NoParallel = False,
    out: Annotated[
        Path | None, typer.Option(metavar="DIR", help="Folder for schedule.csv and purchase.csv.")
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even where the folder holds other files.")
    ] = False,
    json: options.AsJson = False,
    quiet: options.Quiet = False,
    form: options.AnyForm = Forms.both,
    seed: options.Seed = 0,
    seconds: options.Seconds = None,
    effort: options.Effort = None,
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Count the contacts of each relay, and find the cheapest parts for them."""
    from contactlogic.cli import scheduling

    with guarded(keep=str(source)):
        options.check_limits(seconds, effort)
        request = scheduling.Request(
            source=source,
            job=job,
            asked=options.asked(parts, spares, have, buy, coil_volts, no_parallel),
            out=out,
            force=force,
            json=json,
            quiet=quiet,
            form=form.value,
            seed=seed,
            seconds=seconds,
            effort=effort,
            loads=loads,
            unlisted=unlisted,
        )
        if scheduling.run(request):
            raise typer.Exit(Status.STOPPED)
