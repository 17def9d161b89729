"""What coils and loads must do in a sequence, from its expanded list (design.md section 7)."""

from __future__ import annotations

from collections.abc import Mapping

from contactlogic.errors import Place, TableError
from contactlogic.sequence.steps import Expansion
from contactlogic.truth import Target, all_rows, table_of

__all__ = ["drive_targets", "ends", "listed_drives", "listed_loads", "load_targets", "ways"]


def ways(expansion: Expansion) -> dict[int, tuple[int, ...]]:
    """Next states of every state of an unambiguous expansion (none where it ends)."""
    return {
        step.state: tuple(step.state ^ (1 << mover) for mover in step.movers)
        for step in expansion.steps
    }


def ends(expansion: Expansion) -> tuple[int, ...]:
    """The states that the sequence comes to and never leaves: its cycle, or its last state.

    In the order of the expanded list.

    Raises:
        TableError: branches that never come together again.
    """
    onward = ways(expansion)
    reach: dict[int, set[int]] = {}
    for state in onward:
        seen = {state}
        waiting = [state]
        while waiting:
            for there in onward[waiting.pop()]:
                if there not in seen:
                    seen.add(there)
                    waiting.append(there)
        reach[state] = seen
    start = expansion.steps[0].state
    final = [s for s in onward if s in reach[start] and all(s in reach[t] for t in reach[s])]
    kept = reach[final[0]]
    if any(state not in kept for state in final):
        raise TableError(
            "the branches end in different places, so no wiring can start itself into one cycle",
            place=Place(None, "sequence"),
            hint="let every branch come back to a common row",
        )
    return tuple(state for state in onward if state in kept)


def listed_drives(expansion: Expansion) -> dict[str, dict[int, int]]:
    """Wanted drive of each coil by state (design.md section 7, "Drives wanted").

    The mover's drive is its next value.  Every other relay holds, except that it is free where
    its own move is slow and the state is left by a quick move: such states are left out.
    """
    wanted: dict[str, dict[int, int]] = {name: {} for name in expansion.relays}
    for step in expansion.steps:
        quick = expansion.quick(step)
        for i, name in enumerate(expansion.columns):
            if name not in wanted:
                continue
            now = step.state >> i & 1
            moves = i in step.movers
            if moves or not (quick and expansion.timing.slow(name, bool(now))):
                wanted[name][step.state] = now ^ moves
    return wanted


def listed_loads(expansion: Expansion) -> dict[str, dict[int, int]]:
    """Wanted value of each load by state; states in which it is free are left out."""
    wanted: dict[str, dict[int, int]] = {name: {} for name in expansion.loads}
    for step in expansion.steps:
        for name, value in zip(expansion.loads, step.loads, strict=True):
            if value is not None:
                wanted[name][step.state] = value
    return wanted


def drive_targets(expansion: Expansion) -> dict[str, Target]:
    """`listed_drives` as truth tables; states not in the list are free, subject to recovery."""
    n = len(expansion.columns)
    return {name: _target(n, values) for name, values in listed_drives(expansion).items()}


def load_targets(expansion: Expansion) -> dict[str, Target]:
    """`listed_loads` as truth tables; states not in the list are free."""
    n = len(expansion.columns)
    return {name: _target(n, values) for name, values in listed_loads(expansion).items()}


def _target(n: int, values: Mapping[int, int]) -> Target:
    held = table_of(n, values)
    on = table_of(n, (state for state, value in values.items() if value))
    return Target(n, on, all_rows(n) & ~held)
