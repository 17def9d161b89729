"""Hazards in words: for the screen, for Markdown, and as JSON."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from contactlogic.hazard import Cure, Hazard, HazardStudy, MovingPole
from contactlogic.report.phrases import count
from contactlogic.report.text import markdown, one_line
from contactlogic.truth import rows_of, settings

__all__ = ["hazard_line", "hazards_json", "hazards_markdown", "hazards_text", "move_text"]

_TRANSIT = (
    "While a relay moves, a changeover opens before it closes and its contacts do not move "
    "together. Each way the poles can stand meanwhile was tried."
)


def move_text(relays: tuple[str, ...], mover: str, row: int) -> str:
    """The relays that stand still in a move: `DOWN=1 FLOOD=0`."""
    values = zip(relays, settings(row, len(relays)), strict=True)
    return " ".join(f"{name}={value}" for name, value in values if name != mover)


def hazard_line(hazard: Hazard, relays: tuple[str, ...]) -> str:
    """One hazard as a sentence without its full stop."""
    what = "drops out" if hazard.kind == "drop-out" else "flashes"
    still = move_text(relays, hazard.mover, hazard.example)
    example = f", such as {still}" if still and hazard.moves > 1 else f", {still}" if still else ""
    return (
        f"{hazard.load} {what} while {hazard.mover} moves "
        f"({count(hazard.moves, 'move')}{example}): {_poles(hazard.poles)}"
    )


def _poles(poles: tuple[MovingPole, ...]) -> str:
    said = [f"{pole.relay} pole {pole.pole} {_position(pole)}" for pole in poles]
    return " and ".join(said) + (" at once" if len(said) > 1 else "")


def _position(pole: MovingPole) -> str:
    return "open" if pole.position == "open" else f"on {pole.position}"


def hazards_text(study: HazardStudy) -> str:
    """Lines for the screen."""
    return "\n".join(_lines(study)) + "\n"


def _lines(study: HazardStudy) -> Iterator[str]:
    moves = count(study.moves, "move")
    if not study.hazards:
        yield f"no load drops out or flashes in {moves} of one relay"
        return
    yield (
        f"{count(len(study.drop_outs), 'drop-out')}, {_flashes(len(study.flashes))} "
        f"in {moves} of one relay"
    )
    cures = {cure.hazard: cure for cure in study.cures.single}
    for hazard in study.hazards:
        yield "  " + one_line(hazard_line(hazard, study.relays))
        if hazard in cures:
            yield "    " + one_line(_cure_line(cures[hazard]))
    yield from map(one_line, _together(study))


def _flashes(number: int) -> str:
    return "1 flash" if number == 1 else f"{number} flashes"


def _cure_line(cure: Cure) -> str:
    if not cure.poles:
        return f"no form D cure: {cure.why_not}"
    return f"cured by form D (make before break) on {_named(cure.poles)}"


def _named(poles: tuple[tuple[str, int], ...]) -> str:
    return ", ".join(f"{relay} pole {number}" for relay, number in poles)


def _together(study: HazardStudy) -> Iterator[str]:
    if len(study.cures.together) > 1:
        yield f"form D on all of {_named(study.cures.together)}: rechecked together, no harm"
    for mover in study.cures.apart:
        yield f"the cures offered for moves of {mover} do not hold together"


def hazards_markdown(study: HazardStudy) -> str:
    """A section for reports, without its heading."""
    lines = [_TRANSIT, ""]
    if not study.hazards:
        moves = count(study.moves, "move")
        return "\n".join([*lines, f"No load drops out or flashes in {moves} of one relay.", ""])
    cures = {cure.hazard: cure for cure in study.cures.single}
    lines += [
        "| load | what | while | moves | for instance | poles | form D cure |",
        "|" + " --- |" * 7,
    ]
    for hazard in study.hazards:
        cure = cures.get(hazard)
        offer = "" if cure is None else _named(cure.poles) or f"none: {cure.why_not}"
        cells = (
            hazard.load,
            "drops out" if hazard.kind == "drop-out" else "flashes",
            f"{hazard.mover} moves",
            str(hazard.moves),
            move_text(study.relays, hazard.mover, hazard.example),
            _poles(hazard.poles),
            offer,
        )
        lines.append("| " + " | ".join(map(markdown, cells)) + " |")
    said = [markdown(line) for line in _together(study)]
    return "\n".join([*lines, "", *(f"- {line}" for line in said), *([""] if said else [])])


def hazards_json(study: HazardStudy) -> dict[str, Any]:
    """The same as plain values; rows are strings of relay values in `relays` order."""
    n = len(study.relays)
    cures = {cure.hazard: cure for cure in study.cures.single}

    def row_text(row: int) -> str:
        return "".join(map(str, settings(row, n)))

    def entry(hazard: Hazard) -> dict[str, Any]:
        cure = cures.get(hazard)
        return {
            "kind": hazard.kind,
            "load": hazard.load,
            "mover": hazard.mover,
            "moves": hazard.moves,
            "rows": [row_text(row) for row in rows_of(hazard.rows)],
            "poles": [
                {"relay": pole.relay, "pole": pole.pole, "position": pole.position}
                for pole in hazard.poles
            ],
            "cure": None
            if cure is None
            else {"form_d": [list(name) for name in cure.poles], "why_not": cure.why_not or None},
        }

    return {
        "relays": list(study.relays),
        "moves": study.moves,
        "hazards": [entry(hazard) for hazard in study.hazards],
        "form_d_together": [list(name) for name in study.cures.together],
        "not_together": list(study.cures.apart),
    }
