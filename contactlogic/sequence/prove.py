"""Recovery of a sequence, a set of drives or a finished network: the engine chosen by size.

Up to `MOST_LISTED` columns every state has its bit (`motion`); with moves together up to
`groups.MOST_TOGETHER`; above that decision diagrams (`symbolic`).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, Literal

from contactlogic.errors import LimitError
from contactlogic.job.sequence import Timing
from contactlogic.network import Network
from contactlogic.sequence.drives import ContactDrives, Drives, FormulaDrives
from contactlogic.sequence.groups import GroupMotion
from contactlogic.sequence.motion import Motion, MoveRules, build_motion
from contactlogic.sequence.recovery import Recovery, Wanted, recover
from contactlogic.sequence.space import Watch
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.wants import ends, ways

__all__ = [
    "MOST_LISTED",
    "move_rules",
    "network_motion",
    "prove_drives",
    "prove_network",
    "wanted_sequence",
]

MOST_LISTED = 28
"""Most columns for which every state is listed; above that sets are decision diagrams."""

Moves = Literal["single", "together"]


def move_rules(
    columns: tuple[str, ...],
    timing: Timing,
    inputs: tuple[str, ...] = (),
    expansion: Expansion | None = None,
) -> MoveRules:
    """Who moves when.  In the states of a sequence only the inputs it waits for may move."""
    place = {name: i for i, name in enumerate(columns)}
    outside = {place[name] for name in inputs}
    waiting: dict[int, tuple[int, ...]] = {}
    for step in expansion.steps if expansion is not None else ():
        waiting[step.state] = tuple(mover for mover in step.movers if mover in outside)
    return MoveRules(
        len(columns),
        slow_operate=frozenset(place[name] for name in timing.slow_operate),
        slow_release=frozenset(place[name] for name in timing.slow_release),
        inputs=tuple(sorted(outside)),
        waiting=waiting,
    )


def wanted_sequence(expansion: Expansion) -> Wanted:
    """The sequence that is to be recovered, from an unambiguous expanded list."""
    return Wanted(ways(expansion), ends(expansion))


def network_motion(
    network: Network,
    timing: Timing,
    expansion: Expansion | None = None,
    *,
    memory: int | None = None,
    watch: Watch | None = None,
) -> Motion:
    """The moves of a finished network whose coils stand among its loads; other relays are inputs.

    Raises:
        LimitError: more memory needed than allowed.
    """
    inputs = tuple(name for name in network.relays if name not in network.loads)
    rules = move_rules(network.relays, timing, inputs, expansion)
    return build_motion(rules, ContactDrives(network), memory=memory, watch=watch)


def prove_network(
    network: Network,
    timing: Timing,
    expansion: Expansion | None = None,
    *,
    moves: Moves = "single",
    inputs_return: bool = True,
    memory: int | None = None,
    watch: Watch | None = None,
) -> Recovery:
    """Recovery as the finished contacts make it, over all states.

    Args:
        network: its relays are the columns, its coils stand among its loads under their names.
        expansion: the wanted sequence over the same columns, None if there is none.
        memory: most bytes to use.

    Raises:
        LimitError: more memory needed than allowed, or too many relays for moves together.
    """
    from contactlogic.sequence.symbolic import contact_diagrams

    if expansion is not None and expansion.columns != network.relays:
        raise ValueError("the sequence and the network have different columns")
    inputs = tuple(name for name in network.relays if name not in network.loads)
    return _prove(
        network.relays,
        move_rules(network.relays, timing, inputs, expansion),
        ContactDrives(network),
        contact_diagrams(network),
        expansion,
        moves,
        inputs_return,
        memory,
        watch,
    )


def prove_drives(
    columns: tuple[str, ...],
    drives: Mapping[str, Callable[[Mapping[str, Any]], Any]],
    timing: Timing,
    expansion: Expansion | None = None,
    *,
    moves: Moves = "single",
    inputs_return: bool = True,
    memory: int | None = None,
    watch: Watch | None = None,
) -> Recovery:
    """Recovery as given drives make it, over all states.

    Args:
        drives: for each coil a function from the columns' values to its drive that uses `&`,
            `|`, `^` and `~` alone; columns without one are inputs.

    Raises:
        LimitError: as for `prove_network`.
    """
    inputs = tuple(name for name in columns if name not in drives)

    def symbolic(position: Mapping[str, Any]) -> Mapping[str, Any]:
        return {name: drive(position) for name, drive in drives.items()}

    return _prove(
        columns,
        move_rules(columns, timing, inputs, expansion),
        FormulaDrives(columns, drives),
        symbolic,
        expansion,
        moves,
        inputs_return,
        memory,
        watch,
    )


def _prove(
    columns: tuple[str, ...],
    rules: MoveRules,
    drives: Drives,
    symbolic: Callable[[Mapping[str, Any]], Mapping[str, Any]],
    expansion: Expansion | None,
    moves: Moves,
    inputs_return: bool,
    memory: int | None,
    watch: Watch | None,
) -> Recovery:
    wanted = None if expansion is None else wanted_sequence(expansion)
    if len(columns) > MOST_LISTED:
        from contactlogic.sequence.symbolic import symbolic_motion

        if moves == "together":
            raise LimitError(
                f"{len(columns)} relays are too many to follow groups that move together",
                hint="check with single moves",
            )
        diagrams = symbolic_motion(rules, columns, symbolic, watch=watch)
        return recover(diagrams, columns, wanted=wanted, moves=moves, inputs_return=inputs_return)
    motion = build_motion(rules, drives, memory=memory, watch=watch)
    if moves == "single":
        return recover(motion, columns, wanted=wanted, inputs_return=inputs_return)
    together = GroupMotion(motion, memory=memory)
    return recover(together, columns, wanted=wanted, moves=moves, inputs_return=inputs_return)
