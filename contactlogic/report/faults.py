"""Single faults in words: for the screen, for Markdown, and as JSON."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from contactlogic.fault import Fault, FaultEffect, FaultStudy
from contactlogic.report.columns import in_columns
from contactlogic.report.phrases import count
from contactlogic.report.text import markdown, one_line, table_lines
from contactlogic.truth import rows_of, settings

__all__ = [
    "effect_line",
    "fault_text",
    "faults_json",
    "faults_markdown",
    "faults_text",
    "row_text",
]

_METHOD = (
    "Each single fault was tried in every row: each contact welded on each wired throw and never "
    "closing, each coil dead, each wire of the wiring list off. With a wire of the common return "
    "off, loads are taken as conductors, and any fed in series through others is a sneak circuit."
)


def row_text(relays: tuple[str, ...], row: int) -> str:
    """A row as settings: `UP=1 DOWN=0`."""
    values = zip(relays, settings(row, len(relays)), strict=True)
    return " ".join(f"{name}={value}" for name, value in values) or "no relays"


def fault_text(fault: Fault) -> str:
    """A fault in a few words, its terminals in brackets."""
    where = f"{fault.relay} pole {fault.pole}" if fault.pole is not None else f"{fault.relay}"
    if fault.kind == "coil dead":
        return f"coil of {where} dead"
    if fault.kind == "wires swapped":
        one, two = fault.wires
        return f"wires {one} and {two} swapped at {fault.ends[0]} and {fault.ends[1]}"
    ends = f"({fault.ends[0]} to {fault.ends[1]})"
    if fault.kind in ("wire off", "return off"):
        side = "return wire" if fault.kind == "return off" else "wire"
        return f"{side} {fault.wires[0]} off {ends}"
    said = {
        "welded make": "welded on make",
        "welded break": "welded on break",
        "never makes": "never closes on make",
        "never breaks": "never closes on break",
    }[fault.kind]
    return f"{where} {said} {ends}"


def effect_line(effect: FaultEffect, relays: tuple[str, ...]) -> str:
    """What a fault does, loads turned on first: `LAMP on in 2 rows, such as UP=1 DOWN=0`."""
    return "; ".join(_effects(effect, relays)) or "no load goes wrong"


def _effects(effect: FaultEffect, relays: tuple[str, ...]) -> Iterator[str]:
    if effect.short:
        yield f"short from rail to rail{_rows(effect.short, relays)}"
    for load, rows in effect.turns_on.items():
        yield f"{load} on{_rows(rows, relays)}"
    for circuit in effect.sneaks:
        yield f"sneak circuit of {', '.join(circuit.loads)}{_rows(circuit.rows, relays)}"
    for load, rows in effect.turns_off.items():
        yield f"{load} off{_rows(rows, relays)}"


def _rows(rows: int, relays: tuple[str, ...]) -> str:
    some = row_text(relays, next(rows_of(rows)))
    number = rows.bit_count()
    return f" in {some}" if number == 1 else f" in {number} rows, such as {some}"


def _groups(study: FaultStudy) -> dict[str, list[FaultEffect]]:
    """Effects by what is worst about them, the most dangerous first."""
    groups: dict[str, list[FaultEffect]] = {
        "turn a load on wrongly": [],
        "feed loads in series": [],
        "only turn a load off": [],
        "without effect": [],
    }
    for effect in study.effects:
        worst = (
            "turn a load on wrongly"
            if effect.turns_on or effect.short
            else "feed loads in series"
            if effect.in_series
            else "only turn a load off"
            if effect.turns_off
            else "without effect"
        )
        groups[worst].append(effect)
    return groups


def _heading(study: FaultStudy) -> str:
    parts = [f"{len(found)} {name}" for name, found in _groups(study).items() if found]
    return f"{count(len(study.effects), 'single fault')}: {', '.join(parts)}"


_COLUMNS = ("load", "turned on by", "of these open", "turned off by", "in series by")


def _summary(study: FaultStudy) -> list[tuple[str, ...]]:
    return [
        (s.load, *map(str, (s.turn_on, s.open_turn_on, s.turn_off, s.in_series)))
        for s in study.summaries
    ]


def faults_text(study: FaultStudy) -> str:
    """Lines for the screen."""
    rows = [(one_line(load), *more) for load, *more in _summary(study)]
    lines = [_heading(study), *in_columns(_COLUMNS, rows, width=None, figures=True)]
    for name, found in _groups(study).items():
        if found and name == "without effect":
            lines.append(f"{name}: {'; '.join(one_line(fault_text(e.fault)) for e in found)}")
        elif found:
            lines.append(f"{name}:")
            lines += [
                f"  {one_line(fault_text(e.fault))}: {one_line(effect_line(e, study.relays))}"
                for e in found
            ]
    return "\n".join(lines) + "\n"


def faults_markdown(study: FaultStudy) -> str:
    """A section for reports, without its heading."""
    lines = [_METHOD, "", f"{_heading(study)}.", "", *_table(_COLUMNS, _summary(study)), ""]
    worst = [
        (fault_text(effect.fault), effect_line(effect, study.relays)) for effect in study.effects
    ]
    return "\n".join([*lines, *_table(("fault", "what goes wrong"), worst), ""])


def _table(header: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    return table_lines(header, [[markdown(cell) for cell in row] for row in rows])


def faults_json(study: FaultStudy) -> dict[str, Any]:
    """The same as plain values; rows are strings of relay values in `relays` order."""
    n = len(study.relays)

    def texts(tables: Mapping[str, int]) -> dict[str, list[str]]:
        return {load: _texts(rows, n) for load, rows in tables.items()}

    return {
        "relays": list(study.relays),
        "faults": [
            {
                "kind": effect.fault.kind,
                "relay": effect.fault.relay,
                "pole": effect.fault.pole,
                "wires": list(effect.fault.wires),
                "ends": list(effect.fault.ends),
                "open": effect.fault.opens,
                "turns_on": texts(effect.turns_on),
                "turns_off": texts(effect.turns_off),
                "in_series": texts(effect.in_series),
                "short": _texts(effect.short, n),
            }
            for effect in study.effects
        ],
        "loads": {
            s.load: {
                "turned_on_by": s.turn_on,
                "turned_on_by_open_faults": s.open_turn_on,
                "turned_off_by": s.turn_off,
                "in_series_by": s.in_series,
            }
            for s in study.summaries
        },
    }


def _texts(rows: int, n: int) -> list[str]:
    return ["".join(map(str, settings(row, n))) for row in rows_of(rows)]
