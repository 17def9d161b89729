"""Designs to show on pages: drawn up by hand, so that no search is needed."""

from __future__ import annotations

import random
from dataclasses import replace

import handmade
import oracles

from contactlogic.design import Bound, Design, Result
from contactlogic.job.model import Job, Limits, Load
from contactlogic.network import Network, Pole
from contactlogic.report.facts import facts
from contactlogic.report.markdown import report
from contactlogic.truth import Target, all_rows

HOSTILE = (
    '=HYPERLINK("http://x.invalid/","y") </script><script>alert(1)</script> '
    "<img src=x onerror=alert(2)> \\ ' & `{{ 7 * 7 }}` <!-- ![p](http://x.invalid/p) [l](/l) "
)

# Three travelling switches for one lamp, as a bridge with a sneak path that is wanted; with a horn.
STAIRS = Network(
    ("A", "B", "C"),
    "L",
    {"LAMP": "n5", "HORN": "n1"},
    (
        Pole("A", 1, "L", "n1", "n2"),
        Pole("B", 1, "n1", "n3", "n4"),
        Pole("B", 2, "n2", "n4", "n3"),
        Pole("C", 1, "n5", "n3", "n4"),
    ),
)


def result_of(network: Network, form: str, title: str = "By hand", **facts_of_job) -> Result:
    """A result whose job wants just what a network does."""
    relays = network.relays
    n = len(relays)
    loads = tuple(
        Load(name, Target(n, table)) for name, table in oracles.behaviour(network).items()
    )
    job = Job(title, relays, loads, all_rows(n), limits=Limits(isolate="none"), **facts_of_job)
    design = Design(form, network, Bound(1, False), 1 << n)
    return Result(job, (design,), relays)


def sluice() -> Result:
    """Ladder and bridge of one job, with free cells."""
    bridge = replace(handmade.SLUICE_DESIGN, form="bridge")
    return replace(handmade.SLUICE_RESULT, designs=(handmade.SLUICE_DESIGN, bridge))


def crowded(poles: int = 25, relays: int = 6, nets: int = 14, seed: int = 4) -> Network:
    """A large network with changeovers, drawn by lot."""
    lot = random.Random(seed)
    names = tuple(f"K{i + 1}" for i in range(relays))
    points = ["L", *(f"n{i}" for i in range(1, nets))]
    ends = []
    for k in range(poles):
        common, make, rest = lot.sample(points, 3)
        if k < nets - 1:  # every net is met
            make = points[k + 1] if points[k + 1] != common else make
        alone = lot.random() < 0.3
        ends.append((names[k % relays], common, make, None if alone or rest == make else rest))
    found = []
    for name in names:
        own = [end for end in ends if end[0] == name]
        found += [Pole(name, i, *end[1:]) for i, end in enumerate(own, start=1)]
    loads = {f"LAMP{i}": point for i, point in enumerate(points[-5:], start=1)}
    return Network(names, "L", loads, tuple(found))


def text_of(result: Result) -> str:
    """The report that goes on a page."""
    return report(result, [facts(design, result.repeaters) for design in result.designs])


# Four relays that release slowly, in a ring; found by a search and proved to start itself.
RING_JOB = """
title = "Ring"
[sequence]
columns = "NORTH EAST SOUTH WEST | BELL"
rows = \"\"\"
1 1 0 0 | 0
0 1 1 0 | 1
0 0 1 1 | 0
1 0 0 1 | 1
\"\"\"
repeat = true
[timing]
slow_release = "NORTH EAST SOUTH WEST"
"""

RING = Network(
    ("NORTH", "EAST", "SOUTH", "WEST"),
    "L",
    {"NORTH": "n8", "EAST": "n9", "SOUTH": "n5", "WEST": "n6", "BELL": "n3"},
    (
        Pole("NORTH", 1, "L", "n1", "n2"),
        Pole("EAST", 1, "n3", "n4", "n1"),
        Pole("EAST", 2, "n2", "n5", "n6"),
        Pole("SOUTH", 1, "L", "n4", "n7"),
        Pole("WEST", 1, "n7", "n8", "n9"),
    ),
)
