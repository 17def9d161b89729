"""Good covers where a proof takes too long: Espresso, and an irredundant cover of our own.

Espresso (Brayton, Hachtel, McMullen and Sangiovanni-Vincentelli, "Logic Minimization Algorithms
for VLSI Synthesis", 1984) comes from pyeda and runs in a child, since it is native code that has
no time limit of its own.  Our own cover always exists: the recursion of Minato ("Fast generation
of irredundant sum-of-products forms from binary decision diagrams", 1992, after Morreale 1970) on
truth tables, each cube then expanded until it is prime and cubes not needed dropped.  Espresso is
given that recursion's cubes of the on, free and off rows, which spares it thousands of single rows.
"""

from __future__ import annotations

import time
from collections.abc import Sequence
from functools import cache
from typing import Any

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.minimize.cube import Cube
from contactlogic.truth import Target, all_rows, variable

__all__ = ["cubes_of", "espresso", "irredundant", "run_espresso", "run_listed"]

Pairs = tuple[tuple[int, int], ...]
"""Cubes as (care, value), plain for the way to the child and back."""


def espresso(target: Target, *, seconds: float) -> tuple[Cube, ...] | None:
    """Espresso's sum of products for `target`; None if it was late, crashed or gave no cubes.

    The answer is Espresso's word: callers check it against the target.
    """
    end = time.monotonic() + seconds
    parts = (target.on, target.free, target.off)
    lists = [_plain(cubes_of(Target(target.n, part))) for part in parts]
    try:
        found = run(run_espresso, target.n, *lists, seconds=end - time.monotonic())
        return tuple(Cube(care, value) for care, value in found)
    except (ChildTimedOut, ChildCrashed, ValueError):
        return None


def run_espresso(n: int, on: Pairs, free: Pairs, off: Pairs) -> Pairs:
    """Espresso on cubes of the three kinds of rows; runs in the child."""
    from pyeda.boolalg.espresso import DTYPE, FTYPE, RTYPE

    return _engine(n, ((1, on), (2, free), (0, off)), FTYPE | DTYPE | RTYPE)


def run_listed(n: int, wants: Sequence[tuple[Pairs, Pairs]]) -> list[Pairs]:
    """Espresso for several loads, each given by cubes that are on and off; all else is free.

    Runs in the child.
    """
    from pyeda.boolalg.espresso import FTYPE, RTYPE

    return [_engine(n, ((1, on), (0, off)), FTYPE | RTYPE) for on, off in wants]


def _engine(n: int, marked: Sequence[tuple[int, Pairs]], kind: int) -> Pairs:
    from pyeda.boolalg.espresso import espresso as engine
    from pyeda.boolalg.espresso import set_config
    from pyeda.boolalg.minimization import CONFIG

    # the engine's marks: of an input 1 released, 2 operated, 3 either; of the output 1, 0, 2 free
    cover = [
        (tuple(2 if value >> i & 1 else 1 if care >> i & 1 else 3 for i in range(n)), (mark,))
        for mark, cubes in marked
        for care, value in cubes
    ]
    set_config(**CONFIG)
    found = engine(n, 1, cover, intype=kind)
    return tuple(
        sorted(
            (
                sum(1 << i for i, mark in enumerate(inputs) if mark != 3),
                sum(1 << i for i, mark in enumerate(inputs) if mark == 2),
            )
            for inputs, (output,) in found
            if output == 1
        )
    )


def irredundant(target: Target) -> tuple[Cube, ...]:
    """A sum of primes of `target` of which none can be left out."""
    import numpy

    n = target.n
    shape = (2,) * n  # one axis an input, the last input first

    def grid(table: int) -> Any:
        packed = numpy.frombuffer(table.to_bytes(max(1, 1 << n >> 3), "little"), numpy.uint8)
        return numpy.unpackbits(packed, count=1 << n, bitorder="little").reshape(shape)

    def place(cube: Cube) -> tuple[int | slice, ...]:
        return tuple(
            cube.value >> i & 1 if cube.care >> i & 1 else slice(None) for i in reversed(range(n))
        )

    allowed = target.on | target.free
    spare = numpy.zeros(shape, numpy.uint32)  # per row: bit i if it may be left by moving relay i
    for i in range(n):
        spare |= grid(allowed & _moved(allowed, n, i)).astype(numpy.uint32) << i
    primes: dict[Cube, None] = {}
    for cube in cubes_of(target):
        while droppable := int(numpy.bitwise_and.reduce(spare[place(cube)], axis=None)) & cube.care:
            bit = droppable & -droppable
            cube = Cube(cube.care & ~bit, cube.value & ~bit)
        primes[cube] = None
    times = numpy.zeros(shape, numpy.uint16)  # per row: by how many cubes it is covered
    for cube in primes:
        times[place(cube)] += 1
    times[grid(target.on) == 0] = 2**16 - 1  # rows that need no cube, whatever is taken away
    kept = []
    for cube in sorted(primes, key=_order, reverse=True):  # many contacts are the first to go
        if (times[place(cube)] > 1).all():
            times[place(cube)] -= 1
        else:
            kept.append(cube)
    return tuple(reversed(kept))


def cubes_of(target: Target) -> tuple[Cube, ...]:
    """An irredundant sum of products of `target`, by splitting on the last input."""

    @cache  # parity and its like meet the same halves again and again
    def split(lower: int, upper: int, n: int) -> tuple[tuple[Cube, ...], int]:
        if not lower:
            return (), 0
        if upper == all_rows(n):
            return (Cube(0, 0),), upper
        half = 1 << (n - 1)
        mask = (1 << half) - 1
        low0, low1, up0, up1 = lower & mask, lower >> half, upper & mask, upper >> half
        cubes0, table0 = split(low0 & ~up1, up0, n - 1)
        cubes1, table1 = split(low1 & ~up0, up1, n - 1)
        either, table = split(low0 & ~table0 | low1 & ~table1, up0 & up1, n - 1)
        bit = 1 << (n - 1)
        cubes = tuple(Cube(c.care | bit, c.value) for c in cubes0)
        cubes += tuple(Cube(c.care | bit, c.value | bit) for c in cubes1)
        return cubes + either, table0 | table | (table1 | table) << half

    return split(target.on, target.on | target.free, target.n)[0]


def _moved(table: int, n: int, i: int) -> int:
    """The rows of `table` after relay `i` moves."""
    operated = table & variable(n, i)
    return operated >> (1 << i) | (table ^ operated) << (1 << i)


def _order(cube: Cube) -> tuple[int, Cube]:
    return cube.literals, cube


def _plain(cubes: tuple[Cube, ...]) -> Pairs:
    return tuple((cube.care, cube.value) for cube in cubes)
