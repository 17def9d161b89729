"""Recovery over all states: times by size, and beside a general-purpose library's attractors.

    python tests/bench/bench_recovery.py [most relays]

The library (biodivine-aeon) finds the attractors of the same quick-only systems: rings, random
networks in which each relay looks at two or three others, and counters that walk all 2^n states.
"""

from __future__ import annotations

import random
import resource
import sys
import time
from functools import reduce

import biodivine_aeon

from contactlogic.algebra import Break, Exclusive, Name, Parallel, Series
from contactlogic.job.sequence import Row, SequenceTable, Timing
from contactlogic.sequence.drives import FormulaDrives, formula_drive
from contactlogic.sequence.motion import MoveRules, build_motion
from contactlogic.sequence.prove import prove_drives
from contactlogic.sequence.steps import expand
from contactlogic.sequence.traps import traps


def names(n):
    return tuple(f"R{i:02}" for i in range(n))


def ring(n):
    """Each relay follows the one before, the first the opposite of the last."""
    columns = [Name(name) for name in names(n)]
    return [Break(columns[-1]), *columns[:-1]]


def scattered(n, seen, seed):
    """Each relay driven by a random function of `seen` random relays."""
    dice = random.Random(seed)
    drives = []
    for _ in range(n):
        chosen = dice.sample([Name(name) for name in names(n)], seen)
        terms = [
            Series(tuple(c if row >> k & 1 else Break(c) for k, c in enumerate(chosen)))
            for row in range(2**seen)
            if dice.getrandbits(1)
        ]
        drives.append(Parallel((*terms, Series((chosen[0], Break(chosen[0]))))))
    return drives


def counter(n):
    """A reflected binary code: relay 0 moves at even parity, else the one above the lowest on."""
    columns = [Name(name) for name in names(n)]
    odd = Exclusive(tuple(columns))
    drives = [Break(Exclusive(tuple(columns[1:])))]
    for i in range(1, n):
        below = Series((*(Break(c) for c in columns[: i - 1]), columns[i - 1]))
        none = Series(tuple(Break(c) for c in columns[: n - 1]))
        turn = Series((odd, Parallel((below, none)) if i == n - 1 else below))
        drives.append(Exclusive((columns[i], turn)))
    return drives


def library_text(expression):
    if isinstance(expression, Name):
        return expression.name
    if isinstance(expression, Break):
        return f"!({library_text(expression.part)})"
    parts = [library_text(part) for part in expression.parts]
    if isinstance(expression, Exclusive):
        return reduce(lambda a, b: f"(({a}) ^ ({b}))", parts)
    return "(" + (" & " if isinstance(expression, Series) else " | ").join(parts) + ")"


def regulators(expression):
    if isinstance(expression, Name):
        return {expression.name}
    parts = [expression.part] if isinstance(expression, Break) else expression.parts
    return set().union(*map(regulators, parts))


def by_library(drives):
    """Sizes of the asynchronous attractors, as the library finds them."""
    start = time.perf_counter()
    lines = []
    for name, drive in zip(names(len(drives)), drives, strict=True):
        lines += [f"{other} -?? {name}" for other in sorted(regulators(drive))]
        lines.append(f"${name}: {library_text(drive)}")
    network = biodivine_aeon.BooleanNetwork.from_aeon("\n".join(lines))
    graph = biodivine_aeon.AsynchronousGraph(network)
    found = biodivine_aeon.Attractors.attractors(graph)
    sizes = sorted(int(a.vertices().cardinality()) for a in found)
    return sizes, time.perf_counter() - start


def by_bits(drives):
    """Sizes of the traps, as contactlogic finds them over all states."""
    start = time.perf_counter()
    columns = names(len(drives))
    fed = {name: formula_drive(d) for name, d in zip(columns, drives, strict=True)}
    space = build_motion(MoveRules(len(drives)), FormulaDrives(columns, fed))
    sizes = sorted(space.count(trap) for trap in traps(space))
    return sizes, time.perf_counter() - start


def alone(n, j):
    """Drive of a relay of a ring that starts itself: only the one before may be operated."""
    columns = [Name(name) for name in names(n)]
    one = Series(
        (columns[j - 1], *(Break(c) for k, c in enumerate(columns) if k not in (j, (j - 1) % n)))
    )
    return one if j else Parallel((one, Series(tuple(Break(c) for c in columns))))


def self_starting(n):
    """Verdict and time of a ring of slow relays."""
    columns = names(n)
    rows = tuple(Row(tuple(int(i in (k, (k + 1) % n)) for i in range(n))) for k in range(n))
    timing = Timing(slow_release=columns)
    expansion = expand(SequenceTable(columns, (), rows, timing=timing))
    drives = {name: formula_drive(alone(n, j)) for j, name in enumerate(columns)}
    start = time.perf_counter()
    found = prove_drives(columns, drives, timing, expansion)
    return found, time.perf_counter() - start


def main(most):
    print("self-starting ring of slow relays, wanted cycle given, moves single")
    for n in (8, 12, 16, 20, 24, 28, 32, 40):
        if n <= most or n > 28:
            found, seconds = self_starting(n)
            memory = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
            print(
                f"  {n} relays: {found.verdict}, slowest {found.slowest.moves} moves, "
                f"{seconds:.2f} s, at most {memory:.0f} MiB so far"
            )
    print("traps of quick-only systems: over all states | library of diagrams")
    systems = [(f"ring of {n}", ring(n)) for n in (8, 12, 16, 20, 24, 28)]
    systems += [
        (f"random, {n} relays, {seen} seen, no. {seed}", scattered(n, seen, seed))
        for n in (8, 12, 16, 20, 24, 28)
        for seen in (2, 3)
        for seed in range(3)
    ]
    systems += [(f"counter of {n}", counter(n)) for n in (4, 8, 12, 14, 16)]
    for title, drives in systems:
        if len(drives) > most:
            continue
        ours, seconds = by_bits(drives)
        theirs, library = by_library(drives)
        same = "same traps" if ours == theirs else f"DIFFERENT: {ours} and {theirs}"
        print(f"  {title}: {seconds:.3f} s | {library:.3f} s, {len(ours)} {same}", flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 28)
