"""`recovery.json`: a recovery as the contract of design.md section 6 writes it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from contactlogic.job.sequence import state_text
from contactlogic.sequence.recovery import Recovery
from contactlogic.sequence.transit import Transit

__all__ = ["SCHEMA", "recovery_json"]

SCHEMA = "contactlogic/recovery/1"


def recovery_json(recovery: Recovery, transits: Sequence[Transit] | None = None) -> dict[str, Any]:
    """The contract's keys, then what else is known: runs, races, whether it is complete.

    States are strings that list the relays in column order.  `hunting` is null or the states of
    a loop in running order; `transits` is null where there is no wiring to look at.
    """
    n = len(recovery.columns)

    def text(state: int) -> str:
        return state_text(state, n)

    def texts(states: tuple[int, ...] | None) -> list[str] | None:
        return None if states is None else [text(state) for state in states]

    slowest = recovery.slowest
    stray = recovery.stray
    return {
        "schema": SCHEMA,
        "relays": list(recovery.columns),
        "states": recovery.states,
        "moves": recovery.moves,
        "verdict": recovery.verdict,
        "cycle": texts(recovery.cycle),
        "traps": [
            {
                "states": trap.states,
                "example": text(trap.example),
                "wanted": trap.wanted,
                "reached_from": trap.reached_from,
                "run": texts(trap.run),
                "parked": trap.parked,
            }
            for trap in recovery.traps
        ],
        "hunting": texts(recovery.hunting),
        "slowest": None
        if slowest is None
        else {"from": text(slowest.start), "moves": slowest.moves},
        "stray": None if stray is None else {"state": text(stray[0]), "ways_out": texts(stray[1])},
        "races": [
            {
                "relays": [recovery.columns[i] for i in race.columns],
                "states": race.states,
                "at_least": race.at_least,
                "example": text(race.example),
                "endings": [texts(ending) for ending in race.endings],
            }
            for race in recovery.races
        ],
        "transits": None
        if transits is None
        else [
            {
                "kind": transit.kind,
                "mover": transit.mover,
                "coil": transit.coil,
                "states": transit.states,
                "in_sequence": transit.in_sequence,
                "example": text(transit.example),
            }
            for transit in transits
        ],
        "traps_known": recovery.traps_known,
        "complete": recovery.complete,
    }
