"""Existing wiring read back: from a list of wires to what each load really does.

`read_wires` reads the list, `circuit_of` finds nets, contacts and loads, `trace` works out all rows
and compares them with a job.
"""

from contactlogic.trace.behaviour import Behaviour
from contactlogic.trace.circuit import Circuit, TracedContact, TracedLoad, circuit_of
from contactlogic.trace.findings import Joined, LoadTrace, Short, SneakPath, Trace, setting, trace
from contactlogic.trace.known import Known
from contactlogic.trace.listing import End, Wire, read_wires

__all__ = [
    "Behaviour",
    "Circuit",
    "End",
    "Joined",
    "Known",
    "LoadTrace",
    "Short",
    "SneakPath",
    "Trace",
    "TracedContact",
    "TracedLoad",
    "Wire",
    "circuit_of",
    "read_wires",
    "setting",
    "trace",
]
