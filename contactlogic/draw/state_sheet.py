"""The sheet of a state graph: boxes, arrows, plates, legend and footer as text.

Kinds of state are told apart by outlines and plates, kinds of move by dashes, never by colour
alone.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from contactlogic.draw.dot import directed_text
from contactlogic.draw.sheet import Point, plain, shorten, text_width
from contactlogic.draw.state_arrows import Box
from contactlogic.draw.state_layout import DIGITS, PLATE_SIZE, STATE_SIZE, Arrow, lay_out
from contactlogic.job.sequence import state_text

if TYPE_CHECKING:
    from contactlogic.draw.states import Group, Scene
    from contactlogic.sequence.recovery import Recovery

__all__ = ["Facts", "scene_text"]

_EDGE = 26.0
_HEAD, _FOOT = 62.0, 54.0
_LEAST = 430.0  # width of a sheet
_MANY = 16  # columns whose names fill a line
_GREY = "#8a8a8a"

Style = dict[str, str]

_OUTLINES: Mapping[str, Style] = {
    "trap": {
        "penwidth": "1.8",
        "peripheries": "2",
        "style": "filled",
        "fontname": "Helvetica-Bold",
    },
    "loop": {"penwidth": "2.6", "style": "filled,dashed", "fontname": "Helvetica-Bold"},
    "cycle": {"penwidth": "2.2", "style": "rounded,filled"},
    "sequence": {"penwidth": "1.5", "style": "rounded,filled"},
    "single": {"penwidth": "0.7", "style": "rounded,filled"},
    "outside": {"penwidth": "0.7", "style": "rounded,filled"},
    "more": {"shape": "plain", "style": "filled", "fontsize": "8"},
}

_MEANING = {
    "cycle": "wanted cycle",
    "sequence": "sequence on its way there",
    "trap": "trap: never left",
    "loop": "hunting loop",
}


@dataclass(frozen=True)
class Facts:
    """What a state graph shows besides states and moves."""

    title: str
    fingerprint: str
    slow: Callable[[str, bool], bool]
    inputs: tuple[str, ...]
    sequence: Mapping[int, Sequence[int]]


def scene_text(recovery: Recovery, scene: Scene, facts: Facts) -> str:
    """The whole sheet in the DOT language."""
    return _Sheet(recovery, scene, facts).text()


class _Sheet:
    def __init__(self, recovery: Recovery, scene: Scene, facts: Facts) -> None:
        self.recovery, self.scene, self.facts = recovery, scene, facts
        self.columns = recovery.columns
        self.groups = {s: g.kind for g in scene.groups for s in g.states}
        self.nodes: list[tuple[str, Style]] = []
        self.arrows: list[tuple[str, str, Style]] = []
        self.lines: set[str] = set()  # kinds of arrow drawn, for the legend
        plates = [self._plate(group) for group in scene.groups]
        layout = lay_out(scene, self.columns, plates)
        self.width = max(_LEAST, layout.width + 2 * _EDGE)
        self.height = _HEAD + layout.height + _FOOT
        self.origin = (self.width - layout.width) / 2, _HEAD
        self.layout = layout
        self.ways_in = self._ways_in()
        self.plates = plates

    def text(self) -> str:
        self._point("corner1", (-self.origin[0], -self.origin[1]))
        self._point("corner2", (self.width - self.origin[0], self.height - self.origin[1]))
        for arrow in sorted(self.layout.arrows, key=lambda arrow: self._weight(arrow.move)):
            self._draw_arrow(arrow)
        for number, (group, lines, box) in enumerate(
            zip(self.scene.groups, self.plates, self.layout.plates, strict=True), start=1
        ):
            if box is not None:
                self._draw_plate(f"plate{number}", group, lines, box)
        for state in sorted(self.layout.boxes):
            self._draw_state(state, self.layout.boxes[state])
        self._draw_head()
        self._draw_foot()
        return directed_text(self.facts.title, self.nodes, self.arrows)

    # Plates ---------------------------------------------------------------------------------

    def _plate(self, group: Group) -> tuple[str, ...]:
        count = f"{group.size} state{'s' if group.size > 1 else ''}"
        total = self.recovery.states
        basin = "" if group.basin in (None, total) else f", from {group.basin} of {total}"
        if group.kind == "single":
            return ()
        if group.kind == "loop":
            return ("HUNTING LOOP", f"{count}, round and round")
        if group.kind == "trap":
            return ("TRAP, at rest" if group.parked else "TRAP", count + basin)
        if group.size > 1:
            name = "wanted cycle" if self.facts.sequence else "cycle"
        else:
            name = "end of sequence" if self.facts.sequence else "rest"
        if group.basin is None:
            lines = (f"{name.upper()}: NOT KEPT", count)
            held = self.scene.trapped.intersection(group.states)
            return (*lines, "TRAP: the double outlines") if held else lines
        return (name, count + basin)

    def _draw_plate(self, name: str, group: Group, lines: Sequence[str], box: Box) -> None:
        warning = group.kind in ("trap", "loop") or group.basin is None
        ground, ink = ("black", "white") if warning else ("white", "black")
        style = {
            "shape": "box",
            "style": "filled",
            "fillcolor": ground,
            "color": ground,
            "fontcolor": ink,
            "fontsize": _number(PLATE_SIZE),
            "fontname": "Helvetica-Bold",
            "label": "\n".join(lines),
        }
        self.nodes.append((name, {**style, **self._in(box)}))

    # States ---------------------------------------------------------------------------------

    def _kind(self, state: int) -> str:
        if state < 0:
            return "more"
        if state in self.scene.trapped:
            return "trap"
        if state in self.groups:
            return self.groups[state]
        return "sequence" if state in self.facts.sequence else "outside"

    def _draw_state(self, state: int, box: Box) -> None:
        kind = self._kind(state)
        style = {
            "shape": "box",
            "fillcolor": "white",
            "fontsize": _number(STATE_SIZE),
            "class": kind,
            **_OUTLINES[kind],
        }
        if state < 0:
            style["label"] = f"… {self.scene.left_out[state]}\nmore …"
        else:
            text = state_text(state, len(self.columns))
            style["label"] = "\n".join(text[k : k + DIGITS] for k in range(0, len(text), DIGITS))
        self.nodes.append((self._name(state), {**style, **self._in(_inner(kind, box))}))

    def _name(self, state: int) -> str:
        return f"more{-state}" if state < 0 else state_text(state, len(self.columns))

    # Arrows ---------------------------------------------------------------------------------

    def _draw_arrow(self, arrow: Arrow) -> None:
        here, there = arrow.move
        pieces = arrow.curve.pieces(self.layout.width, self.layout.height)
        along = [pieces[0].points[0], *(point for piece in pieces for point in piece.points[1:])]
        points = " ".join(self._at(point) for point in along)
        ends = self._name(here), self._name(there)
        if min(arrow.move) < 0:
            style = {"pos": points, "style": "dotted", "arrowhead": "none", "penwidth": "2"}
            self.arrows.append((*ends, style))
            return
        line, weight = self._line(arrow.move), self._weight(arrow.move)
        style = {"pos": f"e,{self._at(arrow.tip)} {points}", "penwidth": _number(weight)}
        self.lines.add(line)
        if line != "solid":
            style["style"] = line
        if weight < 0.7:
            style |= {"color": _GREY, "fontcolor": "#555555"}
            self.lines.add("grey")
        if arrow.spot is not None:
            style |= {"label": arrow.label, "lp": self._at(arrow.spot)}
        self.arrows.append((*ends, style))

    def _line(self, move: tuple[int, int]) -> str:
        here, there = move
        movers = [i for i in range(len(self.columns)) if (here ^ there) >> i & 1]
        if any(self.columns[i] in self.facts.inputs for i in movers):
            return "dotted"
        slow = any(self.facts.slow(self.columns[i], bool(here >> i & 1)) for i in movers)
        return "dashed" if slow else "solid"

    def _weight(self, move: tuple[int, int]) -> float:
        """Heavier the more it matters; lightest for a move off the chosen way in."""
        here, there = move
        if move in self.scene.loop or self._kind(here) == "trap":
            return 2.4
        if here in self.facts.sequence and there not in self.facts.sequence[here]:
            return 2.4  # leaves the sequence where it must not be left
        if self.groups.get(here) == "cycle":
            return 2.0
        if there in self.facts.sequence.get(here, ()):
            return 1.6
        return 1.0 if self.ways_in.get(here) == there else 0.6

    def _ways_in(self) -> dict[int, int]:
        """For each state outside, the next one on a shortest way in: the nearest on the sheet."""
        away = {
            state: k
            for layers in self.scene.layers
            for k, layer in enumerate(layers, start=1)
            for state in layer
        }
        boxes = self.layout.boxes
        best: dict[int, tuple[float, int]] = {}
        for here, there in self.scene.moves:
            if away.get(there, 0) < away.get(here, 0):
                a, b = boxes[here], boxes[there]
                length = round(math.dist((a.x, a.y), (b.x, b.y)), 6)
                best[here] = min(best.get(here, (length, there)), (length, there))
        return {here: there for here, (_, there) in best.items()}

    # Round the picture ----------------------------------------------------------------------

    def _draw_head(self) -> None:
        self._write((_EDGE, 18), self.facts.title, 12, bold=True)
        self._write((_EDGE, 35), self._verdict(), 9, bold=True)
        names = " ".join(shorten(name, 60, 8) for name in self.columns)
        text = f"Digits of a state: {names} (1 operated)"
        if len(self.columns) > _MANY:  # a long line is cut at its end
            text = f"Digits of a state, 1 operated: {names}"
        if len(self.scene.states) < self.recovery.states:
            text = (
                f"{len(self.scene.states)} of {self.recovery.states} states drawn: the cycle, "
                f"traps and shortest runs.  {text}"
            )
        self._write((_EDGE, 49), text, 8)

    def _verdict(self) -> str:
        known = self.recovery
        size = len(self.columns)
        moves = "" if known.moves == "single" else ", relays moving together"
        if known.verdict is None:
            return "Not known: the check was stopped"
        if known.verdict == "recovers":
            text = f"Recovers from each of the {known.states} states{moves}"
            if known.slowest is not None and known.slowest.moves:
                start = state_text(known.slowest.start, size)
                text += f", in {known.slowest.moves} moves at most (from {start})"
            return text
        if known.verdict == "hunts":
            return f"Hunts: a loop outside the cycle can go on for ever{moves}"
        others = sum(not trap.wanted for trap in known.traps)
        besides = " other than the wanted cycle" if known.cycle is not None else ""
        text = f"Sticks{moves}"
        if others:
            text += f": {others} trap{'s' if others > 1 else ''}{besides}"
        if known.stray is not None:
            text += f"; the sequence can be left at {state_text(known.stray[0], size)}"
        return text

    def _draw_foot(self) -> None:
        """The legend, of what is drawn alone, and the footer."""
        x, y = _EDGE, self.height - 42
        for line, text in (
            ("solid", "quick move"),
            ("dashed", "slow move"),
            ("dotted", "input moved from outside"),
            ("grey", "other moves"),
        ):
            if line in self.lines:
                self._key_arrow(line, (x, y))
                self._write((x + 33, y), text, 8)
                x += 33 + text_width(text, 8) + 14
        x, y = _EDGE, self.height - 27
        drawn = {self._kind(state) for state in self.layout.boxes}
        for kind, text in _MEANING.items():
            if kind in drawn:
                if kind == "cycle" and not self.facts.sequence:
                    text = "cycle"
                box = Box(x + 13 - self.origin[0], y - self.origin[1], 13, 5.5)
                style = {"shape": "box", "fillcolor": "white", "label": "", **_OUTLINES[kind]}
                self.nodes.append((f"key_{kind}", {**style, **self._in(_inner(kind, box))}))
                self._write((x + 33, y), text, 8)
                x += 33 + text_width(text, 8) + 14
        facts = [plain(self.facts.title), plain(self.facts.fingerprint)]
        self._write((_EDGE, self.height - 11), "  |  ".join(facts), 7)

    def _key_arrow(self, line: str, at: Point) -> None:
        x, y = at[0] - self.origin[0], at[1] - self.origin[1]
        ends = f"key_{line}_start", f"key_{line}_end"
        self._point(ends[0], (x, y))
        self._point(ends[1], (x + 27, y))
        points = " ".join(self._at((x + step, y)) for step in (0, 7, 14, 20.5))
        style = {"pos": f"e,{self._at((x + 27, y))} {points}", "penwidth": "1"}
        if line == "grey":
            style |= {"color": _GREY, "penwidth": "0.6"}
        elif line != "solid":
            style["style"] = line
        self.arrows.append((*ends, style))

    def _write(self, at: Point, text: str, size: float, *, bold: bool = False) -> None:
        """Text that begins at a point of the sheet, shortened to its width."""
        room = self.width - at[0] - _EDGE / 2
        text = shorten(text, room, size, bold)
        wide = text_width(text, size, bold) + 2
        box = Box(at[0] + wide / 2 - self.origin[0], at[1] - self.origin[1], wide / 2, size * 0.6)
        style = {
            "shape": "plaintext",
            "label": text,
            "labeljust": "l",
            "fontsize": _number(size),
            "fontname": "Helvetica-Bold" if bold else "Helvetica",
        }
        self.nodes.append((f"text{len(self.nodes)}", {**style, **self._in(box)}))

    def _point(self, name: str, at: Point) -> None:
        style = {"shape": "point", "style": "invis", "width": "0", "height": "0", "label": ""}
        self.nodes.append((name, {**style, "pos": self._at(at)}))

    def _in(self, box: Box) -> Style:
        return {
            "pos": self._at((box.x, box.y)),
            "width": f"{2 * box.half_width / 72:.4f}",
            "height": f"{2 * box.half_height / 72:.4f}",
        }

    def _at(self, point: Point) -> str:
        """A point of the picture as the renderer counts: from the bottom of the sheet."""
        x, y = point[0] + self.origin[0], point[1] + self.origin[1]
        return f"{_number(x)},{_number(self.height - y)}"


def _inner(kind: str, box: Box) -> Box:
    """The box without the room for a second outline, which the renderer adds."""
    less = 4.0 if kind == "trap" else 0.0
    return Box(box.x, box.y, box.half_width - less, box.half_height - less)


def _number(value: float) -> str:
    text = f"{value:.1f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text
