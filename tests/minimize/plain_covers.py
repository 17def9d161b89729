"""Least covers by brute force, written with strings so that no code is shared.

A cube is a string over 0, 1 and -, first character relay 0, as in "1-0".
"""

from __future__ import annotations

import heapq
from itertools import combinations, product


def covered(cube: str) -> int:
    """Rows of a cube as a truth table."""
    table = 0
    for row in range(2 ** len(cube)):
        bits = [str(row // 2**i % 2) for i in range(len(cube))]
        if all(mark in ("-", bit) for mark, bit in zip(cube, bits, strict=True)):
            table += 2**row
    return table


def size(cube: str) -> int:
    return len(cube) - cube.count("-")


def cheapest_unions(n: int) -> dict[int, tuple[int, int]]:
    """Per truth table: least (literals, terms) of cubes whose union is exactly that table.

    Dijkstra over tables: from a table each cube leads to the union with it.
    """
    cubes = [(covered(c), size(c)) for c in map("".join, product("01-", repeat=n))]
    done: dict[int, tuple[int, int]] = {}
    queue = [(0, 0, 0)]
    while queue:
        literals, terms, table = heapq.heappop(queue)
        if table in done:
            continue
        done[table] = (literals, terms)
        for rows, more in cubes:
            if table | rows not in done:
                heapq.heappush(queue, (literals + more, terms + 1, table | rows))
    return done


def least_cost(unions: dict[int, tuple[int, int]], on: int, free: int) -> tuple[int, int]:
    """Least (literals, terms) over every way to settle the free rows."""
    best = unions[on]
    settled = free
    while settled:
        best = min(best, unions[on | settled])
        settled = (settled - 1) & free
    return best


def prime_cubes(n: int, on: int, free: int) -> set[str]:
    """Cubes within on-or-free that touch an on row and lie in no larger such cube."""
    inside = [c for c in map("".join, product("01-", repeat=n)) if not covered(c) & ~(on | free)]
    return {
        cube
        for cube in inside
        if covered(cube) & on
        and not any(c != cube and covered(cube) & ~covered(c) == 0 for c in inside)
    }


def least_covers(n: int, on: int, free: int) -> set[frozenset[str]]:
    """Every least cover, by trying all sets of prime cubes."""
    cubes = sorted(prime_cubes(n, on, free))
    found: dict[tuple[int, int], set[frozenset[str]]] = {}
    for count in range(len(cubes) + 1):
        for chosen in combinations(cubes, count):
            union = 0
            for cube in chosen:
                union |= covered(cube)
            if not on & ~union:
                cost = (sum(map(size, chosen)), count)
                found.setdefault(cost, set()).add(frozenset(chosen))
    return found[min(found)]
