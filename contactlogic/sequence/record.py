"""`recovery.json`: a recovery as the contract of design.md section 6 writes it."""

from __future__ import annotations

from typing import Any

from contactlogic.job.sequence import state_text
from contactlogic.sequence.recovery import Recovery

__all__ = ["SCHEMA", "recovery_json"]

SCHEMA = "contactlogic/recovery/1"


def recovery_json(recovery: Recovery) -> dict[str, Any]:
    """The contract's keys, then what else is known: runs, races, whether it is complete.

    States are strings that list the relays in column order.  `hunting` is null or the states of
    a loop in running order.
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
        "traps_known": recovery.traps_known,
        "complete": recovery.complete,
    }
