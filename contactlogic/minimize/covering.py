"""The covering table: which cubes are certain, which can be struck out, what is left to choose.

Rows are the on rows, columns the candidate cubes.  Reductions after Quine (1952) and McCluskey
(1956): a row with one column makes that column *essential*; a row that is covered whenever
another row is needs no care (row dominance); a column whose rows another column covers at no more
cost is never needed (column dominance).  Rows and columns are Python ints used as bit vectors, so
"whoever covers all of these" is a few ANDs.  The choice among what is left is the engine's
(`least`), not made here.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from contactlogic.minimize.cube import Cube
from contactlogic.truth import rows_of

__all__ = ["Choice", "reduce_table"]


@dataclass(frozen=True)
class Choice:
    """What is left to choose after the reductions.

    Args:
        certain: cubes in every least cover that the reductions kept.
        columns: cubes still to choose from.
        rows: per row left, the indices into `columns` that cover it, ascending; two or more each.
    """

    certain: tuple[Cube, ...]
    columns: tuple[Cube, ...]
    rows: tuple[tuple[int, ...], ...]


def reduce_table(on: int, cubes: Sequence[Cube], n: int, *, keep_equals: bool = False) -> Choice:
    """Reduce the table of `on` rows (a truth table over `n` inputs) against `cubes`.

    With `keep_equals` a column is struck out only for one that costs less, so that every least
    cover is still among the choices.  The cubes must cover `on`, else ValueError.
    """
    costs = [cube.literals for cube in cubes]
    covers = [cube.table(n) & on for cube in cubes]  # per column, its rows
    columns_of = dict.fromkeys(rows_of(on), 0)  # per row, its columns
    for column, covered in enumerate(covers):
        for row in rows_of(covered):
            columns_of[row] |= 1 << column
    if not all(columns_of.values()):
        raise ValueError("the cubes do not cover every on row")
    rows, columns = on, (1 << len(cubes)) - 1
    certain = 0
    changed = True
    while changed and rows:
        changed = False
        for row in rows_of(rows):
            only = columns_of[row] & columns
            if rows >> row & 1 and not only & (only - 1):
                certain |= only
                columns &= ~only
                rows &= ~covers[only.bit_length() - 1]
                changed = True
        for row in rows_of(rows):
            if not rows >> row & 1:
                continue
            implied = rows & ~(1 << row)  # rows covered by whichever column covers this one
            for column in rows_of(columns_of[row] & columns):
                implied &= covers[column]
                if not implied:
                    break
            if implied:
                rows &= ~implied
                changed = True
        for column in rows_of(columns):
            covered = covers[column] & rows
            better = columns & ~(1 << column)
            for row in rows_of(covered):
                better &= columns_of[row]
                if not better:
                    break
            if not covered or any(
                costs[other] < costs[column] or (costs[other] == costs[column] and not keep_equals)
                for other in rows_of(better)
            ):
                columns &= ~(1 << column)
                changed = True
    left = tuple(rows_of(columns)) if rows else ()
    place = {column: i for i, column in enumerate(left)}
    return Choice(
        certain=tuple(cubes[column] for column in rows_of(certain)),
        columns=tuple(cubes[column] for column in left),
        rows=tuple(
            tuple(place[c] for c in rows_of(columns_of[r] & columns)) for r in rows_of(rows)
        ),
    )
