"""Reading a parts list from CSV or XLSX, every cell checked and every fault with its place.

Columns, in any order and case: part, poles, form, coil_volts, contact_amps, price, stock, pins.
part, form and price must be there, and poles unless the forms carry numbers (2C, 1A1B).  An empty
cell means "not given".  Columns of other names are passed over, unless one looks like a slip of
the pen for a column that is missing.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from difflib import get_close_matches
from pathlib import Path

from contactlogic.errors import LimitError, PartsError, Place
from contactlogic.job.sheet import read_cells
from contactlogic.naming import shortened
from contactlogic.purchase.parts import Coil, Contacts, Part, PartsList, current_kind

__all__ = ["COLUMNS", "read_parts"]

COLUMNS = ("part", "poles", "form", "coil_volts", "contact_amps", "price", "stock", "pins")

_MOST_PARTS = 1000
_MOST_POLES = 100  # of one relay
_LONGEST_NAME = 200
_FORMS = re.compile(r"(?:\s*[0-9]{0,3}[ABCD])+", re.IGNORECASE)
_MARK = re.compile(r"[AX][12]|[0-9]{1,2}[1-8]")


@dataclass(frozen=True)
class _Line:
    """One line of the file as it stands, for messages."""

    file: str
    label: str
    header: tuple[str, ...]
    cells: tuple[str, ...]

    def get(self, column: str) -> str:
        return self.cells[self.header.index(column)] if column in self.header else ""

    def error(self, column: str, what: str, expected: str, hint: str | None = None) -> PartsError:
        """A fault of one cell, with a caret under it."""
        at = self.header.index(column)
        place = Place(
            file=self.file,
            row=f"{self.label}, column {column} ({at + 1})",
            line=", ".join(self.cells),
            column=sum(len(cell) + 2 for cell in self.cells[:at]),
            width=max(1, len(self.cells[at])),
        )
        return PartsError(what, place=place, expected=expected, hint=hint)


def read_parts(path: str | Path) -> PartsList:
    """The parts list of a CSV or XLSX file.

    Raises:
        PartsError: a column or cell that cannot be used, a part named twice, or no part at all.
        InputError: the file cannot be read, or is too large.
    """
    shown = str(path)
    lines = read_cells(Path(path), shown, "text or a number")
    if not lines:
        raise PartsError(
            "the parts list is empty",
            place=Place(file=shown),
            expected=f"a header with {', '.join(COLUMNS[:-1])}, then a line for each part",
        )
    if len(lines) > _MOST_PARTS + 1:
        raise LimitError(
            f"the list has {len(lines) - 1} parts",
            place=Place(file=shown),
            expected=f"at most {_MOST_PARTS}",
            hint="leave out parts that do not come into question",
        )
    (label, names), *rest = lines
    header = _header(shown, label, names)
    parts: list[Part] = []
    lines_of: dict[str, str] = {}
    for label, cells in rest:
        if len(cells) > len(header):
            raise PartsError(
                f"the line has {len(cells)} cells",
                place=Place(shown, row=label, line=", ".join(cells)),
                expected=f"{len(header)}, one for each column of the header",
                hint="put a cell that holds a comma in double quotes",
            )
        cells = [*cells, *[""] * (len(header) - len(cells))]
        line = _Line(shown, label, header, tuple(cells))
        part = _part(line)
        if part.name in lines_of:
            raise line.error(
                "part",
                f'"{shortened(part.name)}" stands in {lines_of[part.name]} already',
                "each part once",
                "add up the stock, or give the parts names of their own",
            )
        lines_of[part.name] = label
        parts.append(part)
    if not parts:
        raise PartsError(
            "the list holds no part", place=Place(file=shown), expected="a line for each part"
        )
    known = tuple(name for name in header if name not in COLUMNS and name)
    return PartsList(shown, tuple(parts), known)


def _header(file: str, label: str, cells: Sequence[str]) -> tuple[str, ...]:
    header = tuple(re.sub(r"[\s-]+", "_", cell.strip().lower()) for cell in cells)
    line = _Line(file, label, header, tuple(cells))
    missing = [name for name in COLUMNS if name not in header]
    for at, name in enumerate(header):
        if name and name in header[:at]:
            raise PartsError(
                f"the column {shortened(name)} stands twice",
                place=Place(file, row=f"{label}, column {at + 1}", line=", ".join(cells)),
                expected="each column once",
            )
        # only names as long as a column's can be a slip; the comparison is slow on long ones
        near = get_close_matches(name, missing, n=1, cutoff=0.7) if len(name) <= 20 else []
        if near and name not in COLUMNS:
            raise line.error(
                name,
                f"there is no column {shortened(cells[at])}",
                "columns " + ", ".join(COLUMNS),
                f"did you mean {near[0]}?",
            )
    for name in ("part", "form", "price"):
        if name in missing:
            raise PartsError(
                f"there is no column {name}",
                place=Place(file, row=label, line=", ".join(cells)),
                expected="columns " + ", ".join(COLUMNS),
            )
    return header


def _part(line: _Line) -> Part:
    name = line.get("part")
    if not name:
        raise line.error("part", "the part has no name", "a name such as two-pole relay, 24 V")
    if len(name) > _LONGEST_NAME:
        raise line.error(
            "part",
            f"the name has {len(name)} characters",
            f"at most {_LONGEST_NAME}",
        )
    price = _number(line, "price", "a price such as 3.50, without currency")
    if price is None:
        raise line.error("price", "the part has no price", "a price such as 3.50")
    if price != round(price, 2):
        raise line.error(
            "price", f"{line.get('price')} has more than two decimals", "a price such as 3.50"
        )
    amps = _number(line, "contact_amps", "a number above 0, or nothing")
    if amps == 0:
        raise line.error("contact_amps", "0 A cannot switch anything", "a number above 0")
    stock = _whole(line, "stock", 0, 10**6)
    return Part(name, _contacts(line), _coil(line), amps, price, stock, _pins(line))


def _number(line: _Line, column: str, expected: str) -> Decimal | None:
    text = line.get(column)
    if not text:
        return None
    # a comma inside a cell can only be a decimal one: thousands are not grouped in such lists
    found = re.fullmatch(r"[0-9]{1,9}(?:[.,][0-9]{1,9})?", text)
    if found is None:
        hint = None
        if re.search(r"[^0-9.,\s+-]", text) and re.search("[0-9]", text):
            hint = "write the number alone"
        raise line.error(column, f'"{shortened(text)}" is no number for it', expected, hint)
    return Decimal(text.replace(",", "."))


def _whole(line: _Line, column: str, least: int, most: int) -> int | None:
    text = line.get(column)
    if not text:
        return None
    if not re.fullmatch("[0-9]{1,9}", text) or not least <= int(text) <= most:
        raise line.error(
            column,
            f'"{shortened(text)}" is no number of {"poles" if column == "poles" else "parts"}',
            f"a whole number from {least} to {most}",
        )
    return int(text)


def _contacts(line: _Line) -> Contacts:
    text = line.get("form").upper()
    poles = _whole(line, "poles", 1, _MOST_POLES)
    expected = "A, B, C or D with the number in poles, or numbers and letters such as 2C or 1A1B"
    if not text or not _FORMS.fullmatch(text):
        what = f'"{shortened(text)}" is no contact form' if text else "the part has no form"
        raise line.error(
            "form", what, expected, "A make, B break, C changeover, D make before break"
        )
    counts = dict.fromkeys("ABCD", 0)
    stated = [(number, letter) for number, letter in re.findall("([0-9]*)([ABCD])", text)]
    if len(stated) == 1 and not stated[0][0]:
        if poles is None:
            raise line.error("form", f"how many poles of form {text} is not said", expected)
        counts[text.strip()] = poles
    else:
        for number, letter in stated:
            counts[letter] += int(number or 1)
    total = sum(counts.values())
    if poles is not None and total != poles:
        raise line.error(
            "poles", f"{line.get('form')} makes {total} poles, not {poles}", "numbers that agree"
        )
    if not 1 <= total <= _MOST_POLES:
        raise line.error("form", f"{line.get('form')} makes {total} poles", f"1 to {_MOST_POLES}")
    return Contacts(*(counts[letter] for letter in "ABCD"))


def _coil(line: _Line) -> Coil | None:
    text = line.get("coil_volts").upper()
    if not text:
        return None
    found = re.fullmatch(r"([0-9]{1,6}(?:[.,][0-9]{1,3})?)\s*(?:V\s*)?(AC|DC)?", text)
    if found is None or not (volts := Decimal(found[1].replace(",", "."))):
        raise line.error(
            "coil_volts",
            f'"{shortened(line.get("coil_volts"))}" is no coil voltage',
            "a number above 0 such as 24, or 24 V DC",
        )
    return Coil(volts, current_kind(found[2] or ""))


def _pins(line: _Line) -> dict[str, str]:
    """`A1=13 A2=14 11=9 12=1 14=5`: the socket pin of each terminal."""
    pins: dict[str, str] = {}
    expected = "terminals with their pins, such as A1=13 A2=14 11=9 12=1 14=5"
    for entry in line.get("pins").split():
        mark, equals, pin = entry.partition("=")
        if not equals or not _MARK.fullmatch(mark.upper()):
            raise line.error("pins", f'"{shortened(entry)}" is no terminal with its pin', expected)
        if not re.fullmatch("[A-Za-z0-9]{1,8}", pin):
            raise line.error(
                "pins", f'"{shortened(pin)}" is no pin', "one to eight letters or digits"
            )
        if mark.upper() in pins or pin in pins.values():
            raise line.error(
                "pins", f'"{shortened(entry)}" stands twice', "each terminal and pin once"
            )
        pins[mark.upper()] = pin
    return pins
