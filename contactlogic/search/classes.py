"""Functions of up to four relays in classes under permuting and negating relays.

Permuting relays renames them and negating one swaps its makes with its breaks, so every function
of a class has the same least networks up to that.  There are 402 classes (OEIS A000616), the two
constants among them.  All functions are handled as tables over four relays; the leader of a class
is its least function among those that depend on the lowest relays only.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import permutations
from typing import TYPE_CHECKING, Any

from contactlogic.truth import depends_on

if TYPE_CHECKING:
    import numpy

    Array = numpy.ndarray[Any, Any]

__all__ = ["FUNCTIONS", "RELAYS", "Classes", "Turn", "automorphisms", "classes", "turns"]

RELAYS = 4
FUNCTIONS = 1 << (1 << RELAYS)
_ROWS = 1 << RELAYS


@dataclass(frozen=True)
class Turn:
    """One way to permute and negate: relay i becomes relay `order[i]`, negated if in `flips`."""

    order: tuple[int, ...]
    flips: int

    def sources(self) -> list[int]:
        """For every row of the image the row it takes its value from."""
        return [
            sum((row >> self.order[i] & 1 ^ self.flips >> i & 1) << i for i in range(RELAYS))
            for row in range(_ROWS)
        ]

    def apply(self, table: int) -> int:
        """The image of a function."""
        return sum((table >> source & 1) << row for row, source in enumerate(self.sources()))


@dataclass(frozen=True)
class Classes:
    """All functions by class.

    Args:
        leaders: tables of the leaders, those of fewer relays first, then ascending.
        number: for every function the position of its leader.
        turn: for every function the position in `turns` of one that takes the leader to it.
    """

    leaders: tuple[int, ...]
    number: Array
    turn: Array

    def leader(self, table: int) -> int:
        """The leader of a function's class."""
        return self.leaders[int(self.number[table])]


@cache
def turns() -> tuple[Turn, ...]:
    """All 384 ways, the one that changes nothing first."""
    return tuple(
        Turn(order, flips) for order in permutations(range(RELAYS)) for flips in range(1 << RELAYS)
    )


@cache
def classes() -> Classes:
    """The classes, made once a process in well under a tenth of a second."""
    import numpy

    sources = numpy.array([turn.sources() for turn in turns()])
    weights = 1 << numpy.arange(_ROWS)
    number = numpy.full(FUNCTIONS, -1, dtype=numpy.int16)
    turn = numpy.zeros(FUNCTIONS, dtype=numpy.int16)
    ways = numpy.arange(len(sources))
    leaders: list[int] = []
    for count in range(RELAYS + 1):
        width = 1 << count
        repeat = (FUNCTIONS - 1) // ((1 << width) - 1)  # a table of `count` relays, over four
        for small in range(1 << width):
            table = small * repeat
            if number[table] >= 0 or not all(depends_on(table, RELAYS, i) for i in range(count)):
                continue
            images = (table >> sources & 1) @ weights
            number[images] = len(leaders)
            turn[images[::-1]] = ways[::-1]  # the first way of all wins
            leaders.append(table)
    return Classes(tuple(leaders), number, turn)


def automorphisms(table: int) -> list[Turn]:
    """The ways that leave a function as it is."""
    return [turn for turn in turns() if turn.apply(table) == table]
