"""What is drawn is tagged with what it belongs to, and blades swing between the right wires."""

from __future__ import annotations

from math import hypot

from hypothesis import given, settings
from strategies import networks, series_parallel_networks

from contactlogic.design import Bound, Design
from contactlogic.draw import design_sheet
from contactlogic.draw.sheet import Line, Sheet
from contactlogic.job.model import Job
from contactlogic.network import Network
from contactlogic.terminals import RETURN


def sheet_of(network: Network, form: str) -> Sheet:
    job = Job("", network.relays, (), 0)
    return design_sheet(Design(form, network, Bound(0, False), 1), job)


def ends_of(sheet: Sheet, net: str | None) -> list[tuple[float, float]]:
    """Ends of all that stands still and belongs to a net."""
    return [
        end
        for line in sheet.lines
        if line.tag.net == net and line.tag.operated is None
        for end in (line.start, line.end)
    ]


def near(point: tuple[float, float], ends: list[tuple[float, float]]) -> float:
    return min((hypot(point[0] - x, point[1] - y) for x, y in ends), default=float("inf"))


def assert_swings(sheet: Sheet, network: Network) -> None:
    """Every blade hangs on its common and touches make and break each in its own position."""
    blades = [line for line in sheet.lines if line.tag.operated is not None]
    for blade in blades:
        assert near(blade.start, ends_of(sheet, blade.tag.net)) < 1
        assert any(closes(sheet, blade, pole) for pole in network.poles), blade
    poles = [p for p in network.poles if any(closes(sheet, blade, p) for blade in blades)]
    assert poles == list(network.poles)


def closes(sheet: Sheet, blade: Line, pole) -> bool:
    """Whether a blade does what a pole, or one half of it, does."""
    if (blade.tag.relay, blade.tag.net) != (pole.relay, pole.common):
        return False
    tips = {True: blade.tag.operated, False: blade.end}
    touches = {
        (position, net): near(tip, ends_of(sheet, net)) < 6
        for position, tip in tips.items()
        for net in (pole.make, pole.break_)
        if net is not None
    }
    makes = pole.make is not None and touches[True, pole.make]
    breaks = pole.break_ is not None and touches[False, pole.break_]
    return makes or breaks


@settings(max_examples=25)
@given(networks(poles=7))
def test_bridges(network: Network) -> None:
    ends = [{p.common, p.make, p.break_} - {None} for p in network.poles]
    if any(len(nets) < 2 for nets in ends):
        return  # a contact that joins a net to itself cannot be drawn
    try:
        sheet = sheet_of(network, "bridge")
    except ValueError:
        return
    assert_swings(sheet, network)
    assert_tagged(sheet, network)


@settings(max_examples=25)
@given(series_parallel_networks())
def test_ladders(network: Network) -> None:
    sheet = sheet_of(network, "ladder")
    assert_swings(sheet, network)
    assert_tagged(sheet, network)


def assert_tagged(sheet: Sheet, network: Network) -> None:
    nets = {*network.nets(), RETURN}
    assert all(line.tag.net in nets for line in sheet.lines if line.kind in ("wire", "rail"))
    spots = [spot.tag for spot in sheet.spots]
    assert sorted(tag.load for tag in spots if tag.load) == sorted(network.loads)
    assert {tag.relay for tag in spots if tag.relay} == {pole.relay for pole in network.poles}


@settings(max_examples=15)
@given(series_parallel_networks(contacts=5))
def test_wires_of_two_nets_share_no_end(network: Network) -> None:
    owner: dict[tuple[float, float], str | None] = {}
    for line in sheet_of(network, "ladder").lines:
        if line.kind == "wire":
            for end in (line.start, line.end):
                assert owner.setdefault(end, line.tag.net) == line.tag.net
