"""Single faults of a finished panel: what each does to every load, in every row."""

from contactlogic.fault.kinds import (
    Change,
    Fault,
    FaultKind,
    joins_alike,
    single_faults,
    swaps,
    variants,
)
from contactlogic.fault.panel import Panel, PanelContact, Wire, panel_of
from contactlogic.fault.simulate import Outcome, Simulator
from contactlogic.fault.study import (
    FaultEffect,
    FaultStudy,
    LoadSummary,
    SneakCircuit,
    study_faults,
)

__all__ = [
    "Change",
    "Fault",
    "FaultEffect",
    "FaultKind",
    "FaultStudy",
    "LoadSummary",
    "Outcome",
    "Panel",
    "PanelContact",
    "Simulator",
    "SneakCircuit",
    "Wire",
    "joins_alike",
    "panel_of",
    "single_faults",
    "study_faults",
    "swaps",
    "variants",
]
