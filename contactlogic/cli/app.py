"""The commands and their options."""

from __future__ import annotations

import io
import sys
from pathlib import Path
from typing import Annotated

import typer

from contactlogic.cli import bench, options, schedule
from contactlogic.cli import page as one_page
from contactlogic.cli.choices import Forms, Moves
from contactlogic.cli.status import Status, guarded
from contactlogic.errors import JobFileError

__all__ = ["app", "run"]


app = typer.Typer(
    name="contactlogic",
    help="From a truth table to proven relay contact wiring with the fewest changeover contacts.",
    add_completion=False,
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,  # plain help starts in half the time
    context_settings={"help_option_names": ["-h", "--help"]},
)


def run() -> None:
    """Parse the command line and do what it says; ends in SystemExit."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):  # a title may not fit the terminal's encoding
            stream.reconfigure(errors="backslashreplace")
    app()


def _version(wanted: bool) -> None:
    if wanted:
        from importlib.metadata import version

        typer.echo(f"contactlogic {version('contactlogic')}")
        raise typer.Exit


@app.callback()
def _root(
    version: Annotated[
        bool,
        typer.Option("--version", callback=_version, is_eager=True, help="Print the version."),
    ] = False,
) -> None:
    del version


@app.command()
def wire(
    job: Annotated[
        Path, typer.Argument(metavar="JOB", help="Job file: .toml, or a table as .csv or .xlsx.")
    ],
    out: Annotated[
        Path | None,
        typer.Option(
            metavar="DIR",
            help="Folder for the papers; else named after the job, in the current folder.",
        ),
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Write even where the folder holds other files.")
    ] = False,
    json: Annotated[
        bool, typer.Option("--json", help="Print the design as JSON alone; write no file.")
    ] = False,
    quiet: options.Quiet = False,
    verbose: Annotated[
        bool, typer.Option("--verbose", "-v", help="Say more, for instance of each cover.")
    ] = False,
    seed: Annotated[int, typer.Option(min=0, help="Other seeds search in another order.")] = 0,
    form: Annotated[
        Forms, typer.Option(help="Series-parallel ladder, two-directional bridge, or both.")
    ] = Forms.both,
    seconds: Annotated[
        float | None,
        typer.Option(min=0.1, metavar="S", help="Search so long, or until the least is proved."),
    ] = None,
    effort: Annotated[
        int | None,
        typer.Option(
            min=0, metavar="N", help="Search by N windows instead: the same bytes on any machine."
        ),
    ] = None,
    workers: Annotated[int, typer.Option(min=1, max=64, help="Searching processes at a time.")] = 2,
    poles_per_relay: Annotated[
        int | None,
        typer.Option(min=0, metavar="N", help="Pole budget of every relay that has none."),
    ] = None,
    repeaters: Annotated[
        bool,
        typer.Option("--repeaters", help="Give relays over budget repeaters, as few as possible."),
    ] = False,
    per_terminal: options.PerTerminal = 2,
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
    parts: options.Parts = None,
    cheapest: Annotated[
        bool, typer.Option("--cheapest", help="Search for the least price, not the fewest poles.")
    ] = False,
    spares: options.Spares = 0,
    have: options.Have = None,
    buy: options.Buy = None,
    coil_volts: options.CoilVolts = None,
    no_parallel: options.NoParallel = False,
    hazard_free: Annotated[
        bool,
        typer.Option("--hazard-free", help="No load may drop out or flash while one relay moves."),
    ] = False,
    fail_off: Annotated[
        str | None,
        typer.Option(metavar="A,B", help="Loads that no single open fault may turn on."),
    ] = None,
    page: Annotated[
        bool, typer.Option("--page", help="Write report.html too, with drawings that move.")
    ] = False,
) -> None:
    """Wire the loads of JOB with as few changeover contacts as found, prove it and draw it."""
    from contactlogic.cli import wiring

    request = wiring.Request(
        job=job,
        out=out,
        force=force,
        json=json,
        quiet=quiet,
        verbose=verbose,
        seed=seed,
        form=form.value,
        seconds=seconds,
        effort=effort,
        workers=workers,
        poles_per_relay=poles_per_relay,
        repeaters=repeaters,
        per_terminal=per_terminal,
        page=page,
        buying=options.asked(parts, spares, have, buy, coil_volts, no_parallel),
        cheapest=cheapest,
        hazard_free=hazard_free,
        fail_off=fail_off,
        loads=loads,
        unlisted=unlisted,
    )
    with guarded(keep=str(job), trace=verbose):
        options.check_limits(seconds, effort)
        if cheapest and parts is None:
            raise JobFileError("--cheapest needs prices", hint="name a parts list with --parts")
        if (cheapest, hazard_free, fail_off is not None).count(True) > 1:
            raise JobFileError(
                "--cheapest, --hazard-free and --fail-off exclude each other",
                hint="give one of them",
            )
        result = wiring.run(request)
        if result.interrupted:
            raise typer.Exit(Status.STOPPED)


@app.command()
def verify(
    design: Annotated[Path, typer.Argument(metavar="DESIGN", help="A design.json, from anywhere.")],
    job: Annotated[
        Path, typer.Argument(metavar="JOB", help="Job file: .toml, or a table as .csv or .xlsx.")
    ],
    loads: options.Loads = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Prove the designs of a file against JOB: rows, sneak paths, back-feed, pole use."""
    from contactlogic.cli import verifying

    with guarded(keep=str(design)):
        if not verifying.run(design, job, loads=loads, unlisted=unlisted):
            raise typer.Exit(Status.WRONG)


@app.command()
def recover(
    job: Annotated[
        Path, typer.Argument(metavar="JOB", help="Job file with [sequence], [pattern] or [drives].")
    ],
    design: Annotated[
        Path | None,
        typer.Option(metavar="DESIGN", help="Prove the wiring of this design.json for JOB."),
    ] = None,
    form: options.OneForm = None,
    moves: Annotated[
        Moves, typer.Option(help="One relay at a time, or any group of relays at once.")
    ] = Moves.single,
    json: Annotated[
        bool,
        typer.Option("--json", help="Print the recovery as JSON alone; of several, a failing one."),
    ] = False,
    memory: Annotated[
        float, typer.Option(min=0.001, metavar="GIB", help="Use no more memory than this.")
    ] = 4.0,
    quiet: options.Quiet = False,
) -> None:
    """Prove from all power-on states where the relays of JOB end up: 0 recovers, 1 does not."""
    from contactlogic.cli import recovering

    request = recovering.Request(
        job=job,
        design=design,
        form=None if form is None else form.value,
        moves=moves.value,
        json=json,
        quiet=quiet,
        memory=int(memory * 2**30),
    )
    with guarded(keep=str(job)):
        outcome = recovering.run(request)
        if outcome.stopped:
            raise typer.Exit(Status.STOPPED)
        if not outcome.recovers:
            raise typer.Exit(Status.WRONG)


@app.command()
def trace(
    wires: Annotated[
        Path,
        typer.Argument(metavar="WIRES", help="List of wires: .csv or .xlsx with columns from, to."),
    ],
    job: Annotated[
        Path | None, typer.Argument(metavar="[JOB]", help="Job file to compare the wiring with.")
    ] = None,
    feed: Annotated[
        list[str] | None,
        typer.Option(metavar="NAME", help="What the list calls the feed rail; may be repeated."),
    ] = None,
    back: Annotated[
        list[str] | None,
        typer.Option("--return", metavar="NAME", help="What the list calls the return rail."),
    ] = None,
    name: Annotated[
        list[str] | None,
        typer.Option(metavar="'big lamp=LAMP'", help="A name of the list and the job's for it."),
    ] = None,
    follows: Annotated[
        list[str] | None,
        typer.Option(metavar="UP_2=UP", help="A repeater of the list and the relay it follows."),
    ] = None,
    row: Annotated[
        str | None,
        typer.Option(metavar="'UP=1 DOWN=0'", help="Print the conducting paths of this row."),
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="Print the finding as JSON alone.")] = False,
    loads: Annotated[
        str | None,
        typer.Option(metavar="A,B", help="Which columns of a .csv or .xlsx job are loads."),
    ] = None,
    unlisted: options.Unlisted = None,
) -> None:
    """Say what existing wiring really does, and whether it is what JOB wants: 0 yes, 1 no."""
    from contactlogic.cli import tracing

    request = tracing.Request(
        wires=wires,
        job=job,
        feed=tuple(feed or ()),
        back=tuple(back or ()),
        names=tuple(name or ()),
        follows=tuple(follows or ()),
        row=row,
        json=json,
        loads=loads,
        unlisted=unlisted,
    )
    with guarded(keep=str(wires)):
        if not tracing.run(request):
            raise typer.Exit(Status.WRONG)


bench.register(app)
schedule.register(app)
one_page.register(app)
