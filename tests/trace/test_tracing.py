"""Traced wiring against path enumeration, and contactlogic's own lists traced back to their job."""

from __future__ import annotations

import random
from pathlib import Path

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from strategies import RELAYS, networks, several_targets
from wirelists import load_is_on, wires_of

import contactlogic
from contactlogic.design import Bound, Design
from contactlogic.errors import InputError, WiringError
from contactlogic.job.model import Job, Limits, Load, SequenceJob, Supply
from contactlogic.job.sequence import Row, SequenceTable, Timing
from contactlogic.network import Network
from contactlogic.report.tracing import trace_json
from contactlogic.report.wiring import rail_terminals, wiring_csv
from contactlogic.sequencer import wire_sequence
from contactlogic.synthesis import Search
from contactlogic.trace import Known, Trace, circuit_of, read_wires, trace
from contactlogic.truth import Target, all_rows
from contactlogic.truth import settings as positions

SUPPLIES = st.sampled_from([Supply(), Supply("+24 V", "0 V"), Supply("L1", "N"), Supply("~", "~")])


def known_of(job: Job) -> Known:
    return Known(
        relays=job.relays,
        loads=tuple(load.name for load in job.loads),
        separate=frozenset(job.limits.contacts),
        rails=rail_terminals(job),
    )


def traced(path: Path, text: str, job: Job | None = None, known: Known | None = None) -> Trace:
    path.write_text(text)
    known = known or (Known() if job is None else known_of(job))
    return trace(circuit_of(read_wires(path), known), job, known)


def list_of(folder: Path, *wires: str, job: Job | None = None, known: Known | None = None) -> Trace:
    """The trace of wires written `UP:11 - LAMP:X1`."""
    rows = (",".join(wire.split(" - ")) for wire in wires)
    return traced(folder / "list.csv", "from,to\n" + "\n".join(rows) + "\n", job, known)


def shuffled(text: str, seed: int) -> str:
    """The same list by another hand: other order, other direction, other letter case."""
    head, *lines = text.splitlines()
    draw = random.Random(seed)
    draw.shuffle(lines)
    made = [head]
    for line in lines:
        wire, net, start, end, rest = line.split(",", 4)
        ends = [start, end] if draw.random() < 0.5 else [end, start]
        made.append(",".join([wire, net, *(e.lower() if draw.random() < 0.5 else e for e in ends)]))
        made[-1] += f",{rest}"
    return "\n".join(made) + "\n"


def as_job(network: Network, supply: Supply) -> Job:
    n = len(network.relays)
    loads = tuple(Load(name, Target(n, 0, all_rows(n))) for name in network.loads)
    return Job("drawn up", network.relays, loads, all_rows(n), supply)


@given(networks(relays=3, poles=6, nets=5, loads=3), SUPPLIES, st.integers(0, 99))
@settings(max_examples=100)
def test_any_network_is_traced_as_path_enumeration_finds_it(
    tmp_path_factory, network, supply, seed
):
    folder = tmp_path_factory.mktemp("list")
    job = as_job(network, supply)
    text = wiring_csv(Design("bridge", network, Bound(0, False), 0), job)
    rails = rail_terminals(job)
    assume(rails[0] in text)
    found = traced(folder / "wires.csv", shuffled(text, seed), job)
    assert found.relays == network.relays
    wires = wires_of(text)
    for load in found.loads:
        ends = (f"{load.name}:X1", f"{load.name}:X2")
        for row in range(1 << len(network.relays)):
            setting = dict(zip(network.relays, positions(row, len(network.relays)), strict=True))
            assert load.table >> row & 1 == load_is_on(wires, setting, ends, rails), row


@given(st.integers(1, 3).flatmap(lambda n: several_targets(n)), SUPPLIES, st.integers(0, 99))
@settings(max_examples=6)
def test_own_lists_traced_give_back_the_job(tmp_path_factory, targets, supply, seed):
    folder = tmp_path_factory.mktemp("list")
    n = next(iter(targets.values())).n
    loads = tuple(Load(name, target) for name, target in targets.items())
    job = Job("small", RELAYS[:n], loads, all_rows(n), supply)
    result = contactlogic.wire(job, effort=0)
    assert {design.form for design in result.designs} == {"ladder", "bridge"}
    for design in result.designs:
        found = traced(folder / f"{design.form}.csv", shuffled(wiring_csv(design, job), seed), job)
        assert found.agrees
        assert not found.missing
        assert not found.sneak
        for load in found.loads:
            assert load.target == targets[load.name]
            assert targets[load.name].accepts(load.table)


@st.composite
def rings(draw: st.DrawFn) -> SequenceJob:
    """Two of three slow relays overlap and go round; a load is on in some of the steps."""
    n = 3
    names = RELAYS[:n]
    on = draw(st.lists(st.integers(0, 1), min_size=n, max_size=n))
    rows = []
    for step in range(n):
        columns = tuple(int(i in (step, (step + 1) % n)) for i in range(n))
        rows.append(Row(columns, (on[step],)))
    table = SequenceTable(names, ("STRIKE",), tuple(rows), timing=Timing(slow_release=names))
    return SequenceJob("ring", table, limits=Limits(isolate="none"))


@given(rings(), st.sampled_from(["ladder", "bridge"]), st.integers(0, 99))
@settings(max_examples=3)
def test_own_lists_of_sequences_traced_give_back_the_job(tmp_path_factory, job, form, seed):
    folder = tmp_path_factory.mktemp("list")
    result = wire_sequence(job, Search(form, effort=0))
    for design in result.designs:
        text = shuffled(wiring_csv(design, result.job), seed)
        found = traced(folder / f"{design.form}.csv", text, result.job)
        assert found.agrees
        assert {load.name for load in found.loads if load.coil} == set(job.table.columns)


@given(networks(relays=3, poles=6, nets=4, loads=2), st.data())
@settings(max_examples=60)
def test_a_wire_moved_is_told_as_path_enumeration_has_it(tmp_path_factory, network, data):
    folder = tmp_path_factory.mktemp("list")
    n = len(network.relays)
    rows = [dict(zip(network.relays, positions(row, n), strict=True)) for row in range(1 << n)]
    drawn = as_job(network, Supply())
    rails = rail_terminals(drawn)
    wires = wires_of(wiring_csv(Design("bridge", network, Bound(0, False), 0), drawn))

    def tables() -> dict[str, int]:
        ends = {name: (f"{name}:X1", f"{name}:X2") for name in network.loads}
        return {
            name: sum(load_is_on(wires, row, ends[name], rails) << i for i, row in enumerate(rows))
            for name in ends
        }

    loads = tuple(Load(name, Target(n, table)) for name, table in tables().items())
    job = Job("as drawn up", network.relays, loads, all_rows(n))
    at = data.draw(st.integers(0, len(wires) - 1))
    end = data.draw(st.sampled_from(sorted({end for wire in wires for end in wire})))
    assume(end not in wires[at])
    wires[at] = (wires[at][0], end)
    text = "from,to\n" + "".join(f"{a},{b}\n" for a, b in wires)
    assume(any(rails[0] in wire for wire in wires))
    found = traced(folder / "moved.csv", text, job)
    assume(found.circuit.returns_listed)
    now = tables()
    assert {load.name: load.table for load in found.loads} == {
        load.name: now[load.name] for load in found.loads
    }
    differs = any(now[load.name] != load.target.on for load in loads)
    assert found.agrees == (not differs and found.short is None and not found.in_series)


SLUICE = Job(
    "Sluice house",
    ("UP", "DOWN", "FLOOD"),
    (
        Load("LAMP", Target(3, on=0b1111_0010 & ~0b1000, free=0b1000), "lamp"),
        Load("HORN", Target(3, on=0b0000_0100, free=0b0100_1000)),
    ),
    all_rows(3),
    Supply("+24 V", "0 V"),
)

RIGHT = (
    "rail:+24 V - UP:11",
    "UP:11 - FLOOD:11",
    "UP:14 - FLOOD:14",
    "FLOOD:14 - LAMP:X1",
    "UP:12 - DOWN:11",
    "DOWN:14 - HORN:X1",
    "rail:0 V - LAMP:X2",
    "LAMP:X2 - HORN:X2",
)


def test_a_sneak_path_is_listed_terminal_by_terminal(tmp_path: Path) -> None:
    found = list_of(tmp_path, *RIGHT, "LAMP:X1 - HORN:X1", job=SLUICE)
    assert not found.agrees
    (way, *others) = [sneak for sneak in found.sneak if sneak.load == "HORN"]
    assert way.path == (
        *("rail:+24 V", "UP:11", "UP:14", "FLOOD:14", "LAMP:X1"),
        *("HORN:X1", "HORN:X2", "LAMP:X2", "rail:0 V"),
    )
    assert way.rows == (1,)
    assert [sneak.rows for sneak in others] == [(4, 5, 7)]  # by FLOOD, as short a way


def test_what_is_off_and_should_be_on(tmp_path: Path) -> None:
    found = list_of(tmp_path, *(w for w in RIGHT if w != "UP:14 - FLOOD:14"), job=SLUICE)
    lamp = next(load for load in found.loads if load.name == "LAMP")
    assert lamp.wrongly_off == 0b0000_0010
    assert lamp.wrongly_on == 0


def test_loads_joined_when_off(tmp_path: Path) -> None:
    found = list_of(
        tmp_path,
        *("rail:+24 V - A:11", "A:14 - X:X1", "X:X1 - B:11", "B:14 - Y:X1"),
        *("X:X2 - Y:X2", "Y:X2 - rail:0 V"),
    )
    (pair,) = found.joined
    assert (pair.load, pair.other, pair.forbidden) == ("X", "Y", False)
    assert pair.rows == 0b0100  # A released, B operated
    assert pair.path == ("X:X1", "B:11", "B:14", "Y:X1")


def test_isolated_loads_that_are_joined_differ_from_the_job(tmp_path: Path) -> None:
    wires = (
        *("rail:+24 V - A:11", "A:14 - X:X1", "X:X1 - B:11", "B:14 - Y:X1"),
        *("X:X2 - Y:X2", "Y:X2 - rail:0 V"),
    )
    loads = (Load("X", Target(2, 0b1010)), Load("Y", Target(2, 0b1000)))
    job = Job("two", ("A", "B"), loads, all_rows(2), Supply("+24 V", "0 V"))
    assert list_of(tmp_path, *wires, job=job).agrees
    apart = Job("two", ("A", "B"), loads, all_rows(2), job.supply, Limits(isolate="all"))
    assert not list_of(tmp_path, *wires, job=apart).agrees


def test_terminals_wired_to_nothing(tmp_path: Path) -> None:
    found = list_of(
        tmp_path,
        *("rail:+ - A:11", "A:14 - X:X1", "X:X2 - rail:-", "B:14 - X:X1", "Y:X2 - X:X2"),
        "C:11 - A:11",
    )
    assert found.idle_relays == ("B", "C")
    assert found.circuit.unwired == (
        "B:14 leads nowhere: no wire goes to B:11",
        "C:11 leads nowhere: no wire goes to C:12 or C:14",
        "no wire goes to the feed of Y",
    )


def test_nets_tied_straight_to_a_rail(tmp_path: Path) -> None:
    found = list_of(
        tmp_path,
        *("rail:+ - A:11", "A:14 - X:X1", "X:X2 - rail:-", "Y:X1 - A:11", "Y:X2 - rail:-"),
        *("B:11 - A:11", "B:14 - rail:+", "C:11 - rail:-", "C:14 - X:X1"),
    )
    assert found.on_rails == (
        "Y:X1 is tied straight to the feed",
        "both ends of B:11-14 are on one net, the feed: it does nothing",
        "C:11 is tied straight to the return",
    )
    assert found.idle_relays == ("B",)
    assert found.short is not None
    assert found.short.rows == 0b1010_1010 & 0b1111_0000  # A and C operated
    assert found.short.path == ("rail:+", "A:11", "A:14", "X:X1", "C:14", "C:11", "rail:-")
    assert not found.agrees


def test_relays_that_do_nothing(tmp_path: Path) -> None:
    found = list_of(
        tmp_path,
        *("rail:+ - A:11", "A:14 - X:X1", "X:X2 - rail:-"),
        *("A:14 - B:11", "B:14 - C:11", "A:14 - D:11", "D:14 - X:X1"),
    )
    assert found.idle_relays == ("B", "C", "D")
    assert found.idle_contacts == ("B:11-14", "D:11-14")


def test_loads_in_series_with_others_are_a_sneak_circuit(tmp_path: Path) -> None:
    """X's return hangs on the feed of Y: with A operated and B released both glow."""
    found = list_of(
        tmp_path,
        *("rail:+ - A:11", "A:14 - X:X1", "X:X2 - Y:X1", "Y:X2 - rail:-"),
        *("rail:+ - B:11", "B:14 - Y:X1"),
    )
    assert found.in_series == {"X": 0b0010, "Y": 0b0010}
    assert {load.name: load.table for load in found.loads} == {"X": 0, "Y": 0b1100}


def test_fittings_the_wrong_way_round(tmp_path: Path) -> None:
    wires = ("rail:+ - A:11", "A:14 - X:X1", "X:X2 - rail:-", "X:X1 - X/fuse:2", "A:14 - X/hold:+")
    right = list_of(tmp_path, *wires, "X/hold:- - X:X2", "X/diode:K - X:X1", "X/diode:A - rail:-")
    assert right.turned == ()
    assert [load.table for load in right.loads] == [0b10]
    turned = list_of(tmp_path, *wires, "X/hold:- - X:X2", "X/diode:A - X:X1", "X/diode:K - rail:-")
    assert turned.turned == ("the diode of X is wired the wrong way round",)


def test_a_relay_called_rail(tmp_path: Path) -> None:
    job = Job("odd", ("RAIL",), (Load("X", Target(1, 0b10)),), 3, Supply("+24 V", "0 V"))
    wires = ("rail:+24 V - RAIL:11", "rail:14 - X:X1", "X:X2 - rail:0 V")
    assert list_of(tmp_path, *wires, job=job).agrees


def test_bare_letters_of_mains(tmp_path: Path) -> None:
    found = list_of(tmp_path, "L - A:11", "A:14 - LAMP", "LAMP - N")
    assert [(load.name, load.table) for load in found.loads] == [("LAMP", 0b10)]


def test_separate_makes_and_breaks(tmp_path: Path) -> None:
    found = list_of(
        tmp_path,
        *("rail:+ - START:13", "START:14 - GO", "rail:+ - START:21", "START:22 - IDLE"),
        *("GO - rail:-", "IDLE - rail:-"),
    )
    assert {load.name: load.table for load in found.loads} == {"GO": 0b10, "IDLE": 0b01}


def test_a_load_switched_in_its_return(tmp_path: Path) -> None:
    found = list_of(tmp_path, "+ - LAMP", "LAMP - A:11", "A:14 - 0 V")
    assert [load.table for load in found.loads] == [0b10]
    assert found.circuit.returns_listed


def test_hand_written_names(tmp_path: Path) -> None:
    found = list_of(
        tmp_path,
        *("+24v - up:11", "UP 11 - flood.11", "Up-14 - FLOOD : 14", "FLOOD:14 - big lamp"),
        *("up:12 - down:11", "DOWN:14 - Horn", "0V - horn", "Horn - Big Lamp"),
        job=SLUICE,
        known=Known(
            relays=SLUICE.relays,
            loads=("LAMP", "HORN"),
            rails=rail_terminals(SLUICE),
            names={"big lamp": "LAMP"},
        ),
    )
    assert found.agrees
    assert [load.formula for load in found.loads] == ["UP + FLOOD", "UP' DOWN"]


@pytest.mark.parametrize("mark", [".", " ", "-", "/"])
def test_contacts_written_without_colons(tmp_path: Path, mark: str) -> None:
    wires = ("+ - K1:11", "K1:14 - K2:11", "K2:12 - LAMP 2", "LAMP 2 - 0 V", "LAMP 12 - 0 V")
    written = [w.replace(":", mark) for w in wires]
    rows = "".join(",".join(w.rsplit(" - ", 1)) + "\n" for w in [*written, f"K1{mark}14 - LAMP 12"])
    found = traced(tmp_path / "list.csv", "from,to\n" + rows)
    assert found.relays == ("K1", "K2")
    assert {load.name: load.table for load in found.loads} == {"LAMP 2": 0b0010, "LAMP 12": 0b1010}


@pytest.mark.parametrize("seed", range(12))
def test_loads_written_without_marks_in_any_order(tmp_path: Path, seed: int) -> None:
    """Chains of returns and of feeds through unmarked loads, some of them marked at one end."""
    draw = random.Random(seed)
    wires = ["+ - A:11", "A:14 - P", "P - Q", "A:12 - R:X1", "0 V - R:X2", "R:X2 - Q", "Q - P"]
    wires += ["P - S:X2", "S:X1 - A:14"]
    wires.remove("Q - P")
    wires.append("P:X2 - Q:X2" if seed % 2 else "Q - 0 V")
    if seed % 2:
        wires = [
            w.replace("P - Q", "P:X1 - Q:X1").replace("A:14 - P", "A:14 - P:X1") for w in wires
        ]
        wires = [w.replace("P - S", "P:X2 - S").replace("R:X2 - Q", "R:X2 - Q:X2") for w in wires]
    else:
        wires.append("P - R:X2")
    draw.shuffle(wires)
    found = list_of(tmp_path, *wires)
    assert {load.name: load.table for load in found.loads} == {
        **dict.fromkeys("PQS", 0b10),
        "R": 0b01,
    }


def test_rails_by_any_name(tmp_path: Path) -> None:
    wires = ("bus bar - A:11", "A:14 - LAMP", "LAMP - frame")
    with pytest.raises(WiringError, match="no rail of the list"):
        list_of(tmp_path, *wires)
    found = list_of(tmp_path, *wires, known=Known(feed=("bus bar",), back=("frame",)))
    assert [(load.name, load.table) for load in found.loads] == [("LAMP", 0b10)]
    with pytest.raises(WiringError, match="did you mean bus bar"):
        list_of(tmp_path, *wires, known=Known(feed=("busbar2",)))


def test_repeaters_follow_their_relay(tmp_path: Path) -> None:
    wires = ("+ - UP:11", "UP:14 - UP_2:11", "UP_2:14 - LAMP", "LAMP - -")
    job = Job("one", ("UP",), (Load("LAMP", Target(1, 0b10)),), 3)
    found = list_of(tmp_path, *wires, job=job)
    assert found.agrees
    assert found.follows == {"UP_2": "UP"}
    strange = ("+ - UP:11", "UP:14 - K9:11", "K9:14 - LAMP", "LAMP - -")
    assert not list_of(tmp_path, *strange, job=job).agrees
    known = Known(("UP",), ("LAMP",), rails=rail_terminals(job), follows={"K9": "UP"})
    assert list_of(tmp_path, *strange, job=job, known=known).agrees


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", ["the list holds no wire"]),
        ("from,to\n", ["the list holds no wire"]),
        ("from,too\nA:11,X\n", ["line 1", "no column to", "did you mean to"]),
        ("a,b,c\nA:11,X,3\n", ["line 1", "which columns"]),
        ("from,to\nA:11\n", ["line 2, column 2", "one end only"]),
        ("from,to\n+,A:11\nA:14,A:14\n", ["line 3, column 2", "both ends"]),
        ("from,to\n+,A:15\n", ["line 2, column 2", "no terminal 15"]),
        ("from,to\n+,A:11\nX:X1,X:X2\nX:X3,A:14\n", ["line 4, column 1", "more than two"]),
        ("from,to\n+,A:11\nA,A:14\n", ["line 3, column 1", "which terminal of the relay A"]),
        ("wire,from,to\n1,+,A:11\n2,rail:x,A:14\n3,rail:y,X\n", ["line 3", "rail:x", "--feed"]),
        ("net,to,from,to\n1,+,A:11,B\n", ["line 1", "stands twice"]),
        ('from,to\n"+,A:11\n', ["not a CSV table"]),
    ],
)
def test_malformed_lists(tmp_path: Path, text: str, said: list[str]) -> None:
    with pytest.raises(InputError) as caught:
        traced(tmp_path / "bad.csv", text)
    for words in said:
        assert words in str(caught.value)
    assert [p.name for p in tmp_path.iterdir()] == ["bad.csv"]


@pytest.mark.parametrize(
    ("wire", "said"),
    [
        ("UPP:11 - LAMP:X1", "did you mean UP?"),
        ("UP:11 - LAMPP:X1", "did you mean LAMP?"),
        ("UP:11 - LAMP:14", "LAMP is a load and has no contact 14"),
        ("UP:11 - UP", "which terminal of the relay UP"),
    ],
)
def test_names_that_the_job_does_not_have(tmp_path: Path, wire: str, said: str) -> None:
    with pytest.raises(WiringError) as caught:
        list_of(tmp_path, "rail:+24 V - UP:11", wire, job=SLUICE)
    assert said in str(caught.value)
    assert "line 3, column" in str(caught.value)


def test_lists_without_a_header(tmp_path: Path) -> None:
    bare = traced(tmp_path / "a.csv", "+,A:11\nA:14,LAMP\nLAMP,-\n")
    own = traced(tmp_path / "b.csv", "1,1,+,A:11,x\n2,2,A:14,LAMP,x\n3,3,LAMP,-,x\n")
    assert [x.table for x in bare.loads] == [x.table for x in own.loads] == [0b10]


def test_workbooks_are_read_and_their_other_columns_passed_over(tmp_path: Path) -> None:
    import openpyxl

    book = openpyxl.Workbook()
    sheet = book.active
    sheet.append(["length", "TO", "From"])
    for wire in ("rail:+ - A:11", "A:14 - LAMP:X1", "LAMP:X2 - rail:-"):
        sheet.append(["=1+1", *wire.split(" - ")])
    book.save(tmp_path / "list.xlsx")
    wires = read_wires(tmp_path / "list.xlsx")
    assert (wires[0].start.terminal, wires[0].end.terminal) == ("A:11", "rail:+")
    sheet.append([1, "=A1", "A:11"])
    book.save(tmp_path / "list.xlsx")
    with pytest.raises(WiringError, match="formula"):
        read_wires(tmp_path / "list.xlsx")


@given(networks(relays=3, poles=6, nets=5, loads=3), st.integers(0, 99), st.integers(0, 99))
@settings(max_examples=30)
def test_the_order_of_the_list_does_not_matter(tmp_path_factory, network, one, two):
    folder = tmp_path_factory.mktemp("list")
    job = as_job(network, Supply())
    text = wiring_csv(Design("bridge", network, Bound(0, False), 0), job)
    assume("rail:SUPPLY" in text)
    first = traced(folder / "one.csv", shuffled(text, one).lower())
    second = traced(folder / "two.csv", shuffled(text, two).lower())
    assert trace_json(first) == trace_json(second)
