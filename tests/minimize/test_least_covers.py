"""Covers proved least, against brute force and other people's minimisers."""

from __future__ import annotations

import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from minimize.plain_covers import cheapest_unions, covered, least_cost, least_covers, prime_cubes
from pyeda.boolalg.minimization import espresso_tts
from pyeda.boolalg.table import truthtable
from pyeda.inter import ttvars
from strategies import targets
from sympy import symbols
from sympy.logic.boolalg import Not, SOPform

from contactlogic.minimize import Cover, Cube, cover, covers
from contactlogic.minimize.primes import primes
from contactlogic.truth import Target, all_rows

NAMES = "ABCDEFGHIJ"


@pytest.fixture(scope="module")
def unions():
    return cheapest_unions(3)


def as_text(cube: Cube, n: int) -> str:
    """A cube in the marks of the plain covers."""
    marks = {(0, 0): "-", (1, 0): "0", (1, 1): "1"}
    return "".join(marks[cube.care >> i & 1, cube.value >> i & 1] for i in range(n))


def conducts(text: str, kind: str, n: int) -> int:
    """Truth table of a cover's text, read afresh."""
    table = 0
    for row in range(2**n):
        closed = {"0": False, "1": True}
        for i in range(n):
            closed[NAMES[i]] = bool(row >> i & 1)
            closed[NAMES[i] + "'"] = not row >> i & 1
        if kind == "sop" or (" + " in text and "(" not in text):
            on = any(all(closed[c] for c in term.split()) for term in text.split(" + "))
        else:
            sums = re.findall(r"\(([^)]*)\)|(\S+)", text)
            on = all(any(closed[c] for c in (a or b).split(" + ")) for a, b in sums)
        table |= on << row
    return table


def assert_least(found: Cover, expected: tuple[int, int], target: Target) -> None:
    assert found.proved
    assert target.accepts(found.table())
    assert (found.literals, found.terms) == expected


class TestAgainstBruteForce:
    def test_every_function_of_three_inputs(self, unions):
        for on in range(256):
            target = Target(3, on)
            assert_least(cover(target, "sop"), least_cost(unions, on, 0), target)
            assert_least(cover(target, "pos"), least_cost(unions, 255 & ~on, 0), target)

    def test_three_inputs_with_free_rows(self, unions):
        for sample in range(0, 3**8, 11):
            marks = [sample // 3**row % 3 for row in range(8)]
            on = sum(1 << row for row, mark in enumerate(marks) if mark == 1)
            free = sum(1 << row for row, mark in enumerate(marks) if mark == 2)
            target = Target(3, on, free)
            assert_least(cover(target, "sop"), least_cost(unions, on, free), target)
            assert_least(cover(target, "pos"), least_cost(unions, target.off, free), target)

    @pytest.mark.slow
    def test_functions_of_four_inputs(self):
        four = cheapest_unions(4)
        for on in range(0, 2**16, 13):
            target = Target(4, on)
            assert_least(cover(target, "sop"), four[on], target)

    @given(st.integers(1, 4).flatmap(targets))
    def test_primes_are_all_primes(self, target):
        found = primes(target)
        texts = [as_text(cube, target.n) for cube in found]
        assert set(texts) == prime_cubes(target.n, target.on, target.free)
        assert len(set(texts)) == len(texts)

    @settings(max_examples=60)
    @given(targets(3))
    def test_alternatives_are_all_least_covers(self, target):
        found = [c for c in covers(target, alternatives=50) if c.kind == "sop"]
        sets = [frozenset(as_text(cube, 3) for cube in c.cubes) for c in found]
        assert len(set(sets)) == len(sets)
        assert set(sets) == least_covers(3, target.on, target.free)

    @given(st.integers(0, 4).flatmap(targets))
    def test_cube_tables_and_text(self, target):
        for found in covers(target):
            union = 0
            for cube in found.cubes:
                union |= covered(as_text(cube, target.n))
            table = union if found.kind == "sop" else all_rows(target.n) & ~union
            assert found.table() == table
            assert conducts(found.to_text(NAMES), found.kind, target.n) == table


class TestAgainstOtherMinimisers:
    @settings(max_examples=40, deadline=None)
    @given(st.integers(1, 4).flatmap(targets))
    def test_no_more_literals_than_sympy(self, target):
        relays = symbols(f"a:{target.n}")

        def minterms(table):
            rows = [row for row in range(2**target.n) if table >> row & 1]
            return [[row >> i & 1 for i in range(target.n)] for row in rows]

        other = SOPform(relays, minterms(target.on), minterms(target.free))
        found = cover(target, "sop")
        assert found.proved
        assert target.accepts(found.table())
        assert found.literals <= sum(
            isinstance(part, Not) or part in relays for part in _leaves(other)
        )

    @settings(max_examples=60, deadline=None)
    @given(st.integers(2, 6).flatmap(targets))
    def test_no_more_literals_than_espresso(self, target):
        n = target.n
        marks = "".join(
            "-" if target.free >> row & 1 else str(target.on >> row & 1) for row in range(2**n)
        )
        if not target.on or not target.off:
            return
        (other,) = espresso_tts(truthtable(ttvars("x", n), marks))
        found = cover(target, "sop")
        assert found.proved
        assert target.accepts(found.table())
        assert found.literals <= sum(len(term) for term in other.cover)


def _leaves(formula):
    if isinstance(formula, Not) or not formula.args:
        return [formula]
    return [leaf for part in formula.args for leaf in _leaves(part)]


class TestKnownCovers:
    @pytest.mark.parametrize("n", range(1, 8))
    def test_parity_needs_every_odd_row(self, n):
        # no two odd rows are neighbours, so each is a term of its own
        parity = sum(1 << row for row in range(2**n) if row.bit_count() % 2)
        for found in covers(Target(n, parity)):
            assert found.proved
            assert (found.terms, found.literals) == (2 ** (n - 1), n * 2 ** (n - 1))

    @pytest.mark.parametrize("kind", ["sop", "pos"])
    def test_two_out_of_three(self, kind):
        # 2oo3 is its own dual: three pairs either way (IEC 61508 architecture, trade)
        vote = sum(1 << row for row in range(8) if row.bit_count() >= 2)
        found = cover(Target(3, vote), kind)
        assert (
            found.to_text("ABC")
            == {
                "sop": "A B + A C + B C",
                "pos": "(A + B) (A + C) (B + C)",
            }[kind]
        )

    def test_shannon_figure_5(self):
        # Shannon 1938, fig. 5 and 6: W + W'(X+Y) + (X+Z)(S+W'+Z)(Z'+Y+S'V) = W+X+Y+ZS'V
        def wanted(w, x, y, z, s, v):
            return w or (x or y) or ((x or z) and (s or z or not w) and (not z or (not s and v)))

        on = sum(1 << row for row in range(64) if wanted(*(bool(row >> i & 1) for i in range(6))))
        assert cover(Target(6, on), "sop").to_text("WXYZSV") == "W + X + Y + Z S' V"

    @pytest.mark.parametrize(
        ("target", "text"),
        [
            (Target(2, 0), {"sop": "0", "pos": "0"}),
            (Target(2, 15), {"sop": "1", "pos": "1"}),
            (Target(0, 1), {"sop": "1", "pos": "1"}),
            (Target(2, 0, 15), {"sop": "0", "pos": "1"}),
            (Target(2, 1, 14), {"sop": "1", "pos": "1"}),
            (Target(2, 0b1000), {"sop": "A B", "pos": "A B"}),
            (Target(2, 0b0111), {"sop": "A' + B'", "pos": "A' + B'"}),
        ],
    )
    def test_constants_and_single_terms(self, target, text):
        assert {c.kind: c.to_text("AB") for c in covers(target)} == text

    def test_a_cyclic_table_has_two_least_covers(self):
        # the textbook cycle: A B' + B C' + C A' and its mirror image
        found = covers(Target(3, 0b01111110), alternatives=9)
        assert [c.kind for c in found] == ["pos", "sop", "sop"]
        assert {c.to_text("ABC") for c in found[1:]} == {
            "A B' + A' C + B C'",
            "A' B + A C' + B' C",
        }

    def test_relays_that_do_not_matter_do_not_count(self):
        # P and Q of 16: relays 3 and 9
        on = sum(1 << row for row in range(2**16) if row >> 3 & 1 and not row >> 9 & 1)
        found = cover(Target(16, on), "sop")
        assert found == Cover("sop", (Cube(1 << 3 | 1 << 9, 1 << 3),), 16, True)

    def test_groups_are_the_contacts_as_written(self):
        on = 0b11101010  # A + B C
        assert cover(Target(3, on), "sop").groups == (((0, True),), ((1, True), (2, True)))
        assert cover(Target(3, on), "pos").groups == (
            ((0, True), (1, True)),
            ((0, True), (2, True)),
        )


class TestCube:
    def test_value_outside_care_is_refused(self):
        with pytest.raises(ValueError, match="outside its care"):
            Cube(1, 2)

    def test_relay_beyond_the_inputs_is_refused(self):
        with pytest.raises(ValueError, match="beyond the 2 inputs"):
            Cube(4, 4).table(2)

    def test_text(self):
        assert Cube(0b101, 0b001).to_text(["UP", "DOWN", "FLOOD"]) == "UP FLOOD'"
        assert Cube(0, 0).to_text([]) == "1"
