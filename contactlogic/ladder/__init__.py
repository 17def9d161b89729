"""Ladders: covers factored into series-parallel rungs, ordered, paired and shared."""

from contactlogic.ladder.candidates import formula_of
from contactlogic.ladder.recognise import formulas
from contactlogic.ladder.synthesise import LadderTask, best_ladder

__all__ = ["LadderTask", "best_ladder", "formula_of", "formulas"]
