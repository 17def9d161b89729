"""Sentences that the screen summary and the report share, so that both say the same."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from contactlogic.design import Bound, Design, Result
from contactlogic.job.model import Job, Limits
from contactlogic.report.facts import Facts, constant, free_cells, on_at_rest

__all__ = [
    "COMPARED",
    "at_rest",
    "bound_line",
    "budget",
    "compared",
    "count",
    "formula",
    "not_given",
    "proof_line",
    "run_line",
    "saving",
]

NOT_GIVEN = "not given"

COMPARED = ("form", "poles", "contacts", "springs", "busiest relay", "bound")
"""Headings of `compared`."""


def count(number: int, thing: str) -> str:
    """`1 pole`, `4 poles`."""
    return f"{number} {thing}" if number == 1 else f"{number} {thing}s"


def not_given(value: object) -> str:
    """What the job states, or that it does not; nothing is guessed."""
    return NOT_GIVEN if value is None or value == "" else str(value)


def at_rest(tables: Mapping[str, int]) -> str:
    """Which loads are on with every relay released."""
    loads = on_at_rest(tables)
    if not loads:
        return "no load is on with every relay released"
    return f"on with every relay released: {', '.join(loads)}"


def formula(facts: Facts, load: str, relays: int) -> str:
    """The load's switching algebra as built; constant loads are said to be so."""
    said = constant(facts.tables[load], relays)
    text = facts.formulas[load]
    if said is None and load not in facts.as_wired:
        said = "what it does, not how it is wired"
    return f"{text}  ({said})" if said else text


def run_line(facts: Facts) -> str:
    """`2 contacts in series (LAMP)`: the longest run of the whole design."""
    load, run = facts.longest
    if load is None or not run.contacts:
        return "0 contacts"
    prefix = "" if run.exact else "at least "
    return f"{prefix}{count(run.contacts, 'contact')} in series ({load})"


def bound_line(bound: Bound) -> str:
    """What is proved of the least number of poles."""
    proved = "proved minimum" if bound.proven_minimum else "minimum not proved"
    return f"at least {count(bound.at_least, 'pole')}, {proved}"


def budget(limits: Limits, relay: str) -> str:
    """A relay's budget as the job states it: `2` poles, `1A1B` contacts, or nothing."""
    parts: Iterable[str] = ()
    if relay in limits.poles:
        parts = (str(limits.poles[relay]),)
    if relay in limits.contacts:
        separate = limits.contacts[relay]
        makes = f"{separate.makes}A" if separate.makes else ""
        breaks = f"{separate.breaks}B" if separate.breaks else ""
        parts = (*parts, makes + breaks)
    return " ".join(parts)


def proof_line(design: Design, job: Job, facts: Facts) -> str:
    """How many rows were proved, and what became of the free cells.

    A cell is one load in one row.
    """
    line = f"proved: all {design.verified_rows} rows as wanted"
    free = free_cells(job)
    if not free:
        return f"{line}, none free"
    on = sum((facts.tables.get(load.name, 0) & load.target.free).bit_count() for load in job.loads)
    return f"{line}; of {count(free, 'free cell')} (load and row) {on} came out on"


def compared(designs: Sequence[Design]) -> list[tuple[str, ...]]:
    """The designs of a run side by side in a few figures, one line each."""
    rows = []
    for design in designs:
        counts = design.network.per_relay()
        busiest = max(counts, key=lambda name: counts[name].poles, default=None)
        figures = (
            len(design.network.poles),
            sum(n.contacts for n in counts.values()),
            sum(n.springs for n in counts.values()),
        )
        most = "none" if busiest is None else f"{busiest} ({counts[busiest].poles})"
        rows.append((design.form, *map(str, figures), most, bound_line(design.bound)))
    return rows


def saving(result: Result) -> str:
    """What the last design of a run saves on the first, in what the job's objective counts."""
    singly = result.job.limits.objective == "contacts"
    first, last = result.designs[0], result.designs[-1]

    def cost(design: Design) -> int:
        counts = design.network.per_relay().values()
        return sum(n.contacts if singly else n.poles for n in counts)

    thing = "contact" if singly else "pole"
    saved = cost(first) - cost(last)
    said = f"saves {count(saved, thing)}" if saved > 0 else f"saves no {thing}"
    return f"the {last.form} {said} on the {first.form}"
