"""What the catalogue proves of jobs too large for it: poles of sets of relays.

Hold the relays outside a set T at one position.  What the poles of T then do for one load takes as
many poles as that function of T needs by itself (proof in `restriction`), and of up to four relays
the catalogue knows the bound.  So every set of up to four relays has a least number of poles, by
look-up alone, whatever limits the job has: limits only leave fewer networks.

`least_for_relay` and `shortfall` answer in the same way whether pole budgets can be kept at all.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import combinations, islice
from typing import Literal

from contactlogic.search.bounds import Demand, least_by_load, needed_kinds, total
from contactlogic.search.catalogue import Form, bound
from contactlogic.search.classes import RELAYS
from contactlogic.search.problem import Problem, compositions, needs
from contactlogic.truth import Target

__all__ = [
    "Shortfall",
    "demands_of",
    "least_at_once",
    "least_for_relay",
    "least_of_sets",
    "shortfall",
]

_MOST_RELAYS = 8
_MOST_LOOK_UPS = 20_000
_MOST_WAYS = 2000  # to share poles out, looked at for one size


def least_of_sets(problem: Problem) -> dict[int, int]:
    """Least poles (contacts, where the objective counts them) of sets of relays, as bit masks.

    A job of one load and up to four relays is not looked up whole: the exact search finds that
    bound itself.
    """
    n = problem.n
    if n > _MOST_RELAYS:
        return {}
    form: Form = "contacts" if problem.objective == "contacts" else "bridge"
    loads = [target for target in problem.targets.values() if target.on and target.off]
    largest = RELAYS if len(loads) > 1 else min(RELAYS, n - 1)
    least: dict[int, int] = {}
    known: dict[Target, int] = {}
    left = _MOST_LOOK_UPS
    for size in range(largest, 1, -1):
        for kept in combinations(range(n), min(size, n)):
            mask = sum(1 << relay for relay in kept)
            for target in loads:
                for part in _parts(target, kept):
                    if part not in known:
                        known[part] = bound(part, form) or 0
                        left -= 1
                    least[mask] = max(least.get(mask, 0), known[part])
            if left < 0:
                return least
    return least


def demands_of(problem: Problem, least: Mapping[int, int]) -> list[Demand]:
    """Least poles of sets of relays as demands."""
    return [
        Demand(tuple(mask >> kind.relay & 1 for kind in problem.kinds), poles)
        for mask, poles in sorted(least.items())
    ]


def least_at_once(problem: Problem) -> int:
    """Poles (contacts, for that objective) that every network needs, without any search.

    The least number that can be shared out over the relays so that every bound on a set of them
    is met.
    """
    known = [*least_by_load(problem), *demands_of(problem, least_of_sets(problem))]
    least = needed_kinds(problem, problem.targets.values())
    poles = max(total(known), sum(least.values()))
    while True:
        ways = list(islice(compositions(problem.kinds, poles, least, {}), _MOST_WAYS + 1))
        if len(ways) > _MOST_WAYS or any(all(d.met(way) for d in known) for way in ways):
            return poles
        poles += 1


def _parts(target: Target, kept: tuple[int, ...]) -> Iterator[Target]:
    """The target over the relays kept, for every position of the others."""
    offsets = [
        sum((small >> k & 1) << relay for k, relay in enumerate(kept))
        for small in range(1 << len(kept))
    ]
    mask = offsets[-1]
    for row in range(1 << target.n):
        if row & mask:
            continue
        on = sum((target.on >> row + offset & 1) << k for k, offset in enumerate(offsets))
        free = sum((target.free >> row + offset & 1) << k for k, offset in enumerate(offsets))
        part = Target(len(kept), on, free)
        if part.on and part.off:
            yield part


def least_for_relay(problem: Problem, relay: str) -> int:
    """Poles that every network needs of one relay, whatever the other relays may spend.

    0 where no load needs the relay.  Without isolated loads the answer else is 1, and 1 is the
    least there is: with poles of the others without limit any two nets can be joined in just the
    settings of the others that one likes; so one changeover, its common joined to the supply, can
    have its throws joined in each setting to all loads that are to follow its make, or its break,
    there.

    Isolation takes more.  Hold the others at one setting and let m loads be wanted on there with
    the relay operated and off with it released, no two able to share a net and at most one of
    them not isolated.  Released, their nets and the supply are m + 1 pieces apart.  Operated they
    are one, and each closed make joins two pieces: m makes, each of a pole of its own.  Likewise
    for breaks.
    """
    i = problem.relays.index(relay)
    if not any(
        needs(target, i, make) for target in problem.targets.values() for make in (True, False)
    ):
        return 0
    return max([1, *(_apart(problem, loads) for loads in _following(problem, i))])


def _following(problem: Problem, i: int) -> Iterator[list[str]]:
    """Loads that follow relay i one way, for each setting of the others."""
    if not problem.isolated:
        return
    step = 1 << i
    for row in range(1 << problem.n):
        if row & step:
            continue
        for on_row, off_row in ((row + step, row), (row, row + step)):
            yield [
                name
                for name, target in problem.targets.items()
                if target.on >> on_row & 1 and target.off >> off_row & 1
            ]


def _apart(problem: Problem, loads: Iterable[str]) -> int:
    """Size of a family of these loads on nets of their own, at most one of them not isolated."""
    family: list[str] = []
    for name in sorted(loads, key=lambda name: name not in problem.isolated):
        if name not in problem.isolated and any(other not in problem.isolated for other in family):
            continue
        mine = problem.targets[name]
        theirs = [problem.targets[other] for other in family]
        if all(mine.on & other.off or mine.off & other.on for other in theirs):
            family.append(name)
    return len(family)


@dataclass(frozen=True)
class Shortfall:
    """Budgets that no network keeps.

    Args:
        relays: whose contacts fall short, in the order of the job.
        allowed: what their budgets come to.
        least: what every network needs of them together; proved.
        what: what is short; makes or breaks only of a relay with separate contacts.
    """

    relays: tuple[str, ...]
    allowed: int
    least: int
    what: Literal["poles", "makes", "breaks"] = "poles"


def shortfall(problem: Problem) -> Shortfall | None:
    """Relays whose budgets no network can keep, the fewest; None if nothing shows it at once.

    Looks at single relays, at what the catalogue says of sets of relays, and at the bounds for all
    relays together where each has a budget.  Takes no search.
    """
    limits = dict(problem.budgets)
    for relay, have in problem.separate.items():
        i = problem.relays.index(relay)
        both: tuple[tuple[Literal["makes", "breaks"], int], ...]
        both = (("makes", have.makes), ("breaks", have.breaks))
        for what, allowed in both:
            wanted = any(needs(t, i, what == "makes") for t in problem.targets.values())
            if wanted and not allowed:
                return Shortfall((relay,), 0, 1, what)
        limits[relay] = min(limits.get(relay, have.makes + have.breaks), have.makes + have.breaks)
    for relay in problem.relays:
        least = least_for_relay(problem, relay) if relay in limits else 0
        if relay in limits and least > limits[relay]:
            return Shortfall((relay,), limits[relay], least)
    if not limits:
        return None
    counted = replace(problem, objective="poles")
    found = [_short(problem, limits, mask, least) for mask, least in _sets(counted)]
    short = [each for each in found if each is not None]
    return min(short, key=lambda each: (len(each.relays), each.relays), default=None)


def _sets(problem: Problem) -> Iterator[tuple[int, int]]:
    yield from sorted(least_of_sets(problem).items())
    everyone = (1 << problem.n) - 1
    for demand in least_by_load(problem):
        yield everyone, _total(demand)


def _total(demand: Demand) -> int:
    return -(-demand.least // max(demand.weights, default=1))


def _short(problem: Problem, limits: Mapping[str, int], mask: int, least: int) -> Shortfall | None:
    relays = tuple(name for i, name in enumerate(problem.relays) if mask >> i & 1)
    if any(name not in limits for name in relays):
        return None
    allowed = sum(limits[name] for name in relays)
    return Shortfall(relays, allowed, least) if allowed < least else None
