"""Bridge drawings: what can be read off them is the network, and nothing collides."""

from __future__ import annotations

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

from contactlogic.design import fingerprint
from contactlogic.draw import bridge_drawing, bridge_order
from contactlogic.job.model import LoadKind, Supply
from contactlogic.network import Network, Pole
from contactlogic.terminals import RETURN, wire_numbers

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


def drawing_of(
    shown: Network, title: str = "Weir", separate: Collection[str] = (), count: int = len(KINDS)
) -> str:
    return bridge_drawing(
        shown,
        title=title,
        fingerprint=fingerprint("bridge", shown),
        supply=Supply("+24 V", "0 V"),
        kinds={load: KINDS[i % count] for i, load in enumerate(shown.loads)},
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
@settings(max_examples=40, deadline=None)
def test_any_network_reads_back(seed: int) -> None:
    shown, separate = random_bridge(seed)
    shown.assert_consistent()
    reading = read(drawing_of(shown, separate=separate))
    assert_reads_back(shown, reading, separate)
    assert_nothing_collides(reading)
