"""What must be bought for loads and coils: fuses, resistors, capacitors, suppression."""

from __future__ import annotations

from dataclasses import dataclass

from contactlogic.job.model import Job

__all__ = ["Bill", "fittings_of"]


@dataclass(frozen=True)
class Bill:
    """One kind of fitting: what, its value, and the loads that need one each."""

    part: str
    value: str
    loads: tuple[str, ...]

    @property
    def text(self) -> str:
        """`capacitor 470 uF`; of suppression its kind alone."""
        return self.value if self.part == "suppression" else f"{self.part} {self.value}"


def fittings_of(job: Job) -> tuple[Bill, ...]:
    """The fittings that a job states, alike ones together, in the order it states them."""
    wanted: dict[tuple[str, str], list[str]] = {}
    for load, parts in job.bench.fittings.items():
        for part, value in (
            ("fuse", parts.fuse),
            ("resistor", parts.series),
            ("capacitor", parts.hold),
            ("suppression", parts.suppression),
        ):
            if value is not None:
                wanted.setdefault((part, value), []).append(load)
    return tuple(Bill(part, value, tuple(loads)) for (part, value), loads in wanted.items())
