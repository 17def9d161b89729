"""A synthesis problem as values, and everything about it that needs no solver.

`Problem` is what a job asks of its network.  `groupings` lists the ways in which loads may share
nets, `rows_of_grouping` writes the wants as rows for `encoding`, `compositions` lists how many
poles each relay may have.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal

from contactlogic.job.model import SeparateContacts
from contactlogic.search.encoding import Kind, Row
from contactlogic.truth import Target, all_rows, variable

__all__ = [
    "Grouping",
    "Problem",
    "compositions",
    "groupings",
    "interchangeable",
    "needs",
    "negations",
    "rows_of_grouping",
]


@dataclass(frozen=True)
class Problem:
    """What a network must do, and what it must keep to.

    Args:
        relays: names in bit order.
        targets: wanted behaviour by load, over those relays.
        budgets: most poles of a relay.
        separate: relays with separate makes and breaks; each single contact counts as one.
        isolated: loads that, when off, may be joined to no other load that is off.
        objective: count poles, or makes and breaks singly; they are paired into poles afterwards,
            and `budgets` still mean poles.
    """

    relays: tuple[str, ...]
    targets: Mapping[str, Target]
    budgets: Mapping[str, int] = field(default_factory=dict)
    separate: Mapping[str, SeparateContacts] = field(default_factory=dict)
    isolated: frozenset[str] = frozenset()
    objective: Literal["poles", "contacts"] = "poles"

    @property
    def n(self) -> int:
        return len(self.relays)

    @property
    def kinds(self) -> tuple[Kind, ...]:
        """Kinds of pole there are, in relay order."""
        return tuple(
            Kind(i, form)
            for i, name in enumerate(self.relays)
            for form in (
                ("A", "B") if self.objective == "contacts" or name in self.separate else ("C",)
            )
        )


@dataclass(frozen=True)
class Grouping:
    """One way to put loads on nets.

    Args:
        never: loads on no net.
        always: loads on the supply.
        groups: loads of net 1, of net 2, and so on.
        targets: what each of those nets must do.
        isolated: numbers (from 1) of nets that hold an isolated load.
    """

    never: tuple[str, ...]
    always: tuple[str, ...]
    groups: tuple[tuple[str, ...], ...]
    targets: tuple[Target, ...]
    isolated: frozenset[int]

    @property
    def fixed(self) -> int:
        """Supply and load nets."""
        return 1 + len(self.groups)


def groupings(problem: Problem) -> Iterator[Grouping]:
    """Every grouping that has to be tried for a minimum to be proved.

    A load that may be always off goes on no net and one that may be always on to the supply:
    that takes nothing from the rest.  Load b goes on the net of load a wherever b is content with
    whatever contents a (and a is isolated if b is).  All other loads are tried on every net whose
    loads they agree with, as well as on their own.
    """
    never, always, rest = [], [], []
    for name, target in problem.targets.items():
        if not target.on:
            never.append(name)
        elif not target.off:
            always.append(name)
        else:
            rest.append(name)
    leaders: list[list[str]] = []
    for name in sorted(
        rest, key=lambda load: (-_wants(problem.targets[load]), load not in problem.isolated)
    ):
        target = problem.targets[name]
        for group in leaders:
            lead = problem.targets[group[0]]
            if (
                not target.on & ~lead.on
                and not target.off & ~lead.off
                and (group[0] in problem.isolated or name not in problem.isolated)
            ):
                group.append(name)
                break
        else:
            leaders.append([name])
    order = {name: i for i, name in enumerate(problem.targets)}
    leaders.sort(key=lambda group: order[group[0]])
    for parts in _partitions(leaders, problem.targets):
        groups = tuple(
            tuple(sorted((name for group in part for name in group), key=order.__getitem__))
            for part in parts
        )
        yield Grouping(
            tuple(never),
            tuple(always),
            groups,
            tuple(_joint(problem, group) for group in groups),
            frozenset(
                i for i, group in enumerate(groups, start=1) if problem.isolated & set(group)
            ),
        )


def _wants(target: Target) -> int:
    return target.on.bit_count() + target.off.bit_count()


def _joint(problem: Problem, loads: Sequence[str]) -> Target:
    on = off = 0
    for load in loads:
        on |= problem.targets[load].on
        off |= problem.targets[load].off
    return Target(problem.n, on, all_rows(problem.n) & ~(on | off))


def _partitions(
    items: Sequence[list[str]], targets: Mapping[str, Target]
) -> Iterator[list[list[list[str]]]]:
    """Partitions of the items into parts that agree; most parts first."""

    def agree(a: list[str], b: list[str]) -> bool:
        one, two = targets[a[0]], targets[b[0]]
        return not (one.on & two.off | one.off & two.on)

    def extend(i: int, parts: list[list[list[str]]]) -> Iterator[list[list[list[str]]]]:
        if i == len(items):
            yield [list(part) for part in parts]
            return
        yield from extend(i + 1, [*parts, [items[i]]])
        for k, part in enumerate(parts):
            if all(agree(items[i], member) for member in part):
                yield from extend(i + 1, [*parts[:k], [*part, items[i]], *parts[k + 1 :]])

    return extend(0, [])


def rows_of_grouping(problem: Problem, grouping: Grouping) -> list[Row]:
    """The wants of a grouping, one row per setting; net 0 is the supply."""
    rows = []
    nets = range(1, grouping.fixed)
    for setting in range(1 << problem.n):
        on = tuple(v for v in nets if grouping.targets[v - 1].on >> setting & 1)
        off = tuple(v for v in nets if grouping.targets[v - 1].off >> setting & 1)
        apart = tuple(
            (load, other)
            for load in sorted(grouping.isolated)
            if load not in on
            for other in nets
            if other != load and other not in on
        )
        rows.append(Row(setting, tuple(range(grouping.fixed)), 0, on, off, apart))
    return rows


def needs(target: Target, i: int, make: bool) -> bool:
    """Whether some row needs a make (or a break) of relay i: on there, off with i the other way."""
    n = target.n
    operated = variable(n, i)
    step = 1 << i
    if make:
        return bool(target.on & operated & target.off << step)
    return bool(target.on & ~operated & target.off >> step)


def compositions(
    kinds: Sequence[Kind], poles: int, least: Mapping[Kind, int], most: Mapping[Kind, int]
) -> Iterator[tuple[int, ...]]:
    """All ways to share `poles` out over the kinds within the limits given."""

    def extend(i: int, left: int) -> Iterator[tuple[int, ...]]:
        if i == len(kinds):
            if not left:
                yield ()
            return
        rest = sum(least.get(kind, 0) for kind in kinds[i + 1 :])
        for count in range(least.get(kinds[i], 0), min(left - rest, most.get(kinds[i], left)) + 1):
            for tail in extend(i + 1, left - count):
                yield (count, *tail)

    return extend(0, poles)


def interchangeable(targets: Sequence[Target], n: int) -> list[list[int]]:
    """Relays in classes within which any two may trade places, negated or not, in every target.

    Such trades carry correct networks over into correct networks of as many poles, so one order
    of the pole counts within each class is enough.
    """
    classes: list[list[int]] = []
    for i in range(n):
        for group in classes:
            if any(
                all(_traded(t.on, n, group[0], i, turn) == t.on for t in targets)
                and all(_traded(t.free, n, group[0], i, turn) == t.free for t in targets)
                for turn in (False, True)
            ):
                group.append(i)
                break
        else:
            classes.append([i])
    return classes


def _traded(table: int, n: int, i: int, j: int, turn: bool) -> int:
    """The table with inputs i and j trading places, both negated if `turn`."""
    if i == j:
        return table
    a, b = variable(n, i), variable(n, j)
    # Rows in which the two differ trade values (plain); rows in which they agree do (turned).
    if turn:
        low, high, shift = table & ~a & ~b, table & a & b, (1 << i) + (1 << j)
        stay = table & (a ^ b)
        return stay | low << shift | high >> shift
    up, down, shift = table & a & ~b, table & b & ~a, (1 << j) - (1 << i)
    stay = table & all_rows(n) & ~(a ^ b)
    if shift < 0:
        return stay | up >> -shift | down << -shift
    return stay | up << shift | down >> shift


def negations(targets: Sequence[Target], n: int) -> list[int]:
    """Masks of relays that may be negated together without any target changing; not 0."""

    def turned(table: int, mask: int) -> int:
        for i in range(n):
            if mask >> i & 1:
                up = variable(n, i)
                table = (table & up) >> (1 << i) | (table & ~up) << (1 << i)
        return table

    return [
        mask
        for mask in range(1, 1 << n)
        if all(turned(t.on, mask) == t.on and turned(t.free, mask) == t.free for t in targets)
    ]
