"""Which SAT solver of python-sat is the best for windows, and which for proofs?

Windows: the questions of seeded walks (adder, comparator, seven segments), asked again of every
solver; the time includes writing the clauses.  Proofs: sizes below the least refuted whole, all
cases, without the bounds that would make them too easy.  All solvers meet the same questions, one
after the other in one process, so load of the machine falls on all alike; processor seconds are
counted.  Printed: seconds by question set, the median of the ratios to the best solver of each
proof, and how many proofs were done in time.

    python tests/bench/bench_solvers.py [--solvers cadical153 glucose4 ...] [--seconds 30]
"""

from __future__ import annotations

import argparse
import statistics
import time
from collections.abc import Sequence

from contactlogic.search import windows
from contactlogic.search.cases import Budget, ask, cases
from contactlogic.search.diagrams import starts
from contactlogic.search.goal import Goal
from contactlogic.search.problem import Problem, groupings
from contactlogic.search.resynthesis import resynthesise
from contactlogic.truth import Target

SOLVERS = (
    "cadical153",
    "cadical195",
    "glucose4",
    "glucose42",
    "maplechrono",
    "maplecm",
    "minisat22",
)

DIGITS = "1110111 0010010 1011101 1011011 0111010 1101011 1101111 1010010 1111111 1111011"


def load(n: int, on: Sequence[int], free: Sequence[int] = ()) -> Target:
    return Target(n, sum(1 << row for row in on), sum(1 << row for row in free))


def adder() -> list[Target]:
    return [
        load(3, [r for r in range(8) if r.bit_count() % 2]),
        load(3, [r for r in range(8) if r.bit_count() > 1]),
    ]


def comparator() -> list[Target]:
    pairs = [(row, row & 3, row >> 2) for row in range(16)]
    return [
        load(4, [row for row, a, b in pairs if a < b]),
        load(4, [row for row, a, b in pairs if a == b]),
        load(4, [row for row, a, b in pairs if a > b]),
    ]


def segments() -> list[Target]:
    digits = DIGITS.split()
    return [
        load(4, [d for d, lit in enumerate(digits) if lit[k] == "1"], range(10, 16))
        for k in range(7)
    ]


def parity(n: int) -> list[Target]:
    return [load(n, [row for row in range(1 << n) if row.bit_count() % 2])]


def counts(n: int) -> list[Target]:
    return [load(n, [r for r in range(1 << n) if r.bit_count() == k]) for k in range(n + 1)]


PROOFS = {
    # name: loads, size refuted
    "adder in 5": (adder(), 5),
    "comparator in 5": (comparator(), 5),
    "parity 4 in 5": (parity(4), 5),
    "0x1668 in 5": ([Target(4, 0x1668)], 5),
    "0x166b in 5": ([Target(4, 0x166B)], 5),
    "0x169a in 5": ([Target(4, 0x169A)], 5),
    "counts of 3 in 5": (counts(3), 5),
    "parity 5 in 6": (parity(5), 6),
    "counts of 4 in 6": (counts(4), 6),
}


def problem_of(loads: Sequence[Target]) -> Problem:
    return Problem(
        tuple("ABCDEFGH"[: loads[0].n]), {f"X{k}": target for k, target in enumerate(loads)}
    )


def prove(solver: str, name: str, seconds: float) -> tuple[float, str]:
    loads, poles = PROOFS[name]
    problem = problem_of(loads)
    level = [case for way in groupings(problem) for case in cases(problem, way, poles, [])]
    start = time.process_time()
    answer = ask(level, Budget(None, time.monotonic() + seconds), solver)
    if answer.status == "sat":
        raise ValueError(f"{name}: there is a network, so this is no proof")
    return time.process_time() - start, answer.status


def questions(steps: int) -> list[tuple[tuple[object, ...], dict[str, object]]]:
    """What seeded walks ask, written down."""
    asked: list[tuple[tuple[object, ...], dict[str, object]]] = []

    def remember(*args: object, **kwargs: object) -> object:
        asked.append((args, kwargs))
        return resynthesise(*args, **kwargs)  # type: ignore[arg-type]

    windows.resynthesise = remember  # type: ignore[assignment]
    try:
        for seed, loads in enumerate((adder(), comparator(), segments())):
            walk = windows.Walk(starts(loads, 1)[0], Goal(loads[0].n, tuple(loads)), seed=seed)
            for _ in range(steps):
                walk.step()
    finally:
        windows.resynthesise = resynthesise
    return asked


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    parser.add_argument("--solvers", nargs="+", default=list(SOLVERS))
    parser.add_argument("--seconds", type=float, default=30.0)
    parser.add_argument("--steps", type=int, default=60)
    parser.add_argument("--proofs", nargs="+", default=list(PROOFS))
    args = parser.parse_args()

    asked = questions(args.steps)
    print(f"windows: {len(asked)} questions, processor seconds in all, milliseconds (median)")
    total: dict[str, float] = {}
    for solver in args.solvers:
        each = []
        for words, more in asked:
            start = time.process_time()
            resynthesise(*words, **{**more, "solver": solver})  # type: ignore[arg-type]
            each.append(time.process_time() - start)
        total[solver] = sum(each)
        print(f"  {solver:12} {sum(each):8.2f} {1000 * statistics.median(each):8.1f}", flush=True)
    best = min(total.values())
    print("  ratio to best:", *(f"{s} {t / best:.2f}" for s, t in total.items()))

    print("proofs: processor seconds; > where time ran out")
    ratios: dict[str, list[float]] = {solver: [] for solver in args.solvers}
    done = dict.fromkeys(args.solvers, 0)
    for name in args.proofs:
        took = {solver: prove(solver, name, args.seconds) for solver in args.solvers}
        fastest = min(seconds for seconds, _ in took.values())
        for solver, (seconds, status) in took.items():
            ratios[solver].append(seconds / fastest)
            done[solver] += status != "unknown"
        shown = " ".join(
            f"{solver} {'>' if status == 'unknown' else ''}{seconds:.1f}"
            for solver, (seconds, status) in took.items()
        )
        print(f"  {name:17} {shown}", flush=True)
    for solver in args.solvers:
        print(
            f"  {solver:12} done {done[solver]}/{len(args.proofs)}, "
            f"median ratio to the fastest {statistics.median(ratios[solver]):.2f}"
        )


if __name__ == "__main__":
    main()
