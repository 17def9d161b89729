"""What the proof of recovery found, as plain text: the verdict first, then what shows why."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from contactlogic.job.sequence import state_text
from contactlogic.repair import NoRepair, Repair
from contactlogic.report.phrases import count
from contactlogic.sequence.recovery import Recovery, Trap
from contactlogic.sequence.transit import Transit

__all__ = ["recovery_text", "repair_lines", "transit_line", "verdict_line"]

_WIDTH = 360  # characters of one run that are printed, about
_TRAPS = 12  # most traps that are printed
_RACES = 8


def recovery_text(
    recovery: Recovery, *, wanted: bool, transits: Sequence[Transit] | None = None
) -> str:
    """The verdict and everything that shows why, ending with a line feed.

    Args:
        recovery: what was found.
        wanted: whether a sequence was wanted; if not, a single trap counts as the wanted one.
        transits: gaps and flashes at coils, None where there is no wiring to look at.
    """
    lines = [
        verdict_line(recovery, wanted=wanted),
        f"states list {' '.join(recovery.columns)}; "
        + ("one relay moves at a time" if recovery.moves == "single" else "relays move together"),
    ]
    if not recovery.complete:
        lines.append("not everything is known: what follows was found until then")
    lines += _cycle(recovery, wanted)
    lines += _traps(recovery, wanted)
    if recovery.hunting is not None:
        lines += ["", f"hunting loop of {count(len(recovery.hunting), 'state')}:"]
        lines.append("  " + _run(recovery, (*recovery.hunting, recovery.hunting[0])))
    lines += _slowest(recovery)
    lines += _races(recovery)
    if transits is not None:
        lines += ["", *_transits(recovery, transits)]
    return "\n".join(lines) + "\n"


def verdict_line(recovery: Recovery, *, wanted: bool) -> str:
    """The verdict with its reason, in one line."""
    verdict = recovery.verdict
    goal = "the wanted cycle" if wanted else "the one trap there is"
    if wanted and recovery.cycle is not None and len(recovery.cycle) == 1:
        goal = "the last state of the sequence"
    if verdict is None:
        return "not known: stopped before the verdict"
    if verdict == "recovers":
        return f"recovers: from each of the {recovery.states} states every run enters {goal}"
    if verdict == "hunts":
        return f"hunts: a loop outside {goal} can be run round for ever"
    if recovery.stray is not None:
        state, onward = recovery.stray
        said = " or ".join(_text(recovery, there) for there in onward) or "nowhere"
        return f"sticks: in state {_text(recovery, state)} of the sequence the moves lead to {said}"
    other = [trap for trap in recovery.traps if not trap.wanted]
    if wanted and len(other) == len(recovery.traps):
        return "sticks: the wanted cycle is not where the relays end up"
    if wanted:
        return f"sticks: {count(recovery.traps_known - 1, 'trap')} beside {goal}"
    return f"sticks: {recovery.traps_known} traps, where one would do"


def _text(recovery: Recovery, state: int) -> str:
    return state_text(state, len(recovery.columns))


def _run(recovery: Recovery, states: Sequence[int]) -> str:
    most = max(4, _WIDTH // (len(recovery.columns) + 1))
    if len(states) <= most:
        return " ".join(_text(recovery, state) for state in states)
    shown = " ".join(_text(recovery, state) for state in states[: most - 1])
    return f"{shown} ... {_text(recovery, states[-1])} ({len(states)} states)"


def _cycle(recovery: Recovery, wanted: bool) -> Iterator[str]:
    states = recovery.cycle
    if states is None:
        return
    yield ""
    if len(states) == 1:
        yield f"{'last state' if wanted else 'at rest in'}: {_text(recovery, states[0])}"
    else:
        yield f"{'wanted cycle' if wanted else 'cycle'} of {len(states)} states:"
        yield "  " + _run(recovery, states)


def _traps(recovery: Recovery, wanted: bool) -> Iterator[str]:
    if recovery.verdict == "recovers":
        return
    yield ""
    known = count(recovery.traps_known, "trap")
    if recovery.complete:
        yield f"{known}:"
    else:
        yield f"{known} found so far, maybe more:"
    for trap in recovery.traps[:_TRAPS]:
        yield "  " + _trap_line(recovery, trap, wanted)
        if not (wanted and trap.wanted) and len(trap.run) > 1:
            moves = count(len(trap.run) - 1, "move")
            yield f"    shortest run into it, {moves}: {_run(recovery, trap.run)}"
    if recovery.traps_known > _TRAPS:
        yield f"  and {recovery.traps_known - _TRAPS} more"


def _trap_line(recovery: Recovery, trap: Trap, wanted: bool) -> str:
    example = _text(recovery, trap.example)
    said = (
        f"at rest in {example}" if trap.states == 1 else f"{trap.states} states, such as {example}"
    )
    if trap.parked:
        said = f"waits for ever in {example} if no input moves again"
    from_ = f"{trap.reached_from} of {recovery.states} states can end there"
    return f"{said}; {from_}" + ("; this is the wanted one" if wanted and trap.wanted else "")


def _slowest(recovery: Recovery) -> Iterator[str]:
    slowest = recovery.slowest
    if slowest is None:
        return
    yield ""
    if slowest.moves == 0:
        yield "slowest recovery: no moves, every state belongs to the cycle"
    else:
        yield (
            f"slowest recovery: {count(slowest.moves, 'move')}, "
            f"from {_text(recovery, slowest.start)}"
        )


def _races(recovery: Recovery) -> Iterator[str]:
    if not recovery.races:
        return
    yield ""
    yield "races, where the order of two moves decides the end:"
    for race in recovery.races[:_RACES]:
        one, two = (recovery.columns[i] for i in race.columns)
        ends = [
            " or ".join(_text(recovery, end) for end in ending) or "no trap"
            for ending in race.endings
        ]
        least = "at least " if race.at_least else ""
        yield (
            f"  {one} and {two} in {least}{count(race.states, 'state')}, such as "
            f"{_text(recovery, race.example)}: {one} first leads to {ends[0]}, "
            f"{two} first to {ends[1]}"
        )
    if len(recovery.races) > _RACES:
        yield f"  and {len(recovery.races) - _RACES} more pairs"


def _transits(recovery: Recovery, transits: Sequence[Transit]) -> Iterator[str]:
    if not transits:
        yield "no coil sees a gap or a flash while a relay moves"
        return
    yield "contacts in transit:"
    for transit in transits:
        yield "  " + transit_line(transit, len(recovery.columns))


def transit_line(transit: Transit, n: int) -> str:
    """One gap or flash in words."""
    where = count(transit.states, "state")
    if transit.in_sequence:
        where += f", {transit.in_sequence} of the sequence"
    fed = "unfed" if transit.kind == "gap" else "fed"
    where += f", such as {state_text(transit.example, n)}"
    return f"{transit.coil} is {fed} for a moment while {transit.mover} moves ({where})"


def repair_lines(repair: Repair | NoRepair) -> Iterator[str]:
    """The repair proposed, or why there is none."""
    if isinstance(repair, NoRepair):
        yield f"no repair: {repair.why}"
        return
    kind = "cheapest repair" if repair.cheapest else "best repair found"
    yield f"{kind}: change the drive of {repair.relay}"
    yield f"  from  {repair.before}"
    yield f"  to    {repair.after}"
    least = "" if repair.wired else "at most "
    yield (
        f"  poles of all drives together: {least}{repair.poles_before} before, "
        f"{least}{repair.poles_after} after"
    )
