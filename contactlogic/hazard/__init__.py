"""Contacts in transit: loads that drop out or flash while one relay moves, and what cures it."""

from contactlogic.hazard.cure import Cure, Cures, cures
from contactlogic.hazard.find import Hazard, HazardPenalty, MovingPole, hazards
from contactlogic.hazard.moves import Moves, listed_moves, pairs_within, step_moves
from contactlogic.hazard.study import HazardStudy, study_hazards

__all__ = [
    "Cure",
    "Cures",
    "Hazard",
    "HazardPenalty",
    "HazardStudy",
    "Moves",
    "MovingPole",
    "cures",
    "hazards",
    "listed_moves",
    "pairs_within",
    "step_moves",
    "study_hazards",
]
