"""Parts fitted at loads and coils as they are wired: their terminals, and where polarity lies.

From the net a load is fed from: the fuse, then (without a capacitor) the resistor, then the load.
Across the load, from its fed terminal to the return rail: the resistor and the capacitor one after
the other, and what suppresses its voltage.  A diode's cathode (K) and a capacitor's + lie where the
current comes from; that is the feed, unless its label begins with a minus.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

from contactlogic.job.model import Fittings, Job

__all__ = ["Fitted", "fitted", "polarity"]

_POLAR = ("diode", "zener")


@dataclass(frozen=True)
class Fitted:
    """Terminals that a load's fittings add to nets.

    Args:
        supply: on the net that feeds the load.
        fed: beside the load's own fed terminal; in the net that feeds it if nothing is in series.
        between: terminals that form nets of their own, each a pair.
        returned: on the return rail.
    """

    supply: tuple[str, ...] = ()
    fed: tuple[str, ...] = ()
    between: tuple[tuple[str, str], ...] = ()
    returned: tuple[str, ...] = ()


def polarity(job: Job) -> str | None:
    """What to say of polarity where a fitting has one, None where none has."""
    parts = job.bench.fittings.values()
    if not any(part.hold is not None or part.suppression in _POLAR for part in parts):
        return None
    side = "positive" if job.supply.positive else "negative"
    return f"polarity: direct current, the feed taken as the {side} rail"


def fitted(name: str, parts: Fittings, *, positive: bool = True) -> Fitted:
    """The terminals that the fittings of the load `name` add.

    Args:
        positive: whether the feed is the positive rail.
    """
    supply: list[str] = []
    fed: list[str] = []
    between: list[tuple[str, str]] = []
    returned: list[str] = []
    plus, minus = ("+", "-") if positive else ("-", "+")
    cathode, anode = ("K", "A") if positive else ("A", "K")
    chain = []
    if parts.fuse is not None:
        chain.append(f"{name}/fuse")
    if parts.series is not None and parts.hold is None:
        chain.append(f"{name}/series")
    if chain:
        supply.append(f"{chain[0]}:1")
        between += [(f"{a}:2", f"{b}:1") for a, b in pairwise(chain)]
        fed.append(f"{chain[-1]}:2")
    if parts.hold is not None:
        if parts.series is not None:
            fed.append(f"{name}/series:1")
            between.append((f"{name}/series:2", f"{name}/hold:{plus}"))
        else:
            fed.append(f"{name}/hold:{plus}")
        returned.append(f"{name}/hold:{minus}")
    if parts.suppression in _POLAR:
        fed.append(f"{name}/{parts.suppression}:{cathode}")
        returned.append(f"{name}/{parts.suppression}:{anode}")
    elif parts.suppression is not None:
        fed.append(f"{name}/{parts.suppression}:1")
        returned.append(f"{name}/{parts.suppression}:2")
    return Fitted(tuple(supply), tuple(fed), tuple(between), tuple(returned))
