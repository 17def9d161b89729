"""What coils and loads must do in a sequence, from its expanded list (design.md section 7)."""

from __future__ import annotations

from contactlogic.errors import Place, TableError
from contactlogic.sequence.steps import Expansion
from contactlogic.truth import Target, all_rows

__all__ = ["drive_targets", "ends", "load_targets", "ways"]


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


def drive_targets(expansion: Expansion) -> dict[str, Target]:
    """Wanted drive of each coil over all states (design.md section 7, "Drives wanted").

    The mover's drive is its next value.  Every other relay holds, except that it is free where
    its own move is slow and the state is left by a quick move.  States that are not in the list
    are free, subject to recovery.
    """
    n = len(expansion.columns)
    on = dict.fromkeys(expansion.relays, 0)
    held = dict.fromkeys(expansion.relays, 0)
    for step in expansion.steps:
        bit = 1 << step.state
        quick = expansion.quick(step)
        for i, name in enumerate(expansion.columns):
            if name not in on:
                continue
            now = step.state >> i & 1
            moves = i in step.movers
            if not moves and quick and expansion.timing.slow(name, bool(now)):
                continue
            held[name] |= bit
            if now ^ moves:
                on[name] |= bit
    full = all_rows(n)
    return {name: Target(n, on[name], full & ~held[name]) for name in on}


def load_targets(expansion: Expansion) -> dict[str, Target]:
    """Wanted behaviour of each load over all states; states not in the list are free."""
    n = len(expansion.columns)
    full = all_rows(n)
    targets = {}
    for k, name in enumerate(expansion.loads):
        on = off = 0
        for step in expansion.steps:
            if step.loads[k] is not None:
                if step.loads[k]:
                    on |= 1 << step.state
                else:
                    off |= 1 << step.state
        targets[name] = Target(n, on, full & ~(on | off))
    return targets
