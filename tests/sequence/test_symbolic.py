"""Decision diagrams against bits, and traps against attractors of a reference library."""

from __future__ import annotations

import biodivine_aeon
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contactlogic.job.sequence import Row, SequenceTable, Timing
from contactlogic.sequence.drives import TableDrives
from contactlogic.sequence.motion import MoveRules, build_motion
from contactlogic.sequence.prove import prove_drives
from contactlogic.sequence.recovery import recover
from contactlogic.sequence.steps import expand
from contactlogic.sequence.symbolic import symbolic_motion
from contactlogic.sequence.traps import traps


@st.composite
def networks(draw, most):
    """For each of up to `most` relays the relays it looks at and a truth table of them."""
    n = draw(st.integers(1, most))
    relays = []
    for _ in range(n):
        seen = draw(st.lists(st.integers(0, n - 1), max_size=3, unique=True))
        relays.append((seen, draw(st.integers(0, 2**2 ** len(seen) - 1))))
    return relays


def terms(relay):
    """The rows in which a relay's drive is on, as lists of (column, value)."""
    seen, table = relay
    rows = [row for row in range(2 ** len(seen)) if table >> row & 1]
    return [[(column, row >> k & 1) for k, column in enumerate(seen)] for row in rows]


def truth(relay, n):
    """Truth table of a relay's drive: column `i` is on in every second run of `2**i` rows."""
    names = [str(i) for i in range(n)]
    columns = {str(i): sum(1 << s for s in range(2**n) if s >> i & 1) for i in range(n)}
    return drive(relay, names)(columns) & (1 << 2**n) - 1


def drive(relay, names):
    def fed(values):
        some = values[names[0]]
        total = some ^ some
        for row in terms(relay):
            product = some | ~some
            for column, value in row:
                product = product & (values[names[column]] if value else ~values[names[column]])
            total = total | product
        return total

    return fed


def attractors(relays):
    """Asynchronous attractors as sets of states, by the reference library."""
    lines = ["targets,factors"]
    for i, relay in enumerate(relays):
        rows = [
            " & ".join(("" if v else "!") + f"x{c:02}" for c, v in row) or "true"
            for row in terms(relay)
        ]
        lines.append(f"x{i:02}, " + (" | ".join(f"({row})" for row in rows) or "false"))
    model = biodivine_aeon.BooleanNetwork.from_bnet("\n".join(lines)).infer_valid_graph()
    graph = biodivine_aeon.AsynchronousGraph(model)
    found = set()
    for attractor in biodivine_aeon.Attractors.attractors(graph):
        states = []
        for vertex in attractor.vertices():
            values = vertex.to_named_dict()
            states.append(sum(int(bool(values[f"x{i:02}"])) << i for i in range(len(relays))))
        found.add(frozenset(states))
    return found


@given(networks(10))
@settings(max_examples=200)
def test_traps_are_the_asynchronous_attractors(relays):
    n = len(relays)
    tables = tuple(truth(relay, n) for relay in relays)
    space = build_motion(MoveRules(n), TableDrives(n, tables))
    found = {frozenset(space.listing(trap, 2**n)) for trap in traps(space)}
    assert found == attractors(relays)


@given(networks(6), st.data())
@settings(max_examples=80)
def test_diagrams_and_bits_agree(relays, data):
    n = len(relays)
    names = tuple("ABCDEF"[:n])
    chosen = st.sets(st.integers(0, n - 1))
    outside = tuple(sorted(data.draw(chosen)))[: n - 1]
    slow = [data.draw(chosen) - set(outside) for _ in range(2)]
    waiting = {}
    if outside:
        waiting = data.draw(
            st.dictionaries(st.integers(0, 2**n - 1), st.sets(st.sampled_from(outside)), max_size=2)
        )
    rules = MoveRules(n, *slow, inputs=outside, waiting=waiting)
    tables = tuple(None if i in outside else truth(r, n) for i, r in enumerate(relays))
    fed = {names[i]: drive(r, names) for i, r in enumerate(relays) if i not in outside}
    diagrams = symbolic_motion(
        rules, names, lambda position: {name: f(position) for name, f in fed.items()}
    )
    assert recover(diagrams, names) == recover(build_motion(rules, TableDrives(n, tables)), names)


def counting_ring(n):
    """A ring that lets a relay operate only beside its neighbour alone: it starts itself."""
    names = tuple(f"R{i}" for i in range(n))

    def neighbour(j):
        def fed(values):
            one = values[names[j - 1]]
            for k, name in enumerate(names):
                if k not in (j, (j - 1) % n):
                    one = one & ~values[name]
            if j:
                return one
            nothing = ~values[names[0]]
            for name in names:
                nothing = nothing & ~values[name]
            return one | nothing

        return fed

    rows = tuple(Row(tuple(int(i in (k, (k + 1) % n)) for i in range(n))) for k in range(n))
    timing = Timing(slow_release=names)
    table = SequenceTable(names, (), rows, timing=timing)
    return names, {names[j]: neighbour(j) for j in range(n)}, timing, expand(table)


@pytest.mark.parametrize("n", [8, 12, 32, 40])
def test_a_ring_that_starts_itself_is_proved_at_any_size(n):
    names, drives, timing, expansion = counting_ring(n)
    found = prove_drives(names, drives, timing, expansion)
    assert found.verdict == "recovers"
    assert found.traps[0].states == 2 * n
    assert found.traps[0].reached_from == 2**n
    assert found.slowest.start == 2**n - 1
    assert found.slowest.moves == n - 1
