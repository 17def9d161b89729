"""What is known of a panel beside its list of wires, and names looked up as people write them."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

__all__ = ["Known", "Lookup", "key", "natural"]


@dataclass(frozen=True)
class Known:
    """Names that the list is read with.

    Args:
        relays: relays of the job in bit order; empty without a job.
        loads: loads of the job, coils of a sequence included.
        separate: relays with separate makes and breaks.
        rails: the job's own names of the two rails, feed first, as terminals (`rail:+24 V`).
        feed: what the user says the feed is called in this list.
        back: what the user says the return is called.
        names: hand-written name -> the name it stands for.
        follows: repeater -> the relay it follows, as the user says.
    """

    relays: tuple[str, ...] = ()
    loads: tuple[str, ...] = ()
    separate: frozenset[str] = frozenset()
    rails: tuple[str, str] | None = None
    feed: tuple[str, ...] = ()
    back: tuple[str, ...] = ()
    names: Mapping[str, str] = field(default_factory=dict)
    follows: Mapping[str, str] = field(default_factory=dict)

    @property
    def job(self) -> bool:
        """Whether there is a job."""
        return bool(self.relays or self.loads)


def key(text: str) -> str:
    """What two spellings of one name share: case and blanks do not count."""
    return re.sub(r"\s+", "", text).casefold()


def natural(text: str) -> tuple[object, ...]:
    """Sorts K2 before K10."""
    parts = re.split("([0-9]+)", text.casefold())
    return (*((int(p), "") if p.isdecimal() else (-1, p) for p in parts), (-2, text))


class Lookup:
    """Names found by any spelling: case, blanks and `_` do not count unless they must."""

    def __init__(self, names: Iterable[str]) -> None:
        self.names = tuple(names)
        self._exact = {key(name): name for name in self.names}
        loose: dict[str, list[str]] = {}
        for name in self.names:
            loose.setdefault(_loose(name), []).append(name)
        self._loose = {text: found[0] for text, found in loose.items() if len(found) == 1}

    def find(self, text: str) -> str | None:
        return self._exact.get(key(text)) or self._loose.get(_loose(text))


def _loose(text: str) -> str:
    return re.sub(r"[\s_-]+", "", text).casefold()
