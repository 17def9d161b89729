"""Arguments and options that several commands take, and what is checked of them together."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from contactlogic.cli.choices import Form, Forms
from contactlogic.errors import JobFileError

if TYPE_CHECKING:
    from contactlogic.cli.buying import Asked

__all__ = [
    "AnyForm",
    "AsJson",
    "Buy",
    "CoilVolts",
    "Effort",
    "Have",
    "JobOfDesign",
    "JobOrDesign",
    "Loads",
    "NoParallel",
    "OneForm",
    "Parts",
    "PerTerminal",
    "Quiet",
    "Seconds",
    "Seed",
    "Spares",
    "Unlisted",
    "asked",
    "check_limits",
]

JobOrDesign = Annotated[
    Path,
    typer.Argument(
        metavar="JOB_OR_DESIGN", help="A design.json; or a job file, which is wired first."
    ),
]
JobOfDesign = Annotated[
    Path | None,
    typer.Argument(
        metavar="[JOB]",
        help="What the design is to do; without it, whatever it does.",
        show_default=False,
    ),
]
Loads = Annotated[
    str | None,
    typer.Option(metavar="A,B", help="Which columns of a .csv or .xlsx table are loads."),
]
Unlisted = Annotated[
    str | None,
    typer.Option(metavar="off|free", help="What loads do in rows that a .csv or .xlsx lacks."),
]
AsJson = Annotated[bool, typer.Option("--json", help="Print as JSON alone.")]
Quiet = Annotated[bool, typer.Option("--quiet", "-q", help="Print errors only.")]

OneForm = Annotated[
    Form | None, typer.Option(help="Which design of the file; all of them if not given.")
]
AnyForm = Annotated[Forms, typer.Option(help="Which form or forms.")]
Seed = Annotated[int, typer.Option(min=0, help="Of the search for a job's wiring.")]
Seconds = Annotated[
    float | None, typer.Option(min=0.1, metavar="S", help="Search for the wiring so long.")
]
Effort = Annotated[
    int | None, typer.Option(min=0, metavar="N", help="Search by N windows instead.")
]
PerTerminal = Annotated[
    int, typer.Option(min=2, max=9, metavar="N", help="Most wires on a terminal, 2 or more.")
]

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


def asked(
    parts: Path | None,
    spares: int,
    have: list[str] | None,
    buy: list[str] | None,
    coil_volts: float | None,
    no_parallel: bool,
) -> Asked:
    """What was typed about the purchase."""
    from contactlogic.cli.buying import Asked

    return Asked(parts, spares, coil_volts, not no_parallel, tuple(have or ()), tuple(buy or ()))


def check_limits(seconds: float | None, effort: int | None) -> None:
    """Refuse both ways at once of saying how long to search."""
    if seconds is not None and effort is not None:
        raise JobFileError("--seconds and --effort exclude each other", hint="give one of them")
