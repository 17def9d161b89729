"""Papers for the bench: fittings wired and listed, counts that fit, hostile text kept as text."""

from __future__ import annotations

import csv
import dataclasses
import io
import json
from collections import Counter
from decimal import Decimal
from pathlib import Path

import openpyxl
import pytest
from handmade import SLUICE_DESIGN, SLUICE_JOB, SLUICE_NETWORK, SLUICE_RESULT
from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import networks

from contactlogic.design import Bound, Design, Result
from contactlogic.job.model import Bench, Fittings, Job, Load, Position, Supply
from contactlogic.network import Network, Pole
from contactlogic.purchase.fittings import fittings_of
from contactlogic.purchase.parts import Contacts, Part, PartsList
from contactlogic.purchase.schedule import Drawer, schedule_of
from contactlogic.report.bench import (
    Bought,
    bench_files,
    bought_for,
    points,
    terminals_csv,
    tick_list,
    wire_list,
    wiring_xlsx,
)
from contactlogic.report.markdown import report
from contactlogic.report.purchase import (
    purchase_csv,
    purchase_json,
    purchase_markdown,
    purchase_text,
)
from contactlogic.report.wiring import conductors, rail_terminals
from contactlogic.trace import Known, circuit_of, read_wires, trace
from contactlogic.truth import Target, all_rows

FITTED = dataclasses.replace(
    SLUICE_JOB,
    bench=Bench(
        {
            "LAMP": Fittings(fuse="T 500 mA", suppression="varistor"),
            "HORN": Fittings("1 A", "diode", "470 uF", "100 ohm"),
        }
    ),
)


def ends(job: Job, net: int) -> list[str]:
    found: dict[str, None] = {}
    for wire in conductors(SLUICE_DESIGN, job):
        if wire.net == net:
            found |= dict.fromkeys((wire.start, wire.end))
    return list(found)


def test_fittings_stand_in_the_wiring_list() -> None:
    assert ends(FITTED, 5) == ["DOWN:24", "HORN/fuse:1"]
    assert ends(FITTED, 6) == [
        *("rail:0 V", "LAMP:X2", "LAMP/varistor:2"),
        *("HORN:X2", "HORN/hold:-", "HORN/diode:A"),
    ]
    assert [ends(FITTED, net) for net in (7, 8, 9)] == [
        ["LAMP/fuse:2", "LAMP/varistor:1", "LAMP:X1"],
        ["HORN/fuse:2", "HORN/series:1", "HORN/diode:K", "HORN:X1"],
        ["HORN/series:2", "HORN/hold:+"],
    ]
    plain = [(c.net, c.start, c.end) for c in conductors(SLUICE_DESIGN, SLUICE_JOB)]
    assert not [row for row in plain if "/" in row[1] + row[2]]


def test_polarity_follows_the_feed() -> None:
    job = dataclasses.replace(FITTED, supply=Supply("-48 V", "earth"))
    assert "HORN/hold:+" in ends(job, 6)
    assert "HORN/diode:K" in ends(job, 6)
    assert "negative rail" in tick_list(wire_list(SLUICE_DESIGN, job))


def test_a_resistor_without_a_capacitor_is_in_series_with_the_coil() -> None:
    job = dataclasses.replace(SLUICE_JOB, bench=Bench({"HORN": Fittings(series="47 ohm")}))
    assert ends(job, 5) == ["DOWN:24", "HORN/series:1"]
    assert ends(job, 7) == ["HORN/series:2", "HORN:X1"]


def test_fittings_stand_in_the_purchase() -> None:
    part = Part("relay", Contacts(c=2), None, None, Decimal(3))
    schedule = schedule_of(SLUICE_DESIGN, parts_of(part), job=FITTED)
    rows = list(csv.DictReader(io.StringIO(purchase_csv(schedule, "Sluice house"))))
    bought = {row["part"]: (row["bought"], row["price"]) for row in rows}
    assert bought["relay"] == ("3", "9.00")
    assert bought["fuse T 500 mA"] == ("1", "")
    assert bought["capacitor 470 uF"] == ("1", "")
    assert "resistor 100 ohm" in purchase_text([schedule], "Sluice house", width=None)
    (data,) = json.loads(purchase_json([schedule], "Sluice house"))["designs"]
    assert {"part": "suppression", "value": "diode", "number": 1, "for": ["HORN"]} in data[
        "fittings"
    ]
    assert any("| varistor | 1 | LAMP |" in line for line in purchase_markdown(schedule))


def test_what_is_to_be_bought_at_loads() -> None:
    job = dataclasses.replace(
        FITTED, bench=Bench({**FITTED.bench.fittings, "BELL": Fittings(fuse="1 A")})
    )
    rows = [(b.part, b.value, b.loads) for b in fittings_of(job)]
    assert ("fuse", "1 A", ("HORN", "BELL")) in rows
    assert ("capacitor", "470 uF", ("HORN",)) in rows


@given(networks(relays=3, poles=6, nets=5, loads=3), st.integers(2, 3), st.booleans(), st.data())
@settings(max_examples=40)
def test_counts_fit_and_the_list_traces_back(tmp_path_factory, network, most, placed, data):
    """Whatever is fitted and wherever things sit, each load does what its network does."""
    n = len(network.relays)
    fittings = {
        load: Fittings(
            *(
                data.draw(st.none() | st.just(value))
                for value in ("2 A", "diode", "100 uF", "10 ohm")
            )
        )
        for load in network.loads
    }
    position = st.builds(Position, st.integers(0, 3), st.integers(0, 3))
    seats = {name: data.draw(position) for name in (*network.relays, *network.loads) if placed}
    loads = tuple(Load(name, Target(n, 0, all_rows(n))) for name in network.loads)
    job = Job("t", network.relays, loads, all_rows(n), bench=Bench(fittings, seats))
    design = Design("bridge", network, Bound(0, False), 0)
    wires = wire_list(design, job, per_terminal=most)
    counted = Counter(end for w in wires.conductors for end in (w.start, w.end))
    listed = {p.terminal: p.wires for p in points(wires) if p.owner != "rail"}
    rails = rail_terminals(job)
    assert listed == {t: counted[t] for t in listed}
    assert set(counted) - set(rails) <= set(listed)
    assert not counted or max(counted.values()) <= most
    folder = tmp_path_factory.mktemp("list")
    (folder / "wiring.xlsx").write_bytes(wiring_xlsx(wires))
    if rails[0] not in counted:
        return
    known = Known(network.relays, tuple(network.loads), rails=rails)
    found = trace(circuit_of(read_wires(folder / "wiring.xlsx"), known), None, known)
    plain = Job("t", network.relays, loads, all_rows(n))
    (folder / "plain.xlsx").write_bytes(wiring_xlsx(wire_list(design, plain)))
    again = trace(circuit_of(read_wires(folder / "plain.xlsx"), known), None, known)
    assert {x.name: x.table for x in found.loads} == {x.name: x.table for x in again.loads}
    shorted = {load for load, net in network.loads.items() if net == network.supply}
    assert not found.turned or shorted


def test_each_terminal_is_counted_unwired_ones_too() -> None:
    rows = list(csv.reader(io.StringIO(terminals_csv(wire_list(SLUICE_DESIGN, SLUICE_JOB)))))
    assert rows[0] == ["of", "terminal", "use", "net", "wires", "pin", "design"]
    found = {row[1]: tuple(row[2:5]) for row in rows[1:]}
    assert found["UP:11"] == ("common", "1", "2")
    assert found["DOWN:14"] == ("make", "", "0")
    assert found["LAMP:X2"] == ("load", "6", "2")


def test_repeaters_have_their_coils_in_parallel() -> None:
    network = Network(
        ("A", "A_2"),
        "L",
        {"A": "n1", "Z": "n1"},
        (Pole("A", 1, "L", None, "n2"), Pole("A_2", 1, "n2", None, "n1")),
    )
    loads = (Load("A", Target(1, 1), "coil"), Load("Z", Target(1, 1)))
    job = Job("ring", ("A",), loads, 3)
    design = Design("ladder", network, Bound(1, False), 2)
    wires = wire_list(design, job, repeaters={"A_2": "A"})
    nets = [set(terminals) for terminals in wires.nets.values()]
    assert {"A_2:14", "A_2:12", "A:A1", "A_2:A1", "Z:X1"} - {"A_2:14"} in nets
    assert any({"A:A2", "A_2:A2", "Z:X2"} <= net for net in nets)


def parts_of(*parts: Part) -> Drawer:
    return Drawer(PartsList("drawer", parts))


def test_pins_and_ratings_come_from_what_is_bought() -> None:
    pins = {"11": "9", "12": "1", "14": "5", "21": "12", "22": "4", "24": "8"}
    part = Part("relay", Contacts(c=2), None, Decimal("0.1"), Decimal(3), None, pins)
    strong = dataclasses.replace(part, name="strong", amps=Decimal(2), price=Decimal(9))
    schedule = schedule_of(SLUICE_DESIGN, parts_of(part, strong), job=SLUICE_JOB)
    bought = bought_for(schedule)
    assert bought.amps["UP", 1] == 2  # LAMP draws 0.2 A
    text = tick_list(wire_list(SLUICE_DESIGN, SLUICE_JOB, bought=bought))
    assert "| UP:11 (pin 9) |" in text
    assert "within its rating" in text
    weak = Bought(amps={("UP", 1): Decimal("0.1")})
    assert "exceeds its rating" in tick_list(wire_list(SLUICE_DESIGN, SLUICE_JOB, bought=weak))


HOSTILE = '=HYPERLINK("http://x","y") <script>alert(1)</script> \\ | `' + "x" * 300


def test_hostile_text_stays_text(tmp_path: Path) -> None:
    job = dataclasses.replace(FITTED, title=HOSTILE, supply=Supply("=1+1<b>", '"0"|'))
    pins = {"UP": {"11": "=2+2"}}
    wires = wire_list(SLUICE_DESIGN, job, bought=Bought(pins))
    for name, data in bench_files(wires).items():
        (tmp_path / name).write_bytes(data)
    for name in ("wiring.csv", "terminals.csv"):
        for row in csv.reader(io.StringIO((tmp_path / name).read_text())):
            assert not [cell for cell in row if cell.startswith(("=", "+", "-", "@"))]
    book = openpyxl.load_workbook(tmp_path / "wiring.xlsx")
    kinds = {cell.data_type for sheet in book for row in sheet.iter_rows() for cell in row}
    assert "f" not in kinds
    assert any(cell.value == "=2+2" for row in book["wires"].iter_rows() for cell in row)
    text = (tmp_path / "ticklist.md").read_text()
    assert "<script>" not in text.replace("\\<script\\>", "")
    assert "<b>" not in text.replace("\\<b\\>", "")
    result = Result(job, (SLUICE_DESIGN,), job.relays)
    assert "<script>" not in report(result, [_facts()]).replace("\\<script\\>", "")


def _facts():
    from handmade import SLUICE_FACTS

    return SLUICE_FACTS


def test_the_same_workbook_every_time() -> None:
    wires = wire_list(SLUICE_DESIGN, FITTED)
    assert wiring_xlsx(wires) == wiring_xlsx(wires)


def test_the_report_names_fittings_where_there_are_some() -> None:
    fitted = report(dataclasses.replace(SLUICE_RESULT, job=FITTED), [_facts()])
    assert "- fitted at HORN: fuse 1 A, series 100 ohm, hold 470 uF, diode\n" in fitted
    assert "- fitted at " not in report(SLUICE_RESULT, [_facts()])


@pytest.mark.parametrize("per_terminal", [2, 3])
def test_length_is_told_where_all_positions_are_known(per_terminal: int) -> None:
    seats = {name: Position(1, i) for i, name in enumerate(SLUICE_NETWORK.relays)}
    seats |= {"LAMP": Position(3, 0), "HORN": Position(3, 1)}
    bench = Bench({}, seats, Position(0, 0), Position(4, 0))
    job = dataclasses.replace(SLUICE_JOB, bench=bench)
    wires = wire_list(SLUICE_DESIGN, job, per_terminal=per_terminal)
    assert wires.length is not None
    assert f"length of all wires: {wires.length:g} steps" in tick_list(wires)
    part = dataclasses.replace(job, bench=Bench({}, seats))
    assert "length of all wires: not given" in tick_list(wire_list(SLUICE_DESIGN, part))
