"""[coils], [panel], fuses and suppression: read, shown in one manner, and refused with a place."""

from __future__ import annotations

from pathlib import Path

import pytest

from contactlogic.errors import JobError
from contactlogic.job import load_job
from contactlogic.job.model import Fittings, Job, PatternJob, Position, SequenceJob
from contactlogic.job.values import amperes, farads, ohms
from contactlogic.sequencer import as_table_job

TABLE = """\
[table]
columns = "UP DOWN | LAMP VALVE"
rows = "- - | 0 1"
"""

RING = """\
[sequence]
columns = "A B C | STRIKE"
rows = \"\"\"
1 1 0 | 0
0 1 1 | 1
1 0 1 | 0
\"\"\"
[timing]
slow_release = "A B C"
"""


def read(folder: Path, text: str) -> Job | SequenceJob | PatternJob:
    (folder / "job.toml").write_text(text)
    job = load_job(folder / "job.toml")
    assert isinstance(job, Job | SequenceJob | PatternJob)
    return job


@pytest.mark.parametrize(
    ("written", "shown"),
    [
        ("470 uF", "470 uF"),
        ("470 µF", "470 uF"),
        ("470u", "470 uF"),
        ("4u7", "4.7 uF"),
        ("2,2 mF", "2.2 mF"),
        ("10n", "10 nF"),
    ],
)
def test_capacitors(written: str, shown: str) -> None:
    # codes of values as in IEC 60062 (memory): the letter stands for the decimal point
    assert farads(written) == shown


@pytest.mark.parametrize(
    ("written", "shown"),
    [("100 ohm", "100 ohm"), ("100R", "100 ohm"), ("4k7", "4.7 kohm"), ("1R5", "1.5 ohm")],
)
def test_resistors(written: str, shown: str) -> None:
    assert ohms(written) == shown


@pytest.mark.parametrize(
    ("written", "shown"), [("2 A", "2 A"), ("T500mA", "T 500 mA"), ("FF 1.25 A", "FF 1.25 A")]
)
def test_fuses(written: str, shown: str) -> None:
    assert amperes(written) == shown


@pytest.mark.parametrize("text", ["", "x", "470", "-1 uF", "0 uF", "9 ohm", "1e3", "nan F", "99 F"])
def test_what_is_no_capacitor(text: str) -> None:
    with pytest.raises(ValueError, match=r"."):
        farads(text)


def test_what_a_table_job_states(tmp_path: Path) -> None:
    job = read(
        tmp_path,
        TABLE
        + '[loads]\nLAMP = { kind = "lamp", fuse = "T2A", suppression = "varistor" }\n'
        + '[coils]\nVALVE = { hold = "470u", series = "100R" }\n'
        + "[panel]\nUP = { row = 1, column = 2 }\nfeed = { row = 0, column = 0.5 }\n"
        + "UP_2 = { row = 2, column = 2 }\n",
    )
    assert isinstance(job, Job)
    assert job.bench.fittings == {
        "LAMP": Fittings(fuse="T 2 A", suppression="varistor"),
        "VALVE": Fittings(hold="470 uF", series="100 ohm"),
    }
    assert job.bench.places == {"UP": Position(1, 2), "UP_2": Position(2, 2)}
    assert (job.bench.feed, job.bench.back) == (Position(0, 0.5), None)
    assert {load.name: load.kind for load in job.loads} == {"LAMP": "lamp", "VALVE": "coil"}
    assert job.isolated == {"VALVE"}  # its capacitor would discharge into other loads


def test_a_relay_called_feed_is_no_rail(tmp_path: Path) -> None:
    text = TABLE.replace("UP", "feed") + "[panel]\nfeed = { row = 1, column = 1 }\n"
    job = read(tmp_path, text)
    assert job.bench.places == {"feed": Position(1, 1)}
    assert job.bench.feed is None


def test_coils_of_a_sequence(tmp_path: Path) -> None:
    job = read(tmp_path, RING + '[coils]\nA = { hold = "100 uF" }\n')
    assert isinstance(job, SequenceJob)
    table = as_table_job(job)
    assert table.bench.fittings == {"A": Fittings(hold="100 uF")}


def test_coils_of_a_pattern_are_checked_once_relays_are_chosen(tmp_path: Path) -> None:
    text = '[pattern]\nloads = "RED GREEN"\nrows = "1 0\\n0 1"\nstep = "slow"\n'
    job = read(tmp_path, text + '[coils]\nNONE = { hold = "100 uF" }\n')
    assert isinstance(job, PatternJob)
    with pytest.raises(JobError, match="no relay or load NONE"):
        as_table_job(job)


@pytest.mark.parametrize(
    ("section", "said"),
    [
        ('[coils]\nVALV = { hold = "1 uF" }', ["no coil VALV", "did you mean VALVE?", "line 5"]),
        ('[coils]\nVALVE = { hold = "470" }', ['hold cannot be "470"', "no unit", "line 5"]),
        ("[coils]\nVALVE = { hold = 470 }", ["hold cannot be 470", '"470 uF"']),
        ('[coils]\nVALVE = { fuse = "2 V" }', ["fuse", "V is no unit"]),
        ('[coils]\nVALVE = { hold = "=1+1" }', ["hold", "no value"]),
        ('[loads]\nLAMP = { suppression = "diod" }', ["suppression", "did you mean diode?"]),
        ('[loads]\nLAMP = { hold = "1 uF" }', ["no key hold", "belongs in [coils]"]),
        ("[panel]\nUPP = { row = 1, column = 1 }", ["no relay or load UPP", "did you mean UP?"]),
        ("[panel]\nUP = { row = 1 }", ["column"]),
        ('[panel]\nUP = { row = "a", column = 1 }', ["row cannot be"]),
        ("[panel]\nUP = { row = 1, column = nan }", ["column cannot be"]),
        ('[loads]\nLAMP = {}\n[coils]\nLAMP = { hold = "1 uF" }', ["both in [loads] and in"]),
    ],
)
def test_refusals(tmp_path: Path, section: str, said: list[str]) -> None:
    with pytest.raises(JobError) as caught:
        read(tmp_path, TABLE + section + "\n")
    for words in said:
        assert words in str(caught.value)
