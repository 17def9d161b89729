"""Bridge drawings: what can be read off them is the network, and nothing collides."""

from __future__ import annotations

import os
import subprocess
import sys
from collections import Counter
from collections.abc import Collection
from itertools import combinations
from pathlib import Path
from random import Random

import pytest
from draw.bridge_reading import BridgeReader
from draw.reading import Point, Reading, crosses, overlap, read
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.design import Bound, Design, fingerprint
from contactlogic.draw import bridge_drawing, bridge_order, design_sheet, dot_text, render
from contactlogic.job.model import Job, Load, LoadKind, Supply
from contactlogic.network import Network, Pole
from contactlogic.terminals import RETURN, wire_numbers
from contactlogic.truth import Target

GOLDEN = Path(__file__).parent / "golden"
KINDS: tuple[LoadKind | None, ...] = ("lamp", "horn", "valve", "coil", "motor", "other", None)


def network(relays: str, poles: str, loads: dict[str, str | None]) -> Network:
    """Poles as `A common make break`, "-" where not wired, separated by commas; supply L."""
    names = tuple(relays.split())
    count = dict.fromkeys(names, 0)
    made = []
    for text in sorted(poles.split(", "), key=lambda t: names.index(t.split()[0])):
        relay, common, *throws = text.split()
        count[relay] += 1
        make, break_ = (None if net == "-" else net for net in throws)
        made.append(Pole(relay, count[relay], common, make, break_))
    found = Network(names, "L", loads, tuple(made))
    found.assert_consistent()
    return found


def staircase() -> Network:
    return network("UP DOWN", "UP L x y, DOWN n y x", {"LAMP": "n"})


def shannon() -> Network:
    """R U + S V + R T V + S T U as five makes.

    C. E. Shannon, "A symbolic analysis of relay and switching circuits", 1938, gives the bridge
    of five contacts as the least form of such a function (memory).
    """
    poles = "R L p -, S L q -, T p q -, U p z -, V q z -"
    return network("R S T U V", poles, {"BELL": "z"})


def adder() -> Network:
    """Sum and carry with six poles, three of them crossing over."""
    poles = "A n1 n2 -, A n3 n4 n2, B n5 n3 n1, B n6 n4 n3, C n6 L -, C n5 n1 L"
    return network("A B C", poles, {"SUM": "n2", "CARRY": "n4"})


def oddities() -> Network:
    """Never on, always on, two loads on one net, a load that is fed by nothing, a dead end."""
    poles = "A L x x, B x y -, C y - u, D L y x"
    loads = {"NEVER": None, "ALWAYS": "L", "ONE": "y", "TWO": "y", "LOST": "w"}
    return network("A B C D IDLE", poles, loads)


EXAMPLES = {f.__name__: f for f in (staircase, shannon, adder, oddities)}


def drawing_of(shown: Network, title: str = "Weir", separate: Collection[str] = ()) -> str:
    return bridge_drawing(
        shown,
        title=title,
        fingerprint=fingerprint("bridge", shown),
        supply=Supply("+24 V", "0 V"),
        kinds={load: KINDS[i % len(KINDS)] for i, load in enumerate(shown.loads)},
        separate=separate,
    )


def assert_reads_back(shown: Network, reading: Reading, separate: Collection[str] = ()) -> None:
    """Marks after EN 50005: common 1 (3 of a separate make), break 2, make 4."""
    reader = BridgeReader(reading)
    number = {net: str(n) for net, n in wire_numbers(shown).items()}
    wanted = []
    for p in shown.poles:
        common = "3" if p.relay in separate and p.make else "1"
        wanted.append(
            (
                p.relay,
                (f"{p.number}{common}", number[p.common]),
                (f"{p.number}4", number[p.make]) if p.make else None,
                (f"{p.number}2", number[p.break_]) if p.break_ else None,
            )
        )
    found = [(p.relay, p.common, p.make, p.break_) for p in reader.poles()]
    assert sorted(found, key=repr) == sorted(wanted, key=repr)
    netless = {name: None if net is None else number[net] for name, net in shown.loads.items()}
    assert reader.fed() == netless
    assert reader.rails() == [("+24 V", number[shown.supply]), ("0 V", number[RETURN])]
    assert not reader.unnumbered()
    assert all(len(numbers) == 1 for numbers in reader.numbers.values())
    assert set(reader.group) == set(reader.numbers)


def strikes(box: tuple[float, float, float, float], start: Point, end: Point) -> bool:
    """Whether a line meets a box; slanted ones by points along them."""
    across, along = abs(start[0] - end[0]), abs(start[1] - end[1])
    steps = 1 + int(min(across, along))
    for k in range(steps):
        a, b = (
            [s + (e - s) * t / steps for s, e in zip(start, end, strict=True)] for t in (k, k + 1)
        )
        if overlap(box, (*map(min, a, b), *map(max, a, b))):
            return True
    return False


def assert_nothing_collides(reading: Reading) -> None:
    reader = BridgeReader(reading)
    wires, rails = reader.wires, set(reading.of("rail"))
    ends = Counter(point for line in reading.of("wire") for point in line)
    dots = {centre for centre, _, filled in reading.circles if filled}
    assert dots == {point for point, count in ends.items() if count > 2}
    hops = set(reader.hops)
    assert len(hops) == len(reader.hops)
    for (i, one), (j, other) in combinations(enumerate(wires), 2):
        if not crosses(one, other):
            continue
        if reader.group[i] == reader.group[j]:
            assert set(one) & set(other) or rails & {one, other}, (one, other)
            continue
        level, upright = (one, other) if one[0][1] == one[1][1] else (other, one)
        assert upright[0][0] == upright[1][0], (one, other)
        at = (upright[0][0], level[0][1])
        assert at in hops, (one, other)
        assert upright not in rails, (one, other)
        low, high = sorted(p[1] for p in upright)
        assert low < at[1] < high, (one, other)
        hops.discard(at)
    assert not hops
    boxes = [(label, label.box()) for label in reading.labels]
    for (one_label, a), (other_label, b) in combinations(boxes, 2):
        assert not overlap(a, b), (one_label, other_label)
    for label, box in boxes:
        assert box[0] >= 0, label
        assert box[2] <= reading.size[0], label
        if label.text == "M":  # stands inside a motor's circle
            continue
        for _, start, end, _ in reading.lines:
            assert not strikes(box, start, end), (label, start, end)
        for (x, y), r, _ in reading.circles:
            assert not overlap(box, (x - r, y - r, x + r, y + r)), label


@pytest.fixture
def hasty(monkeypatch: pytest.MonkeyPatch) -> None:
    """A poor layout, made quickly: crossings and long ways that a drawing must stand."""
    monkeypatch.setattr(bridge_order, "_STEPS", 2)


def random_bridge(seed: int, most_poles: int = 24) -> tuple[Network, frozenset[str]]:
    """Any network at all, and its relays with separate contacts."""
    rng = Random(seed)
    relays = [
        rng.choice(["K", "UP", "FLOODGATE", "m_1x", "LIMIT_SWITCH_NORTH"]) + str(i)
        for i in range(rng.randint(1, 6))
    ]
    separate = frozenset(name for name in relays if rng.random() < 0.2)
    nets = ["L", *(f"n{i}" for i in range(rng.randint(3, most_poles)))]
    poles = []
    for relay in relays:
        for number in range(1, 1 + rng.randint(0, most_poles // len(relays))):
            common, *throws = rng.sample(nets, 3)
            if rng.random() < 0.1:
                throws[1] = throws[0]
            kind = rng.randrange(2 if relay in separate else 4)
            make, break_ = (None if kind == 0 else throws[0]), (None if kind == 1 else throws[1])
            poles.append(Pole(relay, number, common, make, break_))
    loads = {f"LOAD_{i}": rng.choice([*nets, None]) for i in range(rng.randint(0, 5))}
    return Network(tuple(relays), "L", loads, tuple(poles)), separate


@pytest.mark.parametrize("name", sorted(EXAMPLES))
def test_an_example_reads_back_as_its_network(name: str) -> None:
    shown = EXAMPLES[name]()
    reading = read(drawing_of(shown))
    assert_reads_back(shown, reading)
    assert_nothing_collides(reading)


@pytest.mark.usefixtures("hasty")
@given(st.integers(0, 1 << 32))
@settings(max_examples=15, deadline=None)
def test_any_network_reads_back(seed: int) -> None:
    shown, separate = random_bridge(seed)
    shown.assert_consistent()
    reading = read(drawing_of(shown, separate=separate))
    assert_reads_back(shown, reading, separate)
    assert_nothing_collides(reading)


@pytest.mark.usefixtures("hasty")
@pytest.mark.parametrize("seed", [3, 16])
def test_forty_poles_can_be_drawn(seed: int) -> None:
    shown, separate = random_bridge(seed, most_poles=90)
    assert len(shown.poles) in range(40, 45)
    reading = read(drawing_of(shown, separate=separate))
    assert_reads_back(shown, reading, separate)
    assert_nothing_collides(reading)


@pytest.mark.parametrize("name", ["adder", "shannon", "staircase"])
def test_the_text_is_as_it_was(name: str) -> None:
    """Set GOLDEN=write in the environment to write the files anew, then look at the pictures."""
    golden = GOLDEN / f"bridge_{name}.dot"
    text = drawing_of(EXAMPLES[name]())
    if os.environ.get("GOLDEN") == "write":
        golden.write_text(text)
    assert text == golden.read_text()


def test_a_flat_bridge_is_drawn_without_crossings() -> None:
    for shown in (staircase(), shannon(), oddities()):
        assert not BridgeReader(read(drawing_of(shown))).hops


def test_a_changeover_is_one_symbol() -> None:
    """One name and one blade for each pole, whichever way its throws go."""
    reading = read(drawing_of(adder()))
    names = Counter(t.text for t in reading.labels if t.bold and t.text in "ABC" and t.size == 12)
    assert names == {"A": 2, "B": 2, "C": 2}
    assert sum(1 for *_, weight in reading.lines if weight == 1.7) == 6


def test_the_sheet_says_what_it_is() -> None:
    shown = shannon()
    (footer,) = [t.text for t in read(drawing_of(shown)).labels if "released" in t.text]
    parts = [part.strip() for part in footer.split("|")]
    mark = fingerprint("bridge", shown)
    assert parts == ["Weir", f"bridge {mark}", "5 poles", "drawn with all relays released"]


def test_a_design_is_drawn_as_its_network() -> None:
    shown = staircase()
    design = Design("bridge", shown, Bound(2, True), 4)
    loads = (Load("LAMP", Target(2, 0), kind="lamp"),)
    job = Job("Weir", shown.relays, loads, 0, supply=Supply("+24 V", "0 V"))
    assert dot_text(design_sheet(design, job)) == drawing_of(shown)


@pytest.mark.parametrize(
    "title",
    [
        'a "quoted" title',
        "<b>&amp;</b>",
        "back\\slash\\n",
        "two\nlines */",
        "x" * 500,
        "",
        "\u202e",
    ],
)
def test_any_title_is_text_only(title: str) -> None:
    reading = read(drawing_of(staircase(), title))
    assert_reads_back(staircase(), reading)
    assert_nothing_collides(reading)


def test_a_hostile_title_renders() -> None:
    svg = render(drawing_of(staircase(), '<script>"&\\N'), ("svg",))["svg"].decode()
    assert "<script" not in svg
    assert "&lt;script" in svg


def test_a_contact_of_one_net_is_refused() -> None:
    shown = network("A B", "A L x -, B x x -", {"Z": "x"})
    with pytest.raises(ValueError, match="B pole 1 joins net x to itself"):
        drawing_of(shown)


def test_a_network_without_poles_is_drawn() -> None:
    shown = Network(("A",), "L", {"ON": "L", "OFF": None}, ())
    reading = read(drawing_of(shown))
    assert_reads_back(shown, reading)
    assert_nothing_collides(reading)


def test_the_same_bytes_under_another_hash_seed() -> None:
    code = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "from draw.test_bridge_drawing import drawing_of, shannon\n"
        "sys.stdout.write(drawing_of(shannon()))"
    )
    tests = str(Path(__file__).parents[1])
    texts = {
        subprocess.run(
            [sys.executable, "-c", code, tests],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    }
    assert texts == {drawing_of(shannon())}
