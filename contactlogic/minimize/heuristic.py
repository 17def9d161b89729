"""Good covers where a proof takes too long: Espresso, and an irredundant cover of our own.

Espresso (Brayton, Hachtel, McMullen and Sangiovanni-Vincentelli, "Logic Minimization Algorithms
for VLSI Synthesis", 1984) comes from pyeda and runs in a child, since it is native code that has
no time limit of its own.  Our own cover always exists: the recursion of Minato ("Fast generation
of irredundant sum-of-products forms from binary decision diagrams", 1992, after Morreale 1970) on
truth tables, each cube then expanded until it is prime and cubes not needed dropped.  It is also
what Espresso starts from, which spares it thousands of single rows.
"""

from __future__ import annotations

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.minimize.cube import Cube
from contactlogic.truth import Target, all_rows

__all__ = ["espresso", "irredundant"]

Pairs = tuple[tuple[int, int], ...]
"""Cubes as (care, value), plain for the way to the child and back."""


def espresso(target: Target, *, seconds: float) -> tuple[Cube, ...] | None:
    """Espresso's sum of products for `target`; None if it was late, crashed or gave no cubes.

    The answer is Espresso's word: callers check it against the target.
    """
    parts = (target.on, target.free, target.off)
    lists = [_plain(_recursive(part, part, target.n)[0]) for part in parts]
    try:
        found = run(run_espresso, target.n, *lists, seconds=seconds)
        return tuple(Cube(care, value) for care, value in found)
    except (ChildTimedOut, ChildCrashed, ValueError):
        return None


def run_espresso(n: int, on: Pairs, free: Pairs, off: Pairs) -> Pairs:
    """Espresso on cubes of the three kinds of rows; runs in the child."""
    from pyeda.boolalg.espresso import DTYPE, FTYPE, RTYPE, set_config
    from pyeda.boolalg.espresso import espresso as engine
    from pyeda.boolalg.minimization import CONFIG

    # the engine's marks: of an input 1 released, 2 operated, 3 either; of the output 1, 0, 2 free
    cover = [
        (tuple(2 if value >> i & 1 else 1 if care >> i & 1 else 3 for i in range(n)), (mark,))
        for mark, cubes in ((1, on), (2, free), (0, off))
        for care, value in cubes
    ]
    set_config(**CONFIG)
    found = engine(n, 1, cover, intype=FTYPE | DTYPE | RTYPE)
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
    cubes, _ = _recursive(target.on, target.on | target.free, target.n)
    allowed = target.on | target.free
    expanded = dict.fromkeys(_expand(cube, allowed, target.n) for cube in cubes)
    return _drop_redundant(sorted(expanded, key=lambda c: (c.literals, c)), target)


def _recursive(lower: int, upper: int, n: int) -> tuple[list[Cube], int]:
    """Cubes that cover `lower` within `upper`, and their table, by splitting on the last input."""
    if not lower:
        return [], 0
    if upper == all_rows(n):
        return [Cube(0, 0)], upper
    half = 1 << (n - 1)
    mask = (1 << half) - 1
    low0, low1, up0, up1 = lower & mask, lower >> half, upper & mask, upper >> half
    cubes0, table0 = _recursive(low0 & ~up1, up0, n - 1)
    cubes1, table1 = _recursive(low1 & ~up0, up1, n - 1)
    both, table = _recursive(low0 & ~table0 | low1 & ~table1, up0 & up1, n - 1)
    bit = 1 << (n - 1)
    cubes = [Cube(c.care | bit, c.value) for c in cubes0]
    cubes += [Cube(c.care | bit, c.value | bit) for c in cubes1]
    return cubes + both, table0 | table | (table1 | table) << half


def _expand(cube: Cube, allowed: int, n: int) -> Cube:
    """Contacts dropped one by one, while every row stays allowed."""
    table = cube.table(n)
    for i in range(n):
        if cube.care >> i & 1:
            step = 1 << i
            wider = table | (table >> step if cube.value & step else table << step)
            if not wider & ~allowed:
                table = wider
                cube = Cube(cube.care & ~step, cube.value & ~step)
    return cube


def _drop_redundant(cubes: list[Cube], target: Target) -> tuple[Cube, ...]:
    """Cubes of which none can be left out; those with many contacts go first."""
    once = twice = 0
    for cube in cubes:
        table = cube.table(target.n) & target.on
        twice |= once & table
        once |= table
    alone = once & ~twice
    kept = [cube for cube in cubes if cube.table(target.n) & alone]
    union = 0
    for cube in kept:
        union |= cube.table(target.n)
    doubtful = [cube for cube in cubes if not cube.table(target.n) & alone]
    needed: list[Cube] = []
    before = [union]  # rows covered by the certain ones and the doubtful ones up to here
    for cube in doubtful:
        before.append(before[-1] | cube.table(target.n))
    for cube, covered in zip(reversed(doubtful), reversed(before[:-1]), strict=True):
        if cube.table(target.n) & target.on & ~(covered | union):
            needed.append(cube)
            union |= cube.table(target.n)
    return tuple(sorted(kept + needed, key=lambda c: (c.literals, c)))


def _plain(cubes: list[Cube]) -> Pairs:
    return tuple((cube.care, cube.value) for cube in cubes)
