"""All papers of a run, made in memory: file name -> content, ready for `folder.write_folder`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from contactlogic.design import Result
from contactlogic.errors import RenderError
from contactlogic.report.bench import Bought, bench_files, wire_list
from contactlogic.report.facts import Facts
from contactlogic.report.markdown import report
from contactlogic.report.wiring import schedule_csv
from contactlogic.sequencer import SequencerResult

__all__ = ["Papers", "papers"]


@dataclass(frozen=True)
class Papers:
    """Files by their path inside the output folder, and what the user should be told of them."""

    files: Mapping[str, bytes]
    notes: tuple[str, ...] = ()


def papers(
    result: Result,
    facts: Sequence[Facts],
    *,
    per_terminal: int = 2,
    bought: Sequence[Bought] = (),
) -> Papers:
    """Every file of the output folder.

    Args:
        facts: of each design, in the order of `result.designs`.
        per_terminal: most conductors on a terminal, at least 2.
        bought: what the parts bought for each design say of its contacts; empty if none are.

    Where no renderer can be run the drawing's text takes the place of its pictures, and a note
    says so.
    """
    from contactlogic.draw import draw_bridge, draw_ladder, render
    from contactlogic.report.designfile import dumps

    lists = [
        wire_list(
            design,
            result.job,
            repeaters=result.repeaters,
            per_terminal=per_terminal,
            bought=bought[index] if bought else None,
        )
        for index, design in enumerate(result.designs)
    ]
    files = {
        "design.json": dumps(result).encode(),
        "report.md": report(result, facts, lists).encode(),
    }
    notes = []
    for index, design in enumerate(result.designs):
        form = design.form
        draw = draw_ladder if form == "ladder" else draw_bridge
        text = draw(
            design,
            title=result.job.title,
            supply=result.job.supply,
            kinds={load.name: load.kind for load in result.job.loads},
            separate=result.job.limits.contacts,
        )
        try:
            pictures = render(text, ("svg", "png"))
        except RenderError as error:
            files[f"{form}/drawing.gv"] = text.encode()
            notes.append(f"no picture of the {form}, its drawing.gv was written instead: {error}")
        else:
            files |= {f"{form}/drawing.{kind}": data for kind, data in pictures.items()}
        files |= {f"{form}/{name}": data for name, data in bench_files(lists[index]).items()}
        files[f"{form}/schedule.csv"] = schedule_csv(design, result.job).encode()
        if isinstance(result, SequencerResult):
            from contactlogic.report.sequencer import sequence_files

            more, said = sequence_files(result, index)
            files |= more
            notes += said
    return Papers(files, tuple(notes))
