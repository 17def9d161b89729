"""Order and pairing together, by integer programming, so that the poles are fewest.

The order inside every series is a Hamiltonian circuit through its parts and a marker for its ends,
kept whole as Miller, Tucker and Zemlin do ("Integer programming formulation of traveling salesman
problems", 1960); which contacts then meet at a net follows from who is first, last and next to
whom.  A make and a break of one relay that meet may pair, each at most once, over all rungs at once
(rungs meet at the supply rail and at shared joints).  An integer program (`integer`) with a limit
in the engine's deterministic time, so that equal input gives an equal answer.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import combinations, permutations
from typing import Any

from contactlogic.integer import Program
from contactlogic.ladder.plan import Branch, Plan
from contactlogic.ladder.tree import Leaf, Series, Tree, leaves

__all__ = ["Arrangement", "Rules", "arrange"]

_END = -1  # stands for the outside of a series among its parts


@dataclass(frozen=True)
class Rules:
    """Which relays never pair, and how many poles each may use; relay numbers as in `Leaf`."""

    separate: frozenset[int] = frozenset()
    poles: Mapping[int, int] | None = None


@dataclass(frozen=True)
class Arrangement:
    """The plan with every series in its chosen order.

    `poles` is the number the engine counted, `least` whether it proved that no order of this plan
    takes fewer.
    """

    plan: Plan
    poles: int
    least: bool


Path = tuple[int, ...]  # branch number, then part numbers down the tree
Chain = tuple[Any, ...]  # conditions (solver literals) that must hold together


class _Model:
    """One plan as an integer program."""

    def __init__(self, plan: Plan, rules: Rules, effort: float, seed: int) -> None:
        self.plan = plan
        self.rules = rules
        self.program = Program(seed=seed, effort=effort)
        self.next_to: dict[Path, dict[tuple[int, int], Any]] = {}
        self.leaf: dict[Path, Leaf] = {}
        self.options: dict[tuple[Path, Path], list[Any]] = {}
        self.uses: dict[Path, list[Any]] = {}
        meeting: dict[int, list[dict[Path, Chain]]] = {}
        for number, branch in enumerate(plan.branches):
            left, right = self._sides(branch.tree, (number,))
            meeting.setdefault(branch.start, []).append(left)
            meeting.setdefault(branch.end, []).append(right)
        for sides in meeting.values():
            for one, other in combinations(sides, 2):
                self._meet(one, other, ())

    def _sides(self, tree: Tree, path: Path) -> tuple[dict[Path, Chain], dict[Path, Chain]]:
        """Contacts that touch the left and the right end of a tree, with the conditions for it."""
        if isinstance(tree, Leaf):
            self.leaf[path] = tree
            self.uses[path] = []
            return {path: ()}, {path: ()}
        sides = [self._sides(part, (*path, i)) for i, part in enumerate(tree.parts)]
        left: dict[Path, Chain] = {}
        right: dict[Path, Chain] = {}
        if not isinstance(tree, Series):
            for part_left, part_right in sides:
                left |= part_left
                right |= part_right
            for one, other in combinations(sides, 2):
                self._meet(one[0], other[0], ())
                self._meet(one[1], other[1], ())
            return left, right
        order = self._order(path, len(tree.parts))
        for i, (part_left, part_right) in enumerate(sides):
            left |= {p: (*chain, order[_END, i]) for p, chain in part_left.items()}
            right |= {p: (*chain, order[i, _END]) for p, chain in part_right.items()}
            for j, (next_left, _) in enumerate(sides):
                if i != j:
                    self._meet(part_right, next_left, (order[i, j],))
        return left, right

    def _order(self, path: Path, count: int) -> dict[tuple[int, int], Any]:
        places = (_END, *range(count))
        arcs = {(i, j): self.program.binary() for i in places for j in places if i != j}
        for i in places:
            self.program.add(sum(arcs[i, j] for j in places if i != j) == 1)
            self.program.add(sum(arcs[j, i] for j in places if i != j) == 1)
        if count > 2:  # two parts cannot form a circuit that leaves the ends out
            turn = [self.program.integer(0, count - 1) for _ in range(count)]
            for i, j in permutations(range(count), 2):
                self.program.add(turn[j] - turn[i] + count * (1 - arcs[i, j]) >= 1)
        self.next_to[path] = arcs
        return arcs

    def _meet(self, one: dict[Path, Chain], other: dict[Path, Chain], extra: Chain) -> None:
        """Offer every make and break of one relay that may meet here as a pair."""
        for p, chain in one.items():
            for q, more in other.items():
                a, b = self.leaf[p], self.leaf[q]
                if a.relay != b.relay or a.make == b.make or a.relay in self.rules.separate:
                    continue
                chosen = self.program.binary()
                for condition in (*chain, *more, *extra):
                    self.program.add(chosen <= condition)
                self.uses[p].append(chosen)
                self.uses[q].append(chosen)
                self.options.setdefault((min(p, q), max(p, q)), []).append(chosen)

    def solve(self) -> Arrangement | None:
        """The best order found, None if there is none."""
        program = self.program
        for choices in self.uses.values():
            if choices:
                program.add(sum(choices) <= 1)
        contacts: dict[int, int] = {}
        for leaf in self.leaf.values():
            contacts[leaf.relay] = contacts.get(leaf.relay, 0) + 1
        pairs: dict[int, list[Any]] = {relay: [] for relay in contacts}
        for (p, _), choices in self.options.items():
            pairs[self.leaf[p].relay] += choices
        budgets = self.rules.poles or {}
        busiest = program.integer(0, max(contacts.values(), default=0))
        for relay, count in sorted(contacts.items()):
            poles = count - sum(pairs[relay])
            program.add(busiest >= poles)
            if relay in budgets:
                program.add(poles <= budgets[relay])
        total = sum(contacts.values()) - sum(sum(pairs[relay]) for relay in sorted(pairs))
        weight = max(contacts.values(), default=0) + 1
        program.minimize(total * weight + busiest)
        if not program.solve():
            return None
        ordered = Plan(
            tuple(
                Branch(b.start, b.end, self._ordered(b.tree, (i,)))
                for i, b in enumerate(self.plan.branches)
            ),
            self.plan.loads,
        )
        found = program.cost // weight
        return Arrangement(ordered, found, program.at_least // weight >= found)

    def _ordered(self, tree: Tree, path: Path) -> Tree:
        if isinstance(tree, Leaf):
            return tree
        parts = [self._ordered(part, (*path, i)) for i, part in enumerate(tree.parts)]
        if not isinstance(tree, Series):
            return type(tree)(tuple(parts))
        return Series(tuple(parts[i] for i in self._walk(path)))

    def _walk(self, path: Path) -> Iterator[int]:
        value = self.program.value
        following = {i: j for (i, j), var in self.next_to[path].items() if value(var)}
        here = following[_END]
        while here != _END:
            yield here
            here = following[here]


def arrange(plan: Plan, rules: Rules, *, effort: float = 5.0, seed: int = 0) -> Arrangement | None:
    """Order every series of `plan` for the fewest poles, then for the least busiest relay.

    Args:
        effort: limit in the solver's deterministic seconds.
        seed: of the solver.

    Returns None if no order keeps the pole budgets, or none was found in time.
    """
    if not any(True for branch in plan.branches for _ in leaves(branch.tree)):
        return Arrangement(plan, 0, True)
    return _Model(plan, rules, effort, seed).solve()
