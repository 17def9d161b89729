"""Time limits, crashes and wrong answers: what comes back is right and honest all the same."""

from __future__ import annotations

import os
import random
import subprocess
import sys
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from strategies import targets

from contactlogic import child
from contactlogic.child import ChildCrashed, ChildTimedOut
from contactlogic.minimize import Cube, cover, covers, heuristic
from contactlogic.minimize import least as least_module
from contactlogic.truth import Target, all_rows


def random_target(n: int, seed: int, *, free: bool = False) -> Target:
    source = random.Random(seed)
    on = source.getrandbits(1 << n)
    return Target(n, on, source.getrandbits(1 << n) & ~on if free else 0)


class TestChild:
    def test_value_comes_back(self):
        assert child.run(divmod, 17, 5, seconds=20) == (3, 2)

    def test_arguments_may_be_large(self):
        assert child.run(len, b"x" * 2_000_000, seconds=20) == 2_000_000

    def test_sleeper_is_killed(self):
        start = time.monotonic()
        with pytest.raises(ChildTimedOut):
            child.run(time.sleep, 60, seconds=0.5)
        assert time.monotonic() - start < 20

    def test_no_time_is_no_start(self):
        with pytest.raises(ChildTimedOut):
            child.run(divmod, 17, 5, seconds=0)

    def test_abort_is_reported(self):
        with pytest.raises(ChildCrashed, match="signal 6"):
            child.run(os.abort, seconds=20)

    def test_exception_is_reported_with_its_text(self):
        with pytest.raises(ChildCrashed, match="ZeroDivisionError"):
            child.run(divmod, 1, 0, seconds=20)

    def test_end_without_answer(self):
        with pytest.raises(ChildCrashed, match="cannot be read"):
            child.run(os._exit, 0, seconds=20)

    def test_answer_that_cannot_travel(self):
        with pytest.raises(ChildCrashed, match="pickle"):
            child.run(compile, "0", "none", "eval", seconds=20)

    def test_garbage_ahead_of_the_answer(self):
        # 3 is the first descriptor free in a fresh interpreter: the one kept for the answer
        with pytest.raises(ChildCrashed):
            child.run(os.write, 3, b"garbage", seconds=20)

    def test_a_printing_engine_does_no_harm(self):
        assert child.run(os.write, 1, b"banner\n", seconds=20) == 7


class TestOutOfTime:
    def test_six_inputs_are_proved_whatever_the_time(self):
        target = random_target(6, 4)
        assert all(c.proved and target.accepts(c.table()) for c in covers(target, seconds=0))

    @pytest.mark.parametrize("n", [7, 8, 10])
    def test_no_time_is_not_proved(self, n):
        # closed when 2 to n-2 relays are operated: no prime is essential, so the engine is needed
        target = Target(n, sum(1 << row for row in range(2**n) if 2 <= row.bit_count() <= n - 2))
        found = cover(target, "sop", seconds=0)
        assert target.accepts(found.table())
        assert not found.proved

    def test_what_needs_no_engine_is_proved_without_time(self):
        target = Target(7, sum(1 << row for row in range(2**7) if row.bit_count() >= 4))
        found = cover(target, "sop", seconds=0)
        assert found.proved
        assert (found.terms, found.literals) == (35, 140)  # every four of seven relays

    def test_eight_inputs_are_proved_in_time(self):
        target = random_target(8, 8)
        in_time = cover(target, "sop", seconds=60)
        assert in_time.proved
        assert target.accepts(in_time.table())
        assert in_time.literals <= cover(target, "sop", seconds=0).literals

    @pytest.mark.parametrize("n", [11, 12])
    def test_beyond_ten_inputs_is_best_found(self, n):
        target = random_target(n, n, free=n == 12)
        for found in covers(target, seconds=20):
            assert target.accepts(found.table())
            assert not found.proved

    def test_sixteen_inputs_without_time(self):
        target = random_target(16, 16)
        found = cover(target, "sop", seconds=0)
        assert target.accepts(found.table())
        assert not found.proved

    def test_sixteen_inputs_with_espresso(self):
        source = random.Random(16)
        listed = source.sample(range(1 << 16), 60)
        on = sum(1 << row for row in listed[:30])
        free = all_rows(16) & ~sum(1 << row for row in listed)
        target = Target(16, on, free)
        found = cover(target, "sop", seconds=20)
        assert target.accepts(found.table())
        own = heuristic.irredundant(target)
        assert (found.literals, found.terms) <= (sum(c.literals for c in own), len(own))


def crash(*_arguments, **_options):
    raise ChildCrashed("ended by signal 11")


def too_late(*_arguments, **_options):
    raise ChildTimedOut("no answer within 1 s")


class TestBadEngines:
    @pytest.mark.parametrize("failure", [crash, too_late])
    def test_engines_that_fail(self, monkeypatch, failure):
        monkeypatch.setattr(least_module, "run", failure)
        monkeypatch.setattr(heuristic, "run", failure)
        target = random_target(9, 1, free=True)
        for found in covers(target):
            assert target.accepts(found.table())
            assert not found.proved

    def test_wrong_espresso_is_thrown_away(self, monkeypatch):
        monkeypatch.setattr(heuristic, "run", lambda *_a, **_o: ((1, 1),))
        target = random_target(11, 2)
        assert target.accepts(cover(target, "sop").table())

    def test_malformed_espresso_is_thrown_away(self, monkeypatch):
        monkeypatch.setattr(heuristic, "run", lambda *_a, **_o: ((1, 2),))
        target = random_target(11, 2)
        assert target.accepts(cover(target, "sop").table())

    def test_wrong_choice_is_thrown_away(self, monkeypatch):
        monkeypatch.setattr(least_module, "run", lambda *_a, **_o: (((0,),), True))
        target = random_target(8, 3)
        found = cover(target, "sop")
        assert target.accepts(found.table())
        assert not found.proved

    def test_best_so_far_is_kept_but_not_called_proved(self, monkeypatch):
        def stopped_early(function, choice, *arguments, **_limit):
            answers, _ = function(choice, *arguments)
            return answers, False

        target = random_target(8, 8)
        proved = cover(target, "sop")
        monkeypatch.setattr(least_module, "run", stopped_early)
        found = cover(target, "sop")
        assert (found.literals, found.terms) == (proved.literals, proved.terms)
        assert proved.proved
        assert not found.proved


class TestOwnCover:
    @settings(deadline=None)
    @given(st.integers(1, 7).flatmap(targets))
    def test_right_prime_and_irredundant(self, target):
        cubes = heuristic.irredundant(target)
        tables = [cube.table(target.n) for cube in cubes]

        def union(tables):
            total = 0
            for table in tables:
                total |= table
            return total

        assert target.accepts(union(tables))
        for k in range(len(cubes)):
            assert not target.accepts(union(tables[:k] + tables[k + 1 :]))
        for cube in cubes:
            for i, _ in cube.contacts():
                wider = Cube(cube.care & ~(1 << i), cube.value & ~(1 << i))
                assert wider.table(target.n) & target.off

    def test_espresso_alone_is_right(self):
        for n in (2, 5, 9):
            target = random_target(n, n, free=True)
            cubes = heuristic.espresso(target, seconds=20)
            assert cubes is not None
            union = 0
            for cube in cubes:
                union |= cube.table(n)
            assert target.accepts(union)


def test_same_bytes_under_another_hash_seed():
    program = (
        "import random\n"
        "from contactlogic.minimize import covers\n"
        "from contactlogic.truth import Target\n"
        "for n in (5, 6, 8, 11):\n"
        "    source = random.Random(n)\n"
        "    on, free = source.getrandbits(1 << n), source.getrandbits(1 << n)\n"
        "    for c in covers(Target(n, on & ~free, free), seconds=60, seed=3, alternatives=3):\n"
        "        print(c)\n"
    )
    outputs = {
        subprocess.run(
            [sys.executable, "-c", program],
            env=os.environ | {"PYTHONHASHSEED": seed},
            capture_output=True,
            check=True,
            timeout=200,
        ).stdout
        for seed in ("1", "2")
    }
    assert len(outputs) == 1
    assert outputs.pop().count(b"Cover(") >= 8
