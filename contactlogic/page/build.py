"""The page put together: sections from values, then the templates of this package.

All text goes through templates that escape it; values for the script are written as JSON in which
no character can end the script.  Style and script are named in the policy by their SHA-256, so
that nothing else is ever obeyed.
"""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from hashlib import sha256
from importlib.resources import files
from typing import TYPE_CHECKING, Any

from contactlogic.design import Design, Result
from contactlogic.draw import design_sheet
from contactlogic.draw.dot import number
from contactlogic.draw.sheet import Sheet
from contactlogic.draw.table import RELEASED
from contactlogic.page import prose
from contactlogic.page.live import live_model, numbers_of
from contactlogic.report.text import one_line
from contactlogic.sequence.steps import Expansion
from contactlogic.sequenced import SequencerResult
from contactlogic.terminals import RETURN

if TYPE_CHECKING:
    from jinja2 import Environment

__all__ = ["Section", "page"]


@dataclass(frozen=True)
class Section:
    """A further section on one design: its title, and its text in Markdown without a heading."""

    title: str
    text: str


@dataclass(frozen=True)
class _Chapter:
    """A main heading and what stands below it."""

    key: str
    title: str
    html: str
    live: Mapping[str, Any] | None = None
    pictures: Sequence[tuple[str, str]] = ()
    sections: Sequence[tuple[str, str, str]] = ()


def page(
    result: Result,
    report: str,
    *,
    sheets: Sequence[Sheet] = (),
    sections: Sequence[Sequence[Section]] = (),
    pictures: Sequence[Mapping[str, bytes]] = (),
    expansion: Expansion | None = None,
) -> str:
    """The whole page as HTML.

    Args:
        result: designs and the job that they are for.
        report: their report, in Markdown (`report.markdown.report`).
        sheets: their drawings; laid out here if not given.
        sections: further sections of each design, such as hazards and faults.
        pictures: further pictures of each design as SVG, by what they show.
        expansion: the steps to go through; those of the result if it is of a sequence.
    """
    environment = _environment()
    style, script = _source("page.css"), _source("page.js")
    if expansion is None and isinstance(result, SequencerResult):
        expansion = result.expansion
    drawn = {
        f"{design.form.capitalize()} {design.fingerprint}": design for design in result.designs
    }
    lead, *rest = prose.parts(report)
    chapters = []
    for count, part in enumerate(rest, start=1):
        design = drawn.pop(part.title, None)
        if design is None:
            chapters.append(_Chapter(f"part-{count}", part.title, part.html))
            continue
        index = result.designs.index(design)
        sheet = sheets[index] if sheets else design_sheet(design, result.job)
        chapters.append(
            _Chapter(
                f"part-{count}",
                part.title,
                part.html,
                _live(design, result, sheet, expansion),
                [(name, _data(svg)) for name, svg in (pictures[index] if pictures else {}).items()],
                [
                    (f"part-{count}-{place}", each.title, prose.html(each.text, 4))
                    for place, each in enumerate(sections[index] if sections else (), start=1)
                ],
            )
        )
    return environment.get_template("page.html").render(
        title=one_line(result.job.title) or "Untitled",
        names=", ".join(f"{design.form} {design.fingerprint}" for design in result.designs),
        lead=lead.html,
        chapters=chapters,
        style=style,
        script=script,
        policy=_policy(style, script),
    )


def _live(
    design: Design, result: Result, sheet: Sheet, expansion: Expansion | None
) -> dict[str, Any]:
    """Everything that the template of a live drawing needs."""
    rails = [
        line.start[0] for line in sheet.lines if line.tag.net == RETURN and line.kind == "rail"
    ]
    lamps = [
        {"load": spot.tag.load, "at": (min(x for x in rails if x > spot.at[0]) + 20, spot.at[1])}
        for spot in sheet.spots
        if spot.tag.load is not None
    ]
    model = live_model(design, result.job, result.repeaters, expansion)
    return {
        "name": f"{design.form} {design.fingerprint}",
        "sheet": sheet,
        "number": numbers_of(design),
        "blades": [line for line in sheet.lines if line.tag.operated is not None],
        "lines": [line for line in sheet.lines if line.tag.operated is None],
        "contacts": [spot for spot in sheet.spots if spot.tag.relay is not None],
        "symbols": [spot for spot in sheet.spots if spot.tag.load is not None],
        "lamps": lamps,
        "released": RELEASED,
        "relays": [(relay, model["relays"][relay]["name"]) for relay in model["columns"]],
        "model": model,
    }


def _data(svg: bytes) -> str:
    """A picture as an address that holds it; scripts in such pictures are never run."""
    return "data:image/svg+xml;base64," + b64encode(svg).decode()


def _policy(style: str, script: str) -> str:
    def named(text: str) -> str:
        return f"'sha256-{b64encode(sha256(text.encode()).digest()).decode()}'"

    return (
        f"default-src 'none'; img-src data:; style-src {named(style)}; "
        f"script-src {named(script)}; base-uri 'none'; form-action 'none'"
    )


@cache
def _source(name: str) -> str:
    return (files(__package__) / "templates" / name).read_text(encoding="utf-8")


@cache
def _environment() -> Environment:
    from jinja2 import Environment, FunctionLoader, StrictUndefined

    environment = Environment(
        loader=FunctionLoader(_source),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters["number"] = number
    return environment
