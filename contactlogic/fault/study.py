"""Which rows go wrong with each single fault, which way, and what it means for each load."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from contactlogic.fault.kinds import Fault, single_faults, variants
from contactlogic.fault.panel import Panel
from contactlogic.fault.simulate import Outcome, Simulator
from contactlogic.truth import Target

__all__ = [
    "MOST_SNEAKS",
    "FaultEffect",
    "FaultStudy",
    "LoadSummary",
    "SneakCircuit",
    "study_faults",
]

MOST_SNEAKS = 20
"""Sneak circuits of one fault that are told apart."""


@dataclass(frozen=True)
class SneakCircuit:
    """Loads fed in series through each other, with the rows in which just these are."""

    loads: tuple[str, ...]
    rows: int


@dataclass(frozen=True)
class FaultEffect:
    """What one fault may do, in any of the ways it may show; rows are truth tables.

    Args:
        turns_on: rows in which each load is on and should be off; loads without such rows are
            left out.
        turns_off: rows in which each load is not on and should be.
        in_series: rows in which each load is fed in series through others (a broken return).
        sneaks: the same by the loads concerned, at most `MOST_SNEAKS` of them.
        short: rows in which the rails are joined.
    """

    fault: Fault
    turns_on: Mapping[str, int]
    turns_off: Mapping[str, int]
    in_series: Mapping[str, int] = field(default_factory=dict)
    sneaks: tuple[SneakCircuit, ...] = ()
    short: int = 0

    @property
    def harmless(self) -> bool:
        """Whether every load is as wanted in every row all the same."""
        return not (self.turns_on or self.turns_off or self.in_series or self.short)


@dataclass(frozen=True)
class LoadSummary:
    """How many of the single faults turn one load on or off wrongly, open ones apart.

    Args:
        turn_on, turn_off: faults after which it is wrongly on, or off, in some row.
        open_turn_on: those of `turn_on` that are open faults.
        rows_on, rows_off: in how many rows some fault does so.
        in_series: faults after which it is fed in series through other loads.
    """

    load: str
    turn_on: int
    turn_off: int
    open_turn_on: int
    rows_on: int
    rows_off: int
    in_series: int


@dataclass(frozen=True)
class FaultStudy:
    """Every single fault of one panel.

    Args:
        relays: in bit order.
        effects: faults that turn a load on wrongly first, then those that only turn one off,
            then those without effect; else in panel order.
        summaries: one for each load.
    """

    relays: tuple[str, ...]
    effects: tuple[FaultEffect, ...]
    summaries: tuple[LoadSummary, ...]

    def open_faults_that_turn_on(self, load: str) -> tuple[FaultEffect, ...]:
        """Effects of open faults after which `load` is on and should be off."""
        return tuple(e for e in self.effects if e.fault.opens and load in e.turns_on)


def study_faults(panel: Panel, targets: Mapping[str, Target]) -> FaultStudy:
    """Try every single fault in every row.

    Args:
        panel: a panel that does what is wanted.
        targets: what each load must do, over the panel's inputs; free cells cannot go wrong.
    """
    simulator = Simulator(panel)
    faults = [(fault, variants(panel, fault)) for fault in single_faults(panel)]
    outcomes = iter(simulator.run_all([change for _, changes in faults for change in changes]))
    effects = [
        _effect(panel, targets, fault, [next(outcomes) for _ in changes])
        for fault, changes in faults
    ]
    effects.sort(key=_rank)
    return FaultStudy(
        panel.inputs,
        tuple(effects),
        tuple(_summary(load, effects) for load in panel.loads),
    )


def _rank(effect: FaultEffect) -> int:
    if effect.turns_on or effect.short:
        return 0
    if effect.in_series:
        return 1
    return 2 if effect.turns_off else 3


def _effect(
    panel: Panel, targets: Mapping[str, Target], fault: Fault, outcomes: Sequence[Outcome]
) -> FaultEffect:
    turns_on: dict[str, int] = {}
    turns_off: dict[str, int] = {}
    in_series: dict[str, int] = {}
    short = 0
    for outcome in outcomes:
        short |= outcome.short
        for load in panel.loads:
            target = targets[load]
            turns_on[load] = turns_on.get(load, 0) | outcome.on[load] & target.off
            turns_off[load] = turns_off.get(load, 0) | target.on & ~outcome.on[load]
        for load, rows in outcome.in_series.items():
            in_series[load] = in_series.get(load, 0) | rows
    return FaultEffect(
        fault,
        {load: rows for load, rows in turns_on.items() if rows},
        {load: rows for load, rows in turns_off.items() if rows},
        in_series,
        _circuits(in_series),
        short,
    )


def _circuits(in_series: Mapping[str, int]) -> tuple[SneakCircuit, ...]:
    """Rows sorted by which loads are in series, from the lowest row on."""
    left = 0
    for rows in in_series.values():
        left |= rows
    found: list[SneakCircuit] = []
    while left and len(found) < MOST_SNEAKS:
        row = left & -left
        here = left
        for rows in in_series.values():
            here &= rows if rows & row else ~rows
        loads = tuple(load for load, rows in in_series.items() if rows & row)
        found.append(SneakCircuit(loads, here))
        left &= ~here
    return tuple(found)


def _summary(load: str, effects: Sequence[FaultEffect]) -> LoadSummary:
    on = [effect for effect in effects if load in effect.turns_on]
    off = [effect for effect in effects if load in effect.turns_off]
    rows_on = rows_off = 0
    for effect in on:
        rows_on |= effect.turns_on[load]
    for effect in off:
        rows_off |= effect.turns_off[load]
    return LoadSummary(
        load,
        len(on),
        len(off),
        sum(effect.fault.opens for effect in on),
        rows_on.bit_count(),
        rows_off.bit_count(),
        sum(load in effect.in_series for effect in effects),
    )
