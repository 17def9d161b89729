"""Patterns: only the loads of each step are known; the relays and their states are chosen here.

Three kinds of stepping (design.md section 5, `[pattern]`):

- "slow": a self-timed cycle in which every move is slow and one relay moves at a time, with the
  fewest relays: a cyclic reflected binary code (Gray 1953) cut to the length needed.  Such a
  cycle has an even number of states, so an odd pattern passes one extra state; it is left by a
  move made quick, so that it does not last.
- "ring": a ring of relays slow to release, two neighbours operated at a time.
- "pulse": an input that pulses; each pulse steps on.  Two relay states belong to each step, one
  before and one after the release of the pulse, so the cycle is always even.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from contactlogic.errors import JobFileError, Place, TableError
from contactlogic.job.model import PatternJob, SequenceJob
from contactlogic.job.sequence import Pattern, Row, SequenceTable, Timing, state_text
from contactlogic.naming import did_you_mean, listed

__all__ = ["PatternChoice", "choose_relays", "cyclic_code", "sequence_of"]

Loads = tuple[int | None, ...]


@dataclass(frozen=True)
class PatternChoice:
    """The sequence chosen for a pattern.

    Args:
        first_rows: for each step of the pattern, the row (from 1) in which it begins.
        notes: the relays chosen and any extra states passed, in plain sentences.
    """

    table: SequenceTable
    first_rows: tuple[int, ...]
    notes: tuple[str, ...]


def sequence_of(job: PatternJob) -> tuple[SequenceJob, PatternChoice]:
    """The sequence job that a pattern job comes to, and how its relays were chosen.

    Raises:
        JobFileError: limits of relays that were not chosen.
    """
    choice = choose_relays(job.pattern)
    for name in (*job.limits.poles, *job.limits.contacts, *job.limits.guided):
        if name not in choice.table.columns:
            raise JobFileError(
                f"there is no relay {name} among those chosen for the pattern",
                place=Place(job.file, "limits"),
                expected=listed(choice.table.columns),
                hint=did_you_mean(name, choice.table.columns),
            )
    chosen = (*choice.table.columns, *job.pattern.loads)
    for name in (*job.bench.fittings, *job.bench.places):
        if name not in chosen:
            raise JobFileError(
                f"there is no relay or load {name} in the pattern or chosen for it",
                place=Place(job.file, "coils" if name in job.bench.fittings else "panel"),
                expected=listed(chosen),
                hint=did_you_mean(name, chosen),
            )
    made = SequenceJob(
        job.title, choice.table, job.supply, job.facts, job.limits, job.file, job.bench
    )
    return made, choice


def choose_relays(pattern: Pattern) -> PatternChoice:
    """A sequence that runs through the steps of a pattern for ever.

    Raises:
        TableError: fewer than two steps.
    """
    if len(pattern.rows) < 2:
        raise TableError("a pattern needs at least two steps", place=Place(pattern.file, "pattern"))
    if pattern.step == "slow":
        return _slow(pattern)
    if pattern.step == "ring":
        return _ring(pattern)
    return _pulse(pattern)


def cyclic_code(length: int) -> list[int]:
    """`length` (even, at least 2) different states, each one move from the next, cyclically.

    The reflected code of half the length, then the same backwards with one more column operated.
    """
    if length < 2 or length % 2:
        raise ValueError("a cycle of one-relay moves has an even number of states")
    half = length // 2
    forth = [k ^ k >> 1 for k in range(half)]
    top = 1 << (half - 1).bit_length()
    return forth + [state | top for state in reversed(forth)]


def _names(pattern: Pattern, count: int, taken: Sequence[str] = ()) -> tuple[str, ...]:
    """Names for relays: letters as long as they last and are free, then K1, K2, ..."""
    used = {name.lower() for name in (*pattern.loads, *taken)}
    letters = [chr(65 + k) for k in range(26) if chr(97 + k) not in used]
    if count <= len(letters) and count <= 8:
        return tuple(letters[:count])
    stem = next(s for s in ("K", "R", "REL", "RELAY", "RELAY_") if f"{s.lower()}1" not in used)
    free = (f"{stem}{k}" for k in range(1, 1000) if f"{stem}{k}".lower() not in used)
    return tuple(name for name, _ in zip(free, range(count), strict=False))


def _row(state: int, n: int, loads: Loads) -> Row:
    return Row(tuple(state >> i & 1 for i in range(n)), loads)


def _between(before: Loads, after: Loads) -> Loads:
    return tuple(a if a == b else None for a, b in zip(before, after, strict=True))


def _slow(pattern: Pattern) -> PatternChoice:
    steps = len(pattern.rows)
    odd = steps % 2
    states = cyclic_code(steps + odd)
    n = max(1, max(states).bit_length())
    names = _names(pattern, n)
    notes = [f"{n} {'relay' if n == 1 else 'relays'} step by themselves, one slow move at a time."]
    slow_operate = names
    extra = None
    if odd:
        # The topmost column moves only twice, so one of its moves can be quick by itself: the
        # state before that move is the extra one.  The pattern is turned so that the extra
        # state comes where the loads change least.
        extra = states[steps // 2]
        gap = _least_change(pattern.rows)
        states = states[steps // 2 + 1 :] + states[: steps // 2]
        states = states[steps - 1 - gap :] + states[: steps - 1 - gap]
        slow_operate = names[:-1]
        # The top column operates quickly out of the extra state.
        notes.append(
            f"{steps} steps are odd but a cycle of single moves is even: between step {gap + 1} "
            f"and step {(gap + 1) % steps + 1} the extra state {state_text(extra, n)} "
            f"({' '.join(names)}) is passed, left at once as {names[-1]} operates quickly."
        )
    rows = tuple(_row(s, n, loads) for s, loads in zip(states, pattern.rows, strict=True))
    timing = Timing(slow_release=names, slow_operate=slow_operate)
    table = SequenceTable(names, pattern.loads, rows, timing=timing, file=pattern.file)
    return PatternChoice(table, tuple(range(1, steps + 1)), tuple(notes))


def _least_change(rows: Sequence[Loads]) -> int:
    """Index of the step after which the loads change least; the last one among equals."""
    count = len(rows)

    def changes(k: int) -> tuple[int, int]:
        after = rows[(k + 1) % count]
        return sum(a != b for a, b in zip(rows[k], after, strict=True)), -k

    return min(range(count), key=changes)


def _ring(pattern: Pattern) -> PatternChoice:
    steps = len(pattern.rows)
    names = _names(pattern, steps)
    rows = [
        _row(1 << k | 1 << (k + 1) % steps, steps, loads) for k, loads in enumerate(pattern.rows)
    ]
    notes = [f"A ring of {steps} relays slow to release, two operated in each step."]
    if steps == 2:  # two relays have no two pairs of neighbours: they drop one after the other
        rows = [
            _row(0b11, 2, pattern.rows[0]),
            _row(0b10, 2, pattern.rows[1]),
            _row(0b00, 2, _between(pattern.rows[1], pattern.rows[0])),
        ]
        notes.append(
            f"Between step 2 and step 1 the extra states 00 and 10 ({' '.join(names)}) are "
            "passed, left at once."
        )
    table = SequenceTable(
        names, pattern.loads, tuple(rows), timing=Timing(slow_release=names), file=pattern.file
    )
    return PatternChoice(table, tuple(range(1, steps + 1)), tuple(notes))


def _pulse(pattern: Pattern) -> PatternChoice:
    steps = len(pattern.rows)
    codes = cyclic_code(2 * steps)
    n = max(codes).bit_length()
    used = {name.lower() for name in pattern.loads}
    stems = ("PULSE", "STEP", "PULSE_IN", "STEP_IN")
    pulse = next(name for name in stems if name.lower() not in used)
    relays = _names(pattern, n, (pulse,))
    names = (pulse, *relays)
    rows = []
    for k, loads in enumerate(pattern.rows):
        # A step begins as the pulse operates: that row, then the one with the pulse released.
        rows.append(_row(codes[2 * k] << 1, n + 1, loads))
        rows.append(_row(codes[2 * k + 1] << 1 | 1, n + 1, pattern.rows[(k + 1) % steps]))
    notes = (
        f"{n} relays stepped by {pulse}; each step begins as {pulse} operates and lasts until "
        "it operates again.",
        f"Step 1 is on in row 1, with {pulse} released.",
    )
    table = SequenceTable(names, pattern.loads, tuple(rows), inputs=(pulse,), file=pattern.file)
    return PatternChoice(table, tuple(range(1, 2 * steps + 1, 2)), notes)
