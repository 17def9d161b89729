"""The page in a real browser: every row clicked through, by mouse and by keyboard alone."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import handmade
import networkx as nx
import oracles
import pytest
from page.pages import HOSTILE, RING, RING_JOB, STAIRS, crowded, result_of, sluice, text_of

from contactlogic.design import Bound, Design, Result
from contactlogic.job import load_job
from contactlogic.job.model import Supply
from contactlogic.network import Network, folded
from contactlogic.page import Section, page
from contactlogic.sequencer import as_sequencer, as_table_job


def gray(bits: int):
    """Which relay to move next so that every row is passed once."""
    return [(step & -step).bit_length() - 1 for step in range(1, 1 << bits)]


def assert_shows(seen, index: int, network: Network, state: dict[str, int], result: Result) -> None:
    """The drawing shows what networkx says of the network in this state, in every way it shows."""
    graph = oracles.closed_graph(network, state)
    live = nx.node_connected_component(graph, network.supply)
    shown = seen.state(index)
    on = {load: net is not None and net in live for load, net in network.loads.items()}
    words = {True: "ON", False: "off"}
    assert shown["loads"] == {load: words[lit] for load, lit in on.items()}
    assert dict(shown["lamps"]) == {i: words[lit] for i, lit in enumerate(on.values())}
    nets = network.nets()
    assert {nets[i] for i in shown["heavy"]} <= live
    assert {nets[i] for i in shown["thin"]} & live == set()
    for relay, end, released, operated in shown["blades"]:
        assert end == (operated if state[network.relays[relay]] else released)
        assert released != operated
    row = sum(state[name] << i for i, name in enumerate(result.job.relays))
    assert f"Row {row}." in shown["said"]
    assert shown["pressed"] == {
        name: "true" if state[name] else "false" for name in result.job.relays
    }
    for load in result.job.loads:
        open_here = load.target.free >> row & 1
        wanted = "on" if load.target.on >> row & 1 else "left open" if open_here else "off"
        assert shown["wanted"][load.name] == wanted
        assert open_here or (wanted == "on") == on[load.name]


@pytest.mark.parametrize("index", [0, 1], ids=["ladder", "bridge"])
def test_every_row_clicked_through_gives_the_loads_of_the_truth_table(opened, index: int) -> None:
    result = sluice()
    seen = opened(page(result, text_of(result)))
    design = result.designs[index]
    state = dict.fromkeys(result.job.relays, 0)
    assert_shows(seen, index, design.network, state, result)
    buttons = seen.drawing(index).locator("button.relay")
    for relay in gray(len(result.job.relays)):
        buttons.nth(relay).click()
        state[result.job.relays[relay]] ^= 1
        assert_shows(seen, index, design.network, state, result)
    seen.drawing(index).locator("button.release").click()
    assert_shows(seen, index, design.network, dict.fromkeys(state, 0), result)


def test_a_sneak_path_shows_live_from_both_sides(opened) -> None:
    result = result_of(STAIRS, "bridge")
    seen = opened(page(result, text_of(result)))
    state = dict.fromkeys("ABC", 0)
    for relay in gray(3):
        seen.drawing().locator("button.relay").nth(relay).click()
        state["ABC"[relay]] ^= 1
        assert_shows(seen, 0, STAIRS, state, result)


def test_twenty_five_poles_in_every_row(opened) -> None:
    network = crowded()
    result = result_of(network, "bridge")
    seen = opened(page(result, text_of(result)))
    state = dict.fromkeys(network.relays, 0)
    for relay in gray(len(network.relays)):
        seen.drawing().locator("button.relay").nth(relay).click()
        state[network.relays[relay]] ^= 1
        assert_shows(seen, 0, network, state, result)


def test_contacts_on_the_drawing_can_be_clicked(opened) -> None:
    result = sluice()
    seen = opened(page(result, text_of(result)))
    network = result.designs[1].network
    hits = seen.drawing(1).locator("svg .hit")
    assert hits.count() == len(network.poles)
    state = dict.fromkeys(result.job.relays, 0)
    for i, pole in enumerate(network.poles):
        hits.nth(i).click()
        state[pole.relay] ^= 1
        assert_shows(seen, 1, network, state, result)


def test_the_keyboard_alone_is_enough(opened) -> None:
    result = handmade.SLUICE_RESULT
    seen = opened(page(result, text_of(result)))
    names = result.job.relays
    state = dict.fromkeys(names, 0)
    focused = (
        "document.activeElement.classList.contains('relay')"
        " ? document.activeElement.querySelector('.name').textContent : ''"
    )
    for relay in gray(len(names)):
        for _ in range(60):  # on from wherever the focus is, round the page if need be
            seen.tab.keyboard.press("Tab")
            if seen.tab.evaluate(focused) == names[relay]:
                break
        assert seen.tab.evaluate(focused) == names[relay]
        ring = seen.tab.evaluate("getComputedStyle(document.activeElement).outlineStyle")
        assert ring == "solid", "where the focus is can be seen"
        seen.tab.keyboard.press("Space" if relay % 2 else "Enter")
        state[names[relay]] ^= 1
        assert_shows(seen, 0, result.designs[0].network, state, result)
        assert seen.tab.evaluate(focused) == names[relay], "the focus stays"


def test_repeaters_move_with_the_relay_they_follow(opened) -> None:
    result = result_of(STAIRS, "bridge")
    poles = tuple(
        replace(pole, relay="B_2", number=1) if (pole.relay, pole.number) == ("B", 2) else pole
        for pole in STAIRS.poles
    )
    poles = (*[p for p in poles if p.relay != "B_2"], *[p for p in poles if p.relay == "B_2"])
    network = replace(STAIRS, relays=("A", "B", "C", "B_2"), poles=poles)
    design = replace(result.designs[0], network=network)
    result = replace(result, designs=(design,), relays=network.relays, repeaters={"B_2": "B"})
    assert oracles.behaviour(folded(network, {"B_2": "B"})) == oracles.behaviour(STAIRS)
    seen = opened(page(result, text_of(result)))
    assert seen.drawing().locator("button.relay").count() == 3
    state = dict.fromkeys("ABC", 0)
    for relay in gray(3):
        seen.drawing().locator("button.relay").nth(relay).click()
        state["ABC"[relay]] ^= 1
        assert_shows(seen, 0, network, state | {"B_2": state["B"]}, result)


def test_hostile_text_is_shown_as_text(opened) -> None:
    result = sluice()
    long = HOSTILE + "x" * 3000
    job = replace(result.job, title=long, supply=Supply(HOSTILE, "=1+1</svg><script>"))
    result = replace(result, job=job)
    text = page(result, text_of(result), sections=[[Section(HOSTILE, "| <b> | `</script>` |")], []])
    seen = opened(text)
    assert seen.tab.locator("h1").text_content() == " ".join(long.split())
    assert "x.invalid" in seen.tab.locator("h3", has_text="HYPERLINK").text_content()
    assert seen.tab.evaluate("document.scripts.length") == 1 + len(result.designs)
    assert seen.tab.locator("img, iframe, object, embed, b").count() == 0
    assert seen.tab.locator("a:not([href^='#'])").count() == 0
    seen.drawing().locator("button.relay").first.click()
    assert "Operated: UP." in seen.state()["said"]
    wide = seen.tab.evaluate("document.documentElement.scrollWidth")
    assert wide <= 1200, "a long title is broken, not pushed off the screen"


def test_hostile_names_of_loads_reach_the_script_as_text(opened) -> None:
    """Job files refuse such names, and design files too; the page does not lean on that."""
    network = replace(STAIRS, loads={HOSTILE: "n5", "</script>": "n1"})
    result = result_of(network, "bridge")
    seen = opened(page(result, text_of(result_of(STAIRS, "bridge"))))
    seen = opened(page(result, text_of(result)))
    seen.drawing().locator("button.relay").first.click()
    assert set(seen.state()["loads"]) == {HOSTILE, "</script>"}


def test_on_and_joined_are_told_without_colour(opened) -> None:
    """Widths, marks and words; a status that is read out; nothing by colour alone."""
    result = sluice()
    seen = opened(page(result, text_of(result)))
    drawing = seen.drawing()
    assert drawing.locator(".state").get_attribute("aria-live") == "polite"
    before = drawing.locator(".state").text_content()
    drawing.locator("button.relay").first.click()
    after = drawing.locator(".state").text_content()
    assert before != after
    assert "On: LAMP." in after
    named = drawing.locator("svg text.operated").first
    assert "underline" in named.evaluate("text => getComputedStyle(text).textDecorationLine")
    outline = "line => parseFloat(getComputedStyle(line).strokeWidth)"
    lit = drawing.locator("svg circle.on").first.evaluate(outline)
    drawing.locator("button.release").click()
    dark = drawing.locator("svg circle[data-load]").first.evaluate(outline)
    assert lit > 2 * dark


def test_print_has_the_papers_and_leaves_out_the_controls(opened) -> None:
    result = sluice()
    seen = opened(page(result, text_of(result)))
    seen.tab.emulate_media(media="print")
    for hidden in ("nav", ".controls", ".skip"):
        assert not seen.tab.locator(hidden).first.is_visible(), hidden
    for kept in ("h1", "svg", "table.loads", ".state"):
        assert seen.tab.locator(kept).first.is_visible(), kept
    assert seen.tab.pdf().startswith(b"%PDF")


def test_without_its_script_the_page_still_shows_everything(browser, tmp_path) -> None:
    result = sluice()
    path = tmp_path / "page.html"
    path.write_text(page(result, text_of(result)), encoding="utf-8")
    context = browser.new_context(java_script_enabled=False)
    tab = context.new_page()
    tab.goto(path.as_uri())
    assert tab.locator("svg").first.is_visible()
    assert tab.locator("noscript p").first.is_visible()
    assert not tab.locator("button.relay").first.is_visible()
    context.close()


def test_a_sequence_is_stepped_through(opened, tmp_path) -> None:
    """Each listed and inserted state in turn; the coils call for just the move that comes next."""
    (tmp_path / "ring.toml").write_text(RING_JOB)
    job = load_job(tmp_path / "ring.toml")
    design = Design("bridge", RING, Bound(4, False), 16)
    result = as_sequencer(Result(as_table_job(job), (design,), RING.relays), job)
    seen = opened(page(result, text_of(result)))
    states = ["1100", "0100", "0110", "0010", "0011", "0001", "1001", "1000", "1100"]
    onward = seen.drawing().locator(".onward button")
    for place, (here, there) in enumerate(pairwise(states)):
        state = {name: int(digit) for name, digit in zip(RING.relays, here, strict=True)}
        assert_shows(seen, 0, RING, state, result)
        moving = next(i for i in range(4) if here[i] != there[i])
        word = "operates" if there[moving] == "1" else "releases"
        slowly = " slowly" if word == "releases" else ""
        first = f"By their coils: {RING.relays[moving]} {word}{slowly}"
        assert first in seen.state()["said"], "quick ones come first"
        assert onward.all_text_contents() == [f"Step on: {RING.relays[moving]} {word}"]
        assert seen.drawing().locator("select.step").input_value() == str(place)
        onward.focus()
        seen.tab.keyboard.press("Enter")
        assert seen.tab.evaluate("document.activeElement.parentElement.className") == "onward"
    assert seen.drawing().locator("select.step").input_value() == "0"
    seen.drawing().locator("button.before").click()
    assert seen.drawing().locator("select.step").input_value() == str(len(states) - 2)
    seen.drawing().locator("button.release").click()
    assert seen.drawing().locator("select.step").input_value() == "-1"
    assert_shows(seen, 0, RING, dict.fromkeys(RING.relays, 0), result)
    seen.drawing().locator("select.step").select_option("4")
    state = {name: int(digit) for name, digit in zip(RING.relays, "0011", strict=True)}
    assert_shows(seen, 0, RING, state, result)
    seen.drawing().locator("button.relay").nth(2).click()  # by hand, to the next of the list
    assert seen.drawing().locator("select.step").input_value() == "5"
