"""Least series-parallel networks for every function of up to four relays.

Dynamic programming over network size: a network of k contacts is one of i and one of k - i
contacts in series or in parallel, so the functions that need k contacts are those first reached by
a conjunction or disjunction of functions that need i and k - i (the formula-size recurrence of
Knuth, The Art of Computer Programming 4A, 7.1.2).  Permuting relays and swapping makes with breaks
changes no size, so the smaller side of each pair runs over class representatives only (222 classes
would do with negation too; 402 are used, OEIS A000616).

The worst sizes found, 1, 4, 10, 16 for one to four relays, are OEIS A056287 plus one.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from itertools import permutations
from typing import TYPE_CHECKING, Any

from contactlogic.ladder.tree import Leaf, Tree, canonical, parallel, series
from contactlogic.truth import literal

if TYPE_CHECKING:
    import numpy

    Array = numpy.ndarray[Any, Any]

__all__ = ["RELAYS", "SizeTable", "least_trees", "size_table"]

RELAYS = 4
_ROWS = 1 << RELAYS
_FUNCTIONS = 1 << _ROWS
_UNKNOWN = 255


@dataclass(frozen=True)
class SizeTable:
    """Contacts that each of the 65536 functions of four relays needs in series-parallel form.

    `size[f]` is that number (0 for the constants) and `by_size[k]` lists the functions that need
    exactly k, ascending.
    """

    size: Array
    by_size: tuple[Array, ...]

    def completions(self, on: int, free: int) -> tuple[int, list[int]]:
        """Least size over all completions of a function with free rows, and those that have it."""
        import numpy

        every = numpy.arange(_FUNCTIONS, dtype=numpy.uint16)
        fits = every[(every & numpy.uint16(0xFFFF & ~free)) == on]
        sizes = self.size[fits]
        least = int(sizes.min())
        return least, [int(f) for f in fits[sizes == least]]

    def splits(self, function: int) -> Iterator[tuple[bool, int, int]]:
        """Pairs of smaller functions, sizes adding up, whose join is `function`."""
        import numpy

        size = int(self.size[function])
        for i in range(1, size // 2 + 1):
            small, large = self.by_size[i], self.by_size[size - i]
            for in_series in (False, True):
                f = numpy.uint16(function)
                if in_series:
                    left, right = small[small & f == f], large[large & f == f]
                    hits = (left[:, None] & right[None, :]) == f
                else:
                    left, right = small[small | f == f], large[large | f == f]
                    hits = (left[:, None] | right[None, :]) == f
                for a, b in numpy.argwhere(hits):
                    yield in_series, int(left[a]), int(right[b])


@cache
def least_trees(function: int, limit: int) -> tuple[Tree, ...]:
    """Up to `limit` different least trees of a function of four relays that is not constant."""
    table = size_table()
    if table.size[function] == 1:
        kinds = ((relay, make) for relay in range(RELAYS) for make in (True, False))
        return tuple(Leaf(*kind) for kind in kinds if literal(RELAYS, *kind) == function)
    found: dict[Tree, None] = {}
    for in_series, left, right in table.splits(function):
        join = series if in_series else parallel
        for first in least_trees(left, limit):
            for second in least_trees(right, limit):
                found.setdefault(canonical(join((first, second))))
                if len(found) >= limit:
                    return tuple(found)
    return tuple(found)


@cache
def size_table() -> SizeTable:
    """The table, made once a process (a fraction of a second)."""
    import numpy

    size = numpy.full(_FUNCTIONS, _UNKNOWN, dtype=numpy.uint8)
    size[[0, _FUNCTIONS - 1]] = 0
    images = _images()
    literals = [literal(RELAYS, i, make) for i in range(RELAYS) for make in (True, False)]
    size[literals] = 1
    none = numpy.empty(0, dtype=numpy.uint16)
    by_size = [none, numpy.array(sorted(literals), dtype=numpy.uint16)]
    classes = [none, by_size[1][:1]]
    while (size == _UNKNOWN).any():
        k = len(by_size)
        reached = numpy.zeros(_FUNCTIONS, dtype=bool)
        for i in range(1, k // 2 + 1):
            for chosen in classes[i]:
                reached[by_size[k - i] & chosen] = True
                reached[by_size[k - i] | chosen] = True
        fresh = numpy.flatnonzero(reached & (size == _UNKNOWN))
        leaders = []
        for function in fresh:
            if size[function] == _UNKNOWN:
                leaders.append(function)
                size[images(int(function))] = k
        by_size.append(numpy.flatnonzero(size == k).astype(numpy.uint16))
        classes.append(numpy.array(leaders, dtype=numpy.uint16))
    return SizeTable(size, tuple(by_size))


def _images() -> Any:
    """A function that gives every image of a table under permuting and negating the relays."""
    import numpy

    rows = numpy.arange(_ROWS)
    moved = []
    for order in permutations(range(RELAYS)):
        shuffled = sum(((rows >> i) & 1) << order[i] for i in range(RELAYS))
        moved += [shuffled ^ flip for flip in range(_ROWS)]
    source = numpy.array(moved)  # image j takes its row r from row source[j, r]
    weights = 1 << rows

    def images(function: int) -> Array:
        bits = (function >> rows) & 1
        result: Array = bits[source] @ weights
        return result

    return images
