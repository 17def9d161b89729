"""contactlogic: from a truth table to proved relay contact wiring with the fewest changeovers.

    job = contactlogic.load_job("sluice.toml")
    result = contactlogic.wire(job)
    proof = contactlogic.verify(result.designs[0], job)

The names below are the public ones; they are loaded when first used, so that importing the
package costs next to nothing.
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from contactlogic.check import Proof, verify
    from contactlogic.design import Bound, Design, LoadStatus, Result
    from contactlogic.errors import ContactLogicError
    from contactlogic.job import load_job, load_table_job
    from contactlogic.job.model import Job, Limits, Load, SeparateContacts, Supply
    from contactlogic.network import Network, Pole
    from contactlogic.synthesis import wire
    from contactlogic.truth import Target

__all__ = [
    "Bound",
    "ContactLogicError",
    "Design",
    "Job",
    "Limits",
    "Load",
    "LoadStatus",
    "Network",
    "Pole",
    "Proof",
    "Result",
    "SeparateContacts",
    "Supply",
    "Target",
    "load_job",
    "load_table_job",
    "verify",
    "wire",
]

_HOME = {
    "Bound": "design",
    "ContactLogicError": "errors",
    "Design": "design",
    "Job": "job.model",
    "Limits": "job.model",
    "Load": "job.model",
    "LoadStatus": "design",
    "Network": "network",
    "Pole": "network",
    "Proof": "check",
    "Result": "design",
    "SeparateContacts": "job.model",
    "Supply": "job.model",
    "Target": "truth",
    "load_job": "job",
    "load_table_job": "job",
    "verify": "check",
    "wire": "synthesis",
}


def __getattr__(name: str) -> Any:
    """Load a public name from the module it lives in (PEP 562)."""
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f"{__name__}.{_HOME[name]}"), name)


def __dir__() -> list[str]:
    return sorted(__all__)
