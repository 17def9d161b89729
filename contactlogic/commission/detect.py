"""Which fault each row shows, and at which load.

A fault shows at a load in a row if the load is then plainly on where it should be off, or plainly
off where it should be on; a load in series with others is neither.  It shows at the rails if they
are joined: the fuse goes, whatever is looked at.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from contactlogic.fault import (
    Change,
    Fault,
    Panel,
    Simulator,
    joins_alike,
    single_faults,
    swaps,
    variants,
)

__all__ = ["Shown", "Suspect", "Watched", "shown_by", "suspects", "union"]

Shown = tuple[int, ...]
"""Rows in which a fault shows, as bits: first at the rails, then at each load."""


@dataclass(frozen=True)
class Suspect:
    """One way in which one fault may show; `way` counts them."""

    fault: Fault
    way: int
    change: Change = field(compare=False)


def suspects(panel: Panel) -> tuple[list[Suspect], list[Suspect], int]:
    """Single faults, two wires swapped, and how many swaps join the same terminals as before.

    The last change nothing: they are wired right, if not as listed.
    """
    single = [
        Suspect(fault, way, change)
        for fault in single_faults(panel)
        for way, change in enumerate(variants(panel, fault))
    ]
    alike = joins_alike(panel)
    swapped = []
    same = 0
    for fault in swaps(panel):
        (change,) = variants(panel, fault)
        if alike(change):
            same += 1
        else:
            swapped.append(Suspect(fault, 0, change))
    return single, swapped, same


def union(tables: Shown) -> int:
    """Rows in which a fault shows at all."""
    found = 0
    for table in tables:
        found |= table
    return found


def shown_by(
    panel: Panel, rows: Sequence[int], tried: Sequence[Suspect], *, exact: bool
) -> list[Shown]:
    """Where each suspect shows among `rows`, bits in their order.

    Unless `exact`, some loads that are off are taken to be in series, and show less than they do.
    """
    simulator = Simulator(panel, rows)
    good = simulator.run().on
    found = []
    for now in simulator.run_all([suspect.change for suspect in tried], exact=exact):
        tables = [now.short]
        for load in panel.loads:
            off = ~(now.on[load] | now.in_series.get(load, 0))
            tables.append((good[load] & off | ~good[load] & now.on[load]) & ~now.short)
        found.append(tuple(tables))
    return found


class Watched:
    """Suspects that have been tried in every row of interest; rows and suspects can be added.

    Args:
        exact: as for `shown_by`.
    """

    def __init__(self, panel: Panel, rows: Sequence[int], *, exact: bool) -> None:
        self.exact = exact
        self.panel = panel
        self.rows = list(rows)
        self.shown: dict[Suspect, Shown] = {}

    def add(self, tried: Sequence[Suspect]) -> None:
        """Try further suspects in all rows."""
        tables = shown_by(self.panel, self.rows, tried, exact=self.exact)
        self.shown |= dict(zip(tried, tables, strict=True))

    def add_rows(self, rows: Sequence[int]) -> None:
        """Try all suspects in further rows."""
        count = len(self.rows)
        more = shown_by(self.panel, rows, list(self.shown), exact=self.exact)
        self.shown = {
            suspect: tuple(old | new << count for old, new in zip(olds, news, strict=True))
            for (suspect, olds), news in zip(self.shown.items(), more, strict=True)
        }
        self.rows += rows

    def seen(self) -> dict[Suspect, Shown]:
        """Those that some row shows."""
        return {suspect: tables for suspect, tables in self.shown.items() if any(tables)}

    def caught(self, looks: Mapping[int, Sequence[int]], tried: Sequence[Suspect]) -> list[bool]:
        """Whether each suspect shows at some of the looks; `looks` by the number of the row."""
        places = list(looks)
        strangers = [suspect for suspect in tried if suspect not in self.shown]
        rows = [self.rows[k] for k in places]
        tables = shown_by(self.panel, rows, strangers, exact=False)
        known = dict(zip(strangers, tables, strict=True))
        at = [0] * (1 + len(self.panel.loads))  # the looks as bits, among `places`
        within = list(at)  # and among all rows
        for bit, place in enumerate(places):
            for look in (0, *(1 + look for look in looks[place])):
                at[look] |= 1 << bit
                within[look] |= 1 << place
        return [
            _meet(known[suspect], at) if suspect in known else _meet(self.shown[suspect], within)
            for suspect in tried
        ]


def _meet(tables: Shown, looks: Sequence[int]) -> bool:
    return any(table & look for table, look in zip(tables, looks, strict=True))
