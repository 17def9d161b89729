"""What a job asks for, as values: loads over rows of relays, supply, limits.

Files and text are read by the other modules of this package; everything past them works on
these values alone (job file format: design.md section 5).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from contactlogic.truth import Target

__all__ = [
    "Isolate",
    "Job",
    "Limits",
    "Load",
    "LoadKind",
    "Objective",
    "SeparateContacts",
    "Supply",
]

LoadKind = Literal["lamp", "horn", "valve", "coil", "motor", "other"]
Isolate = Literal["stored", "all", "none"]
Objective = Literal["poles", "contacts"]


@dataclass(frozen=True)
class Load:
    """One load: what it must do, and what is known of it.

    `kind` and `amps` are None where the job does not state them; reports print "not given".
    `formula` is the text it came from, None for a table load.
    """

    name: str
    target: Target
    kind: LoadKind | None = None
    amps: float | None = None
    formula: str | None = None


@dataclass(frozen=True)
class Supply:
    """Labels of the two rails, None where not given."""

    feed: str | None = None
    return_: str | None = None


@dataclass(frozen=True)
class SeparateContacts:
    """A push-button or contactor with separate makes and breaks: these never pair as one pole."""

    makes: int
    breaks: int


@dataclass(frozen=True)
class Limits:
    """What the wiring must keep to."""

    poles: Mapping[str, int] = field(default_factory=dict)
    contacts: Mapping[str, SeparateContacts] = field(default_factory=dict)
    isolate: Isolate = "stored"
    objective: Objective = "poles"


@dataclass(frozen=True)
class Job:
    """A table or formula job.

    Args:
        title: free text of the user's; may hold any character.
        relays: input relays in bit order (section 3).
        loads: in the order of the table's columns, then of the formulas.
        listed: truth table of the rows that the table lists (all rows if there is no table).
        file: name shown in messages and reports, None if made in code.
    """

    title: str
    relays: tuple[str, ...]
    loads: tuple[Load, ...]
    listed: int
    supply: Supply = Supply()
    limits: Limits = field(default_factory=Limits)
    file: str | None = None

    @property
    def targets(self) -> dict[str, Target]:
        """Wanted behaviour by load name."""
        return {load.name: load.target for load in self.loads}

    @property
    def isolated(self) -> frozenset[str]:
        """Loads whose net may never be joined to another load that is off (section 3).

        A table job has no slow coils, so "stored" isolates nothing there.
        """
        if self.limits.isolate == "all":
            return frozenset(load.name for load in self.loads)
        return frozenset()
