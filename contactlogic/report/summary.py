"""The short summary that the command line prints, as plain text.

No colour and no cursor movement, so that it reads the same on a terminal, in a pipe and in a log.
"""

from __future__ import annotations

from collections.abc import Sequence

from contactlogic.design import Design, Result
from contactlogic.job.model import Job
from contactlogic.report.columns import fold, in_columns
from contactlogic.report.facts import Facts
from contactlogic.report.phrases import (
    COMPARED,
    at_rest,
    bound_line,
    budget,
    compared,
    count,
    formula,
    proof_line,
    run_line,
    saving,
)
from contactlogic.report.text import one_line
from contactlogic.report.wiring import design_name
from contactlogic.sequenced import SequencerResult

__all__ = ["summary"]


def summary(
    result: Result, facts: Sequence[Facts], *, width: int | None, verbose: bool = False
) -> str:
    """What is on at rest, then every design of a run, then the designs side by side.

    Args:
        facts: of each design, in the order of `result.designs`.
        width: columns to fold to, None to fold nothing.
        verbose: also say what the job states and how each load's cover was found.
    """
    parts = [_at_rest(result, facts)] if result.designs else []
    sequencer = result if isinstance(result, SequencerResult) else None
    if sequencer is not None:
        from contactlogic.report.sequencer import expansion_lines, recovery_lines

        parts.append([*expansion_lines(sequencer), *(f"note: {n}" for n in sequencer.notes)])
    for index, (design, known) in enumerate(zip(result.designs, facts, strict=True)):
        more = [] if sequencer is None else list(recovery_lines(sequencer, index))
        parts.append([*_design(design, result.job, known, width, verbose), *more])
    if len(result.designs) > 1:
        parts.append(_side_by_side(result, width))
    lines = [line for part in parts for line in (*part, "")][:-1]
    return "\n".join(folded for line in lines for folded in fold(line, width)) + "\n"


def _at_rest(result: Result, facts: Sequence[Facts]) -> list[str]:
    """Which loads are on at rest: said once where all designs agree."""
    said = [at_rest(known.tables) for known in facts]
    if len(set(said)) == 1:
        return said[:1]
    return [f"{design.form}: {text}" for design, text in zip(result.designs, said, strict=True)]


def _side_by_side(result: Result, width: int | None) -> list[str]:
    rows = compared(result.designs)
    return [*in_columns(COMPARED, rows, width=width), "", saving(result)]


def _design(design: Design, job: Job, facts: Facts, width: int | None, verbose: bool) -> list[str]:
    """The summary of one design."""
    network = design.network
    relays = len(job.relays)
    lines = [design_name(design, job), ""]
    lines += in_columns(
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
    return [*lines, f"bound: {bound_line(design.bound)}", proof_line(design, job, facts)]


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
    return in_columns(header, rows, width=width, figures=True)


def _covers(design: Design, width: int | None) -> list[str]:
    """How each load's two-level cover was found."""
    if not design.covers:
        return ["no two-level covers recorded"]
    return in_columns(
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
