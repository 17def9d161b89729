"""Free text made safe for one line, Markdown and spreadsheets."""

from __future__ import annotations

import csv
import io

import pytest
from hypothesis import given
from hypothesis import strategies as st
from markdown_it import MarkdownIt

from contactlogic.report.text import csv_text, markdown, neutral_cell, one_line


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("Sluice house", "Sluice house"),
        (" two\nlines\tand tabs ", "two lines and tabs"),
        ("bell\a and \x1b[31mred", "bell and [31mred"),
        ("right\u202eto left", "rightto left"),
        ("Schütz Überlauf 水門", "Schütz Überlauf 水門"),
    ],
)
def test_one_line(text: str, shown: str) -> None:
    assert one_line(text) == shown


@given(st.text(alphabet=st.sampled_from("ab*_`[]()<>|#\\~&$!1.-+ "), max_size=20))
def test_markdown_shows_the_text_itself(text: str) -> None:
    """A Markdown reader of its own turns the escaped text into the plain text again."""
    wanted = one_line(text)
    tokens = MarkdownIt("commonmark").enable("table").parseInline("x " + markdown(text))
    shown = "".join(
        child.content for child in tokens[0].children or [] if child.type != "softbreak"
    )
    assert {child.type for child in tokens[0].children or []} <= {"text", "text_special"}
    assert shown.strip() == f"x {wanted}".strip()


@pytest.mark.parametrize("text", ["=1+1", "+24 V", "-1", "@SUM(A1)", "\tx"])
def test_formula_starts_are_made_text(text: str) -> None:
    assert neutral_cell(text) == "'" + text


def test_csv_quotes_and_keeps_every_cell() -> None:
    cells = ("plain", 'quote " and, comma', 7)
    assert list(csv.reader(io.StringIO(csv_text(("a", "b", "c"), [cells])))) == [
        ["a", "b", "c"],
        ["plain", 'quote " and, comma', "7"],
    ]
