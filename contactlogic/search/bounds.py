"""Proved lower bounds on the number of poles, without search.

Every bound is a `Demand`: a weight for each kind of pole and the least that the weighted count of
poles can be.  All weights are 1 or 2, so a demand bounds the poles of a network, and it also
strikes out ways to share poles out over the relays.  The proofs stand with the functions.

Write c_i for the poles of relay i and P for all poles; "wanted on" and "wanted off" leave out free
rows.  A pole is taken to be wired on both throws; a contact that is not there only closes less.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from typing import NamedTuple

from contactlogic.search.encoding import Kind
from contactlogic.search.problem import Grouping, Problem, needs
from contactlogic.truth import Target, all_rows

__all__ = [
    "Demand",
    "demands",
    "least_by_kind",
    "least_by_load",
    "least_poles",
    "least_together",
    "needed_kinds",
    "private_rows",
    "total",
]

_MOST_SUBCUBES = 8  # relays up to which every subcube of rows is looked at
_MOST_FAMILY = 24  # loads looked at for private rows


class Demand(NamedTuple):
    """Poles of every kind, in the order of `Problem.kinds`, weigh at least so much together."""

    weights: tuple[int, ...]
    least: int

    def met(self, counts: Sequence[int]) -> bool:
        """Whether so many poles of each kind weigh enough."""
        return sum(map(int.__mul__, self.weights, counts)) >= self.least


def total(demands: Collection[Demand]) -> int:
    """Least poles in all by each demand alone: no kind weighs more than its heaviest."""
    return max((-(-d.least // max(d.weights)) for d in demands if d.least), default=0)


def demands(problem: Problem, grouping: Grouping) -> list[Demand]:
    """Everything known beforehand about the networks of one grouping."""
    return [*_single(problem, grouping.targets), *least_together(problem, grouping)]


def least_by_kind(problem: Problem, grouping: Grouping) -> dict[Kind, int]:
    """Least poles of each kind: 1 for those that some net needs.

    A changeover of relay i is needed if two rows that differ in i alone want opposite things of
    one load: with no contact of i, both rows have the same closed contacts.  The way that feeds
    the load in the row where it is on must be cut by i in the other, so it passes a make of i if
    i is operated in the row where the load is on, and a break otherwise; hence the count for
    separate makes and breaks.
    """
    return needed_kinds(problem, grouping.targets)


def needed_kinds(problem: Problem, targets: Collection[Target]) -> dict[Kind, int]:
    """Least poles of each kind that these loads show by themselves: as in `least_by_kind`."""
    least = {}
    for kind in problem.kinds:
        forms = {"C": (True, False), "A": (True,), "B": (False,)}[kind.form]
        least[kind] = int(
            any(needs(target, kind.relay, make) for target in targets for make in forms)
        )
    return least


def _single(problem: Problem, targets: Collection[Target]) -> Iterator[Demand]:
    least = needed_kinds(problem, targets)
    yield Demand((1,) * len(least), sum(least.values()))


def least_by_load(problem: Problem) -> list[Demand]:
    """What holds however loads share nets: a net that feeds several needs what each of them needs.

    Loads with private rows want opposite things somewhere, so no two of them share a net.
    """
    targets = list(problem.targets.values())
    found = list(_single(problem, targets))
    found.append(Demand((1,) * len(problem.kinds), private_rows(targets, _pairs(problem))))
    return found


def _pairs(problem: Problem) -> bool:
    """Whether a pole may have both throws wired."""
    return any(kind.form == "C" for kind in problem.kinds)


def least_poles(problem: Problem, grouping: Grouping) -> int:
    """Poles (or contacts) that every network of this grouping needs, by `demands`."""
    return total(demands(problem, grouping))


def least_together(problem: Problem, grouping: Grouping) -> Iterator[Demand]:
    """Load nets that are on somewhere while all relays but those of a set D stand still.

    Let U be the load nets that are wanted on in at least one of these 2^|D| rows.  The closed
    contacts of the other relays are the same in all of them; let them cut the nets into pieces.
    A piece other than the supply's that holds a net of U is joined to the supply's piece, maybe
    through others, by poles of D.  A pole touches at most three pieces, so the c poles of D join at
    most 2c pieces to the supply's (a separate contact only one).  A piece with u nets takes at
    least u - 1 closed contacts, so the pieces that hold U and the supply, at most 2c + 1 with
    |U| + 1 nets in all, take |U| - 2c, each of a pole of its own: P - c + 2c >= |U|.

    With D empty this is a single row: so many nets on, so many contacts closed.
    """
    n = problem.n
    joint = [0] * (1 << n)  # nets wanted on in each row, as bits
    for net, target in enumerate(grouping.targets):
        for row in range(1 << n):
            joint[row] |= (target.on >> row & 1) << net
    sets = range(1 << n) if n <= _MOST_SUBCUBES else (0,)
    seen: dict[int, list[int]] = {0: joint}
    for moving in sets:
        if moving:
            low = moving & -moving
            before = seen[moving ^ low]
            seen[moving] = [before[row] | before[row ^ low] for row in range(1 << n)]
        least = max((nets.bit_count() for nets in seen[moving]), default=0)
        weights = tuple(
            2 if kind.form == "C" and moving >> kind.relay & 1 else 1 for kind in problem.kinds
        )
        yield Demand(weights, least)


def private_rows(targets: Sequence[Target], pairs: bool = True) -> int:
    """Poles needed by the largest family of loads each of which has a row to itself.

    Let each of d loads have a row in which it is wanted on and the others of the family are wanted
    off.  Look at these rows alone: no two of the d nets are on at once.  Then P >= d - 1, and
    P >= d if there is also a row in which all d are wanted off, or if no pole has two throws.

    Proof by induction over d.  In the row of load a, take a way from the supply to a and call the
    pole of its last contact the last of a.  The net before a is no net of the family, since a alone
    is on.  So a pole is the last of one load, by its common or a throw, or of two, by its throws.
    If no pole is the last of two, P >= d.  Else let a pole with throws at loads a and b be the last
    of both, and c its common.  If c is the supply, a or b is on in all these rows, so d = 2 (and
    there is no row with both off), and P >= 1.  Otherwise put c in the family for a and b and take
    the pole out.  In these rows c is on only if a or b is, so again no two nets of the family are
    on at once, and in a row with all off c is off.  The ways of the other loads do not use
    the pole, for then a or b would be on beside them, and neither does the way to c in the row of
    a, if it is a simple one.  Hence d - 1 nets, P - 1 poles, and nothing else has changed.
    """
    loads = [target for target in targets if target.on and target.off][:_MOST_FAMILY]
    full = all_rows(targets[0].n) if targets else 0
    best = 0

    def look(i: int, family: list[int], none: int) -> None:
        # family: rows private to each load taken so far; none: rows in which all are off
        nonlocal best
        worth = len(family) - (1 if pairs and not none else 0)
        best = max(best, worth)
        if i == len(loads) or len(family) + len(loads) - i <= best:
            return
        new = loads[i]
        taken = [rows & new.off for rows in family] + [none & new.on]
        if all(taken):
            look(i + 1, taken, none & new.off)
        look(i + 1, family, none)

    look(0, [], full)
    return best
