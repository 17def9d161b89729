"""Parts lists: what is read, and every refusal with its place."""

from __future__ import annotations

from decimal import Decimal
from pathlib import Path

import openpyxl
import pytest

from contactlogic.errors import InputError, PartsError
from contactlogic.purchase.parts import Coil, Contacts, Part
from contactlogic.purchase.read_parts import read_parts

HEADER = "part,poles,form,coil_volts,contact_amps,price,stock"
PLUG_IN = Part("plug-in", Contacts(c=2), Coil(Decimal(24)), Decimal(5), Decimal("3.50"), 12)


def read(tmp_path: Path, text: str, monkeypatch: pytest.MonkeyPatch) -> tuple[Part, ...]:
    monkeypatch.chdir(tmp_path)
    Path("parts.csv").write_text(text, encoding="utf-8")
    return read_parts("parts.csv").parts


def test_a_plain_list(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    parts = read(tmp_path, f"{HEADER}\nplug-in,2,C,24,5,3.50,12\n", monkeypatch)
    assert parts == (PLUG_IN,)


def test_columns_in_any_order_and_case(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    text = (
        "# from the drawer\nSupplier;Price;Coil Volts;FORM;Part;stock;Contact-Amps;poles\n"
        "someone;3,50;24;c;plug-in;12;5;2\n"
    )
    assert read(tmp_path, text, monkeypatch) == (PLUG_IN,)
    assert read_parts("parts.csv").passed_over == ("supplier",)


def test_a_workbook(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    book.active.append(HEADER.split(","))
    book.active.append(["plug-in", 2, "C", 24, 5.0, 3.5, 12])
    book.save(tmp_path / "parts.xlsx")
    assert read_parts(tmp_path / "parts.xlsx").parts == (PLUG_IN,)


@pytest.mark.parametrize(
    ("poles", "form", "contacts"),
    [
        ("2", "C", Contacts(c=2)),
        ("", "2C", Contacts(c=2)),
        ("2", "2c", Contacts(c=2)),
        ("2", "1A1B", Contacts(a=1, b=1)),
        ("", "1A 2B", Contacts(a=1, b=2)),
        ("", "AB", Contacts(a=1, b=1)),
        ("4", "2A1C1D", Contacts(a=2, c=1, d=1)),
        ("3", "D", Contacts(d=3)),
    ],
)
def test_forms(
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    poles: str,
    form: str,
    contacts: Contacts,
) -> None:
    (part,) = read(tmp_path, f"part,poles,form,price\nx,{poles},{form},1\n", monkeypatch)
    assert part == Part("x", contacts, None, None, Decimal(1))


@pytest.mark.parametrize(
    ("text", "coil"),
    [
        ("24", Coil(Decimal(24))),
        ("24V", Coil(Decimal(24))),
        ("24 V DC", Coil(Decimal(24), "DC")),
        ("230 vac", Coil(Decimal(230), "AC")),
        ("4.5", Coil(Decimal("4.5"))),
        ("", None),
    ],
)
def test_coils(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, text: str, coil: Coil | None
) -> None:
    (part,) = read(tmp_path, f"part,form,price,coil_volts\nx,2C,1,{text}\n", monkeypatch)
    assert part.coil == coil


def test_pins(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    text = "part,form,price,pins\nx,1C,1,A1=13 a2=14 11=9 12=1 14=5\n"
    (part,) = read(tmp_path, text, monkeypatch)
    assert part.pins == {"A1": "13", "A2": "14", "11": "9", "12": "1", "14": "5"}


def line(**cells: str) -> str:
    """A list of one good part but for these cells."""
    good = {
        "part": "plug-in",
        "poles": "2",
        "form": "C",
        "coil_volts": "24",
        "contact_amps": "5",
        "price": "3.50",
        "stock": "12",
    }
    good |= cells
    return ",".join(good) + "\nother,1,C,12,1,1,1\n" + ",".join(good.values()) + "\n"


REFUSED = {
    "an empty list": (
        "",
        "parts.csv: the parts list is empty\n  expected: a header with part, poles, form,"
        " coil_volts, contact_amps, price, stock, then a line for each part",
    ),
    "no part": (
        HEADER + "\n",
        "parts.csv: the list holds no part\n  expected: a line for each part",
    ),
    "a slip in the header": (
        "part,poles,form,pirce\nx,1,C,1\n",
        "parts.csv, line 1, column pirce (4): there is no column pirce\n"
        "    part, poles, form, pirce\n"
        "                       ^^^^^\n"
        "  expected: columns part, poles, form, coil_volts, contact_amps, price, stock, pins\n"
        "  did you mean price?",
    ),
    "a column missing": (
        "part,poles,form\nx,1,C\n",
        "parts.csv, line 1: there is no column price\n    part, poles, form\n"
        "  expected: columns part, poles, form, coil_volts, contact_amps, price, stock, pins",
    ),
    "a column twice": (
        "part,form,price,form\nx,1C,1,1C\n",
        "parts.csv, line 1, column 4: the column form stands twice\n    part, form, price, form\n"
        "  expected: each column once",
    ),
    "too many cells": (
        "part,form,price\nx,1C,1,7\n",
        "parts.csv, line 2: the line has 4 cells\n    x, 1C, 1, 7\n"
        "  expected: 3, one for each column of the header\n"
        "  put a cell that holds a comma in double quotes",
    ),
    "no name": (
        line(part=""),
        "parts.csv, line 3, column part (1): the part has no name\n    , 2, C, 24, 5, 3.50, 12\n"
        "    ^\n  expected: a name such as two-pole relay, 24 V",
    ),
    "a name twice": (
        line(part="other"),
        'parts.csv, line 3, column part (1): "other" stands in line 2 already\n'
        "    other, 2, C, 24, 5, 3.50, 12\n    ^^^^^\n  expected: each part once\n"
        "  add up the stock, or give the parts names of their own",
    ),
    "a price with its currency": (
        line(price="3.50 EUR"),
        'parts.csv, line 3, column price (6): "3.50 EUR" is no number for it\n'
        "    plug-in, 2, C, 24, 5, 3.50 EUR, 12\n                          ^^^^^^^^\n"
        "  expected: a price such as 3.50, without currency\n  write the number alone",
    ),
    "a negative price": (
        line(price="-1"),
        'parts.csv, line 3, column price (6): "-1" is no number for it\n'
        "    plug-in, 2, C, 24, 5, -1, 12\n                          ^^\n"
        "  expected: a price such as 3.50, without currency",
    ),
    "no price": (
        line(price=""),
        "parts.csv, line 3, column price (6): the part has no price\n"
        "    plug-in, 2, C, 24, 5, , 12\n                          ^\n"
        "  expected: a price such as 3.50",
    ),
    "a price in thousandths": (
        line(price="3.505"),
        "parts.csv, line 3, column price (6): 3.505 has more than two decimals\n"
        "    plug-in, 2, C, 24, 5, 3.505, 12\n                          ^^^^^\n"
        "  expected: a price such as 3.50",
    ),
    "an unknown form": (
        line(form="E"),
        'parts.csv, line 3, column form (3): "E" is no contact form\n'
        "    plug-in, 2, E, 24, 5, 3.50, 12\n                ^\n"
        "  expected: A, B, C or D with the number in poles, or numbers and letters such as 2C or"
        " 1A1B\n  A make, B break, C changeover, D make before break",
    ),
    "no form": (
        line(form=""),
        "parts.csv, line 3, column form (3): the part has no form\n"
        "    plug-in, 2, , 24, 5, 3.50, 12\n                ^\n"
        "  expected: A, B, C or D with the number in poles, or numbers and letters such as 2C or"
        " 1A1B\n  A make, B break, C changeover, D make before break",
    ),
    "poles that disagree with the form": (
        line(poles="3", form="1A1B"),
        "parts.csv, line 3, column poles (2): 1A1B makes 2 poles, not 3\n"
        "    plug-in, 3, 1A1B, 24, 5, 3.50, 12\n             ^\n  expected: numbers that agree",
    ),
    "no number of poles": (
        line(poles=""),
        "parts.csv, line 3, column form (3): how many poles of form C is not said\n"
        "    plug-in, , C, 24, 5, 3.50, 12\n               ^\n"
        "  expected: A, B, C or D with the number in poles, or numbers and letters such as 2C or"
        " 1A1B",
    ),
    "no whole number of poles": (
        line(poles="1.5"),
        'parts.csv, line 3, column poles (2): "1.5" is no number of poles\n'
        "    plug-in, 1.5, C, 24, 5, 3.50, 12\n             ^^^\n"
        "  expected: a whole number from 1 to 100",
    ),
    "forms without a contact": (
        line(poles="", form="0C"),
        "parts.csv, line 3, column form (3): 0C makes 0 poles\n"
        "    plug-in, , 0C, 24, 5, 3.50, 12\n               ^^\n  expected: 1 to 100",
    ),
    "a coil that is no voltage": (
        line(coil_volts="=24"),
        'parts.csv, line 3, column coil_volts (4): "=24" is no coil voltage\n'
        "    plug-in, 2, C, =24, 5, 3.50, 12\n                   ^^^\n"
        "  expected: a number above 0 such as 24, or 24 V DC",
    ),
    "contacts for no current": (
        line(contact_amps="0"),
        "parts.csv, line 3, column contact_amps (5): 0 A cannot switch anything\n"
        "    plug-in, 2, C, 24, 0, 3.50, 12\n                       ^\n"
        "  expected: a number above 0",
    ),
    "a stock that is no number": (
        line(stock="many"),
        'parts.csv, line 3, column stock (7): "many" is no number of parts\n'
        "    plug-in, 2, C, 24, 5, 3.50, many\n                                ^^^^\n"
        "  expected: a whole number from 0 to 1000000",
    ),
    "a pin without terminal": (
        "part,form,price,pins\nx,1C,1,A1=1 13\n",
        'parts.csv, line 2, column pins (4): "13" is no terminal with its pin\n'
        "    x, 1C, 1, A1=1 13\n              ^^^^^^^\n"
        "  expected: terminals with their pins, such as A1=13 A2=14 11=9 12=1 14=5",
    ),
    "a pin twice": (
        "part,form,price,pins\nx,1C,1,A1=1 A2=1\n",
        'parts.csv, line 2, column pins (4): "A2=1" stands twice\n'
        "    x, 1C, 1, A1=1 A2=1\n              ^^^^^^^^^\n"
        "  expected: each terminal and pin once",
    ),
    "a cell that is not closed": (
        'part,form,price\n"x,1C,1\n',
        "parts.csv, line 2: not a CSV table: unexpected end of data\n"
        "  expected: cells divided by commas, semicolons or tabs",
    ),
}


@pytest.mark.parametrize("case", REFUSED)
def test_refusals(case: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    text, message = REFUSED[case]
    with pytest.raises(InputError) as caught:
        read(tmp_path, text, monkeypatch)
    assert str(caught.value) == message


def test_a_name_that_is_too_long(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    with pytest.raises(PartsError, match="the name has 100000 characters"):
        read(tmp_path, f"part,form,price\n{'x' * 100_000},1C,1\n", monkeypatch)


def test_a_formula_in_a_workbook(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    book.active.append(["part", "form", "price"])
    book.active.append(["x", "1C", "=2+2"])
    book.save(tmp_path / "parts.xlsx")
    with pytest.raises(InputError, match=r"row 2: a cell holds a formula =2\+2"):
        read_parts(tmp_path / "parts.xlsx")


@pytest.mark.parametrize("name", ["parts.ods", "parts", "missing.csv"])
def test_files_that_cannot_be_read(name: str, tmp_path: Path) -> None:
    if name != "missing.csv":
        (tmp_path / name).write_text("part,form,price\nx,1C,1\n")
    with pytest.raises(InputError):
        read_parts(tmp_path / name)
