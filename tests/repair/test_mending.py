"""Repairs among more columns than can be looked at state by state, run by a plain simulator."""

from __future__ import annotations

import random

import pytest
from sequence.stepping import Sequencer

from contactlogic import repair
from contactlogic.formula import parse
from contactlogic.job.model import DrivesJob
from contactlogic.job.sequence import Row, SequenceTable, Timing
from contactlogic.sequence.drives import formula_drive
from contactlogic.sequence.memory import resolve
from contactlogic.sequence.prove import prove_drives

N = 11
NAMES = tuple(f"K{k}" for k in range(N))


def twisted():
    """All operate one after another, then all release in the same order."""
    up = [tuple(int(i < k) for i in range(N)) for k in range(N + 1)]
    down = [tuple(int(i >= k) for i in range(N)) for k in range(1, N)]
    return SequenceTable(NAMES, (), tuple(map(Row, up + down)))


def job_of(formulas, table=None):
    drives = {name: parse(text) for name, text in formulas.items()}
    return DrivesJob("job", NAMES, drives, formulas, Timing(), table)


def proved(job):
    expansion = None if job.table is None else resolve(job.table, wired=True)
    fed = {name: formula_drive(drive) for name, drive in job.drives.items()}
    return prove_drives(job.columns, fed, job.timing, expansion), expansion


def fed_by(drive):
    read = formula_drive(drive)
    return lambda at: read(at) & 1


def comes_home(job, expansion):
    """Runs from states drawn at random, moves drawn at random, come into the sequence."""
    cycle = {tuple(s.state >> k & 1 for k in range(N)) for s in expansion.steps}
    dice = random.Random(1)
    drives = {name: fed_by(drive) for name, drive in job.drives.items()}
    for _ in range(20):
        start = [dice.getrandbits(1) for _ in NAMES]
        machine = Sequencer(NAMES, drives, set(), start)
        for _ in range(4000):
            if machine.state() in cycle:
                break
            assert machine.step(dice.choice)
        assert machine.state() in cycle


SHIFTED = {"K0": "K10'", **{f"K{k}": f"K{k - 1}" for k in range(1, N)}}


@pytest.mark.parametrize(
    ("changes", "verdict"),
    [
        # further turns can run round at once
        pytest.param({}, "hunts", marks=pytest.mark.slow),
        ({"K5": "K4 + K5 K7"}, "sticks"),  # operated with K7, for ever
        ({"K0": "K10' (K0 + K5)"}, "sticks"),  # wrong where all are released
    ],
)
def test_one_drive_is_made_anew_among_many(changes, verdict):
    job = job_of({**SHIFTED, **changes}, twisted())
    recovery, expansion = proved(job)
    assert recovery.verdict == verdict
    found = repair.cheapest_repair(job, recovery, expansion)
    assert isinstance(found, repair.Repair)
    assert not found.wired
    assert not found.cheapest
    mended = job_of({**job.formulas, found.relay: found.after}, twisted())
    assert proved(mended)[0].verdict == "recovers"
    comes_home(mended, expansion)


def test_without_a_sequence_the_largest_trap_is_kept():
    job = job_of({**SHIFTED, "K0": "K10'", "K5": "K4 + K5 K7"})
    recovery, _ = proved(job)
    found = repair.cheapest_repair(job, recovery)
    assert isinstance(found, repair.Repair | repair.NoRepair)
    if isinstance(found, repair.Repair):
        again = proved(job_of({**job.formulas, found.relay: found.after}))[0]
        assert again.verdict == "recovers"


def test_two_drives_that_are_wrong_are_named():
    job = job_of({**SHIFTED, "K5": "K4'", "K7": "K6'"}, twisted())
    recovery, expansion = proved(job)
    found = repair.cheapest_repair(job, recovery, expansion)
    assert isinstance(found, repair.NoRepair)
    assert "the drives of K5 and K7 are wrong" in found.why
