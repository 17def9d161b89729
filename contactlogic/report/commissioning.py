"""The test plan as a commissioning sheet to tick off, as lines for the screen, and as JSON."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from typing import Any

from contactlogic.commission import Look, Step, TestPlan, Unseen
from contactlogic.fault import Panel
from contactlogic.job.model import Job
from contactlogic.report.cautions import CAUTIONS
from contactlogic.report.faults import fault_text, row_text
from contactlogic.report.phrases import count
from contactlogic.report.text import markdown, one_line, table_lines
from contactlogic.truth import settings

__all__ = ["commissioning_sheet", "plan_json", "plan_text"]

_BOX = "&#9744;"  # an empty box, to be ticked with a pen


def plan_text(plan: TestPlan) -> str:
    """Lines for the screen."""
    lines = [_summary(plan)]
    for number, step in enumerate(plan.steps, start=1):
        looks = f"look at {_looks(step.looks)}" if step.looks else "see that the fuse holds"
        lines.append(f"  {number}. {_change(step)}: {looks}")
    lines += [f"not shown by any listed row: {_unseen(one, plan)}" for one in plan.unseen]
    return "\n".join(map(_flat, lines)) + "\n"


def _flat(line: str) -> str:
    indent = line[: len(line) - len(line.lstrip())]
    return indent + one_line(line)


def _summary(plan: TestPlan) -> str:
    shown = plan.faults - len(plan.unseen)
    least = "the least there are: proved" if plan.least_rows else f"at least {plan.at_least} needed"
    return (
        f"{count(len(plan.steps), 'row')} ({least}) and {count(plan.looks, 'look')} show "
        f"{shown} of {plan.faults} faults, {plan.swaps} of them two wires swapped; "
        f"{count(plan.moves, 'relay move')}"
    )


def _looks(looks: Sequence[Look]) -> str:
    return ", ".join(f"{look.load} {'on' if look.on else 'off'}" for look in looks)


def _change(step: Step) -> str:
    operate = [relay for relay, on in step.change if on]
    release = [relay for relay, on in step.change if not on]
    parts = []
    if operate:
        parts.append(f"operate {' '.join(operate)}")
    if release:
        parts.append(f"release {' '.join(release)}")
    return ", ".join(parts) or "leave every relay as it is"


def _unseen(one: Unseen, plan: TestPlan) -> str:
    said = fault_text(one.fault)
    if one.ways < one.of_ways:
        said += f", in {one.ways} of the {one.of_ways} ways it may show"
    if one.unlisted is not None:
        said += f" (row {row_text(plan.relays, one.unlisted)}, which is not listed, shows it)"
    return said


def commissioning_sheet(plan: TestPlan, panel: Panel, job: Job, name: str) -> str:
    """The sheet as Markdown: dead, then live with indicators, then with the loads.

    Args:
        plan: of the panel.
        panel: for its wires and terminals.
        job: for its title and supply, and for loads that store energy.
        name: form, fingerprint and title of the design.
    """
    lines = [f"# Commissioning sheet: {markdown(name)}", "", *_head(job), ""]
    lines += ["## 1. Dead", "", *_dead(panel, job), ""]
    lines += ["## 2. Live, indicators in place of the loads", "", *_indicators(plan), ""]
    lines += ["## 3. Live, with the loads", "", *_with_loads(plan), ""]
    lines += ["## What these rows do not show", "", *_not_shown(plan), ""]
    lines += ["## Cautions", "", *(f"- {caution}" for caution in CAUTIONS), ""]
    return "\n".join(lines)


def _head(job: Job) -> list[str]:
    feed, back = job.supply.feed or "not given", job.supply.return_ or "not given"
    return [
        f"Supply {markdown(feed)}, return {markdown(back)}.",
        "",
        "Date: ____________________ Name: ____________________ Panel: ____________________",
        "",
        "Only a person competent for this supply and this place does these tests, by the local "
        "code. Go on to the next part only when every box of the one before is ticked.",
    ]


def _dead(panel: Panel, job: Job) -> Iterator[str]:
    stored = [load.name for load in job.loads if load.name in job.stored]
    stored += [name for name, parts in job.bench.fittings.items() if parts.hold is not None]
    of = f" ({', '.join(map(markdown, dict.fromkeys(stored)))})" if stored else ""
    yield f"- {_BOX} Supply off, locked off, and measured dead at both rails."
    yield f"- {_BOX} Every capacitor{of} discharged, and measured."
    yield f"- {_BOX} Loads disconnected. Where the panel feeds relay coils, these too."
    yield (
        f"- {_BOX} No continuity from rail to rail with every relay released"
        f" ({markdown(panel.feed)} to {markdown(panel.back)})."
    )
    yield (
        f"- {_BOX} The same in each row of part 2 that can be set dead, by hand or from a supply "
        "of the coils' own."
    )
    yield ""
    yield "Wires at each terminal, counted on the panel:"
    yield ""
    ends = Counter(end for wire in panel.wires for end in (wire.start, wire.end))
    yield from table_lines(
        ("terminal", "wires", "counted"),
        [(markdown(end), number, _BOX) for end, number in ends.items()],
    )
    yield ""
    yield "Continuity of each wire, end to end:"
    yield ""
    yield from table_lines(
        ("wire", "from", "to", "continuity"),
        [(w.number, markdown(w.start), markdown(w.end), _BOX) for w in panel.wires],
    )


def _indicators(plan: TestPlan) -> Iterator[str]:
    yield markdown(_summary(plan)) + "."
    yield ""
    yield (
        "Begin with every relay released. Fuse the supply for the indicators alone. In each row "
        "see that the fuse holds; look at the loads named, one indicator each. An indicator that "
        "glows dimly is a fault too: current finds a way through other loads."
    )
    yield ""
    rows = []
    for number, step in enumerate(plan.steps, start=1):
        looks = ", ".join(f"{_BOX} {markdown(_looks([look]))}" for look in step.looks)
        row = markdown(row_text(plan.relays, step.row))
        rows.append((number, markdown(_change(step)), row, f"{_BOX} holds", looks))
    yield from table_lines(("step", "do", "row", "fuse", "look at"), rows)


def _with_loads(plan: TestPlan) -> Iterator[str]:
    yield f"- {_BOX} Supply off again, capacitors discharged, loads connected, covers on."
    yield f"- {_BOX} Polarity right at each load that has one."
    yield ""
    rows = []
    for number, step in enumerate(plan.steps, start=1):
        loads = ", ".join(f"{_BOX} {markdown(_looks([look]))}" for look in step.all_loads)
        rows.append((number, markdown(_change(step)), loads))
    yield from table_lines(("step", "do", "every load"), rows)


def _not_shown(plan: TestPlan) -> Iterator[str]:
    if not plan.unseen:
        yield "Every single fault, and every two wires swapped, shows in some row above."
        return
    yield (
        "No listed row shows these. A second way round, or a wire that only carries a spare, "
        "hides them; polarity turned round at a load hides too. Part 1 finds those in wires."
    )
    yield ""
    yield from (f"- {markdown(_unseen(one, plan))}" for one in plan.unseen)


def plan_json(plan: TestPlan) -> dict[str, Any]:
    """The plan as plain values; rows are strings of relay values in `relays` order."""
    n = len(plan.relays)

    def text(row: int) -> str:
        return "".join(map(str, settings(row, n)))

    return {
        "relays": list(plan.relays),
        "faults": plan.faults,
        "swaps": plan.swaps,
        "unchanged_swaps": plan.unchanged_swaps,
        "at_least": plan.at_least,
        "least_rows": plan.least_rows,
        "least_looks": plan.least_looks,
        "relay_moves": plan.moves,
        "steps": [
            {
                "row": text(step.row),
                "change": {relay: int(on) for relay, on in step.change},
                "look_at": {look.load: int(look.on) for look in step.looks},
                "loads": {look.load: int(look.on) for look in step.all_loads},
                "shows": step.shows,
            }
            for step in plan.steps
        ],
        "not_shown": [
            {
                "kind": one.fault.kind,
                "relay": one.fault.relay,
                "pole": one.fault.pole,
                "wires": list(one.fault.wires),
                "ends": list(one.fault.ends),
                "ways": one.ways,
                "of_ways": one.of_ways,
                "unlisted_row": None if one.unlisted is None else text(one.unlisted),
            }
            for one in plan.unseen
        ],
    }
