"""Ladders: covers factored into series-parallel rungs, ordered, paired and shared."""

from contactlogic.ladder.recognise import formulas
from contactlogic.ladder.synthesise import LadderTask, OverBudget, best_ladder

__all__ = ["LadderTask", "OverBudget", "best_ladder", "formulas"]
