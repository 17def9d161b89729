"""From text to pictures: hostile text, golden text, determinism, the renderer and its absence."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from xml.etree import ElementTree

import pytest
from draw.ladder_examples import EXAMPLES, KINDS, ladder, out_of_reach, sluice, taps
from draw.reading import read

from contactlogic.design import fingerprint
from contactlogic.draw import ladder_drawing, render
from contactlogic.draw.render import find_renderer
from contactlogic.errors import RendererMissing, RenderError
from contactlogic.job.model import Supply
from contactlogic.network import Network

GOLDEN = Path(__file__).parent / "golden"
needs_renderer = pytest.mark.skipif(find_renderer() is None, reason="no renderer is installed")
SVG = "{http://www.w3.org/2000/svg}"

HOSTILE = [
    'quotes " and \\" more',
    "<b>angle</b> & &lt; &amp; ]]>",
    "back\\slash \\N \\G \\l \\",
    "two\nlines\r\nand\ttabs \x00 \x1b[31m",
    "Schleuse Nord – größer als 5 µm, 水門",
    "<>",
    "title; } graph { a -- b [label=x] // /* #",
    "very long " * 60,
]


def drawn(network: Network, title: str = "Sluice house", supply: Supply | None = None) -> str:
    return ladder_drawing(
        network,
        title=title,
        fingerprint=fingerprint("ladder", network),
        supply=supply or Supply("+24 V", "0 V"),
        kinds=KINDS,
    )


@pytest.mark.parametrize("make", [sluice, taps, out_of_reach])
def test_golden_text(make: Callable[[], Network]) -> None:
    """Set GOLDEN=write in the environment to write the files anew, then look at the pictures."""
    path = GOLDEN / f"{make.__name__}.dot"
    text = drawn(make())
    if os.environ.get("GOLDEN") == "write":
        path.parent.mkdir(exist_ok=True)
        path.write_text(text, encoding="utf-8")
    assert text == path.read_text(encoding="utf-8")


def test_same_bytes_whatever_the_hash_seed() -> None:
    code = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "from draw.ladder_examples import EXAMPLES\n"
        "from contactlogic.draw import ladder_drawing\n"
        "for name in sorted(EXAMPLES):\n"
        "    print(ladder_drawing(EXAMPLES[name](), title=name, fingerprint='0'))\n"
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


def test_footer_tells_drawings_apart() -> None:
    network = sluice()
    footer = read(drawn(network)).labels[-1].text
    parts = [part.strip() for part in footer.split("|")]
    number = fingerprint("ladder", network)
    assert parts == [
        "Sluice house", f"ladder {number}", "4 poles", "drawn with all relays released"
    ]  # fmt: skip


def test_rails_are_named_neutrally_where_not_given() -> None:
    labels = {t.text for t in read(ladder_drawing(sluice(), title="", fingerprint="0")).labels}
    assert {"supply", "return"} <= labels


def test_table_says_where_contacts_stand() -> None:
    texts = [t.text for t in read(drawn(sluice())).labels]
    for cell in (
        "11 12 14",
        "make rung 1, break rung 2 (one changeover)",
        "11 12 / 21 24",
        "break rung 1, make rung 2",
    ):
        assert cell in texts


def test_halves_of_a_changeover_name_each_other() -> None:
    texts = [t.text for t in read(drawn(sluice())).labels]
    assert texts.count("break: rung 2") == 1
    assert texts.count("make: rung 1") == 1


def test_separate_contacts_have_marks_of_their_own() -> None:
    network = ladder("PUSH", [("PUSH", "L", "n", None)], {"BELL": "n"})
    text = ladder_drawing(network, title="", fingerprint="0", separate=("PUSH",))
    labels = {t.text for t in read(text).labels}
    assert {"13", "14", "13 14"} <= labels  # EN 50005: a separate make is 3-4


def test_long_names_are_shortened_but_stay_different() -> None:
    stem = "EMERGENCY_VENTILATION_FLAP_OF_THE_NORTHERN_GALLERY_"
    names = [f"{stem}{i}_OPEN" for i in range(3)]
    edges = [(name, "L", "n", None) for name in names]
    network = ladder(" ".join(names), edges, {"BELL": "n"})
    bold = {t.text for t in read(drawn(network)).labels if t.bold and "EMERG" in t.text}
    assert len(bold) == 3
    assert all(len(text) < 32 for text in bold)


@pytest.mark.parametrize("title", HOSTILE)
@needs_renderer
def test_hostile_titles_are_drawn_as_they_are(title: str) -> None:
    network = sluice()
    plain = drawn(network)
    hostile = drawn(network, title, Supply(title, title))
    assert len(read(hostile).labels) == len(read(plain).labels)
    svg = ElementTree.fromstring(render(hostile, ("svg",))["svg"])
    texts = ["".join(node.itertext()).replace("\xa0", " ") for node in svg.iter(f"{SVG}text")]
    (footer,) = [text for text in texts if "drawn with all relays released" in text]
    shown = footer.split("   |   ladder")[0]
    visible = " ".join(re.sub(r"[\x00-\x1f]", " ", title).split())
    if shown.endswith("…"):
        assert visible.startswith(shown[:-1])
        assert len(shown) > 40
    else:
        assert shown == visible


@pytest.mark.parametrize("name", sorted(EXAMPLES))
@needs_renderer
def test_pictures(name: str) -> None:
    pictures = render(drawn(EXAMPLES[name]()))
    assert sorted(pictures) == ["png", "svg"]
    assert pictures["png"].startswith(b"\x89PNG\r\n")
    svg = ElementTree.fromstring(pictures["svg"])
    families = {node.get("font-family") for node in svg.iter(f"{SVG}text")}
    assert families == {"Helvetica,sans-Serif"}
    lines = list(svg.iter(f"{SVG}path"))
    assert len(lines) == len(read(drawn(EXAMPLES[name]())).lines)


@needs_renderer
def test_renderer_chatter_does_not_leak(capfd: pytest.CaptureFixture[str]) -> None:
    render(drawn(sluice(), "größer"), ("svg",))
    assert capfd.readouterr() == ("", "")


@needs_renderer
def test_text_that_is_no_drawing_is_a_render_error() -> None:
    with pytest.raises(RenderError, match="made no svg"):
        render("graph {", ("svg",))


def test_time_limit(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    slow = tmp_path / "graphviz-pure"
    slow.write_text(f"#!{sys.executable}\nimport time\ntime.sleep(30)\n")
    slow.chmod(0o755)
    monkeypatch.setattr(sys, "executable", str(tmp_path / "python"))
    with pytest.raises(RenderError, match=r"within 0\.2 s"):
        render("graph {}", ("svg",), seconds=0.2)


def test_missing_renderer_is_told_apart(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "executable", str(tmp_path / "python"))
    monkeypatch.setenv("PATH", str(tmp_path))
    with pytest.raises(RendererMissing, match="graphviz-pure"):
        render("graph {}")


def test_the_environments_own_renderer_comes_first(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for folder in ("env", "system"):
        (tmp_path / folder).mkdir()
    for name in ("env/graphviz-pure", "system/graphviz-pure", "system/dot"):
        (tmp_path / name).write_text("#!/bin/sh\n")
        (tmp_path / name).chmod(0o755)
    monkeypatch.setenv("PATH", str(tmp_path / "system"))
    monkeypatch.setattr(sys, "executable", str(tmp_path / "env/python"))
    assert find_renderer() == str(tmp_path / "env/graphviz-pure")
    (tmp_path / "env/graphviz-pure").unlink()
    assert find_renderer() == str(tmp_path / "system/graphviz-pure")
    (tmp_path / "system/graphviz-pure").unlink()
    assert find_renderer() == str(tmp_path / "system/dot")


def test_many_changeovers_are_listed_pole_by_pole() -> None:
    height = {}
    for label in read(drawn(EXAMPLES["one_of_ten"]())).labels:
        height.setdefault(label.text, set()).add(label.at[1])
    # pole 4 of R1 feeds LAMP0 on its break and LAMP1 on its make: rungs 1 and 2
    assert height["41 42 44"] == height["make rung 2, break rung 1 (one changeover)"]
