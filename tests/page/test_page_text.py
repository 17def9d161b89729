"""The text of the page: one file, nothing fetched, and whatever users write stays text."""

from __future__ import annotations

import json
import re
from base64 import b64encode
from dataclasses import replace
from hashlib import sha256
from html.parser import HTMLParser

import pytest
from page.pages import HOSTILE, STAIRS, result_of, sluice, text_of

from contactlogic.design import Bound, Design, Result
from contactlogic.job.model import Job, Load, Supply
from contactlogic.page import Section, page
from contactlogic.page.prose import html, parts
from contactlogic.truth import Target, all_rows


class Reader(HTMLParser):
    """Elements with their attributes, ids, links and the text outside script and style."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.inside: dict[str, list[str]] = {"script": [], "style": [], "": []}
        self.at = ""
        self.feed(text)
        self.close()

    def handle_starttag(self, tag, attrs):
        self.elements.append((tag, dict(attrs)))
        if tag in ("script", "style"):
            self.at = tag

    def handle_endtag(self, tag):
        if tag == self.at:
            self.at = ""

    def handle_data(self, data):
        self.inside[self.at].append(data)

    @property
    def text(self) -> str:
        return " ".join(" ".join(self.inside[""]).split())

    def all_of(self, attribute: str) -> list[str]:
        return [own[attribute] or "" for _, own in self.elements if attribute in own]


def hostile() -> Result:
    result = sluice()
    job = replace(result.job, title=HOSTILE, supply=Supply(HOSTILE, "=1+1</svg><script>"))
    return replace(result, job=job)


def test_hostile_text_makes_no_element_and_no_address() -> None:
    plain = sluice()
    sections = [[Section("Said", "text")], []]
    usual = Reader(page(plain, text_of(plain), sections=sections))
    sections = [[Section(HOSTILE, f"{HOSTILE}\n\n| a |\n| --- |\n| {HOSTILE} |\n")], []]
    read = Reader(page(hostile(), text_of(hostile()), sections=sections))
    assert " ".join(HOSTILE.split()) in read.text
    assert {tag for tag, _ in read.elements} - {tag for tag, _ in usual.elements} <= {"p", "code"}
    assert [tag for tag, _ in read.elements].count("script") == 1 + len(plain.designs)
    names = {name for _, own in read.elements for name in own}
    assert not [name for name in names if name.startswith("on") or name == "style"]
    addresses = read.all_of("src") + read.all_of("href")
    assert addresses
    assert all(address.startswith(("#", "data:,")) for address in addresses)


def test_every_link_leads_to_a_heading() -> None:
    result = sluice()
    sections = [[Section("Hazards", "None."), Section("Faults", "None.")], [Section("Hazards", "")]]
    read = Reader(page(result, text_of(result), sections=sections))
    keys = read.all_of("id")
    assert len(keys) == len(set(keys))
    links = [link[1:] for link in read.all_of("href") if link.startswith("#")]
    assert set(links) <= set(keys)
    assert len(links) >= 7  # skip, what was asked, two designs with three sections, cautions
    for name in read.all_of("aria-labelledby"):
        assert name in keys


def test_the_policy_names_just_this_script_and_style() -> None:
    text = page(sluice(), text_of(sluice()))
    read = Reader(text)
    policy = next(
        own["content"]
        for tag, own in read.elements
        if tag == "meta" and own.get("http-equiv") == "Content-Security-Policy"
    )

    def named(kind: str, content: str) -> str:
        return f"{kind}-src 'sha256-{b64encode(sha256(content.encode()).digest()).decode()}'"

    style = re.search("<style>(.*?)</style>", text, re.DOTALL)
    script = re.search("<script>(.*?)</script>", text, re.DOTALL)
    assert style
    assert script
    assert named("style", style[1]) in policy
    assert named("script", script[1]) in policy
    assert policy.startswith("default-src 'none'; ")
    assert "unsafe" not in policy
    assert "http" not in text.replace('http-equiv="Content', "")


def test_the_script_gets_the_design_as_it_is() -> None:
    network = replace(STAIRS, loads={"</script><b>": "n5", "'\"\\": None})
    targets = (Target(3, 0b10010110), Target(3, 0, all_rows(3)))
    loads = tuple(Load(n, t) for n, t in zip(network.loads, targets, strict=True))
    job = Job("x", network.relays, loads, all_rows(3))
    result = Result(job, (Design("bridge", network, Bound(1, False), 8),), network.relays)
    text = page(result, text_of(result_of(STAIRS, "bridge")).replace("bridge", "x"))
    assert "LiveDrawing" in text
    text = page(result, f"# x\n\n## Bridge {result.designs[0].fingerprint}\n\nsaid\n")
    model = re.search('<script type="application/json" class="model">(.*?)</script>', text)
    assert model
    assert not set("<>&'") & set(model[1])
    found = json.loads(model[1])
    assert [load["name"] for load in found["loads"]] == list(network.loads)
    assert [load["wanted"] for load in found["loads"]] == ["01101001", "--------"]
    assert [load["net"] is None for load in found["loads"]] == [False, True]
    nets = network.nets()
    poles = [
        (found["relays"][r]["name"], nets[c], nets[m], nets[b]) for r, c, m, b in found["poles"]
    ]
    assert poles == [(p.relay, p.common, p.make, p.break_) for p in network.poles]
    assert found["nets"] == len(nets)
    assert nets[found["supply"]] == "L"
    assert found["steps"] == []


def test_the_page_holds_what_the_report_says() -> None:
    result = sluice()
    read = Reader(page(result, text_of(result)))
    for said in ("What was asked", "Loads as built", "Two-level covers", "Wiring", "Cautions"):
        assert said in read.text
    assert "UP DOWN' + FLOOD" in read.text
    assert "Emergency stops and guards need certified parts" in read.text
    assert read.text.count("Live drawing") == 2


def test_the_same_page_twice_is_the_same() -> None:
    result = hostile()
    assert page(result, text_of(result)) == page(result, text_of(result))


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("<script>alert(1)</script>", "&lt;script&gt;alert(1)&lt;/script&gt;"),
        ("[a](javascript:x)", "[a](javascript:x)"),
        ("![a](http://x.invalid/p)", "![a](http://x.invalid/p)"),
        ("<http://x.invalid>", "&lt;http://x.invalid&gt;"),
        ("a \\<b\\> \\& \\| c", "a &lt;b&gt; &amp; | c"),
        ("`<b>`", "<code>&lt;b&gt;</code>"),
        ("&#9744; \\&lt;b\\&gt; &lt;i&gt;", "☐ &amp;lt;b&amp;gt; &lt;i&gt;"),
    ],
)
def test_prose_reads_no_markup_but_its_own(text: str, shown: str) -> None:
    assert html(text, 3) == f"<p>{shown}</p>\n"


def test_prose_sets_headings_below_those_of_the_page() -> None:
    assert html("# One\n\n### Three\n", 4) == "<h4>One</h4>\n<h6>Three</h6>\n"


def test_long_tables_scroll_on_the_screen() -> None:
    def table(rows: int) -> str:
        return "| a |\n| --- |\n" + "| 1 |\n" * rows

    assert html(table(5), 3).startswith('<div class="table"><table>')
    assert html(table(100), 3).startswith('<div class="table long" tabindex="0"><table>')


def test_a_report_falls_into_its_parts() -> None:
    found = list(parts("# Title\n\nlead\n\n## One *b*\n\n### Deep\n\n- x\n\n## Two\n"))
    assert [(part.title, part.html) for part in found] == [
        ("", "<p>lead</p>\n"),
        ("One b", "<h3>Deep</h3>\n<ul>\n<li>x</li>\n</ul>\n"),
        ("Two", ""),
    ]
