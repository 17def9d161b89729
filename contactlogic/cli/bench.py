"""The commands for the bench, and their options: hazards, faults, test plan."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from contactlogic.cli.choices import Form
from contactlogic.cli.status import Status, guarded

__all__ = ["register"]

_Source = Annotated[
    Path,
    typer.Argument(
        metavar="JOB_OR_DESIGN", help="A design.json; or a job file, which is wired first."
    ),
]
_Job = Annotated[
    Path | None,
    typer.Argument(
        metavar="[JOB]",
        help="What the design is to do; without it, whatever it does.",
        show_default=False,
    ),
]
_Form = Annotated[
    Form | None, typer.Option(help="Which design of the file; all of them if not given.")
]
_Loads = Annotated[
    str | None,
    typer.Option(metavar="A,B", help="Which columns of a .csv or .xlsx table are loads."),
]
_Unlisted = Annotated[
    str | None,
    typer.Option(metavar="off|free", help="What loads do in rows that a .csv or .xlsx lacks."),
]
_Json = Annotated[bool, typer.Option("--json", help="Print as JSON alone.")]
_Quiet = Annotated[bool, typer.Option("--quiet", "-q", help="Print errors only.")]


def register(app: typer.Typer) -> None:
    """Add the commands."""
    app.command()(hazards)
    app.command()(faults)
    app.command("testplan")(plan_of_tests)


def hazards(
    source: _Source,
    job: _Job = None,
    form: _Form = None,
    none: Annotated[
        bool, typer.Option("--none", help="Want none: exit status 1 if there is one.")
    ] = False,
    json: _Json = False,
    quiet: _Quiet = False,
    loads: _Loads = None,
    unlisted: _Unlisted = None,
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
    source: _Source,
    job: _Job = None,
    form: _Form = None,
    fail_off: Annotated[
        str | None,
        typer.Option(
            metavar="A,B",
            help="Loads that no single open fault may turn on: exit status 1 if one does.",
        ),
    ] = None,
    json: _Json = False,
    quiet: _Quiet = False,
    loads: _Loads = None,
    unlisted: _Unlisted = None,
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
    source: _Source,
    job: _Job = None,
    form: _Form = None,
    sheet: Annotated[
        Path | None,
        typer.Option(metavar="FILE", help="Write the commissioning sheet there, as Markdown."),
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even where the file is there already.")
    ] = False,
    json: _Json = False,
    quiet: _Quiet = False,
    loads: _Loads = None,
    unlisted: _Unlisted = None,
) -> None:
    """Plan the fewest rows to set, and loads to look at, that show every single fault."""
    from contactlogic.cli import planning
    from contactlogic.cli.subject import Source

    with guarded(keep=str(source)):
        wanted = Source(source, job, None if form is None else form.value, loads, unlisted, quiet)
        planning.run(planning.Request(wanted, sheet, force, json))
