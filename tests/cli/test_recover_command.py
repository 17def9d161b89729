"""`contactlogic recover` from the outside: what it prints and returns."""

from __future__ import annotations

import json
import os
import signal
import threading
from pathlib import Path

import pytest
from typer.testing import CliRunner, Result

from contactlogic import repair
from contactlogic.algebra import Break, Exclusive, Name, Parallel, Series, to_text
from contactlogic.cli.app import app
from contactlogic.design import Bound, Design
from contactlogic.design import Result as Wiring
from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole
from contactlogic.report.designfile import dumps
from contactlogic.sequence.space import Stopped
from contactlogic.truth import Target

SLOW = '[timing]\nslow_release = "A B C D"\n'

DEAD = """\
[drives]
A = "D C'"
B = "A D'"
C = "B A'"
D = "C B'"
"""

SEQUENCE = '''\
[sequence]
columns = "A B C D | STRIKE"
rows = """
1 1 0 0 | 0
0 1 1 0 | 1
0 0 1 1 | 0
1 0 0 1 | 1
"""
'''

LATCH = '[drives]\nA = "B\'"\nB = "A\'"\n'
BLINK = '[drives]\nA = "A\'"\nB = "A + B"\n'
ODD = '[drives]\nA = "C\'"\nB = "A"\nC = "B"\n'


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """An empty current folder; poles of repairs are counted on formulas, which is quick."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(repair, "_WIRED", 0)


def recover(job: str, *options: str) -> Result:
    Path("job.toml").write_text(job, encoding="utf-8")
    return CliRunner().invoke(app, ["recover", "job.toml", *options])


def test_a_ring_that_starts_dead() -> None:
    done = recover(DEAD + SLOW)
    assert done.exit_code == 1
    assert done.stderr == ""
    assert done.stdout == (
        "sticks: 2 traps, where one would do\n"
        "states list A B C D; one relay moves at a time\n"
        "\n"
        "2 traps:\n"
        "  at rest in 0000; 1 of 16 states can end there\n"
        "  8 states, such as 1000; 15 of 16 states can end there\n"
        "    shortest run into it, 1 move: 1110 1100\n"
        "\n"
        "cheapest repair: change the drive of A\n"
        "  from  D C'\n"
        "  to    B' C'\n"
        "  poles of all drives together: at most 8 before, at most 8 after\n"
    )


def test_a_ring_that_starts_dead_as_json() -> None:
    done = recover(DEAD + SLOW, "--json")
    assert done.exit_code == 1
    found = json.loads(done.stdout)
    assert list(found)[:9] == [
        "schema", "relays", "states", "moves", "verdict", "cycle", "traps", "hunting", "slowest",
    ]  # fmt: skip
    assert found["schema"] == "contactlogic/recovery/1"
    assert found["relays"] == ["A", "B", "C", "D"]
    assert (found["states"], found["moves"], found["verdict"]) == (16, "single", "sticks")
    assert [trap["states"] for trap in found["traps"]] == [1, 8]
    assert [trap["example"] for trap in found["traps"]] == ["0000", "1000"]
    assert (found["hunting"], found["slowest"]) == (None, None)
    assert found["repair"]["after"] == "B' C'"


def test_the_same_ring_against_the_sequence_it_is_meant_for() -> None:
    done = recover(SEQUENCE + DEAD + SLOW)
    assert done.exit_code == 1
    lines = done.stdout.splitlines()
    assert lines[0] == "sticks: 1 trap beside the wanted cycle"
    assert lines[3:5] == [
        "wanted cycle of 8 states:",
        "  1100 0100 0110 0010 0011 0001 1001 1000",
    ]
    assert "can end there; this is the wanted one" in lines[7]
    found = json.loads(recover(SEQUENCE + DEAD + SLOW, "--json").stdout)
    assert found["cycle"][:3] == ["1100", "0100", "0110"]
    assert [(trap["states"], trap["wanted"]) for trap in found["traps"]] == [(8, True), (1, False)]


def test_drives_that_leave_the_sequence() -> None:
    done = recover(SEQUENCE + DEAD.replace("B A'", "B A") + SLOW)
    assert done.exit_code == 1
    assert done.stdout.startswith("sticks: in state 1100 of the sequence the moves lead to 1110\n")


def test_cross_coupled_drives() -> None:
    done = recover(LATCH)
    assert done.exit_code == 1
    assert "at rest in 10; 3 of 4 states can end there" in done.stdout
    assert "  A and B in 2 states, such as 00: A first leads to 10, B first to 01\n" in done.stdout
    together = json.loads(recover(LATCH, "--json", "--moves", "together").stdout)
    assert (together["verdict"], together["moves"]) == ("sticks", "together")


def test_an_odd_ring_without_rest_recovers() -> None:
    done = recover(ODD)
    assert done.exit_code == 0
    assert done.stdout == (
        "recovers: from each of the 8 states every run enters the one trap there is\n"
        "states list A B C; one relay moves at a time\n"
        "\n"
        "cycle of 6 states:\n"
        "  000 100 110 111 011 001\n"
        "\n"
        "slowest recovery: 1 move, from 010\n"
    )
    found = json.loads(recover(ODD, "--json").stdout)
    assert found["slowest"] == {"from": "010", "moves": 1}
    assert found["repair"] is None


def test_hunting() -> None:
    done = recover(BLINK)
    assert done.exit_code == 1
    assert done.stdout.splitlines()[0] == (
        "hunts: a loop outside the one trap there is can be run round for ever"
    )
    assert "hunting loop of 2 states:\n  00 10 00\n" in done.stdout
    assert json.loads(recover(BLINK, "--json").stdout)["hunting"] == ["00", "10"]


def test_quiet_leaves_the_status() -> None:
    done = recover(LATCH, "--quiet")
    assert (done.exit_code, done.output) == (1, "")


def ring(start: str, *, coils: str = "ABCD", relays: str = "ABCD") -> str:
    """A design file of the ring, two poles in series for each coil; `start` is A's first pole."""
    poles: list[Pole] = []
    number = dict.fromkeys("ABCD", 0)

    def pole(relay: str, common: str, throw: str, make: bool) -> None:
        number[relay] += 1
        made = (throw, None) if make else (None, throw)
        poles.append(Pole(relay, number[relay], common, *made))

    first = {"A": start, "B": "A", "C": "B", "D": "C"}
    broken = {"A": "C", "B": "D", "C": "A", "D": "B"}
    for coil in coils:
        lead, stop = first[coil], broken[coil]
        pole(lead.rstrip("'"), "L", f"{coil}1", not lead.endswith("'"))
        pole(stop, f"{coil}1", coil, False)
    poles.sort(key=lambda p: ("ABCD".index(p.relay), p.number))
    loads = {coil: coil for coil in coils} | {"STRIKE": None}
    network = Network(tuple(relays), "L", loads, tuple(poles))
    asked = Job("ring", tuple(relays), tuple(Load(n, Target(4, 0)) for n in loads), 0)
    made = Design("ladder", network, Bound(0, False), 16)
    return dumps(Wiring(asked, (made,), tuple(relays)))


def test_a_design_that_recovers() -> None:
    Path("design.json").write_text(ring("B'"))
    done = recover(SEQUENCE + SLOW, "--design", "design.json")
    assert done.exit_code == 0, done.output
    lines = done.stdout.splitlines()
    assert lines[0].startswith("ladder ")
    assert lines[1] == "recovers: from each of the 16 states every run enters the wanted cycle"
    assert lines[-1] == "no coil sees a gap or a flash while a relay moves"
    found = json.loads(recover(SEQUENCE + SLOW, "--design", "design.json", "--json").stdout)
    assert (found["verdict"], found["form"], found["transits"]) == ("recovers", "ladder", [])
    # of drives without a sequence the timing alone counts
    done = recover(DEAD + SLOW, "--design", "design.json")
    assert done.exit_code == 0


def test_a_design_whose_relays_stand_in_another_order() -> None:
    Path("design.json").write_text(ring("B'", relays="DCBA"))
    done = recover(SEQUENCE + SLOW, "--design", "design.json")
    assert done.exit_code == 0, done.output


def test_a_design_that_starts_dead() -> None:
    Path("design.json").write_text(ring("D"))
    done = recover(SEQUENCE + SLOW, "--design", "design.json")
    assert done.exit_code == 1
    assert done.stdout.splitlines()[1] == "sticks: 1 trap beside the wanted cycle"


def counter(n: int) -> str:
    """A reflected binary code that walks through all its states, one relay at a time."""
    names = [Name(f"K{i}") for i in range(n)]
    odd = Exclusive(tuple(names))
    drives = [Break(Exclusive(tuple(names[1:])))]
    for i in range(1, n):
        below = Series((*(Break(c) for c in names[: i - 1]), names[i - 1]))
        none = Series(tuple(Break(c) for c in names[: n - 1]))
        turn = Series((odd, Parallel((below, none)) if i == n - 1 else below))
        drives.append(Exclusive((names[i], turn)))
    return "[drives]\n" + "".join(
        f'{name.name} = "{to_text(drive)}"\n' for name, drive in zip(names, drives, strict=True)
    )


def test_ctrl_c_gives_what_is_known() -> None:
    # 2^22 states one after the other: many seconds of walking, of which half a second is waited
    timer = threading.Timer(0.5, os.kill, (os.getpid(), signal.SIGINT))
    before = signal.getsignal(signal.SIGINT)
    timer.start()
    done = recover(counter(22))
    timer.join()
    assert done.exit_code == 130
    assert done.stdout.startswith("not known: stopped before the verdict\n") or (
        "contactlogic: stopped\n" in done.stderr
    )
    assert signal.getsignal(signal.SIGINT) is before


def test_ctrl_c_while_a_repair_is_looked_for(monkeypatch: pytest.MonkeyPatch) -> None:
    def stopped(*_: object, **__: object) -> None:
        raise Stopped

    monkeypatch.setattr(repair, "cheapest_repair", stopped)
    done = recover(LATCH)
    assert done.exit_code == 130
    assert done.stdout.startswith("sticks: 2 traps, where one would do\n")


@pytest.mark.parametrize(
    ("job", "options", "message"),
    [
        (
            SEQUENCE,
            (),
            "job.toml: which wiring of this sequence is to be proved is not said\n"
            "  expected: --design with the design file of a wiring\n"
            "  contactlogic wire job.toml makes job/design.json\n",
        ),
        (
            '[formulas]\nLAMP = "UP"\n',
            (),
            "job.toml: this job has no relays that drive each other\n"
            "  expected: a job with [sequence], [pattern] or [drives]\n",
        ),
        (
            DEAD,
            ("--form", "bridge"),
            "--form chooses among the designs of a file\n  give --design\n",
        ),
        (
            SEQUENCE,
            ("--design", "design.json", "--form", "bridge"),
            "design.json: the file holds no bridge\n  expected: one of ladder\n",
        ),
        (
            SEQUENCE.replace("A B C D", "A B C E"),
            ("--design", "design.json"),
            "design.json: the design has no relay E, which the sequence has\n"
            "  expected: the relays A B C E\n",
        ),
        (
            SEQUENCE,
            ("--design", "headless.json"),
            "headless.json: the design feeds no coil of D\n"
            "  expected: D among the loads, for its coil\n",
        ),
        (
            SEQUENCE + 'inputs = "A"\n',
            ("--design", "design.json"),
            "design.json: the design feeds a coil of A, which is moved from outside\n"
            "  expected: no load of that name\n",
        ),
        (
            SEQUENCE.replace("1 0 0 1", "0 0 1 1"),
            ("--design", "design.json"),
            "job.toml, [sequence], row 3, line 6: rows 3 and 4 differ by no relay, so there is no "
            "step between them\n    0 0 1 1 | 0\n"
            "  expected: each row to change at least one relay or input\n",
        ),
        (
            counter(24),
            ("--memory", "0.001"),
            "checking 24 relays in all 2^24 states needs 0.1 GiB of memory; 0.0 GiB are allowed\n"
            "  allow more memory, or check parts of the sequencer one by one\n",
        ),
        (
            counter(20),
            ("--moves", "together"),
            "following all groups of 20 relays that move together needs 128.0 GiB of memory\n"
            "  expected: at most 16 relays and the memory allowed\n  check with single moves\n",
        ),
    ],
)
def test_refusals(job: str, options: tuple[str, ...], message: str) -> None:
    Path("design.json").write_text(ring("B'"))
    Path("headless.json").write_text(ring("B'", coils="ABC"))
    done = recover(job, *options)
    assert (done.exit_code, done.stdout) == (2, "")
    assert done.stderr == "contactlogic: " + message


def test_wiring_drives_points_to_recovery() -> None:
    Path("job.toml").write_text(DEAD)
    done = CliRunner().invoke(app, ["wire", "job.toml"])
    assert done.exit_code == 2
    assert "contactlogic recover job.toml proves where they lead" in done.stderr
