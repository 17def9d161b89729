"""All papers of a run, made in memory: file name -> content, ready for `folder.write_folder`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from contactlogic.design import Result
from contactlogic.draw.sheet import Sheet
from contactlogic.errors import RenderError
from contactlogic.report.bench import bench_files, bought_for, wire_list
from contactlogic.report.facts import Facts
from contactlogic.report.markdown import report
from contactlogic.report.text import table_lines
from contactlogic.report.wiring import schedule_csv
from contactlogic.sequenced import SequencerResult

if TYPE_CHECKING:
    from contactlogic.purchase.cheapest import Cheapest
    from contactlogic.purchase.schedule import Schedule

__all__ = ["Papers", "papers", "purchase_lines"]


@dataclass(frozen=True)
class Papers:
    """Files by their path inside the output folder, and what the user should be told of them.

    `sheets` holds the drawing of each design before it was rendered.
    """

    files: Mapping[str, bytes]
    notes: tuple[str, ...] = ()
    sheets: tuple[Sheet, ...] = ()


def papers(
    result: Result,
    facts: Sequence[Facts],
    *,
    per_terminal: int = 2,
    schedules: Sequence[Schedule] = (),
    cheapest: Cheapest | None = None,
) -> Papers:
    """Every file of the output folder.

    Args:
        facts: of each design, in the order of `result.designs`.
        per_terminal: most conductors on a terminal, at least 2.
        schedules: of each design with what is bought for it; empty if nothing is.
        cheapest: how the designs were chosen by price, None if they were not.

    Where no renderer can be run the drawing's text takes the place of its pictures, and a note
    says so.
    """
    from contactlogic.draw import design_sheet, dot_text, render
    from contactlogic.report.designfile import dumps

    lists = [
        wire_list(
            design,
            result.job,
            repeaters=result.repeaters,
            per_terminal=per_terminal,
            bought=bought_for(schedules[index]) if schedules else None,
        )
        for index, design in enumerate(result.designs)
    ]
    files = {
        "design.json": dumps(result).encode(),
        "report.md": report(result, facts, lists, purchase_lines(schedules, cheapest)).encode(),
    }
    notes = []
    sheets: list[Sheet] = []
    for index, design in enumerate(result.designs):
        form = design.form
        sheets.append(design_sheet(design, result.job))
        text = dot_text(sheets[-1])
        try:
            pictures = render(text, ("svg", "png"))
        except RenderError as error:
            files[f"{form}/drawing.gv"] = text.encode()
            notes.append(f"no picture of the {form}, its drawing.gv was written instead: {error}")
        else:
            files |= {f"{form}/drawing.{kind}": data for kind, data in pictures.items()}
        files |= {f"{form}/{name}": data for name, data in bench_files(lists[index]).items()}
        files[f"{form}/schedule.csv"] = schedule_csv(design, result.job).encode()
        if schedules:
            from contactlogic.report import purchase

            title = result.job.title
            files[f"{form}/schedule.csv"] = purchase.schedule_csv(schedules[index], title).encode()
            files[f"{form}/purchase.csv"] = purchase.purchase_csv(schedules[index], title).encode()
        if isinstance(result, SequencerResult):
            from contactlogic.report.sequencer import sequence_files

            more, said = sequence_files(result, index)
            files |= more
            notes += said
    return Papers(files, tuple(notes), tuple(sheets))


def purchase_lines(schedules: Sequence[Schedule], cheapest: Cheapest | None) -> list[str]:
    """The report's section on what to buy, empty if nothing is bought."""
    if not schedules:
        return []
    from contactlogic.report import purchase

    lines = ["## Purchase", ""]
    if cheapest is not None:
        lines += [*table_lines(purchase.OFFERED, purchase.offered(cheapest)), ""]
    for schedule in schedules:
        design = schedule.design
        lines += [f"### {design.form.capitalize()} {design.fingerprint}: what to buy", ""]
        lines += [*purchase.purchase_markdown(schedule), ""]
    return lines
