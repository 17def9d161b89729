"""Small sequencers for the tests of charts and state graphs, stepped without the package."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from contactlogic.job.sequence import Row, SequenceTable, Timing
from contactlogic.sequence.drives import FormulaDrives
from contactlogic.sequence.motion import build_motion
from contactlogic.sequence.prove import move_rules, prove_drives
from contactlogic.sequence.recovery import Recovery
from contactlogic.sequence.steps import Expansion, expand

Drive = Callable[[Mapping[str, int]], int]


@dataclass(frozen=True)
class Sequencer:
    """Drives of named relays over one bit each, and which of them release slowly."""

    columns: tuple[str, ...]
    drives: Mapping[str, Drive]
    slow: tuple[str, ...] = ()
    expansion: Expansion | None = None

    @property
    def timing(self) -> Timing:
        return Timing(slow_release=self.slow)

    def recovery(self) -> Recovery:
        return prove_drives(self.columns, self.drives, self.timing, self.expansion)

    def successors(self) -> Callable[[int], Sequence[int]]:
        rules = move_rules(self.columns, self.timing, (), self.expansion)
        return build_motion(rules, FormulaDrives(self.columns, self.drives)).successors

    def moves(self) -> set[tuple[int, int]]:
        """All moves, worked out state by state."""
        found = set()
        for state in range(1 << len(self.columns)):
            at = {name: -(state >> i & 1) for i, name in enumerate(self.columns)}
            pending = {
                name: i
                for i, name in enumerate(self.columns)
                if self.drives[name](at) & 1 != state >> i & 1
            }
            quick = [i for name, i in pending.items() if not (at[name] and name in self.slow)]
            found |= {(state, state ^ 1 << i) for i in quick or pending.values()}
        return found


def sequence(
    rows: str, columns: Sequence[str], loads: Sequence[str] = (), slow: Sequence[str] = ()
) -> Expansion:
    """Expansion of rows such as "1100 0, 0110 -"."""
    listed = []
    for text in rows.split(","):
        states, _, wants = text.strip().partition(" ")
        listed.append(
            Row(
                tuple(int(digit) for digit in states),
                tuple(None if want == "-" else int(want) for want in wants),
            )
        )
    timing = Timing(slow_release=tuple(slow))
    return expand(SequenceTable(tuple(columns), tuple(loads), tuple(listed), timing=timing))


def ring(count: int, *, starts: bool = True) -> Sequencer:
    """Pairs of relays in turn, all slow to release; `starts` from all released by itself."""
    names = tuple("ABCDEFGH"[:count])

    def drive(i: int) -> Drive:
        def fed(at: Mapping[str, int]) -> int:
            alone = at["A"] | ~at["A"]
            for name in names:
                if name not in (names[i], names[i - 1]):
                    alone &= ~at[name]
            out = at[names[i - 1]] & alone
            if i == 0 and starts:
                out |= alone & ~at[names[0]] & ~at[names[-1]]
            return out

        return fed

    rows = []
    for k in range(count):
        on = (k, (k + 1) % count)
        rows.append("".join("1" if i in on else "0" for i in range(count)))
    expansion = sequence(", ".join(rows), names, slow=names)
    return Sequencer(names, {n: drive(i) for i, n in enumerate(names)}, names, expansion)


def cross_coupled() -> Sequencer:
    """A and B undo each other until C is on, which the pair may put off for ever."""
    return Sequencer(
        ("A", "B", "C"),
        {
            "A": lambda at: (~at["B"] & at["C"]) | (~at["A"] & ~at["C"] & at["B"]),
            "B": lambda at: (at["A"] ^ at["B"]) | at["C"],
            "C": lambda at: at["C"] | (at["A"] & at["B"]),
        },
    )


def counter(count: int) -> Sequencer:
    """Each relay turns over while all before it are on, so that every state is passed."""
    names = tuple("ABCDEFGH"[:count])

    def drive(i: int) -> Drive:
        def fed(at: Mapping[str, int]) -> int:
            carry = at["A"] | ~at["A"]
            for name in names[:i]:
                carry &= at[name]
            return at[names[i]] ^ carry

        return fed

    return Sequencer(names, {n: drive(i) for i, n in enumerate(names)})


def holding(count: int) -> Sequencer:
    """Every relay holds itself: each state is a trap."""
    names = tuple("ABCDEFGH"[:count])

    def drive(name: str) -> Drive:
        return lambda at: at[name]

    return Sequencer(names, {name: drive(name) for name in names})


def from_tables(tables: Sequence[int], slow: bool) -> Sequencer:
    """Four relays whose drives are given state by state; A slow to release or none."""
    names = tuple("ABCD")

    def drive(table: int) -> Drive:
        def fed(at: Mapping[str, int]) -> int:
            out = at["A"] & ~at["A"]
            for state in range(16):
                if table >> state & 1:
                    here = at["A"] | ~at["A"]
                    for i, name in enumerate(names):
                        here &= at[name] if state >> i & 1 else ~at[name]
                    out |= here
            return out

        return fed

    drives = {name: drive(table) for name, table in zip(names, tables, strict=True)}
    return Sequencer(names, drives, ("A",) if slow else ())
