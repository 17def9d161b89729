"""The moves of a sequencer over all `2**n` states, packed as bits (design.md section 7).

A relay is pending where its drive differs from its position.  If any pending move is quick, one
quick pending relay moves, otherwise one slow pending relay.  Inputs move only when nothing is
pending.  `enabled[i]` is the set of states in which column `i` may move; with it a step of the
whole space is a few word-wide passes per column, done in chunks that stay in the cache.

Reachability goes by the cheapest of three ways at each moment: state by state while the frontier
is narrow, by arrays of state numbers while it is thin, otherwise by sweeps over the chunks that
changed, in place, so that one sweep follows many moves.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from contactlogic.errors import LimitError
from contactlogic.sequence import bits
from contactlogic.sequence.space import Peeled, Watch

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from contactlogic.sequence.bits import Words
    from contactlogic.sequence.drives import Drives

__all__ = ["Motion", "MoveRules", "build_motion", "memory_needed"]

CHUNK = 1 << 14
"""Words worked on at a time: 128 KiB, so that a chunk and its scratch stay in the cache."""

_SETS = 20  # sets alive at once in the recovery check, besides the enabled moves


@dataclass(frozen=True)
class MoveRules:
    """Who moves when, by column number.

    Args:
        n: columns.
        slow_operate, slow_release: columns whose operate or release is slow.
        inputs: columns moved from outside.
        waiting: states of the sequence at rest, and the inputs that may move there; in any
            other state at rest any one input may.
    """

    n: int
    slow_operate: Collection[int] = ()
    slow_release: Collection[int] = ()
    inputs: tuple[int, ...] = ()
    waiting: Mapping[int, Collection[int]] = field(default_factory=dict)


def memory_needed(n: int) -> int:
    """Bytes that the check of `n` columns with single moves takes at most, foretold."""
    return (n + _SETS) * 8 * bits.words_of(n)


def build_motion(
    rules: MoveRules, drives: Drives, *, memory: int | None = None, watch: Watch | None = None
) -> Motion:
    """Work out where each column may move, from the drives.

    Args:
        memory: most bytes to use.

    Raises:
        LimitError: the check would need more memory than allowed.
    """
    import numpy as np

    need = memory_needed(rules.n)
    if memory is not None and need > memory:
        raise LimitError(
            f"checking {rules.n} relays in all 2^{rules.n} states needs "
            f"{need / 2**30:.1f} GiB of memory; {memory / 2**30:.1f} GiB are allowed",
            hint="allow more memory, or check parts of the sequencer one by one",
        )
    watch = watch or Watch()
    words = bits.words_of(rules.n)
    enabled = np.empty((rules.n, words), dtype=np.uint64)
    for start in range(0, words, CHUNK):
        _fill(rules, drives, enabled, start, min(words, start + CHUNK))
        watch.tick("working out the drives", start)
    if rules.n < 6:
        enabled &= bits.full(rules.n)
    for state, allowed in rules.waiting.items():
        for i in rules.inputs:
            if i not in allowed:
                enabled[i, state >> 6] &= ~np.uint64(1 << (state & 63))
    return Motion(rules.n, rules.inputs, enabled, watch)


def _fill(
    rules: MoveRules, drives: Drives, enabled: npt.NDArray[np.uint64], start: int, stop: int
) -> None:
    import numpy as np

    fed = drives.words(start, stop)
    any_quick = np.zeros(stop - start, dtype=np.uint64)
    any_slow = np.zeros(stop - start, dtype=np.uint64)
    slow: dict[int, Words] = {}
    for i, drive in enumerate(fed):
        if i in rules.inputs:
            continue
        if drive is None:
            raise ValueError(f"column {i} has no drive and is no input")
        position = bits.variable_words(i, start, stop)
        pending = drive ^ position
        if i in rules.slow_operate or i in rules.slow_release:
            if i not in rules.slow_release:  # releases are quick
                hasty = pending & position
            elif i not in rules.slow_operate:  # operates are quick
                hasty = pending & ~position
            else:
                hasty = np.zeros_like(pending)
            slow[i] = pending ^ hasty
            any_slow |= slow[i]
            pending = hasty
        any_quick |= pending
        enabled[i, start:stop] = pending
    for i, pending in slow.items():
        enabled[i, start:stop] |= pending & ~any_quick
    for i in rules.inputs:
        enabled[i, start:stop] = ~(any_quick | any_slow)


class Motion:
    """The state space with single moves; sets are packed bit vectors.

    Keeps the contract of `contactlogic.sequence.space.Space`.
    """

    def __init__(
        self, n: int, inputs: tuple[int, ...], enabled: npt.NDArray[np.uint64], watch: Watch
    ) -> None:
        import numpy as np

        self.n = n
        self.inputs = inputs
        self.watch = watch
        self.enabled = enabled
        self.words = bits.words_of(n)
        self.chunk = min(CHUNK, self.words)
        self.within_chunk = min(n, 6 + self.chunk.bit_length() - 1)
        self.busy: list[list[bool]] = [
            bits.any_by_chunk(row, self.chunk).tolist() for row in enabled
        ]
        self.rows = [bits.view_of(row) for row in enabled]
        self.workspace: tuple[Words, Words] = (
            np.empty(self.chunk, dtype=np.uint64),
            np.empty(self.chunk, dtype=np.uint64),
        )

    # Sets -----------------------------------------------------------------------------------

    def everything(self) -> Words:
        return bits.full(self.n)

    def of(self, states: Iterable[int]) -> Words:
        return bits.of_states(self.n, states)

    def both(self, one: Words, two: Words) -> Words:
        return one & two

    def either(self, one: Words, two: Words) -> Words:
        return one | two

    def without(self, one: Words, two: Words) -> Words:
        rest = ~two
        rest &= one
        return rest

    def none(self, states: Words) -> bool:
        return not states.any()

    def count(self, states: Words) -> int:
        return bits.count_of(states)

    def pick(self, states: Words) -> int:
        return bits.lowest(states)

    def has(self, states: Words, state: int) -> bool:
        return bool(int(states[state >> 6]) >> (state & 63) & 1)

    def listing(self, states: Words, most: int) -> list[int]:
        found: list[int] = bits.members(states, most).tolist()
        return found

    # Moves ----------------------------------------------------------------------------------

    def may_move(self, i: int, state: int) -> bool:
        """Whether column `i` may move in a state."""
        return bool(self.rows[i][state >> 6] >> (state & 63) & 1)

    def movable(self, i: int) -> Words:
        able: Words = self.enabled[i]
        return able

    def successors(self, state: int) -> list[int]:
        return [state ^ (1 << i) for i in range(self.n) if self.may_move(i, state)]

    def predecessors(self, state: int) -> list[int]:
        found = (state ^ (1 << i) for i in range(self.n))
        return [there for i, there in enumerate(found) if self.may_move(i, there)]

    def moving(self, i: int, into: Words) -> Words:
        turned = bits.swap(into, i)
        turned &= self.enabled[i]
        return turned

    def pre(self, into: Words) -> Words:
        return self._step(into, False)

    def post(self, states: Words) -> Words:
        return self._step(states, True)

    def _step(self, states: Words, onward: bool) -> Words:
        """One move from (or into) a set, chunk by chunk."""
        import numpy as np

        out = np.zeros_like(states)
        size = self.chunk
        filled: list[bool] = bits.any_by_chunk(states, size).tolist()
        for place in range(len(filled)):
            total = out[place * size : (place + 1) * size]
            for i in range(self.n):
                other = place if i < self.within_chunk else place ^ (1 << (i - self.within_chunk))
                if not filled[other] or not self.busy[i][other if onward else place]:
                    continue
                reach = self.onto_chunk if onward else self.into_chunk
                total |= reach(states, i, place)
        return out

    def into_chunk(self, states: Words, i: int, place: int) -> Words:
        """States of chunk `place` whose move of column `i` leads into a set.

        The answer is overwritten by the next call.
        """
        import numpy as np

        size = self.chunk
        may = self.enabled[i, place * size : (place + 1) * size]
        if i >= self.within_chunk:
            other = place ^ (1 << (i - self.within_chunk))
            here = states[other * size : (other + 1) * size]
            np.bitwise_and(here, may, out=self.workspace[0])
        else:
            here = states[place * size : (place + 1) * size]
            bits.swap_into(here, i, *self.workspace)
            np.bitwise_and(self.workspace[0], may, out=self.workspace[0])
        return self.workspace[0]

    def onto_chunk(self, states: Words, i: int, place: int) -> Words:
        """States of chunk `place` that a move of column `i` reaches from a set.

        The answer is overwritten by the next call.
        """
        import numpy as np

        size = self.chunk
        source = place if i < self.within_chunk else place ^ (1 << (i - self.within_chunk))
        run = slice(source * size, (source + 1) * size)
        if source == place:
            moved = states[run] & self.enabled[i, run]
            bits.swap_into(moved, i, *self.workspace)
        else:
            np.bitwise_and(states[run], self.enabled[i, run], out=self.workspace[0])
        return self.workspace[0]

    # Closures -------------------------------------------------------------------------------

    def forward(self, states: Words, within: Words | None = None) -> Words:
        from contactlogic.sequence.reach import closure

        return closure(self, states, within, True)

    def backward(self, states: Words, within: Words | None = None) -> Words:
        from contactlogic.sequence.reach import closure

        return closure(self, states, within, False)

    def peel(self, region: Words) -> Peeled[Words]:
        from contactlogic.sequence.reach import peel

        return peel(self, region)
