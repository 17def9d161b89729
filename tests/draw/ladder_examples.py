"""Ladder networks written by hand, for looking at and for golden text."""

from __future__ import annotations

from collections.abc import Mapping

from contactlogic.network import Network, Pole

Edge = tuple[str, str, str | None, str | None]  # relay, common, make, break


def ladder(relays: str, edges: list[Edge], loads: Mapping[str, str | None]) -> Network:
    """A network with its poles numbered per relay and sorted; the supply is net L."""
    names = tuple(relays.split())
    count = dict.fromkeys(names, 0)
    poles = []
    for relay, common, make, break_ in sorted(edges, key=lambda e: names.index(e[0])):
        count[relay] += 1
        poles.append(Pole(relay, count[relay], common, make, break_))
    network = Network(names, "L", loads, tuple(poles))
    network.assert_consistent()
    return network


def sluice() -> Network:
    """Two rungs, a parallel branch, a changeover shared by the rungs at the rail."""
    edges: list[Edge] = [
        ("UP", "L", "a", "b"),
        ("DOWN", "a", None, "lamp"),
        ("DOWN", "b", "horn", None),
        ("FLOOD", "L", "lamp", None),
    ]
    return ladder("UP DOWN FLOOD", edges, {"LAMP": "lamp", "HORN": "horn"})


def staircase() -> Network:
    """A B' + A' B as two changeovers."""
    edges: list[Edge] = [("UP", "L", "x", "y"), ("DOWN", "n", "y", "x")]
    return ladder("UP DOWN", edges, {"LAMP": "n"})


def nested() -> Network:
    """Parallel groups three deep."""
    edges: list[Edge] = [
        ("A", "L", "p", None),
        ("B", "p", "q", None),
        ("C", "p", None, "q"),
        ("D", "q", "r", None),
        ("E", "p", "r", None),
        ("F", "L", None, "r"),
        ("G", "r", "z", None),
        ("H", "L", "s", None),
        ("A", "s", None, "z"),
        ("B", "s", None, "t"),
        ("D", "t", "z", None),
    ]
    return ladder("A B C D E F G H", edges, {"PUMP": "z"})


def taps() -> Network:
    """Loads tapped from a top-level joint, from inside a branch, and a chain of taps."""
    edges: list[Edge] = [
        ("A", "L", "p", None),
        ("B", "p", "q", None),
        ("C", "q", None, "x"),
        ("D", "p", "i", None),
        ("E", "i", "q", None),
        ("F", "i", "y", None),
        ("G", "p", None, "z"),
        ("H", "z", "w", None),
        ("B", "q", None, "v"),
        ("C", "L", "u", None),
    ]
    return ladder(
        "A B C D E F G H",
        edges,
        {"X": "x", "Y": "y", "Z": "z", "W": "w", "V": "v", "BELL": "v", "U": "u"},
    )


def out_of_reach() -> Network:
    """Three branches with a tap each: one of them cannot be drawn without a crossing."""
    edges: list[Edge] = [
        ("A", "L", "p", None),
        ("B", "p", "x", None),
        ("C", "L", "q", None),
        ("D", "q", "x", None),
        ("E", "L", "r", None),
        ("F", "r", "x", None),
        ("G", "p", "y", None),
        ("H", "q", "z", None),
        ("A", "r", None, "w"),
    ]
    return ladder("A B C D E F G H", edges, {"X": "x", "Y": "y", "Z": "z", "W": "w"})


def one_of_ten() -> Network:
    """Ten loads on a tree of changeovers."""
    edges: list[Edge] = [
        ("R8", "L", "h", "l"),
        ("R4", "l", "l4", "l0"),
        ("R2", "l4", "l6", "l44"),
        ("R2", "l0", "l2", "l00"),
        ("R1", "l6", "d7", "d6"),
        ("R1", "l44", "d5", "d4"),
        ("R1", "l2", "d3", "d2"),
        ("R1", "l00", "d1", "d0"),
        ("R1", "h", "d9", "d8"),
    ]
    return ladder("R1 R2 R4 R8", edges, {f"LAMP{i}": f"d{i}" for i in range(10)})


def large() -> Network:
    """Twelve loads, thirty poles."""
    names = "START STOP HIGH LOW DOOR GUARD FLOW HEAT AUTO HAND"
    relays = names.split()
    edges: list[Edge] = []
    loads: dict[str, str | None] = {}
    for i in range(10):
        a, b, c = (relays[(i * k + k) % 10] for k in (1, 3, 7))
        edges.append((a, "L", f"n{i}", None))
        edges.append((b, f"n{i}", f"m{i}", None) if i % 3 else (b, f"n{i}", None, f"m{i}"))
        edges.append((c, "L" if i % 2 else f"n{i}", None, f"m{i}"))
        loads[f"OUT{i}"] = f"m{i}"
    loads["SPARE"] = None
    loads["POWER"] = "L"
    return ladder(names, edges, loads)


def single() -> Network:
    """One contact."""
    return ladder("KEY", [("KEY", "L", "n", None)], {"BELL": "n"})


def constants() -> Network:
    """No contact at all: one load always on, one never."""
    return ladder("KEY", [], {"PILOT": "L", "ALARM": None})


def unwired() -> Network:
    """Many loads that are never on, enough for panels without any contact."""
    return ladder("KEY", [], {f"LAMP{i}": None for i in range(12)} | {"PILOT": "L"})


def long_series() -> Network:
    """Twelve contacts in series."""
    names = " ".join(f"K{i}" for i in range(1, 13))
    nets = ["L", *(f"n{i}" for i in range(1, 12)), "z"]
    edges: list[Edge] = [
        (f"K{i + 1}", nets[i], nets[i + 1], None)
        if i % 3
        else (f"K{i + 1}", nets[i + 1], None, nets[i])
        for i in range(12)
    ]
    return ladder(names, edges, {"READY": "z"})


EXAMPLES = {
    make.__name__: make
    for make in (
        sluice,
        staircase,
        nested,
        taps,
        out_of_reach,
        one_of_ten,
        large,
        single,
        constants,
        unwired,
        long_series,
    )
}

KINDS = {
    "LAMP": "lamp",
    "HORN": "horn",
    "PUMP": "motor",
    "X": "coil",
    "Y": "valve",
    "Z": "lamp",
    "BELL": "horn",
    "READY": "lamp",
    "OUT1": "valve",
    "OUT2": "coil",
} | {f"LAMP{i}": "lamp" for i in range(10)}
