"""Single faults against rewiring the panel and walking it row by row."""

from __future__ import annotations

import pytest
from fault.panels import panels, wanted_as_built, wired
from fault.rewiring import state, ways
from hypothesis import given, settings
from strategies import numbered

from contactlogic.fault import (
    Fault,
    Simulator,
    panel_of,
    single_faults,
    study_faults,
    swaps,
    variants,
)
from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole
from contactlogic.truth import Target, rows_of


def shown(outcome, row):
    """An outcome in the words of `rewiring.state`."""
    if outcome.short >> row & 1:
        return "short"
    words = {}
    for load, on in outcome.on.items():
        series = outcome.in_series.get(load, 0) >> row & 1
        words[load] = "on" if on >> row & 1 else "series" if series else "off"
    return words


@given(panels(relays=3, poles=5, nets=4, loads=2))
@settings(max_examples=60)
def test_every_single_fault_does_what_rewiring_does(panel):
    simulator = Simulator(panel)
    rows = range(1 << len(panel.inputs))
    for fault in [None, *single_faults(panel)]:
        (change,) = (None,) if fault is None else variants(panel, fault)
        outcome = simulator.run(change)
        for row in rows:
            assert shown(outcome, row) == state(panel, row, fault), fault


@given(panels(relays=2, poles=4, nets=4, loads=2))
@settings(max_examples=40)
def test_every_two_wires_swapped_do_what_rewiring_does(panel):
    rows = list(range(1 << len(panel.inputs)))
    simulator = Simulator(panel, rows)
    for fault in swaps(panel):
        (change,) = variants(panel, fault)
        outcome = simulator.run(change)
        for k, row in enumerate(rows):
            assert shown(outcome, k) == state(panel, row, fault), fault


@given(panels(guided=True, relays=2, poles=5, nets=4, loads=2))
@settings(max_examples=60)
def test_guided_contacts_weld_in_every_way_they_may(panel):
    simulator = Simulator(panel)
    for fault in single_faults(panel):
        tried = {
            tuple(str(shown(simulator.run(change), row)) for row in range(1 << len(panel.inputs)))
            for change in variants(panel, fault)
        }
        rewired = {
            tuple(str(state(panel, row, fault, w)) for row in range(1 << len(panel.inputs)))
            for w in ways(panel, fault)
        }
        assert tried == rewired


@given(panels(relays=2, poles=5, nets=5, loads=3))
@settings(max_examples=80)
def test_effects_are_the_rows_that_differ_and_sneaks_the_loads_in_series(panel):
    rows = range(1 << len(panel.inputs))
    good = {row: state(panel, row) for row in rows}
    if "short" in good.values():
        return
    targets = {
        load: Target(len(panel.inputs), sum(1 << row for row in rows if good[row][load] == "on"))
        for load in panel.loads
    }
    study = study_faults(panel, targets)
    assert len(study.effects) == len(list(single_faults(panel)))
    ranks = []
    for effect in study.effects:
        bad = {row: state(panel, row, effect.fault) for row in rows}
        short = {row for row in rows if bad[row] == "short"}
        assert set(rows_of(effect.short)) == short
        on, off, series = {}, {}, {}
        for load in panel.loads:
            for row in rows:
                now = "off" if row in short else bad[row][load]
                if now == "series":
                    series.setdefault(row, set()).add(load)
                if now == "on" and good[row][load] == "off":
                    on.setdefault(load, set()).add(row)
                if now != "on" and good[row][load] == "on":
                    off.setdefault(load, set()).add(row)
        assert {load: set(rows_of(r)) for load, r in effect.turns_on.items()} == on
        assert {load: set(rows_of(r)) for load, r in effect.turns_off.items()} == off
        sneaks = {}
        for circuit in effect.sneaks:
            assert len(circuit.loads) > 1
            for row in rows_of(circuit.rows):
                sneaks.setdefault(row, set()).update(circuit.loads)
        assert sneaks == series
        ranks.append(0 if on or short else 1 if series else 2 if off else 3)
    assert ranks == sorted(ranks)
    for summary in study.summaries:
        hits = [e for e in study.effects if summary.load in e.turns_on]
        assert summary.turn_on == len(hits)
        assert summary.open_turn_on == len(study.open_faults_that_turn_on(summary.load))


def test_opening_a_contact_or_a_wire_never_turns_a_load_on_but_a_dead_coil_can():
    relays = ("A", "B")
    ends = [("A", "L", "x", "y"), ("B", "y", None, "x")]
    network = Network(relays, "L", {"X": "x", "Y": "y"}, numbered(relays, ends))
    panel, job = wired(network)
    study = study_faults(panel, job.targets)
    guilty = study.open_faults_that_turn_on("Y")
    assert {(effect.fault.kind, effect.fault.relay) for effect in guilty} == {
        ("coil dead", "A"),
        ("coil dead", "B"),
    }


def test_a_return_broken_between_loads_feeds_them_in_series():
    # Y and Z lose their return between X and Y; with A on, Y's current comes back through Z and X.
    relays = ("A", "B")
    ends = [("A", "L", "y", None), ("B", "x", "z", None)]
    network = Network(relays, "L", {"X": "x", "Y": "y", "Z": "z"}, numbered(relays, ends))
    panel, job = wired(network)
    (effect,) = [
        e
        for e in study_faults(panel, job.targets).effects
        if e.fault.kind == "return off" and e.fault.ends == ("X:X2", "Y:X2")
    ]
    (circuit,) = effect.sneaks
    assert set(circuit.loads) == {"X", "Y", "Z"}
    assert list(rows_of(circuit.rows)) == [0b11]


def test_a_repeater_fails_by_itself():
    network = Network(
        ("A", "A1"),
        "L",
        {"X": "x"},
        (Pole("A", 1, "L", None, "m"), Pole("A1", 1, "m", None, "x")),
    )
    job = Job("T", ("A",), (Load("X", Target(1, 0b01)),), 0b11)
    wires = [
        (1, "rail:SUPPLY", "A:11"), (2, "A:12", "A1:11"),
        (3, "A1:12", "X:X1"), (4, "rail:RETURN", "X:X2"),
    ]  # fmt: skip
    panel = panel_of(network, job, wires, ("rail:SUPPLY", "rail:RETURN"), {"A1": "A"})
    study = study_faults(panel, job.targets)
    assert not study.open_faults_that_turn_on("X")
    assert {e.fault.relay for e in study.effects if e.fault.kind == "coil dead"} == {"A", "A1"}


@pytest.mark.parametrize(
    ("kind", "opens"),
    [("welded make", False), ("never breaks", True), ("coil dead", True), ("return off", True)],
)
def test_what_counts_as_open(kind, opens):
    assert Fault(kind).opens is opens


@pytest.mark.slow
def test_sixty_poles_of_sixteen_relays_take_seconds():
    import time

    relays = tuple(f"K{i}" for i in range(16))
    ends = []
    for z in range(20):  # each load over three changeovers, its rung also fed from the one before
        one, two, three = (relays[(5 * z + k) % 16] for k in range(3))
        ends.append((one, "L", f"a{z}", f"b{z}"))
        ends.append((two, f"a{z}", f"z{z}", f"a{max(z - 1, 0)}"))
        ends.append((three, f"b{z}", f"b{(z + 1) % 20}", f"z{z}"))
    loads = {f"Z{z}": f"z{z}" for z in range(20)}
    network = Network(relays, "L", loads, numbered(relays, ends))
    panel, _ = wired(network)
    began = time.process_time()
    study = study_faults(panel, wanted_as_built(network))
    assert len(study.effects) > 300
    assert time.process_time() - began < 30
