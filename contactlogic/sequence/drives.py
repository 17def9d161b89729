"""Where the drives of a recovery check come from: truth tables, formulas or contacts.

A source answers for a run of words of the state space at a time, so that the whole space of a
large sequencer never has to hold intermediate results.  Within such a run every source works on
packed words (`bits`), all states at once.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import reduce
from operator import and_, or_, xor
from typing import TYPE_CHECKING, Any, Protocol

from contactlogic.algebra import (
    Break,
    Constant,
    Exclusive,
    Expression,
    Name,
    Parallel,
    Series,
)
from contactlogic.network import Network

if TYPE_CHECKING:
    from contactlogic.sequence.bits import Words

__all__ = [
    "ContactDrives",
    "Drives",
    "FormulaDrives",
    "TableDrives",
    "conducting",
    "formula_drive",
    "variables",
]


class Drives(Protocol):
    """Conditions under which the coils are fed."""

    def words(self, start: int, stop: int) -> Sequence[Words | None]:
        """For each column the states, in words `start` to `stop`, in which its coil is fed.

        None for a column without a coil (an input).  Bits beyond the last state may be anything.
        """
        ...


def variables(names: Sequence[str], start: int, stop: int) -> dict[str, Words]:
    """Each column's operated states in a run of words, by name."""
    from contactlogic.sequence.bits import variable_words

    return {name: variable_words(i, start, stop) for i, name in enumerate(names)}


@dataclass(frozen=True)
class TableDrives:
    """Drives given as truth tables (`contactlogic.truth`), None for an input."""

    n: int
    tables: tuple[int | None, ...]

    def words(self, start: int, stop: int) -> Sequence[Words | None]:
        from contactlogic.sequence.bits import from_table

        width = 64 * (stop - start)
        mask = (1 << width) - 1
        n = max(6, (width - 1).bit_length())
        return [
            None if table is None else from_table(table >> (64 * start) & mask, n)
            for table in self.tables
        ]


@dataclass(frozen=True)
class FormulaDrives:
    """Drives given as functions of the columns' words.

    Each function takes the words of every column by name and combines them with `&`, `|`, `^`
    and `~` alone; it returns an array of the same length.
    """

    names: tuple[str, ...]
    formulas: Mapping[str, Callable[[Mapping[str, Words]], Words]]

    def words(self, start: int, stop: int) -> Sequence[Words | None]:
        values = variables(self.names, start, stop)
        return [
            self.formulas[name](values) if name in self.formulas else None for name in self.names
        ]


@dataclass(frozen=True)
class ContactDrives:
    """Drives as a finished network feeds its coils.

    Columns are the network's relays in its order; a column is a coil if it is among the loads,
    otherwise an input.
    """

    network: Network

    def words(self, start: int, stop: int) -> Sequence[Words | None]:
        import numpy as np

        values = variables(self.network.relays, start, stop)
        closed = [
            (c.common, c.throw, values[c.relay] if c.make else ~values[c.relay])
            for c in self.network.contacts()
        ]
        live = conducting(self.network.supply, closed, stop - start)
        nothing = np.zeros(stop - start, dtype=np.uint64)
        answer: list[Words | None] = []
        for name in self.network.relays:
            net = self.network.loads.get(name)
            if name not in self.network.loads:
                answer.append(None)
            else:
                answer.append(nothing if net is None else live.get(net, nothing))
        return answer


def conducting(
    source: str, closed: Sequence[tuple[str, str, Words]], length: int
) -> dict[str, Words]:
    """States in which each net is joined to `source`, given when each contact is closed.

    Worked out for all states at once to the fixed point; nets never reached are left out.
    """
    import numpy as np

    touching: dict[str, list[tuple[str, Words]]] = {}
    for one, two, when in closed:
        touching.setdefault(one, []).append((two, when))
        touching.setdefault(two, []).append((one, when))
    live = {source: np.full(length, ~np.uint64(0), dtype=np.uint64)}
    waiting = [source]
    while waiting:
        net = waiting.pop(0)
        here = live[net]
        for other, when in touching.get(net, ()):
            if other == source:
                continue
            more = here & when
            if other in live:
                more |= live[other]
                if np.array_equal(more, live[other]):
                    continue
            elif not more.any():
                continue
            live[other] = more
            if other not in waiting:
                waiting.append(other)
    return live


def formula_drive(expression: Expression) -> Callable[[Mapping[str, Any]], Any]:
    """A drive as a function of its columns' values, from switching algebra.

    The function takes packed words or decision diagrams by name, whatever combines with `&`,
    `|`, `^` and `~`, and gives the same kind back.
    """

    def fed(values: Mapping[str, Any]) -> Any:
        some = next(iter(values.values()))
        return _value(expression, values, some ^ some)

    return fed


def _value(expression: Expression, values: Mapping[str, Any], nothing: Any) -> Any:
    if isinstance(expression, Name):
        return values[expression.name]
    if isinstance(expression, Constant):
        return ~nothing if expression.value else nothing
    if isinstance(expression, Break):
        return ~_value(expression.part, values, nothing)
    parts = [_value(part, values, nothing) for part in expression.parts]
    if isinstance(expression, Series):
        return reduce(and_, parts)
    if isinstance(expression, Parallel):
        return reduce(or_, parts)
    if isinstance(expression, Exclusive):
        return reduce(xor, parts)
    # A vote counts: `reached[k]` is where at least k of the parts so far are closed.
    reached = [~nothing] + [nothing] * len(parts)
    for part in parts:
        for k in range(len(parts), 0, -1):
            reached[k] = reached[k] | (reached[k - 1] & part)
    if expression.exactly and expression.least < len(parts):
        return reached[expression.least] & ~reached[expression.least + 1]
    return reached[expression.least]
