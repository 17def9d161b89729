"""Expansion, wanted drives and loads, memory and patterns."""

from __future__ import annotations

import random
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sequence.stepping import Sequencer, from_targets

from contactlogic.errors import JobFileError, TableError
from contactlogic.job.model import Limits, LoadFacts, PatternJob, SequenceJob, Supply
from contactlogic.job.sequence import (
    Branch,
    Pattern,
    Row,
    SequenceTable,
    Timing,
    state_text,
)
from contactlogic.sequence.memory import resolve
from contactlogic.sequence.pattern import choose_relays, cyclic_code, sequence_of
from contactlogic.sequence.steps import ambiguities, expand
from contactlogic.sequence.wants import (
    drive_targets,
    ends,
    load_targets,
    ways,
)


def table(columns, rows, loads="", **others):
    """A sequence from text: `rows` like "1100|0 0110|1"."""
    listed = []
    for row in rows.split():
        left, _, right = row.partition("|")
        values = tuple(None if c == "-" else int(c) for c in right)
        listed.append(Row(tuple(map(int, left)), values))
    slow = Timing(
        tuple(others.pop("slow_release", "").split()), tuple(others.pop("slow_operate", "").split())
    )
    return SequenceTable(
        tuple(columns.split()), tuple(loads.split()), tuple(listed), timing=slow, **others
    )


def states(expansion):
    return [state_text(step.state, len(expansion.columns)) for step in expansion.steps]


RING = table("A B C D", "1100|0 0110|1 0011|0 1001|1", "STRIKE", slow_release="A B C D")


def test_a_ring_releases_slowly_before_the_next_relay_operates():
    listed = expand(RING)
    assert states(listed) == ["1100", "0100", "0110", "0010", "0011", "0001", "1001", "1000"]
    assert [step.loads for step in listed.steps[:4]] == [(0,), (None,), (1,), (None,)]
    assert [listed.dwells(step) for step in listed.steps] == [True, False] * 4
    assert ends(listed) == tuple(step.state for step in listed.steps)


def test_drives_hold_except_slow_ones_while_a_quick_relay_moves():
    targets = drive_targets(expand(RING))
    here, passing = 0b0011, 0b0010  # A and B operated; then B alone, while C operates
    a, b, c, d = (targets[name] for name in "ABCD")
    assert [t.on >> here & 1 for t in (a, b, c, d)] == [0, 1, 0, 0]
    assert not any(t.free >> here & 1 for t in (a, b, c, d))
    assert [t.on >> passing & 1 for t in (a, c, d)] == [0, 1, 0]
    assert [t.free >> passing & 1 for t in (a, b, c, d)] == [0, 1, 0, 0]
    assert a.free.bit_count() == 8 + 1  # unlisted states, and where A alone is left by B's move
    assert load_targets(expand(RING))["STRIKE"].on == 1 << 0b0110 | 1 << 0b1001


def test_inputs_move_first_then_slow_then_quick_relays():
    listed = expand(table("Q P S", "000 111", slow_operate="S", inputs=("P",), slow_release="Q S"))
    assert states(listed) == ["000", "010", "011", "111", "101", "001"]
    assert listed.waits(listed.steps[0])
    targets = drive_targets(listed)
    assert set(targets) == {"Q", "S"}
    for target in targets.values():  # everything holds while the input is awaited
        assert not target.free >> 0b000 & 1
        assert not target.on >> 0b000 & 1


def test_a_branch_leaves_a_waiting_row_by_its_own_input():
    sequence = table(
        "P Q A B",
        "0000 1010 0010 0101",
        inputs=("P", "Q"),
        branches=(Branch(1, "Q", 4),),
        repeat=True,
    )
    listed = expand(sequence)
    first = listed.steps[0]
    assert [listed.columns[m] for m in first.movers] == ["P", "Q"]
    assert ways(listed)[0] == (0b0001, 0b0010)
    branch = listed.steps[dict(first.leaving)[1]]
    assert state_text(branch.state, 4) == "0100"


def test_a_sequence_that_runs_once_ends_at_rest():
    listed = expand(table("A B", "00 10 11", repeat=False))
    assert ends(listed) == (0b11,)
    assert listed.steps[-1].leaving == ()
    assert drive_targets(listed)["A"].on >> 0b11 & 1


@pytest.mark.parametrize(
    ("sequence", "message"),
    [
        (table("A B", "10 10 01"), "rows 1 and 2 differ by no relay"),
        (table("A B", "10 01 10"), "repeats by itself"),
        (table("A B", "10"), "at least two rows"),
        (table("A B", "10 01", inputs=("C",)), "names C, which is no column"),
        (table("A B", "10 01", slow_release="C"), "names C, which is no column"),
        (table("A B", "10 01", inputs=("A",), slow_release="A"), "cannot be slow"),
        (table("P A", "00 11", inputs=("P",), branches=(Branch(1, "P", 9),)), "rows 1 to 2"),
        (table("P A", "00 11", inputs=("P",), branches=(Branch(1, "A", 2),)), "is no input"),
        (table("P A", "00 11", inputs=("P",), branches=(Branch(1, "P", 2),)), "same move of P"),
        (
            table("P A B", "000 010 110", inputs=("P",), branches=(Branch(1, "P", 3),)),
            "does not wait",
        ),
        (
            table("P Q A", "000 101 010", inputs=("P", "Q"), branches=(Branch(1, "Q", 2),)),
            "row 2 has Q = 0",
        ),
    ],
)
def test_sequences_that_cannot_be_used_say_why(sequence, message):
    with pytest.raises(TableError) as error:
        expand(sequence)
    assert message in str(error.value)


def test_another_order_is_tried_before_memory():
    # Quick moves in column order would pass 00 twice, wanting A the one time and B the other.
    sequence = table("A B C", "100 001 010 111")
    assert ambiguities(expand(sequence)) or not expand(sequence).notes
    done = resolve(sequence)
    assert not ambiguities(done)
    assert not done.memory


def test_forbidden_memory_names_the_rows():
    sequence = table("A", "1|1 0|0 1|0 0|1", "X", memory="forbidden")
    with pytest.raises(TableError) as error:
        resolve(sequence)
    assert "occurs in row 1 and in row 3" in str(error.value)
    assert 'memory = "allowed"' in str(error.value)


def test_drives_that_are_wired_cannot_be_given_memory():
    sequence = table("A", "1|1 0|0 1|0 0|1", "X")
    with pytest.raises(TableError) as error:
        resolve(sequence, wired=True)
    assert "memory =" not in str(error.value)
    assert "a column, with its drive" in str(error.value)


@pytest.mark.parametrize(("times", "relays"), [(1, 0), (2, 2), (3, 3), (4, 3), (5, 4)])
def test_each_move_of_a_toggling_relay_needs_its_own_setting_of_the_memory(times, relays):
    # Two moves under one setting would pass the same two states: 2 * times settings, by hand.
    rows = []
    for k in range(times):
        lamps = "".join(str(int(k == j)) for j in range(times))
        rows += [f"1|{lamps}", f"0|{lamps}"]
    done = resolve(table("A", " ".join(rows), " ".join(f"X{k}" for k in range(times))))
    assert len(done.memory) == relays
    assert not ambiguities(done)


@st.composite
def sequences(draw):
    n = draw(st.integers(2, 4))
    count = draw(st.integers(2, 7))
    numbers = [draw(st.integers(0, 2**n - 1))]
    for _ in range(count - 1):
        numbers.append(draw(st.integers(0, 2**n - 1).filter(lambda s: s != numbers[-1])))
    repeat = draw(st.booleans()) and numbers[0] != numbers[-1]
    loads = draw(st.lists(st.integers(0, 1), min_size=count, max_size=count))
    names = tuple("ABCD"[:n])
    rows = tuple(
        Row(tuple(s >> i & 1 for i in range(n)), (x,)) for s, x in zip(numbers, loads, strict=True)
    )
    some = st.lists(st.sampled_from(names), unique=True).map(tuple)
    inputs = draw(some)[: n - 1]
    slow = [tuple(x for x in draw(some) if x not in inputs) for _ in range(2)]
    return SequenceTable(
        names, ("X",), rows, repeat=repeat, inputs=inputs, timing=Timing(slow[0], slow[1])
    )


@given(sequences(), st.integers(0, 2**32))
@settings(max_examples=80)
def test_whatever_is_free_the_expanded_list_is_what_happens(sequence, seed):
    done = resolve(sequence)
    n = len(done.columns)
    targets = drive_targets(done)
    dice = random.Random(seed)
    free = {name: dice.getrandbits(2**n) for name in targets}
    slow = {(name, "release") for name in done.timing.slow_release}
    slow |= {(name, "operate") for name in done.timing.slow_operate}
    start = [int(c) for c in state_text(done.steps[0].state, n)]
    box = Sequencer(done.columns, from_targets(targets, done.columns, free), slow, start)
    loads = load_targets(done)["X"]
    seen = []
    step = done.steps[0]
    for _ in range(2 * len(done.steps)):
        here = sum(v << i for i, v in enumerate(box.state()))
        assert here == step.state
        if not step.inserted:
            seen.append((box.state()[: len(sequence.columns)], loads.on >> here & 1))
        if not step.leaving:
            assert not box.pending()
            break
        mover = done.columns[step.movers[0]]
        if mover in done.inputs:
            assert not box.pending()
            box.turn(mover)
        else:
            assert box.pending() == [mover]
            box.step()
        step = done.steps[step.leaving[0][1]]
    listed = [(row.columns, row.loads[0]) for row in sequence.rows]
    assert seen[: len(listed)] == listed
    if not sequence.repeat:
        assert seen == listed


@pytest.mark.parametrize("length", range(2, 66, 2))
def test_cyclic_codes_change_one_relay_at_a_time_with_the_fewest(length):
    code = cyclic_code(length)
    assert len(set(code)) == length
    for here, there in zip(code, code[1:] + code[:1], strict=True):
        assert (here ^ there).bit_count() == 1
    assert max(code) < 2 ** (length - 1).bit_length()


@pytest.mark.parametrize("stepping", ["slow", "ring", "pulse"])
@pytest.mark.parametrize("count", range(2, 25))
def test_patterns_run_through_their_steps(stepping, count):
    rows = tuple((k == 0, k % 2) for k in range(count))
    rows = tuple((int(a), b) for a, b in rows)
    choice = choose_relays(Pattern(("FIRST", "ODD"), rows, stepping))
    done = resolve(choice.table)
    assert not done.memory
    assert len(ends(done)) == len(done.steps)
    n = len(done.columns)
    bits = (count - 1).bit_length()
    assert n == {"slow": bits, "ring": count, "pulse": bits + 2}[stepping]
    # The loads of the states that last are those of the pattern, in order.
    lasting = [s.loads for s in done.steps if done.dwells(s)]
    if stepping == "pulse":  # a step lasts with the pulse operated and again with it released
        lasting = [lasting[0], *lasting[1::2]]
        assert len(lasting) == count + 1
        lasting.pop()
    assert lasting == list(rows)
    if stepping != "pulse":
        odd = count % 2 and stepping == "slow"
        extra = sum(not done.dwells(step) for step in done.steps)
        assert extra == {"slow": int(odd), "ring": count}[stepping]
        assert (count > 2 and not odd) or any("extra" in note for note in choice.notes) or not extra


def test_a_pattern_of_one_step_is_refused():
    with pytest.raises(TableError, match="at least two steps"):
        choose_relays(Pattern(("X",), ((1,),), "slow"))


def test_a_pattern_job_keeps_what_it_states():
    pattern = Pattern(("RED", "GREEN"), ((1, 0), (0, 1), (1, 1)), "ring")
    supply, limits = Supply("+24 V"), Limits(poles={"A": 2})
    job = PatternJob("Lights", pattern, supply, {"RED": LoadFacts("lamp")}, limits, "lights.toml")
    made, choice = sequence_of(job)
    assert made == SequenceJob("Lights", choice.table, supply, job.facts, limits, "lights.toml")
    with pytest.raises(JobFileError) as caught:
        sequence_of(replace(job, limits=Limits(poles={"K9": 2})))
    assert str(caught.value) == (
        "lights.toml, [limits]: there is no relay K9 among those chosen for the pattern\n"
        "  expected: one of A, B, C"
    )


def test_many_transitions_are_turned_round_alike():
    # one relay hands on to the next: released first, each passes the state with none operated
    n = 14
    rows = [" ".join(str(int(i == k)) for i in range(n)) for k in range(n)]
    names = " ".join(f"K{k}" for k in range(n))
    done = resolve(table(names, " ".join(row.replace(" ", "") for row in rows)))
    assert done.memory == ()
    assert len(done.notes) == 1
    assert "from row 2 K2, then K1; from row 3" in done.notes[0]
    assert len(done.steps) == 2 * n
    assert sorted(step.state.bit_count() for step in done.steps) == [1] * n + [2] * n
