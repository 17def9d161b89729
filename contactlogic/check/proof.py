"""What a proof found, as values, and in a few lines of text."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from contactlogic.design import Form

__all__ = ["Backfeed", "NotSeriesParallel", "Proof", "WrongRow"]

SHOWN = 3
"""Findings of one kind that `explain` prints before it only counts the rest."""


def _setting(settings: Mapping[str, int]) -> str:
    return " ".join(f"{relay}={value}" for relay, value in settings.items()) or "no relays"


def _some(names: Sequence[str], most: int = 8) -> str:
    more = f" and {len(names) - most} more" if len(names) > most else ""
    return ", ".join(names[:most]) + more


@dataclass(frozen=True)
class WrongRow:
    """The first row in which a load is not as wanted.

    `path` are the terminals that feed a load that should be off, shortest way first to last;
    empty for a load that should be on, since nothing feeds it.
    """

    load: str
    row: int
    settings: Mapping[str, int]
    wanted: int
    got: int
    path: tuple[str, ...] = ()

    def __str__(self) -> str:
        state = ("off", "on")
        text = (
            f"{self.load} is {state[self.got]} in row {self.row} ({_setting(self.settings)}), "
            f"wanted {state[self.wanted]}"
        )
        return text + (
            f"\n  {' -> '.join(self.path)}" if self.path else "\n  no path to the supply"
        )


@dataclass(frozen=True)
class Backfeed:
    """The first row in which an isolated load that is off is joined to another that is off."""

    load: str
    other: str
    row: int
    settings: Mapping[str, int]
    path: tuple[str, ...]

    def __str__(self) -> str:
        return (
            f"{self.load} can discharge into {self.other} in row {self.row} "
            f"({_setting(self.settings)})\n  {' -> '.join(self.path)}"
        )


@dataclass(frozen=True)
class NotSeriesParallel:
    """A load whose contacts form no series-parallel graph.

    `nets` are those left when every series and parallel group has been taken together,
    `contacts` those that join two of them directly.
    """

    load: str
    nets: tuple[str, ...]
    contacts: tuple[str, ...]

    def __str__(self) -> str:
        return (
            f"the contacts of {self.load} form a bridge between {_some(self.nets)}, "
            f"held by {_some(self.contacts)}"
        )


@dataclass(frozen=True)
class Proof:
    """Outcome of one proof.

    Args:
        form: what was proved for; only a ladder must be series-parallel.
        rows: settings checked, 2 to the power of the number of inputs.
        as_built: truth table of each load as wired (free rows as they turn out), by load.
        wrong: first wrong row of each load that has one, in load order.
        backfeeds: first row of each pair, isolated load first (design.md section 3).
        structure: what is wrong with the wiring whatever the rows, one sentence each.
        series_parallel: loads that break the definition of a ladder (section 2).
        isolated: the loads that were proved to be isolated.
    """

    form: Form
    rows: int
    as_built: Mapping[str, int] = field(default_factory=dict)
    wrong: tuple[WrongRow, ...] = ()
    backfeeds: tuple[Backfeed, ...] = ()
    structure: tuple[str, ...] = ()
    series_parallel: tuple[NotSeriesParallel, ...] = ()
    isolated: tuple[str, ...] = ()

    @property
    def ok(self) -> bool:
        """Whether nothing at all was found."""
        return not (self.wrong or self.backfeeds or self.structure or self.series_parallel)

    def explain(self) -> str:
        """One line for a proof that holds; otherwise the first findings of each kind."""
        if self.ok:
            parts = [f"proved: every load is as wanted in all {self.rows} rows"]
            if self.form == "ladder":
                parts.append("series-parallel")
            if self.isolated:
                parts.append(f"{', '.join(self.isolated)} isolated")
            return "; ".join(parts)
        kinds: tuple[tuple[str, Sequence[object]], ...] = (
            ("wiring", self.structure),
            ("wrong", self.wrong),
            ("back-feed", self.backfeeds),
            ("not a ladder", self.series_parallel),
        )
        lines = []
        for kind, found in kinds:
            lines += [f"{kind}: {finding}" for finding in found[:SHOWN]]
            if len(found) > SHOWN:
                lines.append(f"{kind}: {len(found) - SHOWN} more")
        return "\n".join(lines)
