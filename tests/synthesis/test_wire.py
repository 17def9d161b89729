"""From job values to proved results: both forms, limits, repeaters, the same bytes again."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace

import pytest
from oracles import behaviour

import contactlogic
from contactlogic.errors import LimitError
from contactlogic.job.model import Job, Limits, Load, SeparateContacts
from contactlogic.ladder.small import size_table
from contactlogic.network import folded
from contactlogic.report.designfile import dumps
from contactlogic.truth import Target, all_rows


def job(n: int, *targets: Target, limits: Limits | None = None) -> Job:
    loads = tuple(Load(f"Z{k}", target) for k, target in enumerate(targets))
    return Job("test", tuple("ABCDEFGH"[:n]), loads, all_rows(n), limits=limits or Limits())


def full_adder(**limits: object) -> Job:
    odd = sum(1 << row for row in range(8) if row.bit_count() % 2)
    most = sum(1 << row for row in range(8) if row.bit_count() > 1)
    return job(3, Target(3, odd), Target(3, most), limits=Limits(**limits))  # type: ignore[arg-type]


def test_both_forms_are_proved_and_the_bridge_needs_no_more() -> None:
    result = contactlogic.wire(full_adder(), effort=12)
    ladder, bridge = result.designs
    assert (ladder.form, bridge.form) == ("ladder", "bridge")
    assert len(bridge.network.poles) <= len(ladder.network.poles)
    for design in result.designs:
        assert contactlogic.verify(design, result.job).ok
        assert design.bound.proven_minimum == (len(design.network.poles) == design.bound.at_least)
        seen = behaviour(design.network)
        for load in result.job.loads:
            assert load.target.accepts(seen[load.name])


def test_full_adder_bridge_is_six_and_proved() -> None:
    # 6 changeovers: proved with the reference search of the design page (section 8.2)
    result = contactlogic.wire(full_adder(), form="bridge", effort=40)
    assert len(result.designs[0].network.poles) == 6
    assert result.designs[0].bound.proven_minimum


def test_one_form_alone() -> None:
    result = contactlogic.wire(full_adder(), form="bridge", effort=0)
    assert [design.form for design in result.designs] == ["bridge"]


def test_every_function_of_three_inputs() -> None:
    sizes = size_table().size
    for on in range(256):
        wanted = job(3, Target(3, on))
        result = contactlogic.wire(wanted, effort=0)
        for design in result.designs:
            assert behaviour(design.network)["Z0"] == on
            assert design.verified_rows == 8
        ladder = result.designs[0].network
        contacts = sum(count.contacts for count in ladder.per_relay().values())
        assert contacts >= sizes[on | on << 8]


@pytest.mark.parametrize("start", range(8))
def test_functions_of_four_inputs(start: int) -> None:
    for on in range(start * 37 + 1, 65536, 523):
        result = contactlogic.wire(job(4, Target(4, on)), effort=0)
        for design in result.designs:
            assert behaviour(design.network)["Z0"] == on
        assert result.designs[1].bound.proven_minimum


def test_free_rows_take_the_cheapest_completion() -> None:
    # on in 1 of A B, off in 0, the rest free: one make of either relay does
    result = contactlogic.wire(job(2, Target(2, 0b1000, 0b0110)), effort=0)
    assert all(len(design.network.poles) == 1 for design in result.designs)


def test_least_contacts_on_request() -> None:
    # odd parity of three: 8 contacts as a bridge (OEIS A058759), 10 as a ladder (A056287 plus one)
    odd = Target(3, 0b10010110)
    result = contactlogic.wire(job(3, odd, limits=Limits(objective="contacts")), effort=8)
    contacts = [
        sum(count.contacts for count in design.network.per_relay().values())
        for design in result.designs
    ]
    assert contacts[0] == 10
    assert contacts[1] <= 10


def test_a_budget_is_kept_in_the_search() -> None:
    odd = Target(3, 0b10010110)
    kept = contactlogic.wire(job(3, odd, limits=Limits(poles={"A": 1, "C": 1})), effort=25)
    (bridge,) = kept.designs  # every ladder for odd parity has more contacts of A or C
    use = bridge.network.per_relay()
    assert use["A"].poles <= 1
    assert use["C"].poles <= 1
    assert "no ladder found keeps the pole budgets" in bridge.notes


def test_a_budget_that_cannot_be_met_says_the_least() -> None:
    most = Target(3, 0b11101000)
    limits = Limits(poles=dict.fromkeys("ABC", 1))
    with pytest.raises(LimitError) as caught:
        contactlogic.wire(job(3, most, limits=limits), effort=10)
    assert "may use 1 pole; the least found for it is" in str(caught.value)
    assert "proved: no network keeps all budgets" in str(caught.value)
    assert "--repeaters" in str(caught.value)


def test_repeaters_are_added_as_few_as_possible() -> None:
    most = Target(3, 0b11101000)
    limits = Limits(poles=dict.fromkeys("ABC", 1))
    result = contactlogic.wire(
        job(3, most, limits=limits), form="bridge", effort=20, repeaters=True
    )
    assert len(result.repeaters) == 1  # 4 poles on three relays of one pole each
    ((name, relay),) = result.repeaters.items()
    assert name == f"{relay}_2"
    assert result.relays == ("A", "B", "C", name)
    design = result.designs[0]
    assert all(count.poles <= 1 for count in design.network.per_relay().values())
    assert behaviour(folded(design.network, result.repeaters))["Z0"] == most.on
    assert contactlogic.verify(design, result.job, repeaters=result.repeaters).ok


def test_separate_contacts_never_pair() -> None:
    wanted = full_adder(contacts={"C": SeparateContacts(9, 9)})
    result = contactlogic.wire(wanted, effort=8)
    for design in result.designs:
        assert design.network.per_relay()["C"].changeovers == 0


def test_isolated_loads_are_never_joined_when_off() -> None:
    result = contactlogic.wire(full_adder(isolate="all"), effort=8)
    for design in result.designs:
        proof = contactlogic.verify(design, result.job)
        assert proof.ok
        assert proof.isolated == ("Z0", "Z1")


def test_constant_loads_take_nothing() -> None:
    result = contactlogic.wire(job(2, Target(2, 0), Target(2, 15), Target(2, 8)), effort=5)
    for design in result.designs:
        assert design.network.loads["Z0"] is None
        assert design.network.loads["Z1"] == design.network.supply
        assert len(design.network.poles) == 2


def test_the_clock_is_kept() -> None:
    from time import monotonic

    start = monotonic()
    segments = [Target(4, 0b1111101101, 0xFC00), Target(4, 0x6996), Target(4, 0x1EE1)]
    contactlogic.wire(job(4, *segments), seconds=4)
    assert monotonic() - start < 8  # the limit itself is measured in tests/bench, not here


PROGRAM = """
import contactlogic
from contactlogic.job.model import Job, Load
from contactlogic.report.designfile import dumps
from contactlogic.truth import Target, all_rows
loads = (Load("S", Target(3, 0b10010110)), Load("T", Target(3, 0b11101000, 0b1)))
print(dumps(contactlogic.wire(Job("t", ("A", "B", "C"), loads, all_rows(3)), effort=8, seed=3)))
"""


def test_same_bytes_under_another_hash_seed_and_worker_count() -> None:
    def run(seed: str) -> str:
        done = subprocess.run(
            [sys.executable, "-c", PROGRAM],
            capture_output=True,
            text=True,
            check=True,
            env={"PYTHONHASHSEED": seed, "PATH": ""},
        )
        return done.stdout

    assert run("1") == run("2")
    adder = replace(full_adder(), title="t")
    alone, many = (contactlogic.wire(adder, effort=8, workers=k) for k in (1, 3))
    assert dumps(alone) == dumps(many)


@pytest.mark.parametrize("stage", ["covers", "best_ladder"])
def test_stopped_before_the_search_there_is_a_plain_network(
    stage: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    from contactlogic import synthesis

    plain = synthesis.covers

    def stop(*arguments: object, **options: object) -> object:
        if options.get("seconds") == 0.0:  # what is done once stopped
            return plain(*arguments, **options)  # type: ignore[arg-type]
        raise KeyboardInterrupt

    monkeypatch.setattr(synthesis, stage, stop)
    result = synthesis.wire(full_adder(), effort=1)
    assert result.interrupted
    assert [design.form for design in result.designs] == ["ladder", "bridge"]
    for design in result.designs:
        assert contactlogic.verify(design, result.job).ok


def test_budgets_that_nothing_keeps_are_refused_before_any_search(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    from contactlogic import synthesis

    def fail(*_: object, **__: object) -> None:
        raise AssertionError("a search was begun")

    monkeypatch.setattr(synthesis, "covers", fail)
    asked = job(2, Target(2, 0b0110), limits=Limits(poles={"A": 0}))
    for repeaters in (False, True):
        with pytest.raises(LimitError, match=r"A may use 0 poles; every network needs at least 1"):
            synthesis.wire(asked, repeaters=repeaters)
