"""The fewest rows that show every fault, and then the fewest loads to look at.

Both are set covers, solved as integer programs after the usual reductions: of two faults, one
that shows wherever the other does needs no care; of two rows, one that shows no fault that the
other does not is not needed (McCluskey 1956, for tests as for covers).
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import reduce
from operator import or_

from contactlogic.integer import Program
from contactlogic.truth import rows_of

__all__ = ["fewest_looks", "fewest_rows"]

_JOINT = 300  # pairs of a row and a look up to which both are chosen at once
_EFFORT = 20.0  # deterministic seconds of the engine, for each program


def fewest_rows(
    count: int, shown: Sequence[tuple[int, ...]], *, proved: bool = True
) -> tuple[list[int], int]:
    """Rows that show every fault at some look, and how many are needed at least (proved).

    Args:
        count: how many rows there are.
        shown: for each fault the rows that show it, as bits: first without any look, then at each
            look.  Every fault is shown in some row.
        proved: False for a good choice in little time (greedy; Chvatal 1979) with no proof.
    """
    needs = _least_sets({reduce(or_, tables) for tables in shown})
    if not needs:
        return [], 0
    offers = _columns(count, needs)
    if not proved:
        return _greedy(needs, offers), 1
    program = Program(seed=0, effort=_EFFORT)
    used = {row: program.binary() for row in offers}
    for need in needs:
        program.add(sum(used[row] for row in rows_of(need) if row in used) >= 1)
    program.minimize(sum(used.values()))
    if not program.solve():
        return _greedy(needs, offers), 1
    return [row for row, use in used.items() if program.value(use)], program.at_least


def fewest_looks(
    count: int, shown: Sequence[tuple[int, ...]], rows: Sequence[int]
) -> tuple[dict[int, tuple[int, ...]], bool]:
    """Looks in each row, and whether no set of as few rows needs fewer (proved).

    Args:
        count, shown: as for `fewest_rows`.
        rows: rows that do; on a small panel others, as few, may be chosen instead.
    """
    looks = max(map(len, shown), default=1) - 1
    joint = count * looks <= _JOINT
    chosen, proved = _looks(count, shown, range(count) if joint else rows, len(rows))
    return chosen, joint and proved


def _greedy(needs: Sequence[int], offers: Sequence[int]) -> list[int]:
    left = list(needs)
    chosen = []
    while left:
        best = max(offers, key=lambda row: (sum(need >> row & 1 for need in left), -row))
        chosen.append(best)
        left = [need for need in left if not need >> best & 1]
    return sorted(chosen)


def _least_sets(sets: set[int]) -> list[int]:
    """Those that contain no other, ascending by size, then by value."""
    kept: list[int] = []
    for one in sorted(sets, key=lambda bits: (bits.bit_count(), bits)):
        if not any(other & one == other for other in kept):
            kept.append(one)
    return kept


def _columns(count: int, needs: Sequence[int]) -> list[int]:
    """Rows worth choosing: none meets no more needs than another of those kept."""
    meets = [0] * count
    for k, need in enumerate(needs):
        for row in rows_of(need):
            meets[row] |= 1 << k
    kept: list[int] = []
    for row in sorted(range(count), key=lambda row: (-meets[row].bit_count(), row)):
        if meets[row] and not any(meets[row] & ~meets[other] == 0 for other in kept):
            kept.append(row)
    return sorted(kept)


def _looks(
    count: int, shown: Sequence[tuple[int, ...]], among: Sequence[int] | range, most: int
) -> tuple[dict[int, tuple[int, ...]], bool]:
    """Looks, and the rows for them: at most `most` of those `among`."""
    looks = max(map(len, shown), default=1) - 1
    allowed = sum(1 << row for row in among)
    # One number for a fault: which rows show it without a look, then at each look.
    needs = _least_sets(
        {sum((table & allowed) << count * k for k, table in enumerate(tables)) for tables in shown}
    )
    program = Program(seed=0, effort=_EFFORT)
    used = {row: program.binary() for row in among}
    looked: dict[tuple[int, int], object] = {}
    for need in needs:
        ways = []
        for bit in rows_of(need):
            look, row = divmod(bit, count)
            if not look:
                ways.append(used[row])
            else:
                if (row, look) not in looked:
                    looked[row, look] = program.binary()
                    program.add(looked[row, look] <= used[row])
                ways.append(looked[row, look])
        program.add(sum(ways) >= 1)
    program.add(sum(used.values()) <= most)
    program.minimize(sum(looked.values()))
    if not program.solve():
        rows = among if len(among) <= most else []
        every = tuple(range(looks))
        return dict.fromkeys(rows, every), False
    chosen = {
        row: tuple(
            look - 1
            for look in range(1, looks + 1)
            if (row, look) in looked and program.value(looked[row, look])
        )
        for row, use in used.items()
        if program.value(use)
    }
    return chosen, program.at_least == program.cost
