"""Fittings on drawings: their values stand clear, and what is not stated changes nothing."""

from __future__ import annotations

from itertools import combinations

import pytest
from draw.ladder_examples import EXAMPLES, KINDS, sluice
from draw.reading import overlap, read

from contactlogic.design import fingerprint
from contactlogic.draw import bridge_drawing, ladder_drawing, render
from contactlogic.job.model import Fittings, Supply
from contactlogic.network import Network

ALL = Fittings("T 500 mA", "diode", "4700 uF", "4.7 kohm")
KINDS_OF_SUPPRESSION = ("diode", "zener", "varistor", "rc", "tvs")


def drawn(form: str, network: Network, fittings: dict[str, Fittings] | None) -> str:
    draw = ladder_drawing if form == "ladder" else bridge_drawing
    return draw(
        network,
        title="Sluice house",
        fingerprint=fingerprint(form, network),
        supply=Supply("+24 V", "0 V"),
        kinds=KINDS,
        fittings=fittings,
    )


@pytest.mark.parametrize("form", ["ladder", "bridge"])
@pytest.mark.parametrize("name", EXAMPLES)
def test_values_stand_clear_of_all_other_text(form: str, name: str) -> None:
    network = EXAMPLES[name]()
    fittings = dict.fromkeys(network.loads, ALL)
    reading = read(drawn(form, network, fittings))
    fed = [load for load, net in network.loads.items() if net is not None]
    for said in ALL.texts():
        assert [label.text for label in reading.labels].count(said) == len(fed)
    for one, other in combinations(reading.labels, 2):
        if {one.text, other.text} & set(ALL.texts()):
            assert not overlap(one.box(), other.box()), (one.text, other.text)
    for label in reading.labels:
        if label.text in ALL.texts():
            for (x, y), (x2, y2) in reading.of("wire", "rail", "symbol"):
                line = (min(x, x2), min(y, y2), max(x, x2) + 0.1, max(y, y2) + 0.1)
                assert not overlap(label.box(), line), label.text


@pytest.mark.parametrize("form", ["ladder", "bridge"])
def test_nothing_stated_changes_nothing(form: str) -> None:
    network = sluice()
    empty = dict.fromkeys(network.loads, Fittings())
    assert drawn(form, network, None) == drawn(form, network, {}) == drawn(form, network, empty)


@pytest.mark.parametrize("form", ["ladder", "bridge"])
def test_symbols_differ(form: str) -> None:
    network = sluice()
    load = next(iter(network.loads))
    shapes = {
        kind: tuple(read(drawn(form, network, {load: Fittings(suppression=kind)})).lines)
        for kind in KINDS_OF_SUPPRESSION
    }
    assert len(set(shapes.values())) == len(KINDS_OF_SUPPRESSION)


def test_a_fitted_ladder_renders() -> None:
    network = sluice()
    text = drawn("ladder", network, dict.fromkeys(network.loads, ALL))
    assert b"fuse T 500 mA" in render(text, ("svg",))["svg"].replace(b"&#160;", b" ")
