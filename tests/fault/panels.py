"""Panels for tests: networks of the shared strategies, wired as the wiring list says."""

from __future__ import annotations

from hypothesis import strategies as st
from strategies import networks

from contactlogic.design import Bound, Design
from contactlogic.fault import panel_of
from contactlogic.job.model import Job, Load
from contactlogic.network import conduction
from contactlogic.report.wiring import conductors, rail_terminals
from contactlogic.truth import Target, all_rows


def wanted_as_built(network, inputs=None):
    live = conduction(network)
    n = len(inputs or network.relays)
    return {load: Target(n, 0 if net is None else live[net]) for load, net in network.loads.items()}


def wired(network, *, guided=(), title="T"):
    """The panel of a network without repeaters, and its job."""
    targets = wanted_as_built(network)
    loads = tuple(Load(name, target) for name, target in targets.items())
    job = Job(title, network.relays, loads, all_rows(len(network.relays)))
    design = Design("bridge", network, Bound(0, False), 1 << len(network.relays))
    wires = [(c.wire, c.start, c.end) for c in conductors(design, job)]
    return panel_of(network, job, wires, rail_terminals(job), guided=guided), job


@st.composite
def panels(draw, *, guided=False, **sizes):
    network = draw(networks(**sizes))
    names = draw(st.sets(st.sampled_from(network.relays))) if guided else ()
    return wired(network, guided=names)[0]
