"""What the recovery engine asks of a state space, whoever stores the sets of states.

`motion` stores a set as a packed bit vector, `symbolic` as a decision diagram; `recovery` knows
only this contract.  A state is an int: column `i` is bit `i`.  Sets are values: no operation
changes its arguments.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Generic, Protocol, TypeVar

__all__ = ["Peeled", "Space", "Stopped", "Watch"]

S = TypeVar("S")


class Stopped(Exception):
    """The caller's `stop` said so.  What is known so far is kept by whoever catches this."""


@dataclass(frozen=True)
class Watch:
    """Looks in from outside while a long search runs.

    Args:
        progress: called now and then with what is being done and a count that grows.
        stop: asked at the same moments; True ends the search.
    """

    progress: Callable[[str, int], None] | None = None
    stop: Callable[[], bool] | None = None

    def tick(self, phase: str, count: int) -> None:
        """Report, then raise `Stopped` if the caller wants no more."""
        if self.progress is not None:
            self.progress(phase, count)
        if self.stop is not None and self.stop():
            raise Stopped(phase)


@dataclass(frozen=True)
class Peeled(Generic[S]):
    """States of a region taken away round by round because no move led on within the region.

    `rounds` is the most moves that a run can make before it leaves the region, `last` the
    lowest state that can make so many (None if nothing was taken), `left` what stays for ever.
    """

    rounds: int
    last: int | None
    left: S


class Space(Protocol[S]):
    """Sets of states and the moves between them."""

    n: int
    """Columns: relays and inputs."""
    inputs: tuple[int, ...]
    """Columns that are moved from outside."""
    watch: Watch

    def everything(self) -> S: ...
    def of(self, states: Iterable[int]) -> S: ...
    def both(self, one: S, two: S) -> S: ...
    def either(self, one: S, two: S) -> S: ...
    def without(self, one: S, two: S) -> S: ...
    def none(self, states: S) -> bool: ...
    def count(self, states: S) -> int: ...

    def pick(self, states: S) -> int:
        """The lowest state of a set that is not empty."""
        ...

    def has(self, states: S, state: int) -> bool: ...

    def listing(self, states: S, most: int) -> list[int]:
        """The lowest `most` states, ascending."""
        ...

    def movable(self, i: int) -> S:
        """States in which column `i` may move."""
        ...

    def moving(self, i: int, into: S) -> S:
        """States from which a move of column `i` (with or without others) leads into a set."""
        ...

    def pre(self, into: S) -> S:
        """States with some move into a set."""
        ...

    def post(self, states: S) -> S:
        """States reached by one move from a set."""
        ...

    def forward(self, states: S, within: S | None = None) -> S:
        """A set and all that any run inside `within` reaches from it."""
        ...

    def backward(self, states: S, within: S | None = None) -> S:
        """A set and all states with a run inside `within` that reaches it."""
        ...

    def peel(self, region: S) -> Peeled[S]: ...
    def successors(self, state: int) -> Sequence[int]: ...
    def predecessors(self, state: int) -> Sequence[int]: ...
