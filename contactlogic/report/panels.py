"""The panel that a wiring list describes: terminals, wires, contacts and loads, to be tested."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from contactlogic.design import Design
from contactlogic.fault import Panel, panel_of
from contactlogic.job.model import Fittings, Job
from contactlogic.report.wiring import conductors, rail_terminals
from contactlogic.truth import Target

__all__ = ["panel_of_design", "wanted_of"]


def panel_of_design(
    design: Design, job: Job, repeaters: Mapping[str, str] = MappingProxyType({})
) -> Panel:
    """The panel that the wiring list of a design describes.

    Fuses and series resistors conduct.  A repeater of a relay whose coil is wired here has its
    coil in parallel; it counts as a load of its own.  Repeaters of guided relays are guided.
    """
    links = []
    for load in design.network.loads:
        parts = job.bench.fittings.get(load, Fittings())
        inline = [
            name
            for name, fitted in (
                ("fuse", parts.fuse is not None),
                ("series", parts.series is not None and parts.hold is None),
            )
            if fitted
        ]
        links += [(f"{load}/{name}:1", f"{load}/{name}:2") for name in inline]
    guided = {*job.limits.guided}
    guided |= {name for name, of in repeaters.items() if of in guided}
    return panel_of(
        design.network,
        job,
        [(c.wire, c.start, c.end) for c in conductors(design, job, repeaters=repeaters)],
        rail_terminals(job),
        repeaters,
        links=links,
        guided=guided,
    )


def wanted_of(
    panel: Panel, job: Job, repeaters: Mapping[str, str] = MappingProxyType({})
) -> dict[str, Target]:
    """What each load of the panel must do; a repeater's coil does what its relay's does."""
    targets = job.targets
    return {load: targets[repeaters.get(load, load)] for load in panel.loads}
