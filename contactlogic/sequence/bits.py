"""Sets of states as packed bit vectors: bit `s` of a vector is state `s`.

Sixty-four states lie in a word, the lowest in the lowest bit, so that with `n` columns a set is
`2**max(0, n-6)` words (below six columns only the low `2**n` bits of the one word count).
Moving column `i` swaps blocks of `2**i` bits: for `i < 6` a shift under a mask within each word,
above that a swap of blocks of whole words.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING, TypeAlias

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    Words: TypeAlias = npt.NDArray[np.uint64]

__all__ = [
    "LOW",
    "any_by_chunk",
    "count_of",
    "empty",
    "from_table",
    "full",
    "holds",
    "lowest",
    "members",
    "of_states",
    "swap",
    "swap_into",
    "to_table",
    "variable_words",
    "view_of",
    "words_of",
]

LOW = (
    0x5555555555555555,
    0x3333333333333333,
    0x0F0F0F0F0F0F0F0F,
    0x00FF00FF00FF00FF,
    0x0000FFFF0000FFFF,
    0x00000000FFFFFFFF,
)
"""Bits of a word in which column `i < 6` is released."""

_WORD = (1 << 64) - 1


def words_of(n: int) -> int:
    """Words in a set over `n` columns."""
    return 1 << max(0, n - 6)


def empty(n: int) -> Words:
    """The empty set over `n` columns."""
    import numpy as np

    return np.zeros(words_of(n), dtype=np.uint64)


def full(n: int) -> Words:
    """All `2**n` states."""
    import numpy as np

    word = _WORD if n >= 6 else (1 << (1 << n)) - 1
    return np.full(words_of(n), word, dtype=np.uint64)


def of_states(n: int, states: Iterable[int]) -> Words:
    """The set of the given states."""
    import numpy as np

    words = empty(n)
    for state in states:
        words[state >> 6] |= np.uint64(1 << (state & 63))
    return words


def from_table(table: int, n: int) -> Words:
    """A truth table (an int, `contactlogic.truth`) as a set of its rows."""
    import numpy as np

    raw = table.to_bytes(8 * words_of(n), "little")
    return np.frombuffer(raw, dtype="<u8").astype(np.uint64)


def to_table(words: Words, n: int) -> int:
    """A set as a truth table; the inverse of `from_table`."""
    table = int.from_bytes(words.astype("<u8").tobytes(), "little")
    return table & ((1 << (1 << n)) - 1)


def variable_words(i: int, start: int, stop: int) -> Words:
    """Words `start` to `stop` of the set of states in which column `i` is operated."""
    import numpy as np

    if i < 6:
        return np.full(stop - start, _WORD ^ LOW[i], dtype=np.uint64)
    place = np.arange(start, stop, dtype=np.uint64)
    return np.uint64(0) - ((place >> np.uint64(i - 6)) & np.uint64(1))


def count_of(words: Words) -> int:
    """Number of states in a set."""
    import numpy as np

    return int(np.bitwise_count(words).sum(dtype=np.int64))


def view_of(words: Words) -> memoryview:
    """The words of a set for quick access one at a time; writes go through to the set."""
    return words.data


def any_by_chunk(words: Words, size: int) -> npt.NDArray[np.bool_]:
    """For each run of `size` words whether it holds any state."""
    import numpy as np

    some: npt.NDArray[np.bool_] = np.bitwise_or.reduce(words.reshape(-1, size), axis=1) != 0
    return some


def holds(words: Words, states: npt.NDArray[np.int64]) -> npt.NDArray[np.bool_]:
    """Whether each of some states is in a set."""
    import numpy as np

    shift = (states & 63).astype(np.uint64)
    found: npt.NDArray[np.bool_] = (words[states >> 6] >> shift & np.uint64(1)).astype(np.bool_)
    return found


def lowest(words: Words) -> int:
    """The lowest state of a set that is not empty."""
    import numpy as np

    place = int(np.argmax(words != 0))
    word = int(words[place])
    return place * 64 + (word & -word).bit_length() - 1


def members(words: Words, most: int | None = None) -> npt.NDArray[np.int64]:
    """The states of a set, ascending; only the lowest `most` if given."""
    import numpy as np

    places = np.flatnonzero(words)
    if most is not None:
        places = places[:most]
    bits = np.unpackbits(words[places].astype("<u8").view(np.uint8), bitorder="little")
    rows, columns = np.nonzero(bits.reshape(len(places), 64))
    states = places[rows].astype(np.int64) * 64 + columns
    return states if most is None else states[:most]


def swap_into(words: Words, i: int, out: Words, scratch: Words) -> None:
    """Write to `out` the states that differ from those of `words` in column `i` alone.

    `words` may be any aligned run of whole blocks of `2**(i+1)` bits.  The three arrays have the
    same length and do not overlap.
    """
    import numpy as np

    if i < 6:
        shift, mask = np.uint64(1 << i), np.uint64(LOW[i])
        np.right_shift(words, shift, out=out)
        np.bitwise_and(out, mask, out=out)
        np.bitwise_and(words, mask, out=scratch)
        np.left_shift(scratch, shift, out=scratch)
        np.bitwise_or(out, scratch, out=out)
        return
    block = 1 << (i - 6)
    there, here = out.reshape(-1, 2, block), words.reshape(-1, 2, block)
    if block < 8:  # short inner runs are slow as blocks, quick as strided columns
        for k in range(block):
            there[:, 0, k] = here[:, 1, k]
            there[:, 1, k] = here[:, 0, k]
    else:
        there[:, 0] = here[:, 1]
        there[:, 1] = here[:, 0]


def swap(words: Words, i: int) -> Words:
    """The states that differ from those of a set in column `i` alone."""
    import numpy as np

    out = np.empty_like(words)
    swap_into(words, i, out, np.empty_like(words))
    return out
