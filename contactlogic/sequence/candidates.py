"""Series-parallel formulas by rising number of contacts, to be tried one after the other."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations

from contactlogic.algebra import Break, Constant, Expression, Name, Parallel, Series
from contactlogic.truth import Target, all_rows, variable

__all__ = ["contacts_of", "formulas", "plain_formulas"]

_FORMULAS = 100_000  # most pairs of formulas joined
_LONGEST = 6  # contacts of a single series or parallel


def contacts_of(expression: Expression) -> int:
    """Contacts of a formula as it is written."""
    if isinstance(expression, Name):
        return 1
    if isinstance(expression, Constant):
        return 0
    if isinstance(expression, Break):
        return contacts_of(expression.part)
    return sum(contacts_of(part) for part in expression.parts)


def formulas(names: Sequence[str]) -> Iterator[tuple[int, int, Expression]]:
    """Series-parallel formulas by rising number of contacts, each function once.

    Yields:
        Contacts, truth table, formula.
    """
    n = len(names)
    full = all_rows(n)
    seen: set[int] = {0, full}
    yield 0, 0, Constant(False)
    yield 0, full, Constant(True)
    levels: list[list[tuple[int, Expression]]] = [[], []]
    for i, name in enumerate(names):
        table = variable(n, i)
        contacts: tuple[tuple[int, Expression], ...] = (
            (table, Name(name)),
            (full & ~table, Break(Name(name))),
        )
        for value, formula in contacts:
            seen.add(value)
            levels[1].append((value, formula))
            yield 1, value, formula
    looked = 0
    for size in range(2, 2 * n):
        levels.append([])
        for left in range(size // 2, 0, -1):
            for one, first in levels[left]:
                for two, second in levels[size - left]:
                    for kind, table in ((Series, one & two), (Parallel, one | two)):
                        looked += 1
                        if table in seen:
                            continue
                        if looked > _FORMULAS:
                            return
                        seen.add(table)
                        formula = _joined(kind, first, second)
                        levels[size].append((table, formula))
                        yield size, table, formula


def plain_formulas(target: Target, names: Sequence[str]) -> list[tuple[int, int, Expression]]:
    """Single series and parallels that keep a target, by rising number of contacts.

    As `formulas`, but of any length: every contact of a series is closed wherever it must conduct,
    every contact of a parallel open wherever it must not.
    """
    full = all_rows(target.n)
    off = full & ~target.on & ~target.free
    found: list[tuple[int, int, Expression]] = []
    for kind, wanted, start in ((Series, target.on, full), (Parallel, off, 0)):
        useful: list[tuple[int, Expression]] = []
        for i, name in enumerate(names):
            made = variable(target.n, i)
            for table, formula in ((made, Name(name)), (full & ~made, Break(Name(name)))):
                if not wanted & (~table if kind is Series else table):
                    useful.append((table, formula))
        for size in range(2, min(len(useful), _LONGEST) + 1):
            for chosen in combinations(useful, size):
                table = start
                for part, _ in chosen:
                    table = table & part if kind is Series else table | part
                found.append((size, table, kind(tuple(formula for _, formula in chosen))))
    return sorted(found, key=lambda one: one[0])


def _joined(
    kind: type[Series] | type[Parallel], first: Expression, second: Expression
) -> Expression:
    """Two parts in one series or parallel, without one inside another of its kind."""
    parts: list[Expression] = []
    for part in (first, second):
        parts += part.parts if isinstance(part, kind) else [part]
    return kind(tuple(parts))
