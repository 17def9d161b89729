"""Ladder drawings: what can be read off them is the network, and nothing collides."""

from __future__ import annotations

from collections import Counter
from itertools import combinations

import pytest
from draw.ladder_examples import EXAMPLES, KINDS, out_of_reach, sluice, staircase
from draw.ladder_networks import ladder_networks
from draw.reading import Netlist, Reader, Reading, crosses, overlap, read
from hypothesis import given, settings

from contactlogic.design import fingerprint
from contactlogic.draw import ladder_drawing
from contactlogic.errors import NotALadder
from contactlogic.job.model import Supply
from contactlogic.network import Network, Pole
from contactlogic.terminals import RETURN, wire_numbers


def drawing_of(network: Network, title: str = "Sluice house") -> str:
    return ladder_drawing(
        network,
        title=title,
        fingerprint=fingerprint("ladder", network),
        supply=Supply("+24 V", "0 V"),
        kinds=KINDS,
    )


def wanted(network: Network) -> tuple[list[tuple[object, ...]], dict[str, str | None]]:
    """What a reader should find, straight from the network (marks after EN 50005)."""
    number = {net: str(n) for net, n in wire_numbers(network).items()}
    contacts: list[tuple[object, ...]] = []
    for p in network.poles:
        for net, digit, make in ((p.make, 4, True), (p.break_, 2, False)):
            if net is not None:
                ends = (f"{p.number}1", number[p.common]), (f"{p.number}{digit}", number[net])
                contacts.append((p.relay, *ends, make))
    loads = {name: None if net is None else number[net] for name, net in network.loads.items()}
    return sorted(contacts, key=repr), loads


def assert_reads_back(network: Network, reading: Reading) -> Netlist:
    found = Reader(reading).netlist()
    contacts, loads = wanted(network)
    read_contacts = [(c.relay, c.common, c.throw, c.make) for c in found.contacts]
    assert sorted(read_contacts, key=repr) == contacts
    assert found.fed == loads
    numbers = wire_numbers(network)
    pair = [("+24 V", str(numbers[network.supply])), ("0 V", str(numbers[RETURN]))]
    assert found.rails == pair * (len(found.rails) // 2)
    assert found.rails
    assert not found.unnumbered
    assert not found.mixed
    return found


def assert_nothing_collides(reading: Reading) -> None:
    wires = reading.of("wire", "rail")
    rails = set(reading.of("rail"))
    reader = Reader(reading)
    ends = Counter(point for line in reading.of("wire") for point in line)
    dots = {centre for centre, _, filled in reading.circles if filled}
    assert dots == {point for point, count in ends.items() if count > 2}
    for (i, one), (j, other) in combinations(enumerate(wires), 2):
        if reader.group[i] != reader.group[j]:
            assert not crosses(one, other), (one, other)
        elif crosses(one, other):
            assert set(one) & set(other) or rails & {one, other}, (one, other)
    boxes = [(label, label.box()) for label in reading.labels]
    for (one_label, a), (other_label, b) in combinations(boxes, 2):
        assert not overlap(a, b), (one_label, other_label)
    for label, box in boxes:
        assert box[0] >= 0, label
        assert box[2] <= reading.size[0], label
        if label.text == "M":  # stands inside a motor's circle
            continue
        for _, start, end, _ in reading.lines:
            assert not overlap(box, (*map(min, start, end), *map(max, start, end))), label
        for (x, y), r, _ in reading.circles:
            assert not overlap(box, (x - r, y - r, x + r, y + r)), label


@pytest.mark.parametrize("name", sorted(EXAMPLES))
def test_an_example_reads_back_as_its_network(name: str) -> None:
    network = EXAMPLES[name]()
    reading = read(drawing_of(network))
    assert_reads_back(network, reading)
    assert_nothing_collides(reading)


@given(ladder_networks())
@settings(max_examples=60, deadline=None)
def test_any_ladder_reads_back_as_its_network(network: Network) -> None:
    network.assert_consistent()
    reading = read(drawing_of(network))
    assert_reads_back(network, reading)
    assert_nothing_collides(reading)


def test_all_exits_are_drawn_without_a_reference_where_that_is_possible() -> None:
    """Two branches with a tap each can be drawn flat, by taking a tap as the rung's own load."""
    network = Network(
        ("A", "B", "C", "D"),
        "L",
        {"X": "x", "Y": "p", "Z": "q"},
        (
            Pole("A", 1, "L", "p"),
            Pole("B", 1, "p", "x"),
            Pole("C", 1, "L", "q"),
            Pole("D", 1, "q", "x"),
        ),
    )
    reading = read(drawing_of(network))
    assert_reads_back(network, reading)
    assert not any("from rung" in label.text for label in reading.labels)


def test_a_tap_out_of_reach_refers_to_its_wire() -> None:
    """Feed, three joints, their common end and the return rail hold a K3,3, so no flat drawing."""
    network = out_of_reach()
    texts = [label.text for label in read(drawing_of(network)).labels]
    (source,) = [text for text in texts if text.endswith(" to rung 4")]
    number = source.split()[0]
    assert f"wire {number}" in texts
    assert "from rung 1" in texts


def test_blades_move_the_same_way() -> None:
    """An open make hangs below the wire and closes upwards; a closed break opens upwards."""
    for network in (sluice(), staircase()):
        for kind, a, b, weight in read(drawing_of(network)).lines:
            if kind == "symbol" and weight == 1.7:
                assert a[1] != b[1]
        found = Reader(read(drawing_of(network))).netlist()
        throws = {(c.throw[0][-1], c.make) for c in found.contacts}
        assert throws == {("4", True), ("2", False)}  # EN 50005: make on 4, break on 2


def test_a_tall_ladder_is_split_into_panels() -> None:
    reading = read(drawing_of(EXAMPLES["large"]()))
    rails = {line[0][0] for line in reading.of("rail")}
    assert len(rails) == 4
    assert max(reading.size) / min(reading.size) < 1.6


@pytest.mark.parametrize(
    ("poles", "loads", "said"),
    [
        ((Pole("A", 1, "L", "x"), Pole("B", 1, "x", "y")), {"X": "x"}, "no load is fed through B"),
        ((Pole("A", 1, "L", "x"), Pole("B", 1, "u", "v")), {"X": "x"}, "B 1 has no supply"),
        ((Pole("A", 1, "L", "x"),), {"X": "x", "Y": "y"}, "load Y hangs on net y"),
        ((Pole("A", 1, "L", "x"), Pole("B", 1, "x", "x")), {"X": "x"}, "joins a net to itself"),
        (
            (
                Pole("A", 1, "L", "p"),
                Pole("A", 2, "L", "q"),
                Pole("B", 1, "p", "q"),
                Pole("B", 2, "p", "x"),
                Pole("B", 3, "q", "x"),
            ),
            {"X": "x"},
            "not series-parallel",
        ),
    ],
)
def test_what_is_no_ladder_is_refused(
    poles: tuple[Pole, ...], loads: dict[str, str | None], said: str
) -> None:
    network = Network(("A", "B"), "L", loads, poles)
    with pytest.raises(NotALadder, match=said):
        drawing_of(network)
