"""Hazards and cures of one design, as one value for reports."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from contactlogic.hazard.cure import Cures, cures
from contactlogic.hazard.find import Hazard, hazards
from contactlogic.hazard.moves import Moves
from contactlogic.job.model import Job
from contactlogic.network import Network

__all__ = ["HazardStudy", "study_hazards"]


@dataclass(frozen=True)
class HazardStudy:
    """What was found of one design.

    Args:
        relays: in bit order, repeaters left out.
        moves: how many moves of one relay were looked at.
        hazards: by mover and load, drop-outs first.
        cures: form D cures of the drop-outs.
    """

    relays: tuple[str, ...]
    moves: int
    hazards: tuple[Hazard, ...]
    cures: Cures

    @property
    def drop_outs(self) -> tuple[Hazard, ...]:
        return tuple(hazard for hazard in self.hazards if hazard.kind == "drop-out")

    @property
    def flashes(self) -> tuple[Hazard, ...]:
        return tuple(hazard for hazard in self.hazards if hazard.kind == "flash")


def study_hazards(
    network: Network,
    job: Job,
    moves: Moves,
    repeaters: Mapping[str, str] = MappingProxyType({}),
) -> HazardStudy:
    """Hazards of a finished network in the given moves, and what cures the drop-outs.

    Args:
        network: does what the job wants (`contactlogic.check`).
        moves: from `listed_moves` or `step_moves`, over the job's relays.
        repeaters: relays of the network that follow another.
    """
    found = hazards(network, moves, job.targets, repeaters)
    offered = cures(
        network,
        moves,
        job.targets,
        found,
        isolated=job.isolated,
        separate=job.limits.contacts,
        repeaters=repeaters,
    )
    return HazardStudy(moves.relays, moves.count, found, offered)
