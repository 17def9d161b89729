"""Sequence charts: what stands in every cell, and the same bytes every time."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import pytest
from draw.sequencers import ring, sequence

from contactlogic.draw import sequence_chart
from contactlogic.draw.chart import chart_of
from contactlogic.job.sequence import Branch, Row, SequenceTable
from contactlogic.sequence.steps import Expansion, expand


def four() -> Expansion:
    return sequence("1100 0, 0110 1, 0011 0, 1001 1", "ABCD", ["LAMP"], "ABCD")


def svg_of(expansion: Expansion, **facts: str) -> str:
    pictures = sequence_chart(expansion, **{"title": "Ring", "fingerprint": "12ab", **facts})
    assert pictures["png"].startswith(b"\x89PNG")
    return pictures["svg"].decode()


def marked(svg: str, kind: str) -> set[tuple[int, int]]:
    """(line, step) of every cell that a mark of one kind covers."""
    cells = set()
    for line, start, stop in re.findall(rf'id="{kind}-(\d+)-(\d+)(?:-(\d+))?"', svg):
        steps = range(int(start), int(stop) if stop else int(start) + 1)
        cells |= {(int(line), step) for step in steps}
    return cells


def texts(svg: str) -> list[str]:
    return re.findall(r"<!-- (.*?) -->", svg)


def test_a_ring_of_four_in_full() -> None:
    svg = svg_of(four())
    states = ["1100", "0100", "0110", "0010", "0011", "0001", "1001", "1000"]
    assert [text for text in texts(svg) if re.fullmatch("[01]{4}", text)] == states
    bars = {(i, k) for k, state in enumerate(states) for i in range(4) if state[i] == "1"}
    assert marked(svg, "bar") == bars
    # A coil is fed while the relay moves and is held, not in the state in which it releases;
    # a relay that is on and slow to release may be either while a quick one moves.
    assert marked(svg, "coil") == {
        (1, 0), (2, 1), (2, 2), (3, 3), (3, 4), (0, 5), (0, 6), (1, 7)
    }  # fmt: skip
    assert marked(svg, "free") == {(1, 1), (2, 3), (3, 5), (0, 7), (4, 1), (4, 3), (4, 5), (4, 7)}
    assert marked(svg, "load") == {(4, 2), (4, 6)}
    passing = {int(step) for step in re.findall(r'id="passing-(\d+)"', svg)}
    assert passing == {1, 3, 5, 7}


def test_coils_and_loads_as_wired() -> None:
    # A fed whenever D is on, B never; the lamp on in the free state 0100 too.
    wired = chart_of(
        four(),
        {"A": sum(1 << s for s in range(16) if s & 8), "B": 0},
        {"LAMP": 1 << 0b0010 | 1 << 0b0110},
    )
    a, b, c, _, lamp = wired.lines
    assert [cell.fed for cell in a.cells] == [0, 0, 0, 0, 1, 1, 1, 0]
    assert {cell.fed for cell in b.cells} == {0}
    assert [cell.fed for cell in c.cells] == [0, 1, 1, None, 0, 0, 0, 0]  # not given: as wanted
    assert [cell.on for cell in lamp.cells] == [0, 1, 1, 0, 0, 0, 0, 0]
    assert [cell.free for cell in lamp.cells] == [False, True] * 4


def test_rows_and_ways_on() -> None:
    columns = chart_of(four()).columns
    assert [column.row for column in columns] == [1, None, 2, None, 3, None, 4, None]
    assert [column.lasts for column in columns] == [True, False] * 4
    assert columns[0].onward == (("A", False, None),)
    assert columns[1].onward == (("C", True, None),)
    assert columns[-1].onward == (("B", True, 1),)


def test_inputs_memory_and_branches() -> None:
    rows = ["0000", "1000", "1010", "0010", "0000", "0100", "0101", "0001"]
    table = SequenceTable(
        ("P", "Q", "A", "B"),
        (),
        tuple(Row(tuple(map(int, row))) for row in rows),
        inputs=("P", "Q"),
        branches=(Branch(1, "Q", 6),),
    )
    chart = chart_of(expand(table))
    assert [(line.name, line.group) for line in chart.lines] == [
        ("P", "inputs"), ("Q", "inputs"), ("A", "relays"), ("B", "relays")
    ]  # fmt: skip
    assert all(cell.fed is None for line in chart.lines[:2] for cell in line.cells)
    assert chart.columns[0].onward == (("P", True, None), ("Q", True, 6))
    end = sequence("10, 11, 01", "AB")
    once = Expansion(end.columns, (), end.steps[:2], (), True, False, end.timing, memory=("B",))
    assert [line.group for line in chart_of(once).lines] == ["relays", "memory"]


def test_long_sequences_wrap_and_keep_every_cell() -> None:
    names = [f"K{i}" for i in range(1, 13)]
    rows = ["".join("1" if i in (k, (k + 1) % 12) else "0" for i in range(12)) for k in range(12)]
    svg = svg_of(sequence(", ".join(rows), names, slow=names))
    assert len([text for text in texts(svg) if re.fullmatch("[01]{12}", text)]) == 24
    assert texts(svg).count("K1") == 2  # named in both bands
    assert len(marked(svg, "bar")) == 12 * 2 + 12 * 1  # pairs in listed states, one between
    width = float(re.search(r'width="([\d.]+)pt"', svg)[1])  # type: ignore[index]
    assert width < 880  # A4 on its side, nearly


@pytest.mark.parametrize("title", ["$x_1$ & <b> \\alpha", "two\nlines", "水門", "long " * 200, ""])
def test_hostile_titles(title: str) -> None:
    svg = svg_of(four(), title=title)
    assert len(re.findall('id="bar-', svg)) == len(re.findall('id="bar-', svg_of(four())))


def test_names_with_hostile_letters() -> None:
    expansion = sequence("10, 01", ["$A_1$ <&>", "$A_1$ <&> again and again and again"])
    assert marked(svg_of(expansion), "bar")


def test_same_bytes_whatever_the_hash_seed_and_without_date() -> None:
    code = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "from draw.sequencers import ring\n"
        "from contactlogic.draw import sequence_chart\n"
        "for picture in sequence_chart(ring(4).expansion, title='t', fingerprint='0').values():\n"
        "    sys.stdout.buffer.write(picture)\n"
    )
    found = {
        subprocess.run(
            [sys.executable, "-c", code, str(Path(__file__).parents[1])],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    }
    here = sequence_chart(ring(4).expansion, title="t", fingerprint="0")  # type: ignore[arg-type]
    assert found == {here["svg"] + here["png"]}
    assert b"dc:date" not in here["svg"]


def test_global_settings_are_left_alone() -> None:
    code = (
        "import sys; sys.path.insert(0, sys.argv[1])\n"
        "import matplotlib\n"
        "from draw.sequencers import ring\n"
        "from contactlogic.draw import sequence_chart\n"
        "kept = ('svg.fonttype', 'svg.hashsalt', 'font.family', 'hatch.linewidth')\n"
        "before = [matplotlib.rcParams[key] for key in kept]\n"
        "sequence_chart(ring(4).expansion, title='t', fingerprint='0')\n"
        "assert before == [matplotlib.rcParams[key] for key in kept]\n"
        "assert 'matplotlib.pyplot' not in sys.modules\n"
    )
    path = str(Path(__file__).parents[1])
    subprocess.run([sys.executable, "-c", code, path], check=True)
