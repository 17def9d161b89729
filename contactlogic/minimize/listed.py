"""Covers of loads that are wanted on or off in few listed rows among many relays.

Where a table of `2**n` rows is out of reach, a load is the list of its on rows and the list of its
off rows, everything else free.  Espresso (`heuristic`) minimises such lists as they stand; where it
gives nothing, each on row is widened contact by contact until an off row would be met.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.minimize.cube import Cover, Cube
from contactlogic.minimize.heuristic import run_listed

__all__ = ["Wants", "listed_covers"]

_SECONDS = 20.0


@dataclass(frozen=True)
class Wants:
    """Rows in which a load must be on and rows in which it must be off, without repeats."""

    on: tuple[int, ...]
    off: tuple[int, ...]


def listed_covers(
    n: int, wants: Sequence[Wants], *, seconds: float = _SECONDS
) -> list[tuple[Cover, Cover]]:
    """For each load its two covers, fewest contacts first; of equals the sum of products first.

    Args:
        n: relays.
        seconds: for the engine in all; what it has not done by then is done plainly.
    """
    full = (1 << n) - 1
    asked = [
        (on, off)
        for want in wants
        for on, off in ((want.on, want.off), (want.off, want.on))
        if on and off
    ]
    marked = [
        (tuple((full, row) for row in sorted(on)), tuple((full, row) for row in sorted(off)))
        for on, off in asked
    ]
    try:
        answers = iter(run(run_listed, n, marked, seconds=seconds) if marked else [])
    except (ChildCrashed, ChildTimedOut):
        answers = iter([()] * len(marked))
    found = []
    for want in wants:
        kinds = []
        for kind, on, off in (("sop", want.on, want.off), ("pos", want.off, want.on)):
            if not on:
                cubes: tuple[Cube, ...] = ()
            elif not off:
                cubes = (Cube(0, 0),)
            else:
                cubes = tuple(Cube(care, value) for care, value in next(answers))
                if not _right(cubes, on, off):
                    cubes = _widened(n, on, off)
            cubes = tuple(sorted(cubes, key=lambda cube: (cube.literals, cube)))
            kinds.append(Cover("sop" if kind == "sop" else "pos", cubes, n, False))
        first, second = sorted(kinds, key=lambda cover: (cover.literals, cover.terms))
        found.append((first, second))
    return found


def _right(cubes: Sequence[Cube], on: Sequence[int], off: Sequence[int]) -> bool:
    """Whether some cube covers each on row and none an off row."""
    return all(any(row & c.care == c.value for c in cubes) for row in on) and not any(
        row & c.care == c.value for c in cubes for row in off
    )


def _widened(n: int, on: Sequence[int], off: Sequence[int]) -> tuple[Cube, ...]:
    """Cubes for all on rows: each row not covered yet loses contacts while no off row comes in."""
    cubes: list[Cube] = []
    for row in sorted(on):
        if any(row & c.care == c.value for c in cubes):
            continue
        care = (1 << n) - 1
        for i in range(n):
            less = care & ~(1 << i)
            if all((row ^ other) & less for other in off):
                care = less
        cubes.append(Cube(care, row & care))
    return tuple(cubes)
