"""What a trace of existing wiring found, as text and as JSON (`contactlogic/trace/1`)."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from contactlogic.report.phrases import count
from contactlogic.trace import Behaviour, Trace, setting
from contactlogic.truth import rows_of, settings

__all__ = ["dumps", "row_json", "row_text", "trace_json", "trace_text"]

_RELAYS_SHOWN, _WIDEST = 6, 100  # larger truth tables are left to --json
_SHOWN = 8  # findings of one kind that are shown before the rest are only counted


def trace_text(found: Trace) -> str:
    """The whole finding, section by section; sections without a finding are left out."""
    return _plain(_lines(found))


def _plain(lines: Iterable[str]) -> str:
    """Lines as text, without what a terminal would act on."""
    kept = ("".join(c for c in line if c.isprintable()) for line in lines)
    return "\n".join(kept) + "\n"


def _lines(found: Trace) -> Iterator[str]:
    circuit, relays = found.circuit, found.relays
    nets = len(set(circuit.net_of.values()))
    yield (
        f"{count(len(circuit.wires), 'wire')}, {count(len(circuit.net_of), 'terminal')}, "
        f"{count(nets, 'net')}, {count(len(circuit.contacts), 'contact')}"
    )
    yield from circuit.understood
    yield from found.notes
    yield f"relays: {' '.join(relays) or 'none'}"
    yield ""
    width = max((len(load.name) for load in found.loads), default=0)
    for load in found.loads:
        proved = "" if load.proved else "  (not proved least)"
        yield f"{load.name:<{width}} = {load.formula}{proved}"
    yield ""
    header = sum(len(name) + 1 for name in (*relays, *(load.name for load in found.loads)))
    if 0 < len(relays) <= _RELAYS_SHOWN and found.loads and header <= _WIDEST:
        yield from _table(found)
        yield ""
    yield from _verdict(found)
    for title, lines in _sections(found):
        if lines:
            yield ""
            yield f"{title}:"
            yield from (f"  {line}" for line in lines)


def _table(found: Trace) -> Iterator[str]:
    """Every row as wired; `!` marks what the job does not want."""
    names = [load.name for load in found.loads]
    header = [*found.relays, "|", *names]
    yield " ".join(header)
    for row in range(1 << len(found.relays)):
        cells = [str(value) for value in settings(row, len(found.relays))]
        for load in found.loads:
            wrong = (load.wrongly_on | load.wrongly_off) >> row & 1
            cells.append(f"{load.table >> row & 1}{'!' if wrong else ''}")
        cells.insert(len(found.relays), "|")
        widths = map(len, header)
        yield " ".join(f"{c:<{w}}" for c, w in zip(cells, widths, strict=True)).rstrip()


def _verdict(found: Trace) -> Iterator[str]:
    if not found.compared:
        yield "no job to compare with" if found.agrees else "the rails are joined"
        return
    yield "the wiring agrees with the job" if found.agrees else "the wiring differs from the job"
    for load in found.loads:
        if load.wrongly_off:
            rows = _rows(load.wrongly_off, found.relays)
            yield f"  {load.name} is off and should be on in {rows}"
        if load.wrongly_on:
            rows = _rows(load.wrongly_on, found.relays)
            yield f"  {load.name} is on and should be off in {rows}"
    for name in found.missing:
        yield f"  no wire goes to {name}"
    for name in found.strangers:
        hint = ""
        if len(found.missing) == 1 and len(found.strangers) == 1:
            hint = f' (if it is {found.missing[0]}: --name "{name}={found.missing[0]}")'
        yield f"  the job has no load {name}{hint}"


def _rows(rows: int, relays: tuple[str, ...]) -> str:
    first = next(rows_of(rows))
    return f"{count(rows.bit_count(), 'row')}, first row {first} ({setting(first, relays)})"


def _sections(found: Trace) -> Iterator[tuple[str, list[str]]]:
    relays = found.relays
    sneak = []
    for way in found.sneak:
        more = "" if len(way.rows) == 1 else f" and {len(way.rows) - 1} more by this way"
        sneak.append(f"{way.load} in row {way.rows[0]} ({setting(way.rows[0], relays)}){more}")
        sneak.append(f"  {' -> '.join(way.path)}")
    yield "sneak paths (a load conducts and should not)", _some(sneak, 2)
    short = []
    if found.short is not None:
        short = [_rows(found.short.rows, relays), f"  {' -> '.join(found.short.path)}"]
    yield "rails joined (a short circuit)", short
    joined = []
    for pair in found.joined:
        barred = ": the job wants them isolated" if pair.forbidden else ""
        joined.append(f"{pair.load} and {pair.other} in {_rows(pair.rows, relays)}{barred}")
        joined.append(f"  {' -> '.join(pair.path)}")
    yield "loads joined when off (back-feed)", _some(joined, 2)
    series = [f"{load} in {_rows(rows, relays)}" for load, rows in found.in_series.items()]
    yield "loads that carry current in series with others (sneak circuit)", _some(series)
    yield "terminals wired to nothing", _some(found.circuit.unwired)
    yield "fittings the wrong way round", _some(found.turned)
    yield "nets tied straight to a rail", _some(found.on_rails)
    yield "relays that do nothing", _some(found.idle_relays)
    yield "contacts that no current to a load can pass", _some(found.idle_contacts)


def _some(lines: Sequence[str], each: int = 1) -> list[str]:
    """The first findings, `each` lines long, and how many more there are."""
    shown = list(lines[: _SHOWN * each])
    if len(lines) > len(shown):
        shown.append(f"and {(len(lines) - len(shown)) // each} more")
    return shown


def row_text(found: Trace, does: Behaviour, row: int) -> str:
    """The conducting path of every load in one row, terminal by terminal."""
    lines = [f"row {row} ({setting(row, found.relays)})"]
    for load in found.circuit.loads:
        path = does.path(load, row)
        lines.append(f"  {load.name}: {'on' if path else 'off'}")
        lines += [f"    {' -> '.join(path)}"] if path else []
    return _plain(lines)


def trace_json(found: Trace) -> dict[str, Any]:
    """The finding as JSON data, nothing shortened."""
    circuit = found.circuit
    loads = {}
    for load, ends in zip(found.loads, circuit.loads, strict=True):
        wanted = None
        if load.target is not None:
            wanted = {
                "wrongly_on": list(rows_of(load.wrongly_on)),
                "wrongly_off": list(rows_of(load.wrongly_off)),
            }
        loads[load.name] = {
            "terminals": [ends.fed, ends.returned],
            "formula": load.formula,
            "least": load.proved,
            "on": list(rows_of(load.table)),
            "compared": wanted,
        }
    return {
        "schema": "contactlogic/trace/1",
        "agrees": found.agrees if found.compared else None,
        "relays": list(found.relays),
        "repeaters": dict(sorted(found.follows.items())),
        "feed": list(circuit.feed),
        "return": list(circuit.back),
        "understood": [*circuit.understood, *found.notes],
        "loads": loads,
        "missing": list(found.missing),
        "strangers": list(found.strangers),
        "sneak_paths": [
            {"load": way.load, "rows": list(way.rows), "path": list(way.path)}
            for way in found.sneak
        ],
        "short": None
        if found.short is None
        else {"rows": list(rows_of(found.short.rows)), "path": list(found.short.path)},
        "joined_when_off": [
            {
                "loads": [pair.load, pair.other],
                "rows": list(rows_of(pair.rows)),
                "path": list(pair.path),
                "forbidden": pair.forbidden,
            }
            for pair in found.joined
        ],
        "in_series": {load: list(rows_of(rows)) for load, rows in found.in_series.items()},
        "wired_to_nothing": list(circuit.unwired),
        "wrong_way_round": list(found.turned),
        "tied_to_a_rail": list(found.on_rails),
        "idle_relays": list(found.idle_relays),
        "idle_contacts": list(found.idle_contacts),
    }


def row_json(found: Trace, does: Behaviour, row: int) -> dict[str, Any]:
    """The conducting paths of one row as JSON data."""
    return {
        "row": row,
        "settings": dict(zip(found.relays, settings(row, len(found.relays)), strict=True)),
        "paths": {load.name: list(does.path(load, row)) for load in found.circuit.loads},
    }


def dumps(data: dict[str, Any]) -> str:
    """JSON text of a finding."""
    return json.dumps(data, indent=1) + "\n"
