"""The report's Markdown as HTML.

Only what the papers use is read: headings, lists, tables, emphasis, code.  Links, pictures and
HTML in the text stay text, whoever wrote them.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from markdown_it import MarkdownIt
    from markdown_it.token import Token

__all__ = ["Part", "html", "parts"]

_RULES = (
    *("table", "heading", "list", "fence"),
    *("emphasis", "backticks", "escape", "entity", "newline"),
)
_LONG = 40  # rows of a table from which it scrolls on the screen


@dataclass(frozen=True)
class Part:
    """What stands under one heading of the second level; the first part has none."""

    title: str
    html: str


def html(text: str, top: int) -> str:
    """A text as HTML, its highest headings being of level `top`."""
    tokens = _reader().parse(text)
    levels = [int(token.tag[1:]) for token in tokens if token.type == "heading_open"]
    return _written(tokens, top - min(levels, default=top))


def parts(text: str) -> Iterator[Part]:
    """A report in its parts, the lead first; headings of the first level are left out."""
    title, body = "", list[Any]()
    tokens = iter(_reader().parse(text))
    for token in tokens:
        if token.type == "heading_open" and token.tag in ("h1", "h2"):
            heading = next(tokens)
            next(tokens)  # its end
            if token.tag == "h2":
                yield Part(title, _written(body, 0))
                title, body = _plain(heading), []
        else:
            body.append(token)
    yield Part(title, _written(body, 0))


@cache
def _reader() -> MarkdownIt:
    from markdown_it import MarkdownIt

    return MarkdownIt("zero").enable(list(_RULES))


def _plain(token: Token) -> str:
    """The text of a heading as it is read."""
    return "".join(child.content for child in token.children or ())


def _written(tokens: Sequence[Token], down: int) -> str:
    """HTML with headings `down` levels lower, and each table in a box that can scroll."""
    reader = _reader()
    pieces: list[str] = []
    waiting: list[Token] = []

    def flush() -> None:
        pieces.append(reader.renderer.render(waiting, reader.options, {}))
        waiting.clear()

    for i, token in enumerate(tokens):
        if token.type in ("heading_open", "heading_close"):
            token.tag = f"h{min(6, int(token.tag[1:]) + down)}"
        if token.type == "table_open":
            flush()
            long = _rows(tokens, i) > _LONG
            pieces.append(
                '<div class="table long" tabindex="0">' if long else '<div class="table">'
            )
        waiting.append(token)
        if token.type == "table_close":
            flush()
            pieces.append("</div>")
    flush()
    return "".join(pieces)


def _rows(tokens: Sequence[Token], start: int) -> int:
    count = 0
    for token in tokens[start:]:
        if token.type == "table_close":
            break
        count += token.type == "tr_open"
    return count
