"""`report.md`: everything a wireman or a restorer should keep with the finished wiring.

One report holds every design of a run.  Its last table shows every row as built: a free cell
becomes real behaviour once the wiring exists, so each one in which a load is on is marked.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from contactlogic.design import Design, Result
from contactlogic.job.model import Job
from contactlogic.report.bench import WireList, current_lines, wire_list
from contactlogic.report.cautions import CAUTIONS
from contactlogic.report.facts import Facts, free_on
from contactlogic.report.phrases import (
    COMPARED,
    at_rest,
    bound_line,
    budget,
    compared,
    count,
    formula,
    not_given,
    proof_line,
    run_line,
    saving,
)
from contactlogic.report.text import code, markdown, table_lines
from contactlogic.report.wiring import design_name
from contactlogic.sequenced import SequencerResult
from contactlogic.truth import MAX_INPUTS, rows_of, settings

__all__ = ["report"]


def report(
    result: Result,
    facts: Sequence[Facts],
    wires: Sequence[WireList] | None = None,
    more: Sequence[str] = (),
) -> str:
    """The whole report as Markdown text.

    Args:
        facts: of each design, in the order of `result.designs`.
        wires: of each design; made here with two conductors to a terminal if not given.
        more: lines of further sections, before the cautions.
    """
    lists = wires or [wire_list(d, result.job, repeaters=result.repeaters) for d in result.designs]
    job = result.job
    names = [f"{design.form} {design.fingerprint}" for design in result.designs]
    lines = [f"# {markdown(job.title) or 'Untitled'}", "", ", ".join(names), ""]
    if result.interrupted:
        lines += [
            "The search was stopped early. What it had found by then is proved all the same.",
            "",
        ]
    if len(result.designs) > 1:
        lines += [
            *table_lines(COMPARED, compared(result.designs)),
            "",
            f"{saving(result).capitalize()}.",
            "",
        ]
    lines += _asked(job)
    sequencer = result if isinstance(result, SequencerResult) else None
    if sequencer is not None:
        from contactlogic.report.sequencer import expansion_lines, report_section

        steps = [*expansion_lines(sequencer), *(f"note: {note}" for note in sequencer.notes)]
        lines += ["## Expanded list", "", "```text", *steps, "```", ""]
    for index, (design, known) in enumerate(zip(result.designs, facts, strict=True)):
        lines += _design(design, result, known, lists[index])
        if sequencer is not None:
            lines += report_section(sequencer, index)
    lines += [*more, "## Cautions", "", *(f"- {caution}" for caution in CAUTIONS)]
    return "\n".join(lines) + "\n"


def _asked(job: Job) -> list[str]:
    """What the job states: rails, loads, limits."""
    rows = 1 << len(job.relays)
    listed = job.listed.bit_count()
    file = Path(job.file).name if job.file else None  # wherever it lay, the report is the same
    lines = [
        "## What was asked",
        "",
        f"- job file: {markdown(not_given(file))}",
        f"- input relays: {', '.join(map(markdown, job.relays)) or 'none'}",
        f"- rows: {rows}, of them {listed} listed and {rows - listed} unlisted",
        f"- supply, feed: {markdown(not_given(job.supply.feed))}",
        f"- supply, return: {markdown(not_given(job.supply.return_))}",
        f"- isolate: {job.limits.isolate}",
        f"- objective: {job.limits.objective}",
        *(f"- fitted at {markdown(load)}: {markdown(said)}" for load, said in _fitted(job)),
        "",
    ]
    rows_of_loads = []
    for load in job.loads:
        target = load.target
        amps = None if load.amps is None else f"{load.amps:g} A"
        wanted = (target.on.bit_count(), target.off.bit_count(), target.free.bit_count())
        source = "table" if load.formula is None else code(load.formula)
        facts = (not_given(load.kind), not_given(amps))
        rows_of_loads.append((markdown(load.name), *facts, *wanted, source))
    header = ("load", "kind", "current", "rows on", "rows off", "rows free", "wanted by")
    return [*lines, *table_lines(header, rows_of_loads), ""]


def _fitted(job: Job) -> list[tuple[str, str]]:
    """Loads and coils with what is fitted to them."""
    return [(load, ", ".join(parts.texts())) for load, parts in job.bench.fittings.items()]


def _design(design: Design, result: Result, facts: Facts, wires: WireList) -> list[str]:
    job = result.job
    network = design.network
    counts = network.per_relay()
    lines = [
        f"## {design.form.capitalize()} {design.fingerprint}",
        "",
        f"{markdown(design_name(design, job))}",
        "",
        f"**{markdown(at_rest(facts.tables))}**",
        "",
        f"- poles: {len(network.poles)}",
        f"- contacts: {sum(n.contacts for n in counts.values())}",
        f"- longest run: {markdown(run_line(facts))}",
        f"- nets: {len(network.nets())}, the return rail not counted",
        f"- bound: {bound_line(design.bound)}",
        f"- {proof_line(design, job, facts)}",
        "",
    ]
    lines += [f"- note: {markdown(note)}" for note in design.notes]
    lines += [""] if design.notes else []
    lines += ["### Loads as built", ""]
    lines += table_lines(
        ("load", "switching algebra", "longest run"),
        [
            (markdown(load), code(formula(facts, load, len(job.relays))), facts.runs[load])
            for load in network.loads
        ],
    )
    lines += ["", "### Contacts per relay", ""]
    header = ["relay", "poles", "makes", "breaks", "changeovers", "springs", "budget", "follows"]
    rows = [
        [
            markdown(relay),
            *(n.poles, n.makes, n.breaks, n.changeovers, n.springs),
            budget(job.limits, relay) or "none",
            markdown(result.repeaters.get(relay, "")),
        ]
        for relay, n in counts.items()
    ]
    if not result.repeaters:
        header, rows = header[:-1], [row[:-1] for row in rows]
    lines += table_lines(header, rows)
    currents = current_lines(wires)
    lines += ["", "### Current of each pole", "", *currents] if currents else []
    lines += ["", "### Two-level covers", "", *_covers(design), ""]
    lines += ["### Wiring", "", *_wiring(wires), ""]
    return [*lines, "### As built, row by row", "", *_rows(design, job, facts), ""]


def _covers(design: Design) -> list[str]:
    if not design.covers:
        return ["None recorded."]
    return table_lines(
        ("load", "cover", "size", "status"),
        [
            (
                markdown(cover.load),
                code(cover.cover),
                f"{count(cover.literals, 'literal')}, {count(cover.terms, 'term')}",
                "proved least" if cover.proved else "best found",
            )
            for cover in design.covers
        ],
    )


def _wiring(wires: WireList) -> list[str]:
    unwired = [load for load, net in wires.design.network.loads.items() if net is None]
    lines = table_lines(
        ("wire", "net", "from", "to"),
        [(c.wire, c.net, markdown(c.start), markdown(c.end)) for c in wires.conductors],
    )
    if unwired:
        names = ", ".join(map(markdown, unwired))
        lines += ["", f"Never on, so the feed terminal stays unwired: {names}."]
    return lines


def _rows(design: Design, job: Job, facts: Facts) -> list[str]:
    """Every row, with the free and unlisted cells in which a load is on marked.

    Of more relays than a table job may have, the listed rows alone.
    """
    network = design.network
    whole = len(job.relays) <= MAX_INPUTS
    marked = free_on(job, facts.tables, None if whole else job.listed)
    legend = (
        "`1` on, `0` off, as wanted or free. `1!` on although the job left it open: a don't-care "
        "that the wiring turns into real behaviour. The last column says whether the job lists "
        "the row and left the load free, or does not list the row."
    )
    loads = list(network.loads)
    header = ["row", *map(markdown, job.relays), *map(markdown, loads), "on though left open"]
    rows = []
    for row in range(1 << len(job.relays)) if whole else rows_of(job.listed):
        left_open = marked.get(row, {})
        cells = [
            ("1!" if load in left_open else "1") if facts.tables[load] >> row & 1 else "0"
            for load in loads
        ]
        said = ", ".join(f"{markdown(load)} ({kind})" for load, kind in left_open.items())
        rows.append((row, *settings(row, len(job.relays)), *cells, said))
    note = f"{count(len(marked), 'row')} marked." if marked else "No row is marked."
    if not whole:
        note = f"The listed rows alone, of {1 << len(job.relays)} that were proved. {note}"
    return [legend, "", note, "", *table_lines(header, rows)]
