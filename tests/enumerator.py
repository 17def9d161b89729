"""Fewest poles by plain enumeration, sharing no code with contactlogic.

A network over a handful of nets is, for each row, a partition of the nets into joined ones; a
pole merges two blocks in each row.  Starting from no poles, every pole there is gets added to
every behaviour found so far, so the set after P rounds holds the behaviour of every network of
P poles over those nets.  Nothing is normalised beyond dropping repeated behaviours.
"""

from __future__ import annotations

from itertools import product

import numpy as np


def partitions(nets: int) -> tuple[list[tuple[int, ...]], np.ndarray]:
    """All partitions as tuples of block names, and `merge[partition, a, b]`."""
    found: list[tuple[int, ...]] = [()]
    for _ in range(nets):
        found = [(*p, b) for p in found for b in range(max(p, default=-1) + 2)]
    number = {p: i for i, p in enumerate(found)}
    merge = np.zeros((len(found), nets, nets), dtype=np.int16)
    for i, p in enumerate(found):
        for a, b in product(range(nets), repeat=2):
            joined = [p[a] if block == p[b] else block for block in p]
            names: dict[int, int] = {}
            merge[i, a, b] = number[tuple(names.setdefault(x, len(names)) for x in joined)]
    return found, merge


def all_poles(n: int, nets: int, single: bool = False):
    """Per pole the pair of nets it joins in each row; (0, 0) where it joins nothing."""
    ends = [None, *range(nets)]
    for relay, common, make, break_ in product(range(n), range(nets), ends, ends):
        if common in (make, break_) or make == break_ or (single and None not in (make, break_)):
            continue
        yield [
            (common, end) if end is not None else (0, 0)
            for row in range(1 << n)
            for end in [make if row >> relay & 1 else break_]
        ]


def behaviours(n: int, nets: int, poles: int, *, keep: int, single: bool = False):
    """For P = 0 .. poles, the behaviours of all networks of P poles as arrays of partitions.

    Behaviours that differ only by names of nets from `keep` upwards are taken once.
    """
    names, merge = partitions(nets)
    number = {p: i for i, p in enumerate(names)}
    renamings = []
    for order in _orders(range(keep, nets)):
        places = [*range(keep), *order]
        renamed = []
        for p in names:
            moved = [p[place] for place in places]
            blocks: dict[int, int] = {}
            renamed.append(number[tuple(blocks.setdefault(x, len(blocks)) for x in moved)])
        renamings.append(np.array(renamed, dtype=np.int16))
    kinds = np.unique(np.array(list(all_poles(n, nets, single))), axis=0)
    apart = number[tuple(range(nets))]
    states = np.full((1, 1 << n), apart, dtype=np.int16)
    yield names, states
    for _ in range(poles):
        grown = [states]
        for pole in kinds:
            grown.append(merge[states, pole[:, 0], pole[:, 1]])
        states = _distinct(np.concatenate(grown), renamings, len(names))
        yield names, states


def _orders(items):
    from itertools import permutations

    return permutations(items)


def _distinct(states, renamings, size):
    best = None
    weights = size ** np.arange(states.shape[1], dtype=object)
    fits = size ** states.shape[1] < 2**63
    assert fits, "codes must fit a machine word"
    weights = weights.astype(np.int64)
    for renaming in renamings:
        codes = renaming[states].astype(np.int64) @ weights
        best = codes if best is None else np.minimum(best, codes)
    _, first = np.unique(best, return_index=True)
    return states[first]


def last_round(n: int, nets: int, states, single: bool = False):
    """Behaviours with one pole more, one array per pole, not made distinct."""
    _, merge = partitions(nets)
    for pole in np.unique(np.array(list(all_poles(n, nets, single))), axis=0):
        yield merge[states, pole[:, 0], pole[:, 1]]


def joined_tables(names, states, a: int, b: int):
    """Truth table of "a is joined to b" for every behaviour."""
    same = np.array([p[a] == p[b] for p in names])
    return same[states].astype(np.int64) @ (1 << np.arange(states.shape[1]))
