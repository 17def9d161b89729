"""Ladder drawings: what can be read off them is the network, and nothing collides."""

from __future__ import annotations

import sys
from itertools import combinations
from pathlib import Path

import pytest
from hypothesis import given, settings

sys.path.insert(0, str(Path(__file__).parent))

from ladder_examples import EXAMPLES, KINDS
from ladder_networks import ladder_networks
from reading import Netlist, Reader, Reading, crosses, overlap, read

from contactlogic.design import fingerprint
from contactlogic.draw import ladder_drawing
from contactlogic.job.model import Supply
from contactlogic.network import Network
from contactlogic.terminals import RETURN, wire_numbers

GOLDEN = Path(__file__).parent / "golden"


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
