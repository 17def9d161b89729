"""The state space as decision diagrams, for sequencers with more relays than bits can hold.

Sets of states and moves are reduced ordered binary decision diagrams (Bryant 1986) of the
`biodivine_aeon` library, which is met in this module alone.  The rule "quick before slow" is
written into the update functions: a slow relay keeps its position while any quick one is pending,
so every column's update function is its position, changed where it may move.

The topmost variable of the diagrams is the last column, so that the first valuation of a diagram
is the lowest state.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from typing import Any

from contactlogic.network import Network
from contactlogic.sequence.motion import MoveRules
from contactlogic.sequence.space import Peeled, Watch

__all__ = ["Diagram", "SymbolicMotion", "contact_diagrams", "symbolic_motion"]


class Diagram:
    """A set of states: a decision diagram with `&`, `|`, `^` and `~`, like packed words."""

    __slots__ = ("bdd",)

    def __init__(self, bdd: Any) -> None:
        self.bdd = bdd

    def __and__(self, other: Diagram) -> Diagram:
        return Diagram(self.bdd.l_and(other.bdd))

    def __or__(self, other: Diagram) -> Diagram:
        return Diagram(self.bdd.l_or(other.bdd))

    def __xor__(self, other: Diagram) -> Diagram:
        return Diagram(self.bdd.l_xor(other.bdd))

    def __invert__(self) -> Diagram:
        return Diagram(self.bdd.l_not())


def _and(one: bool | None, two: bool | None) -> bool | None:
    if one is False or two is False:
        return False
    return None if one is None or two is None else True


def _variables(n: int) -> tuple[Any, list[Any]]:
    """The variable set, and the variable of each column."""
    from biodivine_aeon import BddVariableSet

    context = BddVariableSet([f"c{i}" for i in reversed(range(n))])
    return context, list(reversed(context.variable_ids()))


def symbolic_motion(
    rules: MoveRules,
    names: tuple[str, ...],
    drives: Callable[[Mapping[str, Diagram]], Mapping[str, Diagram]],
    *,
    watch: Watch | None = None,
) -> SymbolicMotion:
    """The moves of a sequencer as diagrams.

    Args:
        names: the columns.
        drives: given each column's operated states, each coil's drive by name.
    """
    context, variables = _variables(rules.n)
    position = [Diagram(context.mk_literal(variable, True)) for variable in variables]
    fed = drives(dict(zip(names, position, strict=True)))
    nothing = Diagram(context.mk_false())
    any_quick, any_pending = nothing, nothing
    quick: dict[int, Diagram] = {}
    slow: dict[int, Diagram] = {}
    for i, name in enumerate(names):
        if i in rules.inputs:
            continue
        pending = fed[name] ^ position[i]
        hasty = pending
        if i in rules.slow_release:
            hasty &= ~position[i]
        if i in rules.slow_operate:
            hasty &= position[i]
        quick[i], slow[i] = hasty, pending & ~hasty
        any_quick |= hasty
        any_pending |= pending
    rest = ~any_pending
    able = []
    for i in range(rules.n):
        if i in rules.inputs:
            held = [state for state, allowed in rules.waiting.items() if i not in allowed]
            able.append(rest & ~_of(context, rules.n, held))
        else:
            able.append(quick[i] | (slow[i] & ~any_quick))
    return SymbolicMotion(
        rules.n, rules.inputs, context, variables, able, Watch() if watch is None else watch
    )


def contact_diagrams(
    network: Network,
) -> Callable[[Mapping[str, Diagram]], Mapping[str, Diagram]]:
    """The drives of a finished network's coils, for `symbolic_motion`."""

    def drives(position: Mapping[str, Diagram]) -> Mapping[str, Diagram]:
        some = position[network.relays[0]]
        everything = some | ~some
        live = dict.fromkeys(network.nets(), everything ^ everything)
        live[network.supply] = everything
        touching: dict[str, list[tuple[str, Diagram]]] = {net: [] for net in live}
        for contact in network.contacts():
            closed = position[contact.relay] if contact.make else ~position[contact.relay]
            touching[contact.common].append((contact.throw, closed))
            touching[contact.throw].append((contact.common, closed))
        waiting = [network.supply]
        while waiting:
            net = waiting.pop(0)
            for other, closed in touching[net]:
                more = live[other] | (live[net] & closed)
                if more.bdd != live[other].bdd:
                    live[other] = more
                    if other not in waiting:
                        waiting.append(other)
        nothing = everything ^ everything
        fed = {}
        for name in network.relays:
            if name in network.loads:
                feed = network.loads[name]
                fed[name] = nothing if feed is None else live[feed]
        return fed

    return drives


def _of(context: Any, n: int, states: Iterable[int]) -> Diagram:
    from biodivine_aeon import Bdd, BddValuation

    total = context.mk_false()
    for state in states:
        values = [bool(state >> i & 1) for i in reversed(range(n))]
        total = total.l_or(Bdd(BddValuation(context, values)))
    return Diagram(total)


class SymbolicMotion:
    """The state space with single moves; sets are diagrams.

    Keeps the contract of `contactlogic.sequence.space.Space`.
    """

    def __init__(
        self,
        n: int,
        inputs: tuple[int, ...],
        context: Any,
        variables: list[Any],
        able: list[Diagram],
        watch: Watch,
    ) -> None:
        self.n = n
        self.inputs = inputs
        self.watch = watch
        self._context = context
        self._variables = variables
        self._able = able

    def everything(self) -> Diagram:
        return Diagram(self._context.mk_true())

    def of(self, states: Iterable[int]) -> Diagram:
        return _of(self._context, self.n, states)

    def both(self, one: Diagram, two: Diagram) -> Diagram:
        return one & two

    def either(self, one: Diagram, two: Diagram) -> Diagram:
        return one | two

    def without(self, one: Diagram, two: Diagram) -> Diagram:
        return Diagram(one.bdd.l_and_not(two.bdd))

    def none(self, states: Diagram) -> bool:
        return bool(states.bdd.is_false())

    def count(self, states: Diagram) -> int:
        return int(states.bdd.cardinality())

    def pick(self, states: Diagram) -> int:
        return self._number(states.bdd.valuation_first())

    def _number(self, valuation: Any) -> int:
        return sum(1 << i for i, variable in enumerate(self._variables) if valuation[variable])

    def has(self, states: Diagram, state: int) -> bool:
        return bool(states.bdd([bool(state >> i & 1) for i in reversed(range(self.n))]))

    def listing(self, states: Diagram, most: int) -> list[int]:
        if self.count(states) <= most:
            return sorted(self._number(v) for v in states.bdd.valuation_iterator())
        found: list[int] = []
        while len(found) < most:
            found.append(self.pick(states))
            states = self.without(states, self.of((found[-1],)))
        return found

    def movable(self, i: int) -> Diagram:
        return self._able[i]

    def moving(self, i: int, into: Diagram) -> Diagram:
        from biodivine_aeon import Bdd

        turn = self._variables[i]
        return Diagram(Bdd.apply2(self._able[i].bdd, into.bdd, _and, flip_right=turn))

    def _reached(self, i: int, states: Diagram) -> Diagram:
        from biodivine_aeon import Bdd

        turn = self._variables[i]
        return Diagram(Bdd.apply2(self._able[i].bdd, states.bdd, _and, flip_output=turn))

    def pre(self, into: Diagram) -> Diagram:
        total = self.moving(0, into)
        for i in range(1, self.n):
            total |= self.moving(i, into)
        return total

    def post(self, states: Diagram) -> Diagram:
        total = self._reached(0, states)
        for i in range(1, self.n):
            total |= self._reached(i, states)
        return total

    def forward(self, states: Diagram, within: Diagram | None = None) -> Diagram:
        return self._close(states, within, self._reached)

    def backward(self, states: Diagram, within: Diagram | None = None) -> Diagram:
        return self._close(states, within, self.moving)

    def _close(
        self, states: Diagram, within: Diagram | None, move: Callable[[int, Diagram], Diagram]
    ) -> Diagram:
        """Saturation (Ciardo, Luettgen and Siminiceanu 2001): each column's moves to the end,
        the lowest in the diagram first, starting over as soon as anything is new."""
        reached = states if within is None else states & within
        steps = 0
        i = 0
        while i < self.n:
            fresh = self.without(move(i, reached), reached)
            if within is not None:
                fresh &= within
            if self.none(fresh):
                i += 1
                continue
            reached |= fresh
            i = 0
            steps += 1
            self.watch.tick("following moves", steps)
        return reached

    def peel(self, region: Diagram) -> Peeled[Diagram]:
        left = region
        rounds = 0
        last = None
        while True:
            staying = left & self.pre(left)
            gone = self.without(left, staying)
            if self.none(gone):
                return Peeled(rounds, last, left)
            last = self.pick(gone)
            left = staying
            rounds += 1
            self.watch.tick("peeling", rounds)

    def successors(self, state: int) -> list[int]:
        return [state ^ (1 << i) for i in range(self.n) if self.has(self._able[i], state)]

    def predecessors(self, state: int) -> list[int]:
        found = (state ^ (1 << i) for i in range(self.n))
        return [there for i, there in enumerate(found) if self.has(self._able[i], there)]
