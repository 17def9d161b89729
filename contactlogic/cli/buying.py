"""What the commands that buy share: their options, the parts list, purchases for designs."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from contactlogic.cli.jobs import Wirable
from contactlogic.design import Design, Result
from contactlogic.errors import PartsError
from contactlogic.job.model import AnyJob, Job, PatternJob

if TYPE_CHECKING:
    from contactlogic.purchase.cheapest import Cheapest
    from contactlogic.purchase.parts import Contacts
    from contactlogic.purchase.schedule import Drawer, Schedule
    from contactlogic.synthesis import Search

__all__ = [
    "Asked",
    "Priced",
    "drawer_of",
    "moved",
    "priced",
    "priced_text",
    "schedules_of",
    "schedules_of_result",
]

_SOLVER_SECONDS = 60.0  # for the purchase of one design


@dataclass(frozen=True)
class Asked:
    """Options about the purchase, as typed."""

    parts: Path | None = None
    spares: int = 0
    coil_volts: float | None = None
    repeaters: bool = True
    have: Sequence[str] = ()
    buy: Sequence[str] = ()


def drawer_of(asked: Asked, job: AnyJob | None) -> Drawer:
    """The parts list and how to buy from it.

    Raises:
        InputError: the parts list or an option cannot be used.
    """
    from contactlogic.purchase.buy import Order
    from contactlogic.purchase.needs import wanted_coil
    from contactlogic.purchase.read_parts import read_parts
    from contactlogic.purchase.schedule import Drawer

    parts = None if asked.parts is None else read_parts(asked.parts)
    coil, said = wanted_coil(job, asked.coil_volts)
    order = Order(coil, said, asked.spares, asked.repeaters, _SOLVER_SECONDS)
    return Drawer(parts, order, dict(map(_had, asked.have)), tuple(asked.buy))


def _had(text: str) -> tuple[str, Contacts | None]:
    """`UP` or `UP=2C`: a relay that is there already, with its contacts."""
    from contactlogic.purchase.parts import Contacts

    name, equals, form = text.partition("=")
    if not equals:
        return name.strip(), None
    stated = re.findall("([0-9]{0,2})([ABCD])", form.upper())
    if not stated or "".join(number + letter for number, letter in stated) != form.upper():
        raise PartsError(
            f"--have {text} is not clear",
            expected="a relay such as UP, or a relay and its contacts such as UP=2C or UP=1A1B",
        )
    counts = dict.fromkeys("ABCD", 0)
    for number, letter in stated:
        counts[letter] += int(number or 1)
    return name.strip(), Contacts(*counts.values())


def schedules_of_result(job: Wirable, result: Result, asked: Asked) -> list[Schedule]:
    """Schedules of designs just made.

    Raises:
        PartsError: the parts list cannot be used, or nothing can be bought for some relay.
    """
    outside, slow = moved(job)
    drawer = drawer_of(asked, result.job)
    return schedules_of(result.designs, result.repeaters, drawer, result.job, outside, slow)


def schedules_of(
    designs: Sequence[Design],
    repeaters: Mapping[str, str],
    drawer: Drawer,
    job: Job | None,
    outside: Sequence[str],
    slow: Sequence[str],
) -> list[Schedule]:
    from contactlogic.purchase.schedule import schedule_of

    return [
        schedule_of(design, drawer, job=job, repeaters=repeaters, outside=outside, slow=slow)
        for design in designs
    ]


def moved(job: Wirable) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """What is moved from outside, and what is slow to move."""
    if isinstance(job, Job):
        return (), ()
    if isinstance(job, PatternJob):
        from contactlogic.sequence.pattern import sequence_of

        job, _ = sequence_of(job)
    timing = job.table.timing
    return tuple(job.table.inputs), (*timing.slow_release, *timing.slow_operate)


@dataclass(frozen=True)
class Priced:
    """Designs with what is bought for them."""

    result: Result
    schedules: tuple[Schedule, ...] = ()
    cheapest: Cheapest | None = None


def priced(
    job: Wirable,
    search: Search,
    wired: Callable[[Wirable, Search], Result],
    asked: Asked,
    *,
    cheapest: bool,
) -> Priced:
    """Wire a job and buy for it.

    Args:
        job: what to wire.
        search: how to search.
        wired: wires any job by a search.
        asked: about the purchase; without a parts list nothing is bought.
        cheapest: whether the price counts before the number of poles.

    Raises:
        InputError: as `wired`, or the parts list cannot be used, or nothing can be bought.
    """
    if asked.parts is None:
        return Priced(wired(job, search))
    drawer = drawer_of(asked, job)  # a fault of the list is told before the search
    if not cheapest:
        result = wired(job, search)
        return Priced(result, tuple(schedules_of_result(job, result, asked)))
    from contactlogic.purchase.cheapest import cheapest as search_cheapest

    outside, slow = moved(job)
    found = search_cheapest(search, lambda s: wired(job, s), drawer, outside=outside, slow=slow)
    return Priced(found.result, found.schedules, found)


def priced_text(found: Priced, *, width: int | None) -> str:
    """What is bought, for the screen; empty if nothing is."""
    if not found.schedules:
        return ""
    from contactlogic.report.purchase import cheapest_text, purchase_text

    text = purchase_text(found.schedules, found.result.job.title, width=width)
    if found.cheapest is not None:
        text = cheapest_text(found.cheapest, width=width) + "\n" + text
    return "\n" + text
