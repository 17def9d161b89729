"""Provably least covers: fewest literals, then fewest terms.

The covering table is reduced (`covering`), and what is left to choose is an integer program (one
0/1 variable a cube, one row "at least one of these" an on row) that CP-SAT solves.  Literals and
terms are one objective: a literal weighs more than all terms of any irredundant cover together.

CP-SAT was chosen by measurement (tests/bench/bench_cover.py) over RC2 MaxSAT, SCIP and HiGHS.

Up to `IN_PROCESS_INPUTS` inputs the tables are so small (some hundred columns) that a child's
start would cost more than the choice; above that the engine runs in a child.
"""

from __future__ import annotations

import time
from dataclasses import dataclass

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.integer import Program
from contactlogic.minimize.covering import Choice, reduce_table
from contactlogic.minimize.cube import Cube
from contactlogic.minimize.primes import primes
from contactlogic.truth import Target

__all__ = ["EXACT_INPUTS", "IN_PROCESS_INPUTS", "Found", "choose", "find_least"]

IN_PROCESS_INPUTS = 6
"""Up to here the choice is made in this process, and without a time limit."""

EXACT_INPUTS = 10
"""Up to here a provably least cover is tried."""

Chosen = tuple[tuple[tuple[int, ...], ...], bool]
"""Sets of columns of equal cost, each ascending, and whether they are proved least."""


@dataclass(frozen=True)
class Found:
    """Sums of products for one target, of equal cost, and whether they are proved least."""

    covers: tuple[tuple[Cube, ...], ...]
    proved: bool


def find_least(target: Target, *, seconds: float, seed: int, alternatives: int = 1) -> Found | None:
    """Least sums of products of `target`, up to `alternatives` distinct ones; None if none in time.

    `seconds` bounds the engine above `IN_PROCESS_INPUTS` inputs, and below that only the search
    for alternatives.  The answer is the engine's word: callers check it against the target.
    """
    end = time.monotonic() + seconds
    candidates = primes(target)
    choice = reduce_table(target.on, candidates, target.n, keep_equals=alternatives > 1)
    if not choice.rows:
        return Found((choice.certain,), True)
    if target.n <= IN_PROCESS_INPUTS:
        chosen = choose(choice, None, seconds, seed, alternatives)
    else:
        hard = end - time.monotonic()
        soft = hard - min(1.0, 0.3 * hard)  # so that the best found comes back before the kill
        try:
            chosen = run(choose, choice, soft, soft, seed, alternatives, seconds=hard)
        except (ChildTimedOut, ChildCrashed):
            return None
    answers, proved = chosen
    if not answers:
        return None
    covers = tuple(
        choice.certain + tuple(choice.columns[column] for column in answer) for answer in answers
    )
    return Found(covers, proved)


def choose(
    choice: Choice, seconds: float | None, more_seconds: float, seed: int, alternatives: int
) -> Chosen:
    """Least sets of columns that cover every row of `choice`.

    `seconds` bounds the first set (None: no limit), `more_seconds` the first and all others.
    """
    end = time.monotonic() + more_seconds
    scale = len(choice.rows) + 1  # an irredundant set has no more columns than rows
    weights = [cube.literals * scale + 1 for cube in choice.columns]
    program = Program(seed=seed)
    used = [program.binary() for _ in choice.columns]
    total = sum(weight * use for weight, use in zip(weights, used, strict=True))
    for row in choice.rows:
        program.add(sum(used[column] for column in row) >= 1)
    program.minimize(total)
    if not program.solve(seconds):
        return (), False
    answers = [_columns(program, used)]
    cost = sum(weights[column] for column in answers[0])
    if program.at_least < cost:
        return tuple(answers), False
    program.add(total <= cost)
    while len(answers) < alternatives:
        left = end - time.monotonic()
        if left <= 0:
            break
        # not the last one again; no set of the same cost can contain it
        program.add(sum(used[column] for column in answers[-1]) <= len(answers[-1]) - 1)
        if not program.solve(left):
            break
        answers.append(_columns(program, used))
    return tuple(answers), True


def _columns(program: Program, used: list) -> tuple[int, ...]:  # type: ignore[type-arg]
    return tuple(column for column, use in enumerate(used) if program.value(use))
