"""The cheapest wiring: six poles that need a relay of three against seven on relays of two."""

from __future__ import annotations

import csv
import io
import json
from decimal import Decimal
from pathlib import Path

import pytest
from typer.testing import CliRunner

from contactlogic.check import prove
from contactlogic.cli.app import app
from contactlogic.design import Bound, Design, Result
from contactlogic.errors import PartsError
from contactlogic.job.model import Job, Limits, Load
from contactlogic.network import Network, Pole
from contactlogic.purchase.buy import Order
from contactlogic.purchase.cheapest import Cheapest, cheapest
from contactlogic.purchase.parts import Contacts, Part, PartsList
from contactlogic.purchase.schedule import Drawer
from contactlogic.synthesis import Search
from contactlogic.truth import Target

# A is operated just when E and F both are; other settings do not come up and are free. So a make
# of A may be replaced by one of E and one of F in series: a pole more, but both have one to spare.
ROWS = [(e & f, b, e, f) for b in (0, 1) for e in (0, 1) for f in (0, 1)]
LOADS = ("X", "Y", "Z", "W", "V")


def wanted(a: int, b: int, e: int, f: int) -> tuple[int, ...]:
    return a & b, a, a | (1 - b), e, f


def table_job() -> Job:
    listed = 0
    loads = []
    for k, name in enumerate(LOADS):
        on = 0
        for row in ROWS:
            bit = 1 << sum(value << i for i, value in enumerate(row))
            listed |= bit
            on |= bit if wanted(*row)[k] else 0
        loads.append((name, on))
    made = tuple(Load(name, Target(4, on, 0xFFFF & ~listed)) for name, on in loads)
    return Job("Strongroom", ("A", "B", "E", "F"), made, listed, limits=Limits(isolate="all"))


JOB = table_job()

SIX = Network(
    JOB.relays,
    "L",
    {"X": "n2", "Y": "n3", "Z": "n4", "W": "n5", "V": "n6"},
    (
        Pole("A", 1, "n1", "n2"),
        Pole("A", 2, "L", "n3"),
        Pole("A", 3, "L", "n4"),
        Pole("B", 1, "L", "n1", "n4"),
        Pole("E", 1, "L", "n5"),
        Pole("F", 1, "L", "n6"),
    ),
)
SEVEN = Network(
    JOB.relays,
    "L",
    {"X": "n2", "Y": "n5", "Z": "n1", "W": "n6", "V": "n7"},
    (
        Pole("A", 1, "L", "n1"),
        Pole("A", 2, "n2", "n3"),
        Pole("B", 1, "L", "n3", "n1"),
        Pole("E", 1, "n4", "n5"),
        Pole("E", 2, "n6", "L"),
        Pole("F", 1, "n7", "L"),
        Pole("F", 2, "L", "n4"),
    ),
)


def design(network: Network) -> Design:
    proof = prove(network, JOB.targets, form="bridge", isolated=JOB.isolated)
    assert proof.ok, proof.explain()
    return Design("bridge", network, Bound(6, len(network.poles) == 6), proof.rows)


def wired(search: Search) -> Result:
    """What the searches find: fewest poles without a price, fewest relays with one."""
    network = SIX if search.price is None else min((SIX, SEVEN), key=search.price)
    return Result(JOB, (design(network),), JOB.relays)


def part(name: str, price: str, stock: int | None = None, **counts: int) -> Part:
    return Part(name, Contacts(**counts), None, None, Decimal(price), stock)


def found(*parts: Part, repeaters: bool = True, **options: object) -> Cheapest:
    drawer = Drawer(PartsList("parts.csv", parts), Order(repeaters=repeaters))
    return cheapest(Search("bridge", effort=1), wired, drawer, **options)  # type: ignore[arg-type]


TWO = part("two", "3.40", c=2)


def test_seven_poles_on_four_small_relays_beat_six_with_a_larger_one() -> None:
    best = found(TWO)
    (chosen,) = best.result.designs
    assert len(chosen.network.poles) == 7
    assert {n.poles for n in chosen.network.per_relay().values()} == {1, 2}
    (schedule,) = best.schedules
    assert schedule.purchase is not None
    assert schedule.purchase.price == Decimal("13.60")
    (fewest,) = best.fewest
    assert (len(fewest.design.network.poles), fewest.price) == (6, Decimal("17.00"))
    assert best.at_least[0] <= Decimal("13.60")


def test_without_relays_in_parallel_the_larger_one_must_be_bought() -> None:
    best = found(TWO, part("four", "9.00", c=4), repeaters=False)
    assert best.fewest[0].price == Decimal("19.20")
    assert best.schedules[0].purchase is not None
    assert best.schedules[0].purchase.price == Decimal("13.60")


def test_where_poles_are_priced_singly_the_fewest_win() -> None:
    best = found(part("one", "1.00", c=1))
    (chosen,) = best.result.designs
    assert chosen.bound == Bound(6, True)
    # every pole is a relay of its own: A has two repeaters, and the wiring says so
    assert dict(best.result.repeaters) == {"A_2": "A", "A_3": "A"}
    assert chosen.network.relays == ("A", "B", "E", "F", "A_2", "A_3")
    assert {n.poles for n in chosen.network.per_relay().values()} == {1}
    assert prove(
        chosen.network, JOB.targets, form="bridge", isolated=JOB.isolated,
        repeaters=best.result.repeaters,
    ).ok  # fmt: skip
    assert best.schedules[0].purchase is not None
    assert best.schedules[0].purchase.price == best.at_least[0] == Decimal("6.00")
    assert list(best.schedules[0].moved()) == []


def test_a_changeover_is_wired_apart_where_only_singles_are_on_offer() -> None:
    best = found(part("make", "1.00", a=1), part("break", "1.00", b=1))
    (chosen,) = best.result.designs
    assert len(chosen.network.poles) == 7
    assert all(None in (pole.make, pole.break_) for pole in chosen.network.poles)
    assert best.fewest[0].price is None
    assert "B pole 1 is used as a changeover" in best.fewest[0].why_not


def test_stock_is_kept_in_the_choice() -> None:
    best = found(part("two", "3.40", 4, c=2), part("four", "9.00", c=4))
    assert best.schedules[0].purchase is not None
    assert best.schedules[0].purchase.price == Decimal("13.60")
    with pytest.raises(PartsError, match="the stock"):
        found(part("two", "3.40", 3, c=2))


LISTED = "\n".join(
    f"{' '.join(map(str, row))} | {' '.join(map(str, wanted(*row)))}" for row in ROWS
)
TOML = f"""\
title = "Strongroom"
[table]
columns = "A B E F | X Y Z W V"
unlisted = "free"
rows = \"\"\"
{LISTED}
\"\"\"
[limits]
isolate = "all"
"""


@pytest.mark.slow
def test_the_command_finds_the_seven_poles(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("strongroom.toml").write_text(TOML)
    Path("parts.csv").write_text("part,form,price\n=two,2C,3.40\n")
    arguments = ["wire", "strongroom.toml", "--parts", "parts.csv", "--cheapest"]
    ran = CliRunner().invoke(app, [*arguments, "--form", "bridge", "--effort", "60"])
    assert ran.exit_code == 0, ran.stderr
    lines = [line.split("  ") for line in ran.stdout.splitlines() if line.startswith("bridge  ")]
    shown = [[cell.strip() for cell in line if cell.strip()] for line in lines]
    assert shown[0][:5] == ["bridge", "fewest poles found", "6", "A (3)", "17.00"]
    assert shown[1][:3] + shown[1][4:5] == ["bridge", "cheapest found", "7", "13.60"]
    data = json.loads(Path("strongroom/design.json").read_text())
    assert data["designs"][0]["changeovers"] == 7
    bought = list(csv.DictReader(io.StringIO(Path("strongroom/bridge/purchase.csv").read_text())))
    assert [(row["part"], row["bought"], row["price"]) for row in bought] == [
        ("'=two", "4", "13.60")
    ]
    report = Path("strongroom/report.md").read_text()
    assert report.index("## Purchase") < report.index("## Cautions")
    again = CliRunner().invoke(app, ["verify", "strongroom/design.json", "strongroom.toml"])
    assert again.exit_code == 0


def test_cheapest_needs_prices(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("strongroom.toml").write_text(TOML)
    ran = CliRunner().invoke(app, ["wire", "strongroom.toml", "--cheapest"])
    assert (ran.exit_code, ran.stdout) == (2, "")
    assert "--cheapest needs prices" in ran.stderr


def test_wire_buys_for_its_designs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("vote.toml").write_text('[formulas]\nMOST = "2oo3(A, B, C)"\n')
    Path("parts.csv").write_text("part,form,price,pins\ntwo,2C,3.40,A1=13 A2=14 11=9 14=5\n")
    ran = CliRunner().invoke(
        app, ["wire", "vote.toml", "--parts", "parts.csv", "--form", "bridge", "--spares", "1"]
    )
    assert ran.exit_code == 0, ran.stderr
    assert "total:" in ran.stdout
    assert sorted(p.name for p in Path("vote/bridge").glob("*.csv")) == [
        "purchase.csv",
        "schedule.csv",
        "terminals.csv",
        "wiring.csv",
    ]
    refused = CliRunner().invoke(
        app, ["wire", "vote.toml", "--parts", "none.csv", "--out", "nowhere"]
    )
    assert refused.exit_code == 2
    assert not Path("nowhere").exists()
