"""Test plans: replayed against every fault by rewiring, and the least by trying every choice."""

from __future__ import annotations

from itertools import combinations, permutations

from fault.panels import panels, wired
from fault.rewiring import state, ways
from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import numbered

from contactlogic.commission import plan_test
from contactlogic.commission.order import moves_of, ordered
from contactlogic.fault import Fault, panel_of, single_faults, swaps
from contactlogic.network import Network
from contactlogic.truth import all_rows, rows_of


def works(panel):
    return all(state(panel, row) != "short" for row in range(1 << len(panel.inputs)))


def shows(panel, fault, stuck, row, load=None):
    """Whether a fault shows in a row at a load (None: at the rails), by rewiring."""
    bad = state(panel, row, fault, stuck)
    if bad == "short":
        return True  # the fuse goes, whatever is looked at
    if load is None:
        return False
    good = state(panel, row)[load]
    return bad[load] in ("on", "off") and bad[load] != good


def every_fault(panel):
    """(fault, contacts stuck): every way of every single fault, and swaps that change a net."""
    found = [(fault, stuck) for fault in single_faults(panel) for stuck in ways(panel, fault)]
    return found + [(fault, ()) for fault in swaps(panel)]


@given(panels(guided=True, relays=2, poles=4, nets=4, loads=2), st.integers(0, 15))
@settings(max_examples=40)
def test_each_plan_catches_every_fault_that_any_listed_row_shows(panel, listed):
    if not works(panel):
        return
    listed &= all_rows(len(panel.inputs))
    plan = plan_test(panel, listed)
    unseen = {u.fault: u for u in plan.unseen}
    assert all(listed >> step.row & 1 for step in plan.steps)
    for step in plan.steps:
        good = state(panel, step.row)
        assert {look.load: "on" if look.on else "off" for look in step.all_loads} == good
        assert set(step.looks) <= set(step.all_loads)
    hidden = {}
    for fault, stuck in every_fault(panel):
        showing = [
            row
            for row in rows_of(listed)
            if any(shows(panel, fault, stuck, row, load) for load in (None, *panel.loads))
        ]
        caught = any(
            shows(panel, fault, stuck, step.row, look)
            for step in plan.steps
            for look in (None, *(look.load for look in step.looks))
        )
        assert caught == bool(showing), fault
        if not showing:
            hidden.setdefault(fault, []).append(stuck)
    real = {f for f in hidden if f.kind != "wires swapped" or f in unseen}
    assert set(unseen) == real  # swaps that join the same terminals are no faults
    for fault, one in unseen.items():
        assert one.ways == len(hidden[fault]) or fault.kind.startswith("welded")
        beyond = [
            row
            for row in range(1 << len(panel.inputs))
            for stuck in hidden[fault]
            if not listed >> row & 1
            and any(shows(panel, fault, stuck, row, load) for load in (None, *panel.loads))
        ]
        if one.unlisted is not None:
            assert one.unlisted in beyond


@given(panels(relays=2, poles=3, nets=3, loads=2))
@settings(max_examples=40)
def test_no_fewer_rows_do_and_no_fewer_looks_with_as_few_rows(panel):
    if not works(panel):
        return
    rows = range(1 << len(panel.inputs))
    plan = plan_test(panel, all_rows(len(panel.inputs)))
    assert plan.least_rows
    assert plan.least_looks
    assert plan.at_least == len(plan.steps)
    needs = []
    for fault, stuck in every_fault(panel):
        need = {
            (row, load)
            for row in rows
            for load in (None, *panel.loads)
            if shows(panel, fault, stuck, row, load)
        }
        if need:
            needs.append(need)

    def enough(looks):
        return all(need & looks for need in needs)

    def least(chosen):
        rails = {(row, None) for row in chosen}
        every = [(row, load) for row in chosen for load in panel.loads]
        if not enough(rails | set(every)):
            return None
        return next(
            size
            for size in range(len(every) + 1)
            for some in combinations(every, size)
            if enough(rails | set(some))
        )

    for size in range(len(plan.steps) + 1):
        answers = [least(chosen) for chosen in combinations(rows, size)]
        answers = [answer for answer in answers if answer is not None]
        if answers:
            assert size == len(plan.steps)
            assert min(answers) == plan.looks
            break


@given(st.sets(st.integers(0, 31), max_size=6))
def test_rows_come_in_an_order_in_which_few_relays_change(rows):
    order = ordered(sorted(rows))
    assert sorted(order) == sorted(rows)
    least = min(map(moves_of, permutations(rows)), default=0)
    assert least <= moves_of(order) <= least + 2


def test_a_step_tells_which_relays_move():
    network = Network(
        ("A", "B"), "L", {"X": "x"}, numbered("AB", [("A", "L", "m", None), ("B", "m", "x", None)])
    )
    panel, job = wired(network)
    plan = plan_test(panel, job.listed)
    at = 0
    for step in plan.steps:
        for relay, operated in step.change:
            assert (at >> "AB".index(relay) & 1) != operated
            at ^= 1 << "AB".index(relay)
        assert at == step.row
    assert plan.moves == sum(len(step.change) for step in plan.steps)
    assert plan.faults == len(list(single_faults(panel))) + plan.swaps
    # a series of two: both operated, and each released alone, as every textbook has it
    assert {step.row for step in plan.steps} == {0b01, 0b10, 0b11}


def test_what_no_row_shows_is_named():
    # A second contact in parallel: neither of the two is missed when it does not close.
    network = Network(("A",), "L", {"X": "x"}, numbered("A", [("A", "L", "x", None)] * 2))
    panel, job = wired(network)
    unseen = {u.fault for u in plan_test(panel, job.listed).unseen}
    assert {(f.kind, f.pole) for f in unseen if f.kind == "never makes"} == {
        ("never makes", 1),
        ("never makes", 2),
    }


def test_two_wires_of_one_net_that_join_the_same_are_no_fault():
    network = Network(("A",), "L", {"X": "x"}, numbered("A", [("A", "L", "x", None)]))
    _, job = wired(network)
    wires = [
        (1, "rail:S", "A:11"),
        (2, "rail:S", "A:11"),
        (3, "A:14", "X:X1"),
        (4, "X:X2", "rail:R"),
    ]
    panel = panel_of(network, job, wires, ("rail:S", "rail:R"))
    plan = plan_test(panel, job.listed)
    assert Fault("wire off", wires=(1,), ends=("rail:S", "A:11")) in {u.fault for u in plan.unseen}
    assert plan.swaps + plan.unchanged_swaps == len(list(swaps(panel)))


def test_a_panel_of_some_size_takes_seconds():
    import time

    relays = tuple(f"K{i}" for i in range(8))
    ends = []
    for z in range(8):
        one, two, three = (relays[(5 * z + k) % 8] for k in range(3))
        ends.append((one, "L", f"a{z}", f"b{z}"))
        ends.append((two, f"a{z}", f"z{z}", None))
        ends.append((three, f"b{z}", None, f"z{z}"))
    network = Network(relays, "L", {f"Z{z}": f"z{z}" for z in range(8)}, numbered(relays, ends))
    panel, job = wired(network)
    began = time.process_time()
    plan = plan_test(panel, job.listed)
    assert plan.swaps > 2000
    assert time.process_time() - began < 60
