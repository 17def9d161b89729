"""The text of a recovery, from recoveries made up by hand."""

from __future__ import annotations

from dataclasses import replace

from contactlogic.repair import NoRepair, Repair
from contactlogic.report.recovery import (
    recovery_text,
    repair_lines,
    verdict_line,
)
from contactlogic.sequence.races import Race
from contactlogic.sequence.recovery import Recovery, Slowest, Trap
from contactlogic.sequence.transit import Transit

GOOD = Recovery(
    ("P", "A", "B"),
    "single",
    "recovers",
    (0b001, 0b011, 0b010, 0b000),
    (Trap(4, 0, True, 8, (0,)),),
    1,
    slowest=Slowest(0b111, 2),
)


def lines(recovery: Recovery, wanted: bool = True, transits=None) -> list[str]:
    return recovery_text(recovery, wanted=wanted, transits=transits).splitlines()


def test_what_recovers() -> None:
    assert lines(GOOD) == [
        "recovers: from each of the 8 states every run enters the wanted cycle",
        "states list P A B; one relay moves at a time",
        "",
        "wanted cycle of 4 states:",
        "  100 110 010 000",
        "",
        "slowest recovery: 2 moves, from 111",
    ]


def test_a_sequence_that_runs_once() -> None:
    once = replace(GOOD, cycle=(0b110,), moves="together", slowest=Slowest(0b110, 0))
    assert lines(once) == [
        "recovers: from each of the 8 states every run enters the last state of the sequence",
        "states list P A B; relays move together",
        "",
        "last state: 011",
        "",
        "slowest recovery: no moves, every state belongs to the cycle",
    ]


def test_a_parked_trap_and_a_race_not_counted_out() -> None:
    parked = Trap(1, 0b101, False, 3, (0b100, 0b101), parked=True)
    stuck = replace(
        GOOD,
        verdict="sticks",
        traps=(*GOOD.traps, parked),
        traps_known=2,
        slowest=None,
        races=(Race((1, 2), 0b111, 3, True, ((0,), (0, 0b101))),),
    )
    said = lines(stuck)
    assert said[0] == "sticks: 1 trap beside the wanted cycle"
    assert said[-6:] == [
        "  4 states, such as 000; 8 of 8 states can end there; this is the wanted one",
        "  waits for ever in 101 if no input moves again; 3 of 8 states can end there",
        "    shortest run into it, 1 move: 001 101",
        "",
        "races, where the order of two moves decides the end:",
        "  A and B in at least 3 states, such as 111: A first leads to 000, B first to 000 or 101",
    ]


def test_another_way_out_of_the_sequence_comes_first() -> None:
    stray = replace(GOOD, verdict="sticks", stray=(0b011, (0b010, 0b111)))
    assert verdict_line(stray, wanted=True) == (
        "sticks: in state 110 of the sequence the moves lead to 010 or 111"
    )
    resting = replace(GOOD, verdict="sticks", stray=(0b011, ()))
    assert verdict_line(resting, wanted=True).endswith("the moves lead to nowhere")


def test_many_traps_and_long_runs_are_cut() -> None:
    traps = tuple(Trap(1, k, False, 1, (k,)) for k in range(40))
    names = tuple(f"K{i}" for i in range(8))
    many = Recovery(names, "single", "sticks", None, traps, 40)
    said = lines(many, wanted=False)
    assert said[0] == "sticks: 40 traps, where one would do"
    assert said[3] == "40 traps:"
    assert len(said) == 4 + 12 + 1
    assert said[-1] == "  and 28 more"
    long = replace(many, verdict="recovers", cycle=tuple(range(60)))
    run = lines(long, wanted=False)[4]
    assert run.split()[-3:] == ["11011100", "(60", "states)"]
    assert len(run.split()) == 40 - 1 + 4


def test_what_was_stopped() -> None:
    stopped = replace(GOOD, verdict=None, complete=False, slowest=None)
    assert lines(stopped)[0] == "not known: stopped before the verdict"
    assert "not everything is known: what follows was found until then" in lines(stopped)
    assert "1 trap found so far, maybe more:" in lines(stopped)


def test_contacts_in_transit() -> None:
    gap = Transit("gap", "A", "B", 3, 1, 0b011)
    flash = Transit("flash", "A", "A", 1, 0, 0b001)
    assert lines(GOOD, transits=())[-1] == "no coil sees a gap or a flash while a relay moves"
    assert lines(GOOD, transits=(gap, flash))[-3:] == [
        "contacts in transit:",
        "  B is unfed for a moment while A moves (3 states, 1 of the sequence, such as 110)",
        "  A is fed for a moment while A moves (1 state, such as 100)",
    ]


def test_repairs() -> None:
    made = Repair("A", "D C'", "B' C'", 6, 5, True)
    assert list(repair_lines(made)) == [
        "cheapest repair: change the drive of A",
        "  from  D C'",
        "  to    B' C'",
        "  poles of all drives together: 6 before, 5 after",
    ]
    assert list(repair_lines(NoRepair("none helps"))) == ["no repair: none helps"]
