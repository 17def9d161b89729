"""Job files that are right: every section, orders, constants."""

from __future__ import annotations

from pathlib import Path

import pytest

from contactlogic.job import load_job
from contactlogic.job.model import Job, SeparateContacts, Supply

WHOLE = """
title = "Sluice \\"house\\" <1>"

[table]
columns = "UP DOWN FLOOD | LAMP HORN"
rows = '''
0 0 0 | 0 0
1 0 0 | 1 0
0 1 0 | 1 -
- - 1 | 1 1
'''
unlisted = "free"

[formulas]
BELL = "2oo3(UP, K7, FLOOD) ^ 1CR'"
SPARE = "0"

[supply]
feed = "+24 V"
return = "0 V"

[loads]
LAMP = { kind = "lamp", amps = 0.2 }
BELL = { kind = "horn", amps = 1 }
SPARE = {}

[limits]
poles = { UP = 2, K7 = 0 }
contacts = { DOWN = "1A1B", FLOOD = "2A", 1CR = "12B" }
isolate = "all"
guided = "UP"
objective = "contacts"
"""


def job_of(tmp_path: Path, text: str) -> Job:
    path = tmp_path / "sluice.toml"
    path.write_text(text, encoding="utf-8")
    return load_job(path)


def test_every_section(tmp_path: Path) -> None:
    job = job_of(tmp_path, WHOLE)
    assert job.title == 'Sluice "house" <1>'
    assert job.relays == ("UP", "DOWN", "FLOOD", "K7", "1CR")
    assert [load.name for load in job.loads] == ["LAMP", "HORN", "BELL", "SPARE"]
    assert [load.kind for load in job.loads] == ["lamp", None, "horn", None]
    assert [load.amps for load in job.loads] == [0.2, None, 1.0, None]
    assert [load.formula for load in job.loads] == [
        None, None, "2oo3(UP, K7, FLOOD) ^ 1CR'", "0"
    ]  # fmt: skip
    assert job.supply == Supply("+24 V", "0 V")
    assert job.limits.poles == {"UP": 2, "K7": 0}
    assert job.limits.contacts == {
        "DOWN": SeparateContacts(1, 1), "FLOOD": SeparateContacts(2, 0),
        "1CR": SeparateContacts(0, 12),
    }  # fmt: skip
    assert (job.limits.isolate, job.limits.objective) == ("all", "contacts")
    assert job.limits.guided == ("UP",)
    assert job.isolated == {"LAMP", "HORN", "BELL", "SPARE"}


def test_table_rows_hold_for_both_values_of_relays_they_lack(tmp_path: Path) -> None:
    job = job_of(tmp_path, WHOLE)
    lamp, horn = job.targets["LAMP"], job.targets["HORN"]
    for row in range(32):
        up, down, flood = (row >> i & 1 for i in range(3))
        unlisted = up and down and not flood
        assert job.listed >> row & 1 == (not unlisted)
        assert lamp.free >> row & 1 == unlisted
        assert lamp.on >> row & 1 == (not unlisted and (up or down or flood))
        assert horn.free >> row & 1 == (down and not flood)
        assert horn.on >> row & 1 == flood


def test_formulas_are_wanted_in_every_row(tmp_path: Path) -> None:
    job = job_of(tmp_path, WHOLE)
    bell = job.targets["BELL"]
    assert bell.free == 0
    for row in range(32):
        up, _, flood, k7, cr = (row >> i & 1 for i in range(5))
        assert bell.on >> row & 1 == (up + k7 + flood >= 2) ^ (not cr)


def test_relays_stand_in_order_of_first_appearance(tmp_path: Path) -> None:
    job = job_of(tmp_path, "[formulas]\nX = \"C' + A C\"\nY = 'B A + D'\n")
    assert job.relays == ("C", "A", "B", "D")
    assert job.title == "sluice"
    assert job.supply == Supply(None, None)
    assert job.listed == (1 << 16) - 1


def test_constant_loads_are_allowed(tmp_path: Path) -> None:
    job = job_of(tmp_path, '[formulas]\nON = "A + A\'"\nOFF = "0"\n')
    assert (job.targets["ON"].on, job.targets["OFF"].on) == (0b11, 0)
    job = job_of(tmp_path, '[formulas]\nON = "1"\nOFF = "0"\n')  # no relay at all: one row
    assert (job.relays, job.listed) == ((), 1)
    assert (job.targets["ON"].on, job.targets["OFF"].on) == (1, 0)


@pytest.mark.parametrize("other", ["K2", "K12", "DOORR", "B", "PUMP2", "LEFT"])
def test_relays_beside_the_table_are_not_taken_for_slips(tmp_path: Path, other: str) -> None:
    text = '[table]\ncolumns = "K1 DOORL A PUMP1 RIGHT | X"\nrows = "- - - - - | 1"\n'
    job = job_of(tmp_path, text + f'[formulas]\nY = "K1 {other}"\n')
    assert job.relays[-1] == other


@pytest.mark.parametrize("slip", ["DWON", "DONW", "DOWNN", "DOWNS", "DWN", "DOON"])
def test_slips_are_found(tmp_path: Path, slip: str) -> None:
    text = '[table]\ncolumns = "UP DOWN | X"\nrows = "- - | 1"\n[formulas]\n'
    if slip == "DOON":  # one letter changed in a short name may well be another relay
        assert job_of(tmp_path, text + f'Y = "UP {slip}"').relays == ("UP", "DOWN", "DOON")
        return
    with pytest.raises(Exception, match="did you mean DOWN"):
        job_of(tmp_path, text + f'Y = "UP {slip}"')


def test_a_byte_order_mark_and_line_ends_of_other_systems(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes(b"\xef\xbb\xbf" + WHOLE.replace("\n", "\r\n").encode())
    assert load_job(path).targets == job_of(tmp_path, WHOLE).targets
