"""The jobs that the benchmarks share: codes, adders, comparators, votes, selectors, random.

Each is `(relays, targets)`; bit order as in `contactlogic.truth`.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from random import Random

from contactlogic.truth import Target, all_rows

Task = tuple[tuple[str, ...], dict[str, Target]]
Wish = Callable[[int], bool]

# decimal to seven segments a..g for 0..9: common seven-segment convention (seen)
_DIGITS = "1111110 0110000 1101101 1111001 0110011 1011011 1011111 1110000 1111111 1111011"
SEGMENTS = _DIGITS.split()


def task(n: int, wishes: dict[str, Wish], listed: Iterable[int] | None = None) -> Task:
    """Targets from one predicate a load over row numbers; rows not listed are free."""
    rows = sorted(listed) if listed is not None else list(range(1 << n))
    free = all_rows(n) & ~sum(1 << row for row in rows)
    targets = {
        name: Target(n, sum(1 << row for row in rows if wish(row)), free)
        for name, wish in wishes.items()
    }
    return tuple("ABCDEFGH"[:n]), targets


def ones(row: int) -> int:
    return row.bit_count()


def _random(n: int, loads: int, seed: int, free: float = 0.0) -> Task:
    random = Random(seed)
    targets = {}
    for k in range(loads):
        spare = sum(1 << row for row in range(1 << n) if random.random() < free)
        targets[f"Z{k}"] = Target(n, random.getrandbits(1 << n) & ~spare, spare)
    return tuple("ABCDEFGH"[:n]), targets


def _add(n: int) -> Task:
    mask = (1 << n) - 1
    return task(
        2 * n,
        {f"S{k}": lambda r, k=k: ((r & mask) + (r >> n)) >> k & 1 == 1 for k in range(n + 1)},
    )


def _compare(n: int) -> Task:
    mask = (1 << n) - 1
    return task(
        2 * n,
        {
            "GT": lambda r: (r & mask) > r >> n,
            "EQ": lambda r: (r & mask) == r >> n,
            "LT": lambda r: (r & mask) < r >> n,
        },
    )


JOBS: dict[str, Task] = {
    "staircase": task(2, {"Z": lambda r: ones(r) % 2 == 1}),
    "full adder": task(3, {"SUM": lambda r: ones(r) % 2 == 1, "CARRY": lambda r: ones(r) > 1}),
    "2oo3": task(3, {"Z": lambda r: ones(r) >= 2}),
    "exact counts of 3": task(3, {f"N{k}": lambda r, k=k: ones(r) == k for k in range(4)}),
    "exact counts of 4": task(4, {f"N{k}": lambda r, k=k: ones(r) == k for k in range(5)}),
    "exact counts of 5": task(5, {f"N{k}": lambda r, k=k: ones(r) == k for k in range(6)}),
    "3oo5": task(5, {"Z": lambda r: ones(r) >= 3}),
    "odd parity of 4": task(4, {"Z": lambda r: ones(r) % 2 == 1}),
    "odd parity of 6": task(6, {"Z": lambda r: ones(r) % 2 == 1}),
    "odd parity of 8": task(8, {"Z": lambda r: ones(r) % 2 == 1}),
    "compare 2 bits": _compare(2),
    "compare 3 bits": _compare(3),
    "add 2 bits": _add(2),
    "add 3 bits": _add(3),
    "seven segments": task(
        4, {s: lambda r, k=k: SEGMENTS[r][k] == "1" for k, s in enumerate("abcdefg")}, range(10)
    ),
    "one of ten": task(4, {f"D{k}": lambda r, k=k: r == k for k in range(10)}, range(10)),
    "one of eight": task(3, {f"D{k}": lambda r, k=k: r == k for k in range(8)}),
    "one of sixteen": task(4, {f"D{k}": lambda r, k=k: r == k for k in range(16)}),
    "decimal to reflected": task(
        4, {f"G{k}": lambda r, k=k: (r ^ r >> 1) >> k & 1 == 1 for k in range(4)}, range(10)
    ),
    "decimal to excess-3": task(
        4, {f"X{k}": lambda r, k=k: (r + 3) >> k & 1 == 1 for k in range(4)}, range(10)
    ),
    "select one of four": task(6, {"Z": lambda r: r >> 2 >> (r & 3) & 1 == 1}),
    "random 4, one load": _random(4, 1, 1),
    "random 4, three loads": _random(4, 3, 2),
    "random 5, one load": _random(5, 1, 3),
    "random 5, two loads, half free": _random(5, 2, 4, 0.5),
    "random 6, one load": _random(6, 1, 5),
}
