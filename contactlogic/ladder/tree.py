"""Series-parallel networks as trees of contacts.

A tree is a contact (`Leaf`), parts in series, or parts in parallel.  It has two ends, the one
nearer the supply on the left.  Trees carry relay numbers (bit positions of `truth`), not names.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Union

from contactlogic.truth import all_rows, literal

__all__ = [
    "Leaf",
    "Parallel",
    "Series",
    "Tree",
    "contact_count",
    "fewest_poles",
    "leaves",
    "parallel",
    "rename",
    "series",
    "sort_key",
    "table",
]


@dataclass(frozen=True)
class Leaf:
    """One contact: a make (closed when operated) or a break of a relay."""

    relay: int
    make: bool


@dataclass(frozen=True)
class Series:
    """Two or more parts in series, from the supply end; no part is itself a series."""

    parts: tuple[Tree, ...]


@dataclass(frozen=True)
class Parallel:
    """Two or more parts in parallel; no part is itself parallel."""

    parts: tuple[Tree, ...]


Tree = Union[Leaf, Series, Parallel]  # noqa: UP007 - a string-free union that names later classes


def series(parts: Iterable[Tree]) -> Tree:
    """Parts in series, nested series flattened; a single part is returned as it is."""
    flat = [p for part in parts for p in (part.parts if isinstance(part, Series) else (part,))]
    return flat[0] if len(flat) == 1 else Series(tuple(flat))


def parallel(parts: Iterable[Tree]) -> Tree:
    """Parts in parallel, nested parallel groups flattened."""
    flat = [p for part in parts for p in (part.parts if isinstance(part, Parallel) else (part,))]
    return flat[0] if len(flat) == 1 else Parallel(tuple(flat))


def table(tree: Tree, n: int) -> int:
    """Rows in which the tree conducts, as a truth table over `n` relays."""
    if isinstance(tree, Leaf):
        return literal(n, tree.relay, tree.make)
    if isinstance(tree, Series):
        result = all_rows(n)
        for part in tree.parts:
            result &= table(part, n)
        return result
    result = 0
    for part in tree.parts:
        result |= table(part, n)
    return result


def leaves(tree: Tree) -> Iterator[Leaf]:
    """Every contact, left to right."""
    if isinstance(tree, Leaf):
        yield tree
    else:
        for part in tree.parts:
            yield from leaves(part)


def contact_count(tree: Tree) -> int:
    """Makes and breaks counted singly."""
    return sum(1 for _ in leaves(tree))


def fewest_poles(trees: Iterable[Tree], separate: frozenset[int] = frozenset()) -> int:
    """Least poles any arrangement of these trees can have.

    A pole holds at most one make and one break of its relay, so each relay takes at least the
    larger of its makes and breaks; a relay of `separate` takes one entry for each contact.
    """
    tally = Counter((leaf.relay, leaf.make) for tree in trees for leaf in leaves(tree))
    total = 0
    for relay in {relay for relay, _ in tally}:
        makes, breaks = tally[relay, True], tally[relay, False]
        total += makes + breaks if relay in separate else max(makes, breaks)
    return total


def rename(tree: Tree, relays: Sequence[int]) -> Tree:
    """The same tree with relay `i` replaced by `relays[i]`."""
    if isinstance(tree, Leaf):
        return Leaf(relays[tree.relay], tree.make)
    return type(tree)(tuple(rename(part, relays) for part in tree.parts))


def sort_key(tree: Tree) -> tuple[object, ...]:
    """A total order of trees that does not depend on the run."""
    if isinstance(tree, Leaf):
        return (0, tree.relay, tree.make)
    kind = 1 if isinstance(tree, Series) else 2
    return (kind, len(tree.parts), tuple(sort_key(part) for part in tree.parts))


def canonical(tree: Tree) -> Tree:
    """The tree with every group sorted, so that equal groupings compare equal."""
    if isinstance(tree, Leaf):
        return tree
    return type(tree)(tuple(sorted((canonical(part) for part in tree.parts), key=sort_key)))
