"""Factoring two-level covers into series-parallel trees.

Algebraic: divide a sum of products by its kernels, best saving first (Brayton and McMullen, "The
decomposition and factorization of Boolean expressions", ISCAS 1982).  A product of sums is the
dual: the same with series and parallel exchanged.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Sequence

from contactlogic.ladder.tree import Leaf, Tree, parallel, series

__all__ = ["Term", "factor_products", "factor_sums"]

Term = frozenset[Leaf]
_MOST_KERNELS = 400


def factor_products(terms: Sequence[Term]) -> Tree:
    """A tree for a sum of products; each term is a set of contacts in series, none is empty."""
    return _factor(list(terms), series, parallel)


def factor_sums(terms: Sequence[Term]) -> Tree:
    """A tree for a product of sums; each term is a set of contacts in parallel."""
    return _factor(list(terms), parallel, series)


Join = Callable[[Iterable[Tree]], Tree]


def _leaf_key(leaf: Leaf) -> tuple[int, bool]:
    return (leaf.relay, leaf.make)


def _sorted(term: Term) -> list[Tree]:
    return [*sorted(term, key=_leaf_key)]


def _term_key(term: Term) -> tuple[int, tuple[tuple[int, bool], ...]]:
    return (len(term), tuple(sorted(map(_leaf_key, term))))


def _factor(terms: list[Term], inside: Join, across: Join) -> Tree:
    common = frozenset.intersection(*terms)
    if common:
        outer = _sorted(common)
        rest = [term - common for term in terms]
        if all(rest):
            outer.append(_factor(rest, inside, across))
        return inside(outer)
    if len(terms) == 1:
        return inside(_sorted(terms[0]))
    divisor = _best_divisor(terms)
    if divisor is None:
        return across(inside(_sorted(t)) for t in sorted(terms, key=_term_key))
    quotient, remainder = _divide(terms, divisor)
    parts = [inside((_factor(quotient, inside, across), _factor(divisor, inside, across)))]
    if remainder:
        parts.append(_factor(remainder, inside, across))
    return across(parts)


def _best_divisor(terms: list[Term]) -> list[Term] | None:
    """The kernel, or else the commonest contact, whose extraction saves most contacts."""
    best: tuple[int, list[Term]] | None = None
    for kernel in _kernels(terms):
        quotient, _ = _divide(terms, kernel)
        if not quotient:
            continue
        size = sum(map(len, kernel))
        saved = (
            len(quotient) * size
            + len(kernel) * sum(map(len, quotient))
            - size
            - sum(map(len, quotient))
        )
        if saved > 0 and (best is None or saved > best[0]):
            best = (saved, kernel)
    if best is not None:
        return best[1]
    uses = Counter(leaf for term in terms for leaf in term)
    leaf, count = max(uses.items(), key=lambda use: (use[1], _leaf_key(use[0])))
    # a contact that is a whole term has an empty cofactor: dividing by it would lose that term
    return [frozenset((leaf,))] if count > 1 and frozenset((leaf,)) not in terms else None


def _divide(terms: list[Term], divisor: list[Term]) -> tuple[list[Term], list[Term]]:
    """Weak division: terms = quotient x divisor + remainder, no contact on both sides."""
    quotient: set[Term] | None = None
    for part in divisor:
        found = {term - part for term in terms if part <= term}
        quotient = found if quotient is None else quotient & found
        if not quotient:
            return [], terms
    assert quotient is not None
    covered = {q | d for q in quotient for d in divisor}
    return sorted(quotient, key=_term_key), [term for term in terms if term not in covered]


def _kernels(terms: list[Term]) -> list[list[Term]]:
    """Cube-free quotients by a product of contacts, at most `_MOST_KERNELS` of them."""
    order = sorted({leaf for term in terms for leaf in term}, key=_leaf_key)
    rank = {leaf: i for i, leaf in enumerate(order)}
    found: dict[frozenset[Term], None] = {}

    def search(current: list[Term], start: int) -> None:
        for i in range(start, len(order)):
            if len(found) >= _MOST_KERNELS:
                return
            sharing = [term for term in current if order[i] in term]
            if len(sharing) < 2:
                continue
            cube = frozenset.intersection(*sharing)
            if any(rank[leaf] < i for leaf in cube):
                continue  # found before, from the earlier contact
            quotient = [term - cube for term in sharing]
            if not all(quotient):
                continue
            key = frozenset(quotient)
            if key not in found:
                found[key] = None
                search(quotient, i + 1)

    search(terms, 0)
    return [sorted(kernel, key=_term_key) for kernel in found]
