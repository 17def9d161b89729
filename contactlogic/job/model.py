"""What a job asks for, as values: loads over rows of relays or over a sequence, supply, limits.

Files and text are read by the other modules of this package; everything past them works on
these values alone (job file format: design.md section 5).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from contactlogic.algebra import Expression
from contactlogic.job.sequence import Pattern, SequenceTable, Timing
from contactlogic.truth import Target

__all__ = [
    "AnyJob",
    "Bench",
    "DrivesJob",
    "Fittings",
    "Isolate",
    "Job",
    "Limits",
    "Load",
    "LoadFacts",
    "LoadKind",
    "Objective",
    "PatternJob",
    "Position",
    "SeparateContacts",
    "SequenceJob",
    "Supply",
    "Suppression",
]

LoadKind = Literal["lamp", "horn", "valve", "coil", "motor", "other"]
Isolate = Literal["stored", "all", "none"]
Objective = Literal["poles", "contacts"]
Suppression = Literal["diode", "zener", "varistor", "rc", "tvs"]


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
class LoadFacts:
    """What is known of a load or coil, None where the job does not state it."""

    kind: LoadKind | None = None
    amps: float | None = None


@dataclass(frozen=True)
class Fittings:
    """Parts fitted at a load or coil, None where the job states none.

    Args:
        fuse: its rating, `2 A`; in series with the load.
        suppression: what limits the voltage when the load is switched off; across it.
        hold: a capacitor across the coil, `470 uF`.
        series: a resistor, `100 ohm`: in series with the capacitor, or without one with the coil.
    """

    fuse: str | None = None
    suppression: Suppression | None = None
    hold: str | None = None
    series: str | None = None

    def texts(self) -> tuple[str, ...]:
        """Each part in a few words, as drawings and lists name them."""
        said = []
        if self.fuse is not None:
            said.append(f"fuse {self.fuse}")
        if self.series is not None:
            said.append(f"series {self.series}")
        if self.hold is not None:
            said.append(f"hold {self.hold}")
        if self.suppression is not None:
            said.append(self.suppression)
        return tuple(said)


@dataclass(frozen=True)
class Position:
    """Where a relay or load sits: rows and columns are the steps that wires are measured in."""

    row: float
    column: float


@dataclass(frozen=True)
class Bench:
    """What the job states of the panel: parts at loads and coils, and where things sit.

    Args:
        fittings: by the name of the load or coil.
        places: position of relays and loads, by name.
        feed: position of the feed rail's terminal.
        back: position of the return rail's terminal.
    """

    fittings: Mapping[str, Fittings] = field(default_factory=dict)
    places: Mapping[str, Position] = field(default_factory=dict)
    feed: Position | None = None
    back: Position | None = None

    @property
    def stored(self) -> frozenset[str]:
        """Loads and coils with a capacitor, which discharges into whatever they are joined to."""
        return frozenset(name for name, parts in self.fittings.items() if parts.hold is not None)


@dataclass(frozen=True)
class Supply:
    """Labels of the two rails, and the voltage that coils are rated for; None where not given."""

    feed: str | None = None
    return_: str | None = None
    coil_volts: float | None = None

    @property
    def positive(self) -> bool:
        """Whether the feed is the positive rail: it is, unless its label begins with a minus."""
        return not (self.feed or "").strip().startswith(("-", "\u2212"))


@dataclass(frozen=True)
class SeparateContacts:
    """A push-button or contactor with separate makes and breaks: these never pair as one pole."""

    makes: int
    breaks: int


@dataclass(frozen=True)
class Limits:
    """What the wiring must keep to; `guided` relays have forcibly guided contacts."""

    poles: Mapping[str, int] = field(default_factory=dict)
    contacts: Mapping[str, SeparateContacts] = field(default_factory=dict)
    isolate: Isolate = "stored"
    objective: Objective = "poles"
    guided: tuple[str, ...] = ()


@dataclass(frozen=True)
class Job:
    """A table or formula job.

    Args:
        title: free text of the user's; may hold any character.
        relays: input relays in bit order (section 3).
        loads: in the order of the table's columns, then of the formulas.
        listed: truth table of the rows that the table lists (all rows if there is no table).
        file: name shown in messages and reports, None if made in code.
        stored: loads that store energy, such as slow coils with their capacitors.
        bench: parts at loads and coils, and positions.
    """

    title: str
    relays: tuple[str, ...]
    loads: tuple[Load, ...]
    listed: int
    supply: Supply = Supply()
    limits: Limits = field(default_factory=Limits)
    file: str | None = None
    stored: frozenset[str] = frozenset()
    bench: Bench = field(default_factory=Bench)

    @property
    def targets(self) -> dict[str, Target]:
        """Wanted behaviour by load name."""
        return {load.name: load.target for load in self.loads}

    @property
    def isolated(self) -> frozenset[str]:
        """Loads whose net may never be joined to another load that is off (section 3)."""
        if self.limits.isolate == "all":
            return frozenset(load.name for load in self.loads)
        return self.stored if self.limits.isolate == "stored" else frozenset()


@dataclass(frozen=True)
class SequenceJob:
    """A sequence to wire, every state of which is listed.

    Args:
        facts: what is known of loads and coils, by name; those not named have none.
    """

    title: str
    table: SequenceTable
    supply: Supply = Supply()
    facts: Mapping[str, LoadFacts] = field(default_factory=dict)
    limits: Limits = field(default_factory=Limits)
    file: str | None = None
    bench: Bench = field(default_factory=Bench)

    @property
    def isolated(self) -> frozenset[str]:
        """Coils and loads whose net may never be joined to another that is off (section 3).

        By default the coils of slow relays and of others with a capacitor.  Relays that are added
        later are quick; where all are isolated, so must they be.
        """
        if self.limits.isolate == "all":
            coils = set(self.table.columns) - set(self.table.inputs)
            return frozenset({*coils, *self.table.loads})
        if self.limits.isolate == "none":
            return frozenset()
        timing = self.table.timing
        return frozenset({*timing.slow_release, *timing.slow_operate}) | self.bench.stored


@dataclass(frozen=True)
class PatternJob:
    """A pattern to wire: what the loads do in each step; the relays are chosen for it."""

    title: str
    pattern: Pattern
    supply: Supply = Supply()
    facts: Mapping[str, LoadFacts] = field(default_factory=dict)
    limits: Limits = field(default_factory=Limits)
    file: str | None = None
    bench: Bench = field(default_factory=Bench)


@dataclass(frozen=True)
class DrivesJob:
    """Drives that someone has already wired, to be checked.

    Args:
        columns: the sequence's columns if there is one; else the relays with a drive in the order
            of their keys, then, as they appear, the inputs: what no drive moves.
        drives: the condition under which each coil is fed.
        formulas: the text each drive came from.
        table: the sequence that the drives are meant to run through, None if it is not known.
    """

    title: str
    columns: tuple[str, ...]
    drives: Mapping[str, Expression]
    formulas: Mapping[str, str]
    timing: Timing = field(default_factory=Timing)
    table: SequenceTable | None = None
    supply: Supply = Supply()
    facts: Mapping[str, LoadFacts] = field(default_factory=dict)
    limits: Limits = field(default_factory=Limits)
    file: str | None = None
    bench: Bench = field(default_factory=Bench)

    @property
    def inputs(self) -> tuple[str, ...]:
        """Columns that are moved from outside."""
        return tuple(name for name in self.columns if name not in self.drives)


AnyJob = Job | SequenceJob | PatternJob | DrivesJob
