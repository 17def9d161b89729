"""The catalogue: every entry against independent oracles, look-ups under free rows and turns."""

from __future__ import annotations

from itertools import permutations

import numpy as np
import oracles
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.check import prove
from contactlogic.search.catalogue import (
    FORMS,
    contacts_of,
    entries,
    from_lines,
    least_bridge,
    least_contacts,
    least_ladder,
    size,
    to_lines,
)
from contactlogic.search.catalogue_build import distribution, search
from contactlogic.search.classes import classes
from contactlogic.search.encoding import Encoding, Kind
from contactlogic.search.exact import exact
from contactlogic.search.mesh import Mesh, to_network
from contactlogic.search.problem import Problem, groupings, rows_of_grouping
from contactlogic.search.rows import merged
from contactlogic.search.solver import Session
from contactlogic.search.symmetry import break_symmetry
from contactlogic.truth import Target

RELAYS = ("A", "B", "C", "D")
LOOK_UPS = {"bridge": least_bridge, "ladder": least_ladder, "contacts": least_contacts}


def network_of(mesh, relays=RELAYS):
    return to_network(mesh, relays, ["X"])


def needed(form, table, n=4):
    """Poles or contacts of the entry for a function without free rows."""
    return size(form, LOOK_UPS[form](Target(n, table)).mesh)


def rows_turned(order, flips):
    """For each row x the row y with y_i = x_order[i], negated where `flips` says."""
    return [sum((row >> order[i] & 1 ^ flips >> i & 1) << i for i in range(4)) for row in range(16)]


def turned(table, order, flips):
    """The function that has in each row the value of `table` in the turned row."""
    return sum((table >> row & 1) << place for place, row in enumerate(rows_turned(order, flips)))


def test_there_are_402_classes_and_they_hold_every_function_once():
    # OEIS A000616: 3, 6, 22, 402 classes for n = 1 .. 4 (seen).
    leaders = classes().leaders
    relays_used = [sum(_depends(table, i) for i in range(4)) for table in leaders]
    assert [sum(used <= n for used in relays_used) for n in (1, 2, 3, 4)] == [3, 6, 22, 402]
    sources = np.array([rows_turned(o, f) for o in permutations(range(4)) for f in range(16)])
    members = [set(((table >> sources & 1) @ (1 << np.arange(16))).tolist()) for table in leaders]
    assert sum(map(len, members)) == len(set().union(*members)) == 65536
    for number, own in enumerate(members):
        assert set(classes().number[sorted(own)].tolist()) == {number}


def _depends(table, relay):
    return any((table >> row & 1) != (table >> (row ^ 1 << relay) & 1) for row in range(16))


@pytest.mark.parametrize("form", FORMS)
def test_every_entry_does_what_its_class_asks(form):
    for leader in classes().leaders:
        mesh = entries()[form, leader].mesh
        assert oracles.behaviour(network_of(mesh)) == {"X": leader}


def test_every_ladder_is_series_parallel():
    for leader in classes().leaders:
        network = network_of(entries()["ladder", leader].mesh)
        assert prove(network, {"X": Target(4, leader)}, form="ladder").ok
        edges = [(c.common, c.throw) for c in network.contacts()]
        if network.loads["X"] not in (None, network.supply):
            assert oracles.confluent(edges, network.supply, network.loads["X"])


def test_bounds_agree_with_each_other():
    for leader in classes().leaders:
        bridge, ladder, contacts = (entries()[form, leader] for form in FORMS)
        assert bridge.proved  # all least-pole bridges are
        assert bridge.at_least <= ladder.at_least <= len(ladder.mesh.poles)
        assert contacts.at_least <= contacts_of(contacts.mesh)
        assert contacts_of(contacts.mesh) <= contacts_of(bridge.mesh)
        assert bridge.at_least <= len(contacts.mesh.poles)
        for form, entry in zip(FORMS, (bridge, ladder, contacts), strict=True):
            assert entry.proved == (size(form, entry.mesh) == entry.at_least)


def every_network(n, table, poles):
    """All networks of so many poles for a load, redrawings left out, one solution at a time."""
    problem = Problem(RELAYS[:n], {"X": Target(n, table)})
    encoding = Encoding([[Kind(i) for i in range(n)]] * poles, 2, (3 * poles - 2) // 2)
    break_symmetry(encoding)
    for row in merged(rows_of_grouping(problem, next(groupings(problem)))):
        encoding.add_row(row)
    choices = [literal for kinds in encoding.kind for literal in kinds.values()]
    for side in (*encoding.common, *(side.at for side in (*encoding.make, *encoding.break_))):
        choices += side
    with Session(encoding.clauses, solver="minisat22") as session:
        while session.solve() == "sat":
            model = session.model()
            yield to_network(Mesh(encoding.decode(model), (1,)), RELAYS[:n], ["X"])
            session.add([[-literal for literal in choices if model[literal - 1] > 0]])


@pytest.mark.parametrize(
    "table", [0x16, pytest.param(0x17, marks=pytest.mark.slow), 0x1E, 0x69, 0x6B]
)
def test_no_ladder_takes_a_pole_less_where_a_bridge_does(table):
    ladder = least_ladder(Target(3, table))
    poles = len(ladder.mesh.poles)
    assert ladder.proved
    assert len(least_bridge(Target(3, table)).mesh.poles) == poles - 1
    count = 0
    for network in every_network(3, table, poles - 1):
        count += 1
        edges = [(c.common, c.throw) for c in network.contacts()]
        assert not oracles.confluent(edges, network.supply, network.loads["X"])
    assert count  # the bridges


@pytest.mark.parametrize("form", ["bridge", "contacts"])
def test_a_second_solver_refutes_one_less(form):
    # Of the classes of four relays a few with easy proofs; the demands of cofactors play no part.
    for table in (*classes().leaders[2:22], 0x0001, 0x07F2, 0x018B, 0x19F1, 0x7FFE):
        entry = entries()[form, table]
        if not entry.proved or entry.at_least > 6:
            continue
        problem = Problem(
            RELAYS,
            {"X": Target(4, table)},
            objective="contacts" if form == "contacts" else "poles",
        )
        refuted = exact(problem, most=entry.at_least - 1, solver="glucose4", catalogue=False)
        assert (refuted.network, refuted.at_least) == (None, entry.at_least)


@pytest.mark.parametrize(
    "form",
    ["bridge", "contacts", pytest.param("ladder", marks=pytest.mark.slow)],  # makes its tallies
)
def test_the_build_finds_the_shipped_entries_again(form):
    for table in (0x1717, 0x6969, 0x07F2):
        shipped = entries()[form, table]
        known = {key: entry for key, entry in entries().items() if _relays(key[1]) < 4}
        known["bridge", table] = entries()["bridge", table]
        known.pop((form, table), None)
        found = search(table, form, known, 20_000)
        assert (size(form, found.mesh), found.at_least) == (
            size(form, shipped.mesh),
            shipped.at_least,
        )
        assert oracles.behaviour(network_of(found.mesh)) == {"X": table}


def _relays(table):
    return sum(_depends(table, i) for i in range(4))


def test_the_distribution_counts_every_function():
    rows = [line.split("|")[1:-1] for line in distribution(entries()).splitlines()[2:-1]]
    for column in (1, 2, 3):
        assert sum(int(row[column].strip() or 0) for row in rows) == 65536


@pytest.mark.parametrize(("n", "most"), [(1, 1), (2, 4), (3, 8), (4, 13)])
def test_most_contacts_of_any_function(n, most):
    # OEIS A058759: 1, 4, 8, 13 for n = 1 .. 4 (seen; n = 4: Vasil'ev 1959).
    own = [table for table in classes().leaders if not any(_depends(table, i) for i in range(n, 4))]
    found = [entries()["contacts", table] for table in own]
    assert max(entry.at_least for entry in found) <= most
    worst = max(contacts_of(entry.mesh) for entry in found)
    assert worst == most if all(entry.proved for entry in found) else worst >= most


@pytest.mark.parametrize("n", [2, 3, 4])
def test_parity(n):
    # Shannon 1938: 4(n-1) contacts, drawn as 2(n-1) changeovers (seen).
    odd = sum((row.bit_count() & 1) << row for row in range(1 << n))
    assert needed("bridge", odd, n) == 2 * (n - 1)
    assert needed("contacts", odd, n) <= 4 * (n - 1)


@settings(deadline=None, max_examples=40)
@given(
    table=st.integers(0, 65535),
    order=st.permutations(range(4)),
    flips=st.integers(0, 15),
)
def test_turning_a_function_turns_its_network(table, order, flips):
    image = turned(table, order, flips)
    for form, look_up in LOOK_UPS.items():
        entry = look_up(Target(4, image))
        assert oracles.behaviour(network_of(entry.mesh)) == {"X": image}
        assert size(form, entry.mesh) == needed(form, table)
        assert entry.at_least == look_up(Target(4, table)).at_least


@settings(deadline=None, max_examples=25)
@given(table=st.integers(0, 65535), rows=st.sets(st.integers(0, 15), max_size=6))
def test_free_rows_give_the_best_of_all_completions(table, rows):
    free = sum(1 << row for row in rows)
    on = table & ~free
    fillings = [
        sum((k >> i & 1) << row for i, row in enumerate(rows)) for k in range(1 << len(rows))
    ]
    for form, look_up in LOOK_UPS.items():
        entry = look_up(Target(4, on, free))
        (wired,) = oracles.behaviour(network_of(entry.mesh)).values()
        assert wired & ~free == on
        filled = [look_up(Target(4, on | filling)) for filling in fillings]
        assert size(form, entry.mesh) == min(size(form, other.mesh) for other in filled)
        assert entry.at_least == min(other.at_least for other in filled)
        if form != "contacts":
            assert _worth(form, entry) == min(_worth(form, other) for other in filled)


def _worth(form, entry):
    """Poles and ties; of ladders the contacts come right after the poles."""
    network = network_of(entry.mesh)
    poles, *ties = network.cost()
    contacts = sum(1 for _ in network.contacts())
    return (poles, contacts, *ties) if form == "ladder" else (poles, *ties)


def test_constants_take_no_poles():
    for look_up in LOOK_UPS.values():
        assert look_up(Target(3, 0)).mesh.feeds == (None,)
        assert look_up(Target(3, 255)).mesh.feeds == (0,)
        assert look_up(Target(3, 0, 0b1010)).mesh.feeds == (None,)
        assert look_up(Target(3, 0b101, 0b11111010)).mesh.feeds == (0,)


def test_relays_that_do_not_matter_are_passed_over():
    # Of six relays the load depends on the second, fourth and sixth: at least two of three.
    relays = ("A", "B", "C", "D", "E", "F")
    table = sum(((row >> 1 & 1) + (row >> 3 & 1) + (row >> 5 & 1) >= 2) << row for row in range(64))
    for look_up in LOOK_UPS.values():
        entry = look_up(Target(6, table))
        assert oracles.behaviour(network_of(entry.mesh, relays)) == {"X": table}
    five = sum((row.bit_count() & 1) << row for row in range(32))
    assert least_bridge(Target(5, five)) is None


def test_the_table_reads_back_as_written():
    lines = to_lines(entries())
    assert len(lines) == 400 * len(FORMS)
    assert from_lines(lines) == entries()
