"""The moves of a sequencer where pending relays may also move together (`moves = "together"`).

From a state, any group of the relays that may move at all moves at once.  For each group `u` (a
number with the bits of its columns) the states in which all of it may move are kept as a bit
vector, `4**n` bits in all: exact up to 14 columns in 32 MiB, 16 in 512 MiB.  A step is then the
union over groups of a set with its state numbers turned by `u`: the low six bits are turned in
one go for all 64 low parts, the high bits are a look-up of words.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from contactlogic.errors import LimitError
from contactlogic.sequence import bits
from contactlogic.sequence.space import Peeled

if TYPE_CHECKING:
    from contactlogic.sequence.bits import Words
    from contactlogic.sequence.motion import Motion

__all__ = ["MOST_TOGETHER", "GroupMotion", "memory_needed_together"]

MOST_TOGETHER = 16
"""Most columns for which all groups are followed."""


def memory_needed_together(n: int) -> int:
    """Bytes that the check of `n` columns moving together takes, foretold."""
    return 8 * (1 << n) * bits.words_of(n) + (1 << 22)


class GroupMotion:
    """The state space in which any group of the relays that may move does so at once.

    Keeps the contract of `contactlogic.sequence.space.Space`; sets are packed bit vectors.
    """

    def __init__(self, single: Motion, *, memory: int | None = None) -> None:
        import numpy as np

        n = single.n
        need = memory_needed_together(n)
        if n > MOST_TOGETHER or (memory is not None and need > memory):
            raise LimitError(
                f"following all groups of {n} relays that move together needs "
                f"{need / 2**30:.1f} GiB of memory",
                expected=f"at most {MOST_TOGETHER} relays and the memory allowed",
                hint="check with single moves",
            )
        self.single = single
        self.n = n
        self.inputs = single.inputs
        self.watch = single.watch
        self._low = 1 << min(n, 6)
        self._high = bits.words_of(n)
        able = np.zeros((1 << n, self._high), dtype=np.uint64)
        able[0] = bits.full(n)
        for i in range(n):
            size = 1 << i
            if i in single.inputs:  # only one input moves at a time, and only at rest
                able[size] = single.enabled[i]
            else:
                np.bitwise_and(able[:size], single.enabled[i], out=able[size : 2 * size])
        able[0] = 0
        self._able = able.reshape(self._high, self._low, self._high)
        self._places = np.arange(self._high)
        # Each high group's words are kept where the group leads to: a step then looks up words
        # of one set only, not of a set for every low group.
        for high in range(1, self._high):
            self._able[high] = self._able[high][:, self._places ^ high]
        self._busy: list[int] = [h for h in range(self._high) if self._able[h].any()]
        self._scratch = np.empty((self._low, self._high), dtype=np.uint64)

    # Sets and single moves are those of the single motion -------------------------------------

    def everything(self) -> Words:
        return self.single.everything()

    def of(self, states: Iterable[int]) -> Words:
        return self.single.of(states)

    def both(self, one: Words, two: Words) -> Words:
        return one & two

    def either(self, one: Words, two: Words) -> Words:
        return one | two

    def without(self, one: Words, two: Words) -> Words:
        return one & ~two

    def none(self, states: Words) -> bool:
        return not states.any()

    def count(self, states: Words) -> int:
        return bits.count_of(states)

    def pick(self, states: Words) -> int:
        return bits.lowest(states)

    def has(self, states: Words, state: int) -> bool:
        return self.single.has(states, state)

    def listing(self, states: Words, most: int) -> list[int]:
        return self.single.listing(states, most)

    def movable(self, i: int) -> Words:
        return self.single.movable(i)

    # Moves ------------------------------------------------------------------------------------

    def successors(self, state: int) -> list[int]:
        free = [i for i in range(self.n) if self.single.may_move(i, state)]
        if any(i in self.inputs for i in free):
            return [state ^ (1 << i) for i in free]
        found = []
        group = pool = sum(1 << i for i in free)
        while group:
            found.append(state ^ group)
            group = (group - 1) & pool
        return sorted(found)

    def predecessors(self, state: int) -> list[int]:
        found: list[int] = bits.members(self.pre(self.of((state,)))).tolist()
        return found

    def _turned(self, states: Words) -> Words:
        """A set turned by each low group: row `u` holds the states `s ^ u` for `s` in the set."""
        import numpy as np

        rows = np.empty((self._low, self._high), dtype=np.uint64)
        rows[0] = states
        for i in range(min(self.n, 6)):
            size = 1 << i
            rows[size : 2 * size] = bits.swap(rows[:size].reshape(-1), i).reshape(size, -1)
        return rows

    def _into(self, states: Words, column: int | None) -> Words:
        """States with a group move (that moves `column`, if given) into a set."""
        import numpy as np

        turned = self._turned(states)
        out = np.zeros_like(states)
        low = None  # rows of the low groups that count, all if None
        highs = self._busy
        if column is not None and column < 6:
            low = np.flatnonzero(np.arange(self._low) >> column & 1)
            turned = turned[low]
        elif column is not None:
            highs = [high for high in highs if high >> (column - 6) & 1]
        meeting = self._scratch[: len(turned)]
        for high in highs:
            able = self._able[high] if low is None else self._able[high][low]
            np.bitwise_and(able, turned, out=meeting)
            out |= np.bitwise_or.reduce(meeting, axis=0)[self._places ^ high]
        return out

    def pre(self, into: Words) -> Words:
        return self._into(into, None)

    def moving(self, i: int, into: Words) -> Words:
        return self._into(into, i)

    def post(self, states: Words) -> Words:
        import numpy as np

        out = np.zeros_like(states)
        for high in self._busy:
            rows = self._able[high] & states[self._places ^ high]
            size = self._low
            while size > 1:  # fold the half with the topmost low column onto the other
                size >>= 1
                column = size.bit_length() - 1
                rows = rows[:size] | bits.swap(rows[size:].reshape(-1), column).reshape(size, -1)
            out |= rows[0]
        return out

    def forward(self, states: Words, within: Words | None = None) -> Words:
        return self._close(states, within, True)

    def backward(self, states: Words, within: Words | None = None) -> Words:
        return self._close(states, within, False)

    def _close(self, states: Words, within: Words | None, onward: bool) -> Words:
        reached = states if within is None else states & within
        frontier = reached
        rounds = 0
        while frontier.any():
            fresh = self.post(frontier) if onward else self.pre(frontier)
            fresh &= ~reached
            if within is not None:
                fresh &= within
            reached = reached | fresh
            frontier = fresh
            rounds += 1
            self.watch.tick("following groups", rounds)
        return reached

    def peel(self, region: Words) -> Peeled[Words]:
        left = region
        rounds = 0
        last = None
        while True:
            staying = self.pre(left) & left
            gone = left ^ staying
            if not gone.any():
                return Peeled(rounds, last, staying)
            last = bits.lowest(gone)
            left = staying
            rounds += 1
            self.watch.tick("peeling", rounds)
