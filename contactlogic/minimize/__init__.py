"""Two-level covers of a load: sums of products and products of sums, free rows used.

Up to 6 inputs the cover is always proved least (by literals, then terms); up to 10 inputs it is
if the time suffices.  Otherwise the better of the engine's best so far and Espresso's cover, or
else an irredundant cover of our own, comes back, and `Cover.proved` is False.  Relays that neither
the wanted nor the free rows depend on are set aside first and do not count as inputs.

Every engine's answer is checked against the target by the cubes' own truth tables; one that
fails is thrown away, and an answer that is right always comes back.
"""

from __future__ import annotations

import time
from collections.abc import Iterable

from contactlogic.errors import InternalError
from contactlogic.minimize.cube import Cover, Cube, Group, Kind
from contactlogic.minimize.heuristic import espresso, irredundant
from contactlogic.minimize.least import EXACT_INPUTS, IN_PROCESS_INPUTS, Found, find_least
from contactlogic.truth import Target, depends_on

__all__ = ["EXACT_INPUTS", "IN_PROCESS_INPUTS", "Cover", "Cube", "Group", "Kind", "cover", "covers"]


def cover(target: Target, kind: Kind, *, seconds: float = 30.0, seed: int = 0) -> Cover:
    """A two-level cover of `target`, least if its `proved` is True.

    Args:
        target: what the load must do in each row.
        kind: "sop" or "pos".
        seconds: time for the engines in all; tables of up to 6 inputs are solved whatever it is.
            Reading and checking the answers, or our own cover, add a few seconds at 16 inputs.
        seed: the engine's.
    """
    return _best(target, kind, seconds, seed, 1)[0]


def covers(
    target: Target, *, seconds: float = 30.0, seed: int = 0, alternatives: int = 1
) -> tuple[Cover, ...]:
    """Covers of both kinds, best first by literals, then terms; at equal cost "sop" first.

    `seconds` is for both kinds together.  With `alternatives` above 1 up to that many distinct
    covers of equal cost come back for each kind, where the engine finds more.
    """
    end = time.monotonic() + seconds
    sums = _best(target, "sop", seconds / 2, seed, alternatives)
    products = _best(target, "pos", end - time.monotonic(), seed, alternatives)
    return tuple(sorted(sums + products, key=lambda c: (c.literals, c.terms)))


def _best(
    target: Target, kind: Kind, seconds: float, seed: int, alternatives: int
) -> tuple[Cover, ...]:
    wanted = target if kind == "sop" else Target(target.n, target.off, target.free)
    inner, relays = _inner(wanted)
    found = _sums_of_products(inner, seconds, seed, alternatives)
    made = []
    for cubes in found.covers:
        outer = sorted((_outer(cube, relays) for cube in cubes), key=lambda c: (c.literals, c))
        made.append(Cover(kind, tuple(outer), target.n, found.proved))
    if not all(target.accepts(one.table()) for one in made):
        raise InternalError("a cover that was checked is wrong after relays were put back")
    return tuple(made)


def _sums_of_products(target: Target, seconds: float, seed: int, alternatives: int) -> Found:
    end = time.monotonic() + seconds
    candidates: list[tuple[Cube, ...]] = []
    if target.n <= EXACT_INPUTS:
        # some time is kept for Espresso, should there be no proof in time
        limit = seconds - min(2.0, 0.2 * seconds)
        found = find_least(target, seconds=limit, seed=seed, alternatives=alternatives)
        if found is not None:
            right = tuple(cubes for cubes in found.covers if target.accepts(_table(cubes, target)))
            if right and found.proved:
                return Found(right, True)
            candidates.extend(right)
    quick = espresso(target, seconds=end - time.monotonic())
    if quick is not None and target.accepts(_table(quick, target)):
        candidates.append(quick)
    if not candidates:
        candidates.append(irredundant(target))
        if not target.accepts(_table(candidates[0], target)):
            raise InternalError("no cover of a load passed its check")
    return Found((min(candidates, key=_cost),), False)


def _table(cubes: Iterable[Cube], target: Target) -> int:
    union = 0
    for cube in cubes:
        union |= cube.table(target.n)
    return union


def _cost(cubes: tuple[Cube, ...]) -> tuple[int, int]:
    return sum(cube.literals for cube in cubes), len(cubes)


def _inner(target: Target) -> tuple[Target, tuple[int, ...]]:
    """The target over only those inputs that its on or free rows depend on, and which they are."""
    n = target.n
    relays = tuple(
        i for i in range(n) if depends_on(target.on, n, i) or depends_on(target.free, n, i)
    )
    if len(relays) == n:
        return target, relays
    aside = sum(1 << i for i in range(n) if i not in relays)

    def narrow(table: int) -> int:
        bits = format(table, f"0{1 << n}b")[::-1]
        # rows with all relays set aside released keep their order when those bits are left out
        return int("".join(bits[row] for row in range(1 << n) if not row & aside)[::-1], 2)

    return Target(len(relays), narrow(target.on), narrow(target.free)), relays


def _outer(cube: Cube, relays: tuple[int, ...]) -> Cube:
    care = sum(1 << relay for i, relay in enumerate(relays) if cube.care >> i & 1)
    value = sum(1 << relay for i, relay in enumerate(relays) if cube.value >> i & 1)
    return Cube(care, value)
