"""The fewest rows that show every fault, and then the fewest loads to look at.

Both are set covers, solved as integer programs after the usual reductions: of two faults, one
that shows wherever the other does needs no care; of two rows, one that shows no fault that the
other does not is not needed (McCluskey 1956, for tests as for covers).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from contactlogic.integer import Program
from contactlogic.truth import rows_of

__all__ = ["Choice", "fewest"]

_JOINT = 1500  # pairs of a row and a look up to which both are chosen at once
_EFFORT = 20.0  # deterministic seconds of the engine, for each program


@dataclass(frozen=True)
class Choice:
    """Rows chosen, and looks in each.

    Args:
        looks: chosen row -> looks, ascending; looks are counted from 0.
        at_least: so many rows are needed (proved).
        least_looks: whether no set of as few rows needs fewer looks (proved).
    """

    looks: dict[int, tuple[int, ...]]
    at_least: int
    least_looks: bool


def fewest(count: int, shown: Sequence[tuple[int, ...]]) -> Choice:
    """The least choice.

    Args:
        count: how many rows there are.
        shown: for each fault the rows that show it, as bits: first without any look, then at each
            look.  Every fault is shown in some row.
    """
    if not shown:
        return Choice({}, 0, True)
    rows, at_least = _fewest_rows(count, shown)
    looks = len(shown[0]) - 1
    joint = count * looks <= _JOINT
    chosen, proved = _fewest_looks(count, shown, range(count) if joint else rows, len(rows))
    return Choice(chosen, at_least, joint and proved)


def _fewest_rows(count: int, shown: Sequence[tuple[int, ...]]) -> tuple[list[int], int]:
    unions = set()
    for tables in shown:
        union = 0
        for table in tables:
            union |= table
        unions.add(union)
    needs = _least_sets(unions)
    offers = _columns(count, needs)
    program = Program(seed=0, effort=_EFFORT)
    used = {row: program.binary() for row in offers}
    for need in needs:
        program.add(sum(used[row] for row in rows_of(need) if row in used) >= 1)
    program.minimize(sum(used.values()))
    if not program.solve():
        return _greedy(needs, offers), 1
    return [row for row, use in used.items() if program.value(use)], program.at_least


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


def _fewest_looks(
    count: int, shown: Sequence[tuple[int, ...]], among: Sequence[int] | range, most: int
) -> tuple[dict[int, tuple[int, ...]], bool]:
    """Looks, and the rows for them: at most `most` of those `among`."""
    looks = len(shown[0]) - 1
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
