"""The test plan of a panel: rows to set one after the other, and the loads to look at in each."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from random import Random

from contactlogic.commission.cover import fewest_looks, fewest_rows
from contactlogic.commission.detect import Suspect, Watched, shown_by, suspects, union
from contactlogic.commission.order import moves_of, ordered
from contactlogic.fault import Fault, Panel, Simulator
from contactlogic.truth import all_rows, rows_of

__all__ = ["Look", "Step", "TestPlan", "Unseen", "plan_test"]

_ALL_TRIED = 1024  # rows up to which all are candidates for the plan
_SAMPLE = 512
_AT_ONCE = 1 << 20  # suspects times rows, tried before a choice is made again


@dataclass(frozen=True)
class Look:
    """A load to look at, and what it must do."""

    load: str
    on: bool


@dataclass(frozen=True)
class Step:
    """One row to set.

    Args:
        row: its number.
        change: relays to move from the step before (the first from all released), with the
            position to move them to.
        looks: the loads to look at.
        all_loads: what every load does in this row.
        shows: faults that this step is the first to show.
    """

    row: int
    change: tuple[tuple[str, bool], ...]
    looks: tuple[Look, ...]
    all_loads: tuple[Look, ...]
    shows: int


@dataclass(frozen=True)
class Unseen:
    """A fault that no row which may be set shows.

    Args:
        ways: how many of the ways in which it may show stay unseen.
        of_ways: in how many ways it may show.
        unlisted: a row outside the list that would show it, None if there is none.
    """

    fault: Fault
    ways: int
    of_ways: int
    unlisted: int | None


@dataclass(frozen=True)
class TestPlan:
    """Rows that show every fault that rows can show.

    Args:
        relays: in bit order.
        steps: in the order to go through.
        faults: how many faults were looked at: single ones, and wires swapped by twos.
        swaps: how many of these are swaps.
        unchanged_swaps: further swaps that join the same terminals as before: no fault.
        unseen: faults that no row shows.
        at_least: so many rows are needed (proved).
        least_rows: whether the steps are as few as can be (proved).
        least_looks: whether as few rows need as many looks (proved).
        moves: how many relays change in all.
    """

    __test__ = False  # not a test, whatever its name begins with

    relays: tuple[str, ...]
    steps: tuple[Step, ...]
    faults: int
    swaps: int
    unchanged_swaps: int
    unseen: tuple[Unseen, ...]
    at_least: int
    least_rows: bool
    least_looks: bool
    moves: int

    @property
    def looks(self) -> int:
        """How many looks in all."""
        return sum(len(step.looks) for step in self.steps)


def plan_test(panel: Panel, listed: int, *, seed: int = 0) -> TestPlan:
    """The fewest rows, then the fewest looks, that show every fault that can be shown.

    The least for the single faults comes first; swapped wires that it does not show are added to
    what must be shown, until nothing is left that it does not show.  A choice that is least for
    some faults and shows all is least for all.

    Args:
        panel: a panel that does what is wanted.
        listed: the rows that may be set, as a truth table over the panel's inputs.
        seed: of the sample of rows, where there are too many to try all.
    """
    single, swapped, same = suspects(panel)
    every = list(rows_of(listed))
    exhaustive = len(every) <= _ALL_TRIED
    watched = Watched(panel, every if exhaustive else _sample(panel, every, seed), exact=exhaustive)
    _add(watched, single, every)
    whole = tuple(range(len(panel.loads)))
    waiting = swapped
    if len(swapped) * len(watched.rows) <= _AT_ONCE:
        _add(watched, swapped, every)
        waiting = []

    def choose(choice: Callable[[], dict[int, tuple[int, ...]]]) -> dict[int, tuple[int, ...]]:
        """A choice of rows and looks that misses nothing; what one misses is watched from then."""
        nonlocal waiting
        missed = waiting
        while True:
            looks = choice()
            missed = _missed(watched, looks, missed) or _missed(watched, looks, waiting)
            if not missed:
                return looks
            _add(watched, missed[:: 1 + len(missed) * len(watched.rows) // _AT_ONCE], every)
            waiting = [suspect for suspect in waiting if suspect not in watched.shown]
            missed = [suspect for suspect in missed if suspect not in watched.shown]

    at_least = 0

    def rows_alone() -> dict[int, tuple[int, ...]]:
        nonlocal at_least
        rows, at_least = fewest_rows(
            len(watched.rows), list(watched.seen().values()), proved=exhaustive
        )
        return dict.fromkeys(rows, whole)

    least_looks = False

    def with_looks() -> dict[int, tuple[int, ...]]:
        nonlocal least_looks
        looks, least_looks = fewest_looks(
            len(watched.rows), list(watched.seen().values()), list(rows)
        )
        return looks

    rows = choose(rows_alone)
    looks = choose(with_looks)
    order = ordered([watched.rows[k] for k in looks])
    steps = _steps(watched, looks, order, waiting)
    faults = list(dict.fromkeys(suspect.fault for suspect in (*single, *swapped)))
    return TestPlan(
        panel.inputs,
        steps,
        len(faults),
        len(swapped),
        same,
        _unseen(watched, listed),
        at_least if exhaustive else min(1, len(steps)),
        exhaustive and at_least == len(steps),
        exhaustive and least_looks,
        moves_of(order),
    )


def _missed(
    watched: Watched, looks: Mapping[int, Sequence[int]], tried: Sequence[Suspect]
) -> list[Suspect]:
    caught = watched.caught(looks, tried)
    return [suspect for suspect, yes in zip(tried, caught, strict=True) if not yes]


def _sample(panel: Panel, every: Sequence[int], seed: int) -> list[int]:
    """Rows in which few relays are operated, few released, and some at random."""
    n = len(panel.inputs)
    whole = (1 << n) - 1
    some = {0, whole, *(1 << i for i in range(n)), *(whole ^ 1 << i for i in range(n))}
    some &= set(every)
    return sorted(some.union(Random(seed).sample(every, _SAMPLE)))


def _add(watched: Watched, tried: Sequence[Suspect], every: Sequence[int]) -> None:
    """Watch further suspects; where they show in no row of a sample, with a row that shows them."""
    watched.add(tried)
    if len(watched.rows) == len(every):
        return
    hidden = [suspect for suspect in tried if not any(watched.shown[suspect])]
    if hidden:
        rows = set()
        for tables in shown_by(watched.panel, every, hidden, exact=False):
            found = union(tables)
            rows |= {every[k] for k in rows_of(found & -found)}
        watched.add_rows(sorted(rows - set(watched.rows)))


def _steps(
    watched: Watched,
    looks: Mapping[int, tuple[int, ...]],
    order: Sequence[int],
    waiting: Sequence[Suspect],
) -> tuple[Step, ...]:
    """The steps in order; `waiting` are suspects that are shown but not watched."""
    panel = watched.panel
    place = {row: k for k, row in enumerate(watched.rows)}
    good = Simulator(panel, order).run().on
    left = dict.fromkeys([*watched.seen(), *waiting])
    steps = []
    before = 0
    for at, row in enumerate(order):
        chosen = looks[place[row]]
        suspected = list(left)
        caught = watched.caught({place[row]: chosen}, suspected)
        showing = [suspect for suspect, yes in zip(suspected, caught, strict=True) if yes]
        every = tuple(Look(load, bool(good[load] >> at & 1)) for load in panel.loads)
        moved = row ^ before
        steps.append(
            Step(
                row,
                tuple(
                    (relay, bool(row >> i & 1))
                    for i, relay in enumerate(panel.inputs)
                    if moved >> i & 1
                ),
                tuple(every[i] for i in chosen),
                every,
                len({suspect.fault for suspect in showing}),
            )
        )
        for suspect in showing:
            del left[suspect]
        before = row
    return tuple(steps)


def _unseen(watched: Watched, listed: int) -> tuple[Unseen, ...]:
    panel = watched.panel
    ways: dict[Fault, int] = {}
    hidden: dict[Fault, list[Suspect]] = {}
    for suspect, tables in watched.shown.items():
        ways[suspect.fault] = ways.get(suspect.fault, 0) + 1
        if not any(tables):
            hidden.setdefault(suspect.fault, []).append(suspect)
    others = list(rows_of(all_rows(len(panel.inputs)) & ~listed))
    tried = [suspect for some in hidden.values() for suspect in some]
    beyond: dict[Suspect, int] = {}
    if others and tried:
        for suspect, tables in zip(tried, shown_by(panel, others, tried, exact=False), strict=True):
            if rows := union(tables):
                beyond[suspect] = others[next(rows_of(rows))]
    return tuple(
        Unseen(
            fault,
            len(some),
            ways[fault],
            next((beyond[suspect] for suspect in some if suspect in beyond), None),
        )
        for fault, some in hidden.items()
    )
