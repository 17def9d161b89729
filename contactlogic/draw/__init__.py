"""Drawings: their text (pure) and, in `render` alone, their pictures."""

from __future__ import annotations

from collections.abc import Collection, Mapping

from contactlogic.design import Design
from contactlogic.draw.arrange import SheetFacts, arrange
from contactlogic.draw.bridge import arrange_bridge
from contactlogic.draw.chart import sequence_chart
from contactlogic.draw.dot import dot_text
from contactlogic.draw.render import render
from contactlogic.draw.sheet import Sheet
from contactlogic.draw.states import state_graph
from contactlogic.job.model import Fittings, Job, LoadKind, Supply
from contactlogic.network import Network

__all__ = [
    "bridge_drawing",
    "design_sheet",
    "dot_text",
    "ladder_drawing",
    "render",
    "sequence_chart",
    "state_graph",
]


def design_sheet(design: Design, job: Job) -> Sheet:
    """The sheet of a design in its own form, with what its job states beside the network.

    Everything is tagged with what it shows; `dot_text` turns the sheet into the drawing's text.
    """
    facts = SheetFacts(
        job.title,
        design.fingerprint,
        job.supply,
        {load.name: load.kind for load in job.loads},
        job.limits.contacts,
        job.bench.fittings,
    )
    lay_out = arrange if design.form == "ladder" else arrange_bridge
    return lay_out(design.network, facts)


def ladder_drawing(
    network: Network,
    *,
    title: str,
    fingerprint: str,
    supply: Supply = Supply(),  # noqa: B008 - frozen
    kinds: Mapping[str, LoadKind | None] | None = None,
    separate: Collection[str] = (),
    fittings: Mapping[str, Fittings] | None = None,
) -> str:
    """The ladder drawing of a network, as text in the DOT language for `render`.

    Args:
        network: a network of ladder form.
        title: any text; shown on one line and shortened where it is too long.
        fingerprint: tells this design from others (`Design.fingerprint`).
        supply: labels of the rails; "supply" and "return" where not given.
        kinds: kind of each load, for its symbol; a plain rectangle where not given.
        separate: relays with separate makes and breaks, for their terminal marks.
        fittings: parts fitted to loads, by load.

    Raises:
        NotALadder: the network does not keep the ladder definition.
    """
    facts = SheetFacts(title, fingerprint, supply, kinds or {}, separate, fittings or {})
    return dot_text(arrange(network, facts))


def bridge_drawing(
    network: Network,
    *,
    title: str,
    fingerprint: str,
    supply: Supply = Supply(),  # noqa: B008 - frozen
    kinds: Mapping[str, LoadKind | None] | None = None,
    separate: Collection[str] = (),
    fittings: Mapping[str, Fittings] | None = None,
) -> str:
    """The drawing of any two-directional network, as text in the DOT language for `render`.

    Every net is a vertical line, every pole a symbol on a row, a changeover one symbol.
    Parameters as for `ladder_drawing`.

    Raises:
        ValueError: a contact joins a net to itself.
    """
    facts = SheetFacts(title, fingerprint, supply, kinds or {}, separate, fittings or {})
    return dot_text(arrange_bridge(network, facts))
