"""The commands for the bench, and their options: hazards, faults, test plan."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from contactlogic.cli import options
from contactlogic.cli.status import Status, guarded

__all__ = ["register"]


def register(app: typer.Typer) -> None:
    """Add the commands."""
    app.command()(hazards)
    app.command()(faults)
    app.command("testplan")(plan_of_tests)


def hazards(
    source: options.JobOrDesign,
    job: options.JobOfDesign = None,
    form: options.OneForm = None,
    none: Annotated[
        bool, typer.Option("--none", help="Want none: exit status 1 if there is one.")
    ] = False,
    json: options.AsJson = False,
    quiet: options.Quiet = False,
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Name every load that can drop out or flash while one relay moves, and what cures it."""
    from contactlogic.cli import hazarding
    from contactlogic.cli.subject import Source

    with guarded(keep=str(source)):
        wanted = Source(source, job, None if form is None else form.value, loads, unlisted, quiet)
        clean = hazarding.run(hazarding.Request(wanted, json))
        if none and not clean:
            raise typer.Exit(Status.WRONG)


def faults(
    source: options.JobOrDesign,
    job: options.JobOfDesign = None,
    form: options.OneForm = None,
    fail_off: Annotated[
        str | None,
        typer.Option(
            metavar="A,B",
            help="Loads that no single open fault may turn on: exit status 1 if one does.",
        ),
    ] = None,
    json: options.AsJson = False,
    quiet: options.Quiet = False,
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Try every single fault: which rows go wrong, and which way; loads turned on first."""
    from contactlogic.cli import faulting
    from contactlogic.cli.subject import Source

    with guarded(keep=str(source)):
        wanted = Source(source, job, None if form is None else form.value, loads, unlisted, quiet)
        named = () if fail_off is None else (fail_off,)
        if not faulting.run(faulting.Request(wanted, named, json)):
            raise typer.Exit(Status.WRONG)


def plan_of_tests(
    source: options.JobOrDesign,
    job: options.JobOfDesign = None,
    form: options.OneForm = None,
    sheet: Annotated[
        Path | None,
        typer.Option(metavar="FILE", help="Write the commissioning sheet there, as Markdown."),
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even where the file is there already.")
    ] = False,
    json: options.AsJson = False,
    quiet: options.Quiet = False,
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Plan the fewest rows to set, and loads to look at, that show every single fault."""
    from contactlogic.cli import planning
    from contactlogic.cli.subject import Source

    with guarded(keep=str(source)):
        wanted = Source(source, job, None if form is None else form.value, loads, unlisted, quiet)
        planning.run(planning.Request(wanted, sheet, force, json))
