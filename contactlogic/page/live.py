"""What the script of a live drawing must know of a design, as plain values.

Nets, relays and loads go by their numbers; names stand beside them for display alone.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from contactlogic.design import Design
from contactlogic.job.model import Job
from contactlogic.sequence.steps import Expansion, Step
from contactlogic.truth import Target

__all__ = ["Numbers", "live_model", "numbers_of"]

_MOST_RELAYS = 10  # up to here the page tells for every row what is wanted

Numbers = dict[str, dict[str, int]]
"""Number of each net, relay and load: {"nets": ..., "relays": ..., "loads": ...}."""


def numbers_of(design: Design) -> Numbers:
    """Numbers of everything on the drawing of a design."""
    network = design.network
    return {
        "nets": {net: i for i, net in enumerate(network.nets())},
        "relays": {relay: i for i, relay in enumerate(network.relays)},
        "loads": {load: i for i, load in enumerate(network.loads)},
    }


def live_model(
    design: Design,
    job: Job,
    repeaters: Mapping[str, str],
    expansion: Expansion | None,
) -> dict[str, Any]:
    """A design for the script.

    Keys: `relays` (name, the relay whose position it takes, its coil among the loads or null,
    whether it is slow to operate and to release), `columns` (relays in the order of the bits of a
    row), `nets` (how many), `supply`, `poles` (relay, common, make or null, break or null), `loads`
    (name, net or null, what is wanted of it in each row as `1`, `0` or `-`, null where there are
    too many rows), `steps` (position of each column, row, what it is, what moves next, which steps
    follow).
    """
    network = design.network
    number = numbers_of(design)
    nets, relays, loads = number["nets"], number["relays"], number["loads"]
    targets = job.targets
    coils = () if expansion is None else expansion.relays
    return {
        "relays": [
            {
                "name": relay,
                "follows": relays[repeaters.get(relay, relay)],
                "coil": loads.get(relay) if relay in coils else None,
                "slow": [expansion.timing.slow(relay, at) for at in (False, True)]
                if expansion is not None
                else [False, False],
            }
            for relay in network.relays
        ],
        "columns": [relays[relay] for relay in job.relays],
        "nets": len(nets),
        "supply": nets[network.supply],
        "poles": [
            [
                relays[pole.relay],
                nets[pole.common],
                None if pole.make is None else nets[pole.make],
                None if pole.break_ is None else nets[pole.break_],
            ]
            for pole in network.poles
        ],
        "loads": [
            {
                "name": load,
                "net": None if net is None else nets[net],
                "wanted": _wanted(targets.get(load)),
            }
            for load, net in network.loads.items()
        ],
        "steps": [] if expansion is None else [_step(expansion, i) for i in expansion.steps],
    }


def _wanted(target: Target | None) -> str | None:
    if target is None or target.n > _MOST_RELAYS:
        return None
    rows = range(1 << target.n)
    return "".join(
        "1" if target.on >> row & 1 else "0" if target.off >> row & 1 else "-" for row in rows
    )


def _step(expansion: Expansion, step: Step) -> dict[str, Any]:
    lasting = "waits" if expansion.waits(step) else "dwells"
    moves = [
        f"{expansion.columns[mover]} {'releases' if step.state >> mover & 1 else 'operates'}"
        for mover, _ in step.leaving
    ]
    return {
        "positions": [step.state >> i & 1 for i in range(len(expansion.columns))],
        "row": None if step.inserted else step.row,
        "kind": lasting if expansion.dwells(step) else "passes",
        "moves": moves,
        "next": [index for _, index in step.leaving],
    }
