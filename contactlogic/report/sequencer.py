"""Papers of a sequencer beside those of its wiring: expanded list, recovery, chart, state graph."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping

from contactlogic.design import Design
from contactlogic.draw.render import render
from contactlogic.errors import RenderError
from contactlogic.network import folded
from contactlogic.report.facts import as_built
from contactlogic.report.recovery import recovery_text, transit_line, verdict_line
from contactlogic.sequence.prove import network_motion
from contactlogic.sequence.record import recovery_json
from contactlogic.sequence.wants import ways
from contactlogic.sequenced import SequencerResult

__all__ = ["expansion_lines", "pictures", "recovery_lines", "report_section", "sequence_files"]


def expansion_lines(result: SequencerResult) -> Iterator[str]:
    """The one-relay steps: number, state, whether it dwells or is passed, what moves next."""
    expansion = result.expansion
    columns = expansion.columns
    yield f"steps of {' '.join(columns)}:"
    width = len(str(len(expansion.steps)))
    for number, step in enumerate(expansion.steps, start=1):
        state = "".join(str(step.state >> i & 1) for i in range(len(columns)))
        lasting = "waits" if expansion.waits(step) else "dwells"
        kind = lasting if expansion.dwells(step) else "passes"
        movers = " or ".join(_move(step.state, mover, columns) for mover in step.movers)
        row = f", row {step.row}" if not step.inserted else ""
        yield f"  {number:>{width}}  {state}  {kind}, then {movers or 'stays'}{row}"


def _move(state: int, mover: int, columns: tuple[str, ...]) -> str:
    return f"{columns[mover]} {'releases' if state >> mover & 1 else 'operates'}"


def recovery_lines(result: SequencerResult, index: int) -> Iterator[str]:
    """Verdict, slowest recovery and contacts in transit of one design."""
    found = result.recoveries[index]
    yield f"from the contacts: {verdict_line(found, wanted=True)}"
    if found.slowest is not None:
        n = len(found.columns)
        start = "".join(str(found.slowest.start >> i & 1) for i in range(n))
        yield f"slowest recovery: {found.slowest.moves} moves, from {start}"
    for transit in result.transits[index]:
        yield f"in transit: {transit_line(transit, len(found.columns))}"
    if not result.transits[index]:
        yield "in transit: no coil is unfed or fed for a moment while a relay moves"


def report_section(result: SequencerResult, index: int) -> list[str]:
    """The part of the report that proves recovery of one design."""
    said = recovery_text(
        result.recoveries[index], wanted=True, transits=result.transits[index]
    ).rstrip()
    return ["### Recovery from every power-on state", "", "```text", said, "```", ""]


def sequence_files(result: SequencerResult, index: int) -> tuple[dict[str, bytes], list[str]]:
    """recovery.json, chart and state graph of one design, and notes on what could not be drawn."""
    from contactlogic.draw.chart import sequence_chart

    design, expansion = result.designs[index], result.expansion
    found = result.recoveries[index]
    network = folded(design.network, result.repeaters)
    fed = as_built(network)
    title = result.job.title
    form = design.form
    record = {
        "title": title,
        "form": form,
        "fingerprint": design.fingerprint,
    }
    contract = recovery_json(found, result.transits[index])
    files = {
        f"{form}/recovery.json": (json.dumps(contract | record, indent=1) + "\n").encode(),
    }
    pictures = sequence_chart(
        expansion,
        {name: fed[name] for name in expansion.relays},
        {name: table for name, table in fed.items() if name not in expansion.relays},
        title=title,
        fingerprint=f"{form} {design.fingerprint}",
    )
    files |= {f"{form}/chart.{kind}": data for kind, data in pictures.items()}
    text = _graph(result, design, index)
    try:
        drawn = render(text, ("svg", "png"))
    except RenderError as error:
        files[f"{form}/states.gv"] = text.encode()
        return files, [f"no picture of the states, states.gv was written instead: {error}"]
    return files | {f"{form}/states.{kind}": data for kind, data in drawn.items()}, []


def pictures(files: Mapping[str, bytes], form: str) -> dict[str, bytes]:
    """The pictures of a sequencer among the files of its design, as SVG by what they show."""
    named = {"Chart of the sequence": "chart.svg", "States and moves": "states.svg"}
    found = {name: files.get(f"{form}/{file}") for name, file in named.items()}
    return {name: svg for name, svg in found.items() if svg is not None}


def _graph(result: SequencerResult, design: Design, index: int) -> str:
    from contactlogic.draw.states import state_graph

    network = folded(design.network, result.repeaters)
    motion = network_motion(network, result.timing, result.expansion)
    return state_graph(
        result.recoveries[index],
        motion.successors,
        title=result.job.title,
        fingerprint=f"{design.form} {design.fingerprint}",
        slow=result.timing.slow,
        inputs=result.expansion.inputs,
        sequence=ways(result.expansion),
    )
