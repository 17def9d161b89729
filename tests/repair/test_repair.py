"""Repairs of failing drives, judged by listing every state and trying every drive."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given, settings
from sequence import explicit
from sequence.test_recovery import systems

from contactlogic import repair
from contactlogic.algebra import Break, Constant, Name, Parallel, Series, evaluate
from contactlogic.formula import parse
from contactlogic.job.model import DrivesJob
from contactlogic.job.sequence import Row, SequenceTable, Timing
from contactlogic.sequence import candidates
from contactlogic.sequence.drives import formula_drive
from contactlogic.sequence.memory import resolve
from contactlogic.sequence.prove import prove_drives
from contactlogic.truth import Target

RING = {"A": "D C'", "B": "A D'", "C": "B A'", "D": "C B'"}
SLOW = Timing(slow_release=("A", "B", "C", "D"))


def job_of(formulas, timing=Timing(), columns=None, table=None):  # noqa: B008 - a frozen value
    drives = {name: parse(text) for name, text in formulas.items()}
    columns = columns or tuple(formulas)
    return DrivesJob("job", columns, drives, formulas, timing, table)


def proved(job, moves="single"):
    expansion = None if job.table is None else resolve(job.table)
    fed = {name: formula_drive(drive) for name, drive in job.drives.items()}
    return prove_drives(job.columns, fed, job.timing, expansion, moves=moves), expansion


def by_contacts(monkeypatch):
    """Count contacts of the formulas, so that nothing is wired."""
    monkeypatch.setattr(repair, "_WIRED", 0)


def changed(job, found):
    """The job with the repair made."""
    formulas = {**job.formulas, found.relay: found.after}
    return job_of(formulas, job.timing, job.columns, job.table)


def test_a_ring_that_starts_dead_is_given_a_start() -> None:
    job = job_of(RING, SLOW)
    found = repair.cheapest_repair(job, proved(job)[0])
    assert isinstance(found, repair.Repair)
    # each relay but one needs one that is on; "nobody else is on" starts it, as is usual
    assert (found.relay, found.before, found.after) == ("A", "D C'", "B' C'")
    assert (found.poles_before, found.poles_after, found.wired) == (6, 5, True)
    assert proved(changed(job, found))[0].verdict == "recovers"


def test_a_wanted_sequence_is_kept(monkeypatch: pytest.MonkeyPatch) -> None:
    by_contacts(monkeypatch)
    rows = tuple(Row(s) for s in ((1, 1, 0, 0), (0, 1, 1, 0), (0, 0, 1, 1), (1, 0, 0, 1)))
    table = SequenceTable(("A", "B", "C", "D"), (), rows, timing=SLOW, memory="forbidden")
    job = job_of(RING, SLOW, table=table)
    recovery, expansion = proved(job)
    found = repair.cheapest_repair(job, recovery, expansion)
    assert isinstance(found, repair.Repair)
    assert (found.poles_before, found.poles_after, found.wired) == (8, 8, False)
    again = proved(changed(job, found))[0]
    assert again.verdict == "recovers"
    assert again.cycle == recovery.cycle
    # with a second drive that is wrong in the sequence itself there is nothing to propose
    twice = job_of({**RING, "B": "A D", "C": "B A"}, SLOW, table=table)
    recovery, expansion = proved(twice)
    assert repair.cheapest_repair(twice, recovery, expansion) == repair.NoRepair(
        "the drives of B and C are wrong in states of the sequence, so that no change of one "
        "drive alone repairs it"
    )


def test_what_one_drive_cannot_mend_is_said(monkeypatch: pytest.MonkeyPatch) -> None:
    by_contacts(monkeypatch)
    pairs = job_of({"A": "B'", "B": "A'", "C": "D'", "D": "C'"})
    found = repair.cheapest_repair(pairs, proved(pairs)[0])
    assert isinstance(found, repair.NoRepair)
    assert found.why == (
        "no change of one drive alone repairs it: with any drive of A, state 0001 cannot be led "
        "to the largest trap; the other relays are no better"
    )


def test_large_sets_of_drives_are_left_alone() -> None:
    names = [f"K{i}" for i in range(repair.MOST_COLUMNS + 1)]
    job = job_of({name: name for name in names})
    recovery = replace(proved(job)[0], moves="together")
    found = repair.cheapest_repair(job, recovery)
    assert found == repair.NoRepair(
        "among so many relays and inputs one is looked for with single moves alone, up to 24 of "
        "them"
    )


def expression(table, names):
    """Any drive as a sum of products."""
    rows = [row for row in range(2 ** len(names)) if table >> row & 1]
    terms = [
        Series(tuple(Name(x) if row >> k & 1 else Break(Name(x)) for k, x in enumerate(names)))
        for row in rows
    ]
    return Parallel(tuple(terms)) if terms else Constant(False)


@pytest.mark.slow
@settings(max_examples=150)
@given(systems(most=3, inputs=True))
def test_repairs_against_every_possible_drive(system) -> None:
    check_repair(system)


@settings(max_examples=25)
@given(systems(most=3, inputs=True))
def test_repairs_against_every_possible_drive_of_a_few(system) -> None:
    check_repair(system)


def check_repair(system):
    n, tables, slow, inputs, _ = system
    names = tuple("ABC"[:n])
    timing = Timing(
        tuple(names[i] for i, at in sorted(slow) if at),
        tuple(names[i] for i, at in sorted(slow) if not at),
    )
    drives = {names[i]: expression(t, names) for i, t in enumerate(tables) if t is not None}
    job = DrivesJob("job", names, drives, dict.fromkeys(drives, "?"), timing)
    recovery, _ = proved(job)
    if recovery.verdict == "recovers":
        return
    with pytest.MonkeyPatch.context() as patch:
        by_contacts(patch)
        found = repair.cheapest_repair(job, recovery)
    legal = largest(n, tables, slow, inputs)

    def recovers(column, table):
        other = [table if i == column else t for i, t in enumerate(tables)]
        moves = graph(n, other, slow, inputs)
        return explicit.verdict(moves, n, legal) == "recovers" and all(
            set(moves[s]) == set(graph(n, tables, slow, inputs)[s]) for s in legal
        )

    if isinstance(found, repair.Repair):
        after = evaluate(parse(found.after), names)
        assert recovers(names.index(found.relay), after)
        return
    coils = [i for i in range(n) if i not in inputs]
    assert not any(recovers(i, t) for i in coils for t in range(2**2**n)), found.why


def graph(n, tables, slow, inputs):
    fed = [None if t is None else [t >> s & 1 for s in range(2**n)] for t in tables]
    return explicit.graph(n, fed, slow, inputs)


def largest(n, tables, slow, inputs):
    found = explicit.traps(graph(n, tables, slow, inputs))
    return max(found, key=lambda trap: (len(trap), -min(trap)))


def test_the_repair_as_json() -> None:
    made = repair.Repair("A", "B", "C'", 3, 2, True)
    assert repair.repair_json(made) == {
        "relay": "A",
        "before": "B",
        "after": "C'",
        "poles_before": 3,
        "poles_after": 2,
        "poles_are": "wired",
        "cheapest": True,
    }
    assert repair.repair_json(replace(made, wired=False))["poles_are"] == "at most"
    assert repair.repair_json(repair.NoRepair("too many")) == {"relay": None, "why": "too many"}


def test_formulas_come_by_contacts_and_do_what_they_say() -> None:
    names = ("A", "B", "C")
    found = list(candidates.formulas(names))
    assert [contacts for contacts, _, _ in found] == sorted(contacts for contacts, _, _ in found)
    assert len({table for _, table, _ in found}) == len(found)
    for contacts, table, formula in found:
        assert evaluate(formula, names) == table
        assert candidates.contacts_of(formula) == contacts
    # all functions of two relays but the two that need each relay twice take at most 2 contacts
    two = [contacts for contacts, _, _ in candidates.formulas(("A", "B"))]
    assert sum(contacts <= 2 for contacts in two) == 14


def test_plain_formulas_keep_the_target() -> None:
    names = ("A", "B", "C")
    target = Target(3, on=0b0000_0010, free=0b1100_0000)  # on in A alone, free in B C and A B C
    found = candidates.plain_formulas(target, names)
    for contacts, table, formula in found:
        assert evaluate(formula, names) == table
        assert candidates.contacts_of(formula) == contacts
    assert parse("A B' C'") in [formula for _, _, formula in found]
    assert parse("A B C'") not in [formula for _, _, formula in found]
