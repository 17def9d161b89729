"""The command `schedule` and its options."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from contactlogic.cli.choices import Forms
from contactlogic.cli.status import Status, guarded
from contactlogic.errors import JobFileError

__all__ = ["Buy", "CoilVolts", "Have", "NoParallel", "Parts", "Spares", "register"]


Parts = Annotated[
    Path | None,
    typer.Option(metavar="PARTS", help="Parts list, .csv or .xlsx; without it nothing is bought."),
]
Spares = Annotated[
    int,
    typer.Option(min=0, max=1000, metavar="PERCENT", help="Spares of each part, rounded up."),
]
Have = Annotated[
    list[str] | None,
    typer.Option(metavar="RELAY[=FORM]", help="A relay that is there already: UP, or UP=2C."),
]
Buy = Annotated[
    list[str] | None,
    typer.Option(metavar="RELAY", help="Buy a relay that the job says is moved from outside."),
]
CoilVolts = Annotated[
    float | None, typer.Option(min=0.001, metavar="V", help="Voltage of the coils.")
]
NoParallel = Annotated[
    bool, typer.Option("--no-parallel", help="Buy one part for each relay, none in parallel.")
]


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command()(schedule)


def schedule(
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
            help="What a design is for: currents, coil voltage, push-buttons.",
            show_default=False,
        ),
    ] = None,
    parts: Parts = None,
    spares: Spares = 0,
    have: Have = None,
    buy: Buy = None,
    coil_volts: CoilVolts = None,
    no_parallel: NoParallel = False,
    out: Annotated[
        Path | None, typer.Option(metavar="DIR", help="Folder for schedule.csv and purchase.csv.")
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even where the folder holds other files.")
    ] = False,
    json: Annotated[bool, typer.Option("--json", help="Print as JSON alone.")] = False,
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
    """Count the contacts of each relay, and find the cheapest parts for them."""
    from contactlogic.cli import scheduling
    from contactlogic.cli.buying import Asked

    with guarded(keep=str(source)):
        if seconds is not None and effort is not None:
            raise JobFileError("--seconds and --effort exclude each other", hint="give one of them")
        request = scheduling.Request(
            source=source,
            job=job,
            asked=Asked(
                parts, spares, coil_volts, not no_parallel, tuple(have or ()), tuple(buy or ())
            ),
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
