"""Closures and peeling over packed state spaces, by the cheapest way at each moment.

`closure` is plain reachability; `peel` takes away, round by round, the states of a region that
have no move inside it.  Both switch between following single states, arrays of state numbers and
whole sweeps, by the width of the frontier.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from contactlogic.sequence import bits
from contactlogic.sequence.space import Peeled

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from contactlogic.sequence.bits import Words
    from contactlogic.sequence.motion import Motion

    States = npt.NDArray[np.int64]

__all__ = ["closure", "peel"]

_WIDE = 64  # frontier from which whole sweeps are cheaper, at least
_NARROW = 8  # states up to which following them one by one beats numpy's overhead per call
_PASSES = 12  # passes over one chunk before its neighbours get their turn
_TICK = 1 << 14  # narrow steps between looks at the clock


def closure(motion: Motion, start: Words, within: Words | None, onward: bool) -> Words:
    """All states that runs inside `within` reach from `start` (or reach it from)."""
    reached = start.copy()
    if within is not None:
        reached &= within
    wide = max(_WIDE, motion.words >> 6)
    frontier = bits.members(reached) if bits.count_of(reached) <= wide else None
    while True:
        if frontier is None:
            frontier = _sweeps(motion, reached, within, onward, wide)
        if len(frontier) == 0:
            return reached
        if len(frontier) <= _NARROW:
            frontier = _narrow(motion, frontier, reached, within, onward)
        elif len(frontier) <= wide:
            frontier = _thin(motion, frontier, reached, within, onward)
            motion.watch.tick("following moves", len(frontier))
        else:
            frontier = None


def _narrow(
    motion: Motion, start: States, reached: Words, within: Words | None, onward: bool
) -> States:
    """Follow a frontier state by state while it stays narrow; gives the frontier left."""
    import numpy as np

    inside = None if within is None else bits.view_of(within)
    known = bits.view_of(reached)
    rows = list(enumerate(motion.rows))
    frontier: list[int] = start.tolist()
    steps = 0
    while frontier and len(frontier) <= _NARROW:
        fresh = []
        for state in frontier:
            word, bit = state >> 6, state & 63
            for i, row in rows:
                there = state ^ (1 << i)
                at, place = there >> 6, there & 63
                if not (row[word] >> bit if onward else row[at] >> place) & 1:
                    continue
                if known[at] >> place & 1:
                    continue
                if inside is not None and not inside[at] >> place & 1:
                    continue
                known[at] |= 1 << place
                fresh.append(there)
        frontier = fresh
        steps += 1
        if not steps % _TICK:
            motion.watch.tick("following moves", steps)
    return np.array(frontier, dtype=np.int64)


def _thin(
    motion: Motion, frontier: States, reached: Words, within: Words | None, onward: bool
) -> States:
    """One move on from an array of states; marks and gives the new ones."""
    import numpy as np

    found = []
    for i in range(motion.n):
        there = frontier ^ (1 << i)
        row = motion.enabled[i]
        there = there[bits.holds(row, frontier if onward else there)]
        there = there[~bits.holds(reached, there)]
        if within is not None:
            there = there[bits.holds(within, there)]
        if len(there):
            _mark(reached, there)
            found.append(there)
    return np.concatenate(found) if found else frontier[:0]


def _mark(words: Words, states: States) -> None:
    """Add states to a set."""
    import numpy as np

    bit = np.uint64(1) << (states & 63).astype(np.uint64)
    np.bitwise_or.at(words, states >> 6, bit)


def _unmark(words: Words, states: States) -> None:
    """Take states, all members, out of a set."""
    import numpy as np

    bit = np.uint64(1) << (states & 63).astype(np.uint64)
    np.bitwise_and.at(words, states >> 6, ~bit)


def _sweeps(
    motion: Motion, reached: Words, within: Words | None, onward: bool, wide: int
) -> States:
    """Sweep in place over the chunks that changed until few new states come; gives those."""
    size = motion.chunk
    waiting: list[int] = bits.any_by_chunk(reached, size).nonzero()[0].tolist()
    rounds = 0
    while True:
        before = reached.copy()
        changed: set[int] = set()
        for place in waiting:
            part = reached[place * size : (place + 1) * size]
            inside = None if within is None else within[place * size : (place + 1) * size]
            if not _settle(motion, place, part, inside, onward):
                changed.add(place)
            changed |= _spill(motion, place, part, reached, within, onward)
        rounds += 1
        motion.watch.tick("sweeping", rounds)
        before ^= reached
        if not waiting or bits.count_of(before) <= wide >> 1:
            return bits.members(before)
        waiting = sorted(changed)


def _settle(motion: Motion, place: int, part: Words, inside: Words | None, onward: bool) -> bool:
    """Close one chunk under the moves that stay in it; False if it may still grow."""
    import numpy as np

    size = motion.chunk
    busy = [i for i in range(motion.within_chunk) if motion.busy[i][place]]
    turned, scratch = motion.workspace
    before = part.copy()
    for _ in range(_PASSES):
        for i in busy:
            may = motion.enabled[i, place * size : (place + 1) * size]
            if onward:
                bits.swap_into(part & may, i, turned, scratch)
            else:
                bits.swap_into(part, i, turned, scratch)
                turned &= may
            if inside is not None:
                turned &= inside
            part |= turned
        if np.array_equal(before, part):
            return True
        before[:] = part
    return False


def _spill(
    motion: Motion, place: int, part: Words, reached: Words, within: Words | None, onward: bool
) -> set[int]:
    """Make the moves that lead from one chunk to others; gives the chunks that grew."""
    import numpy as np

    size = motion.chunk
    grown = set()
    moved, total = motion.workspace
    for i in range(motion.within_chunk, motion.n):
        other = place ^ (1 << (i - motion.within_chunk))
        source = place if onward else other
        if not motion.busy[i][source]:
            continue
        there = slice(other * size, (other + 1) * size)
        np.bitwise_and(part, motion.enabled[i, source * size : (source + 1) * size], out=moved)
        if within is not None:
            moved &= within[there]
        np.bitwise_or(moved, reached[there], out=total)
        if not np.array_equal(total, reached[there]):
            reached[there] = total
            grown.add(other)
    return grown


def peel(motion: Motion, region: Words) -> Peeled[Words]:
    """Take away the states without a move inside what is left, until nothing changes."""
    left = region.copy()
    wide = max(_WIDE, motion.words >> 7)
    rounds = 0
    last = None
    places: list[int] = bits.any_by_chunk(left, motion.chunk).nonzero()[0].tolist()
    gone: States | None = None  # states taken in the last round, where they are few
    while True:
        if gone is None:
            leaving = _leaving(motion, left, places)
            number = bits.count_of(leaving)
            if not number:
                return Peeled(rounds, last, left)
            last = bits.lowest(leaving)
            left ^= leaving
            if number <= wide:
                gone = bits.members(leaving)
            else:
                places = _doubtful_chunks(motion, leaving, left)
            motion.watch.tick("peeling", rounds)
        else:
            gone = _peel_thin(motion, left, gone)
            if not len(gone):
                return Peeled(rounds, last, left)
            last = int(gone.min())
            if len(gone) > wide:
                gone = None
                places = bits.any_by_chunk(left, motion.chunk).nonzero()[0].tolist()
            if not rounds % 64:
                motion.watch.tick("peeling", rounds)
        rounds += 1


def _leaving(motion: Motion, left: Words, places: list[int]) -> Words:
    """States of some chunks of a set that have no move inside the set."""
    import numpy as np

    size = motion.chunk
    out = np.zeros_like(left)
    staying = np.empty(size, dtype=np.uint64)
    # Moves to other chunks are the cheapest to follow, moves within words the dearest: those are
    # followed only where doubt is left.
    high, low = range(motion.n - 1, 5, -1), range(min(motion.n, 6) - 1, -1, -1)
    for place in places:
        here = left[place * size : (place + 1) * size]
        part = out[place * size : (place + 1) * size]
        part[:] = here
        for columns in (high, low):
            staying[:] = 0
            for i in columns:
                if motion.busy[i][place]:
                    np.bitwise_or(staying, motion.into_chunk(left, i, place), out=staying)
            np.bitwise_not(staying, out=staying)
            part &= staying
            if not part.any():
                break
    return out


def _doubtful_chunks(motion: Motion, leaving: Words, left: Words) -> list[int]:
    """Chunks of a set with a neighbour (or themselves) that lost states."""
    size = motion.chunk
    lost: list[int] = bits.any_by_chunk(leaving, size).nonzero()[0].tolist()
    filled: list[bool] = bits.any_by_chunk(left, size).tolist()
    near = set(lost)
    for i in range(motion.n - motion.within_chunk):
        near.update(place ^ (1 << i) for place in lost)
    return sorted(place for place in near if filled[place])


def _peel_thin(motion: Motion, left: Words, gone: States) -> States:
    """Take away the states whose last move inside led to one of those just gone."""
    import numpy as np

    found = []
    for i in range(motion.n):
        there = gone ^ (1 << i)
        found.append(there[bits.holds(motion.enabled[i], there) & bits.holds(left, there)])
    doubtful = np.unique(np.concatenate(found))
    for i in range(motion.n):
        if not len(doubtful):
            break
        onward = bits.holds(motion.enabled[i], doubtful) & bits.holds(left, doubtful ^ (1 << i))
        doubtful = doubtful[~onward]
    _unmark(left, doubtful)
    return doubtful
