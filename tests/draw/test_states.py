"""State graphs: nothing missing, nothing on top of something else, traps unmissable."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from itertools import combinations
from pathlib import Path

import pytest
from draw.sequencers import Sequencer, counter, cross_coupled, from_tables, holding, ring
from hypothesis import example, given, settings
from hypothesis import strategies as st

from contactlogic.draw import state_graph
from contactlogic.draw.render import find_renderer, render
from contactlogic.sequence.wants import ways

GOLDEN = Path(__file__).parent / "golden"
needs_renderer = pytest.mark.skipif(find_renderer() is None, reason="no renderer is installed")

_NODE = re.compile(r'^\t(?:"([^"]*)"|(\w+)) \[(.*)\]$')
_ARROW = re.compile(r"^\t(\w+) -> (\w+) \[(.*)\]$")
_ATTRIBUTE = re.compile(r'(\w+)=("(?:[^"\\]|\\.)*"|[^\s\]]+)')

EXAMPLES = {
    "ring_of_4": ring(4),
    "ring_of_4_dead": ring(4, starts=False),
    "ring_of_6": ring(6),
    "cross_coupled": cross_coupled(),
    "counter_of_3": counter(3),
    "holding_4": holding(4),
}


def drawn(sequencer: Sequencer, title: str = "Sequencer") -> str:
    expansion = sequencer.expansion
    return state_graph(
        sequencer.recovery(),
        sequencer.successors(),
        title=title,
        fingerprint="12ab",
        slow=sequencer.timing.slow,
        sequence=ways(expansion) if expansion else None,
    )


def attributes(text: str) -> dict[str, str]:
    return {key: value.strip('"') for key, value in _ATTRIBUTE.findall(text)}


def nodes(dot: str) -> dict[str, dict[str, str]]:
    found = {}
    for line in dot.splitlines():
        match = _NODE.match(line)
        if match and match[2] not in ("node", "edge", "graph"):
            found[match[1] or match[2]] = attributes(match[3])
    return found


def arrows(dot: str) -> dict[tuple[str, str], dict[str, str]]:
    found = {}
    for line in dot.splitlines():
        match = _ARROW.match(line)
        if match and not match[1].startswith("key"):
            found[match[1], match[2]] = attributes(match[3])
    return found


def states(dot: str) -> dict[str, dict[str, str]]:
    return {name: style for name, style in nodes(dot).items() if re.fullmatch("[01]+", name)}


def number(text: str) -> int:
    return sum(1 << i for i, digit in enumerate(text) if digit == "1")


def box(style: dict[str, str]) -> tuple[float, float, float, float]:
    """Left, bottom, right, top in points; a second outline stands out by 4."""
    x, y = map(float, style["pos"].split(","))
    more = 4 if style.get("peripheries") == "2" else 0
    wide, tall = (float(style[side]) * 36 + more for side in ("width", "height"))
    return x - wide, y - tall, x + wide, y + tall


@pytest.mark.parametrize("name", ["ring_of_4", "cross_coupled", "ring_of_4_dead"])
def test_golden_text(name: str) -> None:
    """Set GOLDEN=write in the environment to write the files anew, then look at the pictures."""
    path = GOLDEN / f"states_{name}.dot"
    text = drawn(EXAMPLES[name])
    if os.environ.get("GOLDEN") == "write":
        path.write_text(text, encoding="utf-8")
    assert text == path.read_text(encoding="utf-8")


@pytest.mark.parametrize("name", sorted(EXAMPLES))
def test_every_state_and_every_move_is_drawn(name: str) -> None:
    sequencer = EXAMPLES[name]
    dot = drawn(sequencer)
    assert {number(state) for state in states(dot)} == set(range(1 << len(sequencer.columns)))
    assert {(number(a), number(b)) for a, b in arrows(dot)} == sequencer.moves()


@pytest.mark.parametrize("name", [*sorted(EXAMPLES), "ring_of_8", "counter_of_8"])
def test_nothing_stands_on_anything_else(name: str) -> None:
    more = {"ring_of_8": ring(8), "counter_of_8": counter(8)}
    assert_apart(drawn({**EXAMPLES, **more}[name]))


@given(tables=st.lists(st.integers(0, 2**16 - 1), min_size=4, max_size=4), slow=st.booleans())
@example(tables=[65, 192, 207, 269], slow=False)  # a state at the corner of a plate
@example(tables=[208, 208, 80, 267], slow=False)  # a single run wound round onto another state
@example(tables=[19937, 33301, 14448, 36363], slow=False)
@settings(max_examples=12, deadline=None)
def test_any_drives_are_drawn_whole_and_apart(tables: list[int], slow: bool) -> None:
    sequencer = from_tables(tables, slow)
    dot = drawn(sequencer)
    assert {number(state) for state in states(dot)} == set(range(16))
    assert {(number(a), number(b)) for a, b in arrows(dot)} == sequencer.moves()
    traps = [trap for trap in sequencer.recovery().traps if not trap.wanted]
    plates = [style["label"] for style in nodes(dot).values() if "TRAP" in style.get("label", "")]
    assert len(plates) == len(traps)
    assert_apart(dot)


def assert_apart(dot: str) -> None:
    found = nodes(dot)
    boxes = {
        node: box(style)
        for node, style in found.items()
        if style.get("shape") != "point" and "width" in style
    }
    assert len(boxes) > 8
    for (one, a), (two, b) in combinations(sorted(boxes.items()), 2):
        apart = a[2] <= b[0] or b[2] <= a[0] or a[3] <= b[1] or b[3] <= a[1]
        assert apart, f"{one} and {two}"
    right, bottom = map(float, found["corner2"]["pos"].split(","))
    _, top = map(float, found["corner1"]["pos"].split(","))
    for node, (x, y, x2, y2) in boxes.items():
        assert min(x, y - bottom, right + 1 - x2, top - y2) >= 0, node


@pytest.mark.parametrize("name", sorted(EXAMPLES))
def test_labels_of_moves_name_the_mover_and_stand_clear(name: str) -> None:
    sequencer = EXAMPLES[name]
    dot = drawn(sequencer)
    fixed = [box(style) for style in states(dot).values()]
    places = []
    for (here, there), style in arrows(dot).items():
        if "label" not in style:
            continue
        moved = number(here) ^ number(there)
        assert style["label"] == sequencer.columns[moved.bit_length() - 1]
        places.append(tuple(map(float, style["lp"].split(","))))
    if sequencer.moves():
        assert len(places) > 0.7 * len(sequencer.moves())
    for x, y in places:
        assert not any(a < x < c and b < y < d for a, b, c, d in fixed)
    assert all(abs(a[0] - b[0]) > 3.5 or abs(a[1] - b[1]) > 6.5 for a, b in combinations(places, 2))


@pytest.mark.parametrize("name", sorted(EXAMPLES))
def test_slow_moves_are_dashed(name: str) -> None:
    sequencer = EXAMPLES[name]
    for (here, there), style in arrows(drawn(sequencer)).items():
        released = number(here) & ~number(there)
        mover = sequencer.columns[(number(here) ^ number(there)).bit_length() - 1]
        slow = bool(released) and mover in sequencer.slow
        assert (style.get("style") == "dashed") == slow


@pytest.mark.parametrize("count", [4, 6, 8])
def test_the_cycle_goes_round_clockwise(count: int) -> None:
    sequencer = ring(count)
    found = states(drawn(sequencer))
    cycle = [s for s, style in found.items() if style["class"] == "cycle"]
    assert len(cycle) == 2 * count
    at = {s: tuple(map(float, found[s]["pos"].split(","))) for s in cycle}
    x = sum(p[0] for p in at.values()) / len(at)
    y = sum(p[1] for p in at.values()) / len(at)
    for here, there in arrows(drawn(sequencer)):
        if here in at and there in at:
            a, b = at[here], at[there]
            assert (a[0] - x) * (b[1] - y) - (a[1] - y) * (b[0] - x) < 0, f"{here} to {there}"


def test_traps_are_unmissable() -> None:
    dot = drawn(ring(4, starts=False))
    found = states(dot)
    assert {s for s, style in found.items() if style.get("peripheries") == "2"} == {"0000"}
    plates = [style for style in nodes(dot).values() if style.get("fillcolor") == "black"]
    assert [style["label"] for style in plates] == [r"TRAP\n1 state, from 1 of 16"]
    assert "Sticks: 1 trap other than the wanted cycle" in dot


def test_hunting_loops_are_unmissable() -> None:
    sequencer = cross_coupled()
    loop = sequencer.recovery().hunting
    assert loop
    dot = drawn(sequencer)
    heavy = {s for s, style in states(dot).items() if style["class"] == "loop"}
    assert {number(s) for s in heavy} == set(loop)
    assert all("dashed" in states(dot)[s]["style"] for s in heavy)
    assert any(style.get("label", "").startswith("HUNTING") for style in nodes(dot).values())
    for here, there in zip(loop, (*loop[1:], loop[0]), strict=True):
        (weight,) = (
            float(style["penwidth"])
            for (a, b), style in arrows(dot).items()
            if (number(a), number(b)) == (here, there)
        )
        assert weight > 2


def test_a_sequence_that_is_left_says_so() -> None:
    whole = ring(4)
    third = whole.drives["C"]
    drives = {**whole.drives, "C": lambda at: third(at) | (at["A"] & at["B"] & ~at["C"])}
    sequencer = Sequencer(whole.columns, drives, whole.slow, whole.expansion)
    dot = drawn(sequencer)
    assert "the sequence can be left at 1100" in dot
    (plate,) = (s["label"] for s in nodes(dot).values() if "NOT KEPT" in s.get("label", ""))
    assert "TRAP" in plate
    double = {number(s) for s, style in states(dot).items() if style.get("peripheries") == "2"}
    (trap,) = sequencer.recovery().traps
    assert len(double) == trap.states
    assert_apart(dot)
    assert {number(state) for state in states(dot)} == set(range(16))
    assert float(arrows(dot)["1100", "1110"]["penwidth"]) > 2


def test_large_state_spaces_show_cycle_traps_and_runs() -> None:
    sequencer = ring(8, starts=False)
    recovery = sequencer.recovery()
    dot = drawn(sequencer)
    found = {number(state) for state in states(dot)}
    assert recovery.cycle is not None
    wanted = set(recovery.cycle) | {s for trap in recovery.traps for s in trap.run}
    assert wanted <= found
    assert len(found) < 64
    assert "of 256 states drawn" in dot
    moves = {(number(a), number(b)) for a, b in arrows(dot)}
    assert moves == {move for move in sequencer.moves() if set(move) <= found}


def test_the_slowest_start_is_shown_with_its_way_in() -> None:
    sequencer = ring(8)
    recovery = sequencer.recovery()
    assert recovery.slowest is not None
    assert recovery.slowest.start in {number(state) for state in states(drawn(sequencer))}


def test_long_rings_leave_out_and_count_what_is_left_out() -> None:
    dot = drawn(counter(8))
    gone = [
        int(style["label"].split()[1].removesuffix("\\nmore"))
        for name, style in nodes(dot).items()
        if name.startswith("more")
    ]
    assert len(states(dot)) + sum(gone) == 256
    assert gone


@pytest.mark.parametrize(
    "title", ['quotes " and \\" \\N', "<b>&amp;</b>", "two\nlines \x00", "水門", "long " * 99, ""]
)
@needs_renderer
def test_hostile_titles(title: str) -> None:
    svg = render(drawn(cross_coupled(), title), ("svg",))["svg"]
    assert len(re.findall(rb"<title>[01]{3}</title>", svg)) == 8
    assert len(nodes(drawn(cross_coupled(), title))) == len(nodes(drawn(cross_coupled())))


@pytest.mark.parametrize("count", [4, 6])
@needs_renderer
def test_the_renderer_keeps_the_places(count: int) -> None:
    dot = drawn(ring(count))
    svg = render(dot, ("svg",))["svg"].decode()
    right = float(nodes(dot)["corner2"]["pos"].split(",")[0])
    assert abs(float(re.search(r'width="([\d.]+)pt"', svg)[1]) - right) < 3  # type: ignore[index]
    assert svg.count('class="node cycle"') == 2 * count


def test_same_text_whatever_the_hash_seed() -> None:
    code = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "from draw.test_states import EXAMPLES, drawn\n"
        "print(*(drawn(EXAMPLES[name]) for name in sorted(EXAMPLES)))\n"
    )
    texts = {
        subprocess.run(
            [sys.executable, "-c", code, str(Path(__file__).parents[1])],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    }
    assert len(texts) == 1
