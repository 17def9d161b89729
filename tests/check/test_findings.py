"""Faults of structure, matching relays by name, and the text of a proof."""

from __future__ import annotations

from dataclasses import replace

import networkx as nx
import pytest
from hypothesis import given
from oracles import contact_graph
from strategies import networks

from contactlogic.check import prove, verify
from contactlogic.design import Bound, Design
from contactlogic.job.model import Job, Limits, Load, SeparateContacts
from contactlogic.network import Network, Pole
from contactlogic.truth import Target, all_rows

# LAMP = UP DOWN' + UP' DOWN, HORN = UP DOWN: a staircase pair and a tap, worked out by hand.
RELAYS = ("UP", "DOWN")
STAIRS = Network(
    RELAYS,
    "L",
    {"LAMP": "n1", "HORN": "n4"},
    (
        Pole("UP", 1, "L", "n2", "n3"),
        Pole("DOWN", 1, "n1", "n3", "n2"),
        Pole("DOWN", 2, "n2", "n4"),
    ),
)
WANTED = {"LAMP": Target(2, 0b0110), "HORN": Target(2, 0b1000)}


def faults(network: Network = STAIRS, **more) -> tuple[str, ...]:
    return prove(network, WANTED, **({"form": "ladder"} | more)).structure


def with_pole(*poles: Pole) -> Network:
    return replace(STAIRS, poles=STAIRS.poles + poles)


def test_a_right_network_has_no_findings():
    proof = prove(STAIRS, WANTED, form="ladder", isolated=["LAMP", "HORN"])
    assert proof.ok
    assert proof.as_built == {"LAMP": 0b0110, "HORN": 0b1000}
    assert proof.explain() == (
        "proved: every load is as wanted in all 4 rows; series-parallel; LAMP, HORN isolated"
    )
    assert prove(STAIRS, WANTED, form="bridge").explain() == (
        "proved: every load is as wanted in all 4 rows"
    )


@pytest.mark.parametrize(
    ("network", "fault"),
    [
        (with_pole(Pole("UP", 1, "L", "n2")), "UP pole 1 is used twice"),
        (with_pole(Pole("UP", 2, "L")), "UP pole 2 has only its common wired"),
        (with_pole(Pole("UP", 0, "L", "n2")), "UP pole 0: poles are numbered from 1"),
        (with_pole(Pole("TIDE", 1, "L", "n2")), "TIDE pole 1: there is no relay TIDE in the job"),
        (
            with_pole(Pole("UP", 2, "L", "n9")),
            "contact UP:21-24 is on no way from the supply to a load",
        ),
        (
            with_pole(Pole("UP", 2, "n2", None, "n2")),
            "contact UP:21-22 is on no way from the supply to a load",
        ),
        (replace(STAIRS, loads={"LAMP": "n1"}), "load HORN is missing"),
        (
            replace(STAIRS, loads=dict(STAIRS.loads) | {"BELL": "n4"}),
            "there is no load BELL in the job",
        ),
        (
            replace(STAIRS, loads={"LAMP": "n1", "HORN": "n9"}),
            "no contact reaches HORN at net n9",
        ),
        (
            replace(STAIRS, relays=("UP", "DOWN", "UP")),
            "relay UP is named 2 times",
        ),
    ],
)
def test_each_fault_of_structure_is_named(network, fault):
    assert fault in faults(network)


def test_constant_loads_belong_on_no_net_and_on_the_supply():
    never = Network(
        ("A",), "L", {"X": "n1"}, (Pole("A", 1, "L", "n2"), Pole("A", 2, "n2", None, "n1"))
    )
    proof = prove(never, {"X": Target(1, 0)}, form="bridge")
    assert proof.structure == ("X is never on, so it belongs on no net instead of n1",)
    always = Network(("A",), "L", {"X": "n1"}, (Pole("A", 1, "n1", "L", "L"),))
    proof = prove(always, {"X": Target(1, 0b11)}, form="bridge")
    assert proof.structure == ("X is always on, so it belongs on the supply instead of n1",)
    right = Network(("A",), "L", {"X": None, "Y": "L"}, ())
    wanted = {"X": Target(1, 0), "Y": Target(1, 0b11)}
    assert prove(right, wanted, form="ladder", isolated=["X", "Y"]).ok


def test_budgets():
    assert faults(pole_limits={"DOWN": 2, "UP": 1}) == ()
    assert faults(pole_limits={"DOWN": 1}) == ("DOWN uses 2 poles, its budget is 1",)


def test_separate_contacts_never_pair_and_have_budgets_of_their_own():
    found = faults(separate={"DOWN": SeparateContacts(makes=1, breaks=1)})
    assert found == (
        "DOWN pole 1: DOWN has separate makes and breaks, no changeover",
        "DOWN uses 2 makes, its budget is 1",
    )
    split = replace(
        STAIRS,
        poles=(
            STAIRS.poles[0],
            Pole("DOWN", 1, "n1", "n3"),
            Pole("DOWN", 2, "n1", None, "n2"),
            Pole("DOWN", 3, "n2", "n4"),
        ),
    )
    assert faults(split, separate={"DOWN": SeparateContacts(makes=2, breaks=1)}) == ()


@given(networks(loads=3, poles=8, nets=6))
def test_idle_contacts_are_those_on_no_simple_path_to_a_load(network):
    graph = contact_graph(network)
    useful = set()
    for net in network.loads.values():
        if net not in (None, network.supply):
            for path in nx.all_simple_edge_paths(graph, network.supply, net):
                useful |= {(frozenset((a, b)), key) for a, b, key in path}
    idle = sum((frozenset((a, b)), key) not in useful for a, b, key in graph.edges(keys=True))
    wanted = {load: Target(len(network.relays), 0) for load in network.loads}
    structure = prove(network, wanted, form="bridge").structure
    assert sum("is on no way from the supply" in fault for fault in structure) == idle


def test_explain_shows_the_way_that_current_takes():
    wrong = replace(STAIRS, poles=(*STAIRS.poles[:2], Pole("DOWN", 2, "n2", None, "n4")))
    proof = prove(wrong, WANTED, form="ladder")
    assert proof.explain() == (
        "wrong: HORN is on in row 1 (UP=1 DOWN=0), wanted off\n"
        "  supply -> UP:11 -> UP:14 -> DOWN:21 -> DOWN:22 -> HORN"
    )
    swapped = replace(STAIRS, poles=(*STAIRS.poles[:2], Pole("DOWN", 2, "n3", "n4")))
    assert prove(swapped, WANTED, form="ladder").explain() == (
        "wrong: HORN is on in row 2 (UP=0 DOWN=1), wanted off\n"
        "  supply -> UP:11 -> UP:12 -> DOWN:21 -> DOWN:24 -> HORN"
    )
    assert prove(STAIRS, WANTED | {"HORN": Target(2, 0b1001)}, form="ladder").explain() == (
        "wrong: HORN is off in row 0 (UP=0 DOWN=0), wanted on\n  no path to the supply"
    )


def test_the_shortest_way_is_shown():
    # A long way is wired first and last, the short one between them.
    poles = (
        Pole("UP", 1, "L", "n2"),
        Pole("UP", 2, "n2", "n3"),
        Pole("UP", 3, "n3", "n1"),
        Pole("DOWN", 1, "L", "n4"),
        Pole("DOWN", 2, "n4", "n1"),
        Pole("DOWN", 3, "L", "n5"),
        Pole("DOWN", 4, "n5", "n6"),
        Pole("DOWN", 5, "n6", "n1"),
    )
    network = Network(RELAYS, "L", {"LAMP": "n1"}, poles)
    (wrong,) = prove(network, {"LAMP": Target(2, 0b0110)}, form="ladder").wrong
    assert (wrong.row, wrong.path) == (
        3,
        ("supply", "DOWN:11", "DOWN:14", "DOWN:21", "DOWN:24", "LAMP"),
    )


def test_explain_shows_a_discharge_and_counts_what_it_leaves_out():
    star = Network(
        ("A",),
        "L",
        {f"Z{i}": f"n{i}" for i in range(4)},
        (*(Pole("A", i + 1, "c", f"n{i}") for i in range(4)), Pole("A", 5, "L", None, "c")),
    )
    wanted = {load: Target(1, 0) for load in star.loads}
    proof = prove(star, wanted, form="bridge", isolated=["Z0", "Z1"])
    assert proof.explain().splitlines() == [
        "wiring: Z0 is never on, so it belongs on no net instead of n0",
        "wiring: Z1 is never on, so it belongs on no net instead of n1",
        "wiring: Z2 is never on, so it belongs on no net instead of n2",
        "wiring: 1 more",
        "back-feed: Z0 can discharge into Z1 in row 1 (A=1)",
        "  Z0 -> A:14 -> A:11 -> A:21 -> A:24 -> Z1",
        "back-feed: Z0 can discharge into Z2 in row 1 (A=1)",
        "  Z0 -> A:14 -> A:11 -> A:31 -> A:34 -> Z2",
        "back-feed: Z0 can discharge into Z3 in row 1 (A=1)",
        "  Z0 -> A:14 -> A:11 -> A:41 -> A:44 -> Z3",
        "back-feed: 2 more",
    ]


def test_targets_of_another_size_and_strange_isolated_loads_are_refused():
    with pytest.raises(ValueError, match="LAMP is wanted over 3 relays, not 2"):
        prove(STAIRS, {"LAMP": Target(3, 0)}, form="ladder")
    with pytest.raises(ValueError, match="isolated but not wanted: BELL"):
        prove(STAIRS, WANTED, form="ladder", isolated=["BELL"])


def design_of(network: Network, at_least: int = 1) -> Design:
    return Design("ladder", network, Bound(at_least, False), 4)


JOB = Job(
    "Sluice",
    RELAYS,
    tuple(Load(name, target) for name, target in WANTED.items()),
    all_rows(2),
)


@pytest.mark.parametrize("relays", [RELAYS, RELAYS[::-1]])
def test_verify_matches_relays_by_name(relays):
    order = {name: i for i, name in enumerate(relays)}
    poles = tuple(sorted(STAIRS.poles, key=lambda pole: order[pole.relay]))
    proof = verify(design_of(replace(STAIRS, relays=relays, poles=poles)), JOB)
    assert proof.ok
    assert proof.rows == 4


def test_verify_reports_relays_that_the_job_does_not_know():
    spare = design_of(replace(STAIRS, relays=("TIDE", *RELAYS)))
    assert verify(spare, JOB).structure == ("there is no relay TIDE in the job",)
    poles = (Pole("TIDE", 1, "L", "n1"), *STAIRS.poles)
    wired = design_of(replace(STAIRS, relays=("TIDE", *RELAYS), poles=poles))
    proof = verify(wired, JOB)
    assert proof.structure == ("TIDE pole 1: there is no relay TIDE in the job",)
    assert not proof.wrong


def test_verify_takes_a_repeater_for_the_relay_it_follows():
    poles = (*STAIRS.poles[:2], Pole("DOWN_R", 1, "n2", "n4"))
    network = replace(STAIRS, relays=(*RELAYS, "DOWN_R"), poles=poles)
    job = replace(JOB, limits=Limits(poles={"DOWN": 1, "UP": 1}))
    proof = verify(design_of(network), job, repeaters={"DOWN_R": "DOWN"})
    assert proof.ok
    assert proof.rows == 4
    assert not verify(design_of(network), job).ok
    assert verify(design_of(STAIRS), job).structure == ("DOWN uses 2 poles, its budget is 1",)


def test_verify_takes_isolation_and_form_from_the_job_and_the_design():
    tee = Network(
        ("A", "B"),
        "L",
        {"LAMP": "n1", "HORN": "n2"},
        (Pole("A", 1, "L", "n1"), Pole("B", 1, "n1", "n2")),
    )
    loads = (Load("LAMP", Target(2, 0b1010)), Load("HORN", Target(2, 0b1000)))
    job = Job("", ("A", "B"), loads, all_rows(2))
    assert verify(design_of(tee), job).ok
    stored = replace(job, limits=Limits(isolate="all"))
    assert [(b.load, b.other, b.row) for b in verify(design_of(tee), stored).backfeeds] == [
        ("LAMP", "HORN", 2)
    ]


def test_verify_doubts_a_bound_above_what_the_design_uses():
    proof = verify(design_of(STAIRS, at_least=4), JOB)
    assert proof.structure == ("claims that 4 poles are least, but uses 3",)


def test_a_network_without_relays_has_one_row():
    network = Network((), "L", {"X": "L", "Y": None}, ())
    proof = prove(network, {"X": Target(0, 1), "Y": Target(0, 0)}, form="ladder")
    assert proof.ok
    assert proof.rows == 1
    assert prove(network, {"X": Target(0, 0), "Y": Target(0, 0)}, form="ladder").explain() == (
        "wrong: X is on in row 0 (no relays), wanted off\n  supply -> X"
    )
