"""Covers of loads wanted in few listed rows: right in every listed row, read by their own text."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.child import ChildCrashed
from contactlogic.minimize import listed
from contactlogic.minimize.listed import Wants, listed_covers


def conducts(cover, row):
    """Whether a load wired as the cover's contacts stand in its text is on."""
    closed = [[bool(row >> i & 1) == make for i, make in group] for group in cover.groups]
    return any(map(all, closed)) if cover.kind == "sop" else all(map(any, closed))


@st.composite
def wanted(draw):
    n = draw(st.integers(2, 24))
    rows = draw(st.lists(st.integers(0, 2**n - 1), unique=True, max_size=30))
    values = draw(st.lists(st.booleans(), min_size=len(rows), max_size=len(rows)))
    pairs = list(zip(rows, values, strict=True))
    return n, Wants(tuple(r for r, v in pairs if v), tuple(r for r, v in pairs if not v))


def is_right(cover, wants):
    return all(conducts(cover, row) for row in wants.on) and not any(
        conducts(cover, row) for row in wants.off
    )


@settings(max_examples=15, deadline=None)
@given(st.lists(wanted(), min_size=1, max_size=4))
def test_both_covers_do_what_every_listed_row_wants(loads):
    n = max(n for n, _ in loads)
    found = listed_covers(n, [wants for _, wants in loads])
    for covers, (_, wants) in zip(found, loads, strict=True):
        assert sorted(cover.kind for cover in covers) == ["pos", "sop"]
        assert all(is_right(cover, wants) for cover in covers)
        assert covers[0].literals <= covers[1].literals


def test_covers_are_right_without_the_engine(monkeypatch):
    def crash(*_args, **_options):
        raise ChildCrashed("no engine")

    monkeypatch.setattr(listed, "run", crash)
    wants = Wants((0b0001, 0b0110, 0b1110), (0b0000, 0b1111))
    assert all(is_right(cover, wants) for cover in listed_covers(4, [wants])[0])


def test_an_answer_that_is_wrong_is_not_used(monkeypatch):
    monkeypatch.setattr(listed, "run", lambda *_args, **_options: [((0, 0),), ((0, 0),)])
    wants = Wants((1,), (2,))
    assert all(is_right(cover, wants) for cover in listed_covers(2, [wants])[0])


@pytest.mark.parametrize(("on", "off", "text"), [((), (3,), "0"), ((3,), (), "1")])
def test_loads_that_may_be_constant_are(on, off, text):
    covers = listed_covers(5, [Wants(on, off)])[0]
    assert {cover.to_text("ABCDE") for cover in covers} == {text}
