"""What a long search shows while it runs, and how the time asked for is shared out."""

from __future__ import annotations

import io
import sys
from pathlib import Path

import pytest

from contactlogic.cli.progress import line, live
from contactlogic.cli.wiring import Request, papers_time, searching
from contactlogic.network import Network, Pole
from contactlogic.search.mesh import from_network
from contactlogic.search.portfolio import Progress, Standing

ONE = from_network(Network(("A",), "L", {"Z": "n1"}, (Pole("A", 1, "L", "n1"),)))


def test_the_live_line() -> None:
    standings = (Standing(ONE, windows=30), Standing(None, windows=12))
    text = line(("ladder", "bridge"), Progress(standings, at_least=1, seconds=4.0))
    assert text == "ladder 1, bridge - poles, at least 1 proved, 4 s, 10 windows/s"
    first = line(("ladder",), Progress((Standing(),), at_least=0, seconds=0.0))
    assert first == "ladder - poles, at least 0 proved, 0 s, 0 windows/s"


def test_nothing_is_shown_where_nobody_looks(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stderr", io.StringIO())  # no terminal
    for wanted in (True, False):
        with live(wanted) as watch:
            assert watch is None


def _left(seconds: float | None, now: float = 0.0, **options: object) -> float | None:
    request = Request(Path("job.toml"), seconds=seconds, began=0.0, **options)  # type: ignore[arg-type]
    return searching(request, now)


def test_without_a_limit_none_is_passed_on() -> None:
    assert _left(None) is None
    assert _left(None, now=9.0) is None


def test_papers_take_longer_for_more_forms_and_more_poles() -> None:
    both, one = (
        papers_time(Request(Path("job.toml"), form=form))  # type: ignore[arg-type]
        for form in ("both", "bridge")
    )
    assert both is not None
    assert one is not None
    assert 0.1 < one(10) < both(10) < 1.5
    assert one(30) < one(300)
    assert papers_time(Request(Path("job.toml"), json=True)) is None


def test_what_is_spent_before_the_search_is_taken_off() -> None:
    early, late = _left(60.0, now=0.0), _left(60.0, now=7.5)
    assert early is not None
    assert late == pytest.approx(early - 7.5)


def test_some_time_is_always_left() -> None:
    assert _left(1.0, now=5.0) == pytest.approx(0.1)
