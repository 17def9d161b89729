"""The short summary that the command line prints, as plain text.

No colour and no cursor movement, so that it reads the same on a terminal, in a pipe and in a log.
"""

from __future__ import annotations

import io
import textwrap
from collections.abc import Sequence

from contactlogic.design import Design, Result
from contactlogic.job.model import Job
from contactlogic.report.facts import Facts
from contactlogic.report.phrases import (
    at_rest,
    bound_line,
    budget,
    count,
    formula,
    proof_line,
    run_line,
)
from contactlogic.report.text import one_line
from contactlogic.report.wiring import design_name

__all__ = ["design_summary", "summary"]

_UNFOLDED = 1_000_000  # columns; more than any line has


def summary(
    result: Result, facts: Sequence[Facts], *, width: int | None, verbose: bool = False
) -> str:
    """The summary of every design of a run, one after the other.

    Args:
        facts: of each design, in the order of `result.designs`.
        width: columns to fold to, None to fold nothing.
        verbose: also say what the job states and how each load's cover was found.
    """
    parts = [
        design_summary(design, result.job, known, width=width, verbose=verbose)
        for design, known in zip(result.designs, facts, strict=True)
    ]
    if len(result.designs) > 1:
        parts.append("\n".join(_side_by_side(result, width)) + "\n")
    return "\n".join(parts)


def _side_by_side(result: Result, width: int | None) -> list[str]:
    """The designs of a run in a few figures, and what the last saves on the first."""
    rows = []
    for design in result.designs:
        counts = design.network.per_relay()
        busiest = max(counts, key=lambda name: counts[name].poles, default="")
        figures = (
            len(design.network.poles),
            sum(n.contacts for n in counts.values()),
            sum(n.springs for n in counts.values()),
        )
        most = f"{busiest} ({counts[busiest].poles})" if busiest else "none"
        row = (design.form, *map(str, figures), most, bound_line(design.bound))
        rows.append(row)
    header = ("form", "poles", "contacts", "springs", "busiest relay", "bound")
    first, last = result.designs[0], result.designs[-1]
    saved = len(first.network.poles) - len(last.network.poles)
    said = f"saves {count(saved, 'pole')}" if saved > 0 else "saves no pole"
    return [*_table(header, rows, width=width), "", f"the {last.form} {said} on the {first.form}"]


def design_summary(
    design: Design, job: Job, facts: Facts, *, width: int | None, verbose: bool = False
) -> str:
    """The summary of one design; ends with a line feed."""
    network = design.network
    relays = len(network.relays)
    lines = [at_rest(facts.tables), design_name(design, job), ""]
    lines += _table(
        ("load", "longest run", "as built"),
        [(load, str(facts.runs[load]), formula(facts, load, relays)) for load in network.loads],
        width=width,
    )
    contacts = sum(n.contacts for n in network.per_relay().values())
    lines += [
        "",
        f"poles:       {len(network.poles)}",
        f"contacts:    {contacts}",
        f"longest run: {run_line(facts)}",
        "",
        *_relays(design, job, width),
        "",
    ]
    if verbose:
        lines += [*_covers(design, width), ""]
    lines += [f"note: {one_line(note)}" for note in design.notes]
    lines += [f"bound: {bound_line(design.bound)}", proof_line(design, job, facts)]
    return "\n".join(folded for line in lines for folded in _fold(line, width)) + "\n"


def _fold(line: str, width: int | None) -> list[str]:
    if width is None or len(line) <= width:
        return [line]
    return textwrap.wrap(line, width, subsequent_indent="  ")


def _relays(design: Design, job: Job, width: int | None) -> list[str]:
    """The per-relay table; the budget column only where the job sets one."""
    limits = job.limits
    header = ["relay", "poles", "makes", "breaks", "changeovers", "springs"]
    limited = bool(limits.poles or limits.contacts)
    if limited:
        header.append("budget")
    rows = []
    for relay, n in design.network.per_relay().items():
        figures = (n.poles, n.makes, n.breaks, n.changeovers, n.springs)
        row = [relay, *(str(figure) for figure in figures)]
        rows.append([*row, budget(limits, relay)] if limited else row)
    return _table(header, rows, width=width, figures=True)


def _covers(design: Design, width: int | None) -> list[str]:
    """How each load's two-level cover was found."""
    if not design.covers:
        return ["no two-level covers recorded"]
    return _table(
        ("load", "cover", "size", "status"),
        [
            (
                cover.load,
                cover.cover,
                f"{count(cover.literals, 'literal')}, {count(cover.terms, 'term')}",
                "proved least" if cover.proved else "best found",
            )
            for cover in design.covers
        ],
        width=width,
    )


def _table(
    header: Sequence[str],
    rows: Sequence[Sequence[str]],
    *,
    width: int | None,
    figures: bool = False,
) -> list[str]:
    """Rows in columns, folded to `width`; with `figures` all but the first stand to the right."""
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    table = Table(box=None, pad_edge=False, padding=(0, 3, 0, 0), header_style=None)
    for i, name in enumerate(header):
        right = figures and i > 0
        table.add_column(name, justify="right" if right else "left", overflow="fold")
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    out = io.StringIO()
    console = Console(
        file=out,
        width=width or _UNFOLDED,
        color_system=None,
        force_terminal=False,
        legacy_windows=False,
    )
    console.print(table)
    return [line.rstrip() for line in out.getvalue().splitlines()]
