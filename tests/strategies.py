"""Hypothesis strategies shared by all tests."""

from __future__ import annotations

import re
from collections.abc import Sequence

from hypothesis import strategies as st

from contactlogic.network import Network, Pole
from contactlogic.truth import Target, all_rows

RELAYS = ("A", "B", "C", "D", "E", "F")
LOADS = ("X", "Y", "Z")


def tables(n: int) -> st.SearchStrategy[int]:
    """Truth tables over `n` inputs."""
    return st.integers(0, all_rows(n))


@st.composite
def targets(draw: st.DrawFn, n: int, *, free: bool = True) -> Target:
    """What one load must do, with free rows unless told otherwise."""
    on = draw(tables(n))
    may = draw(st.one_of(st.just(0), tables(n))) if free else 0
    return Target(n, on & ~may, may)


@st.composite
def several_targets(
    draw: st.DrawFn, n: int, *, most: int = 3, free: bool = True
) -> dict[str, Target]:
    """What one to `most` loads must do, by load name."""
    names = LOADS[: draw(st.integers(1, min(most, len(LOADS))))]
    return {name: draw(targets(n, free=free)) for name in names}


def relay_names() -> st.SearchStrategy[str]:
    """Names a job accepts: letters, digits and `_` with a letter, and no vote such as 2oo3."""
    names = st.from_regex(r"\A[A-Za-z0-9_]{1,8}\Z")
    return names.filter(
        lambda name: bool(re.search("[A-Za-z]", name)) and not re.fullmatch(r"(?i)\d+oo\d+", name)
    )


def relay_columns(n: int) -> st.SearchStrategy[tuple[str, ...]]:
    """`n` relay names that differ in more than case."""
    return st.lists(relay_names(), min_size=n, max_size=n, unique_by=str.lower).map(tuple)


def numbered(relays: Sequence[str], ends: Sequence[tuple[str, str, str | None, str | None]]):
    """Poles sorted and numbered per relay, from (relay, common, make, break)."""
    poles = []
    for relay in relays:
        own = [end for end in ends if end[0] == relay]
        poles += [Pole(*end[:1], number, *end[1:]) for number, end in enumerate(own, start=1)]
    return tuple(poles)


@st.composite
def networks(
    draw: st.DrawFn,
    *,
    relays: int = 3,
    poles: int = 6,
    nets: int = 5,
    loads: int = 2,
) -> Network:
    """Networks of any form: sneak paths, dead ends, loops and constant loads included."""
    names = RELAYS[: draw(st.integers(1, relays))]
    points = ("L", *(f"n{i}" for i in range(1, nets)))
    net = st.sampled_from(points)
    pole = st.tuples(st.sampled_from(names), net, st.none() | net, st.none() | net).filter(
        lambda end: end[2] is not None or end[3] is not None
    )
    ends = draw(st.lists(pole, max_size=poles))
    fed = {load: draw(st.one_of(net, st.none())) for load in LOADS[: draw(st.integers(1, loads))]}
    return Network(names, "L", fed, numbered(names, ends))


@st.composite
def series_parallel_networks(draw: st.DrawFn, *, relays: int = 3, contacts: int = 7) -> Network:
    """One load fed over single contacts joined by series and parallel steps alone."""
    names = RELAYS[:relays]
    edges = [("L", "n1")]
    for fresh in range(2, 1 + draw(st.integers(1, contacts))):
        place = draw(st.integers(0, len(edges) - 1))
        start, end = edges[place]
        if draw(st.booleans()):
            edges[place : place + 1] = [(start, f"n{fresh}"), (f"n{fresh}", end)]
        else:
            edges.append((start, end))
    ends = []
    for start, end in edges:
        relay, make, turned = draw(st.tuples(st.sampled_from(names), st.booleans(), st.booleans()))
        common, throw = (end, start) if turned else (start, end)
        ends.append((relay, common, throw if make else None, None if make else throw))
    return Network(names, "L", {"X": "n1"}, numbered(names, ends))
