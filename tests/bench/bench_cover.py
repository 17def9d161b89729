"""Which engine chooses least covers fastest: MaxSAT, CP-SAT or a MIP solver?

Random functions of 6 to 10 inputs (seeded), half of them with free rows, and one symmetric
function of each size.  Every engine gets the same reduced covering tables and minimises literals,
then terms.  Printed: median and worst seconds per engine and size, imports excluded, and how many
were proved in time.

    python tests/bench/bench_cover.py [--inputs 6 7 8] [--count 10] [--seconds 30]
"""

from __future__ import annotations

import argparse
import random
import statistics
import time
from collections.abc import Callable

from contactlogic.minimize.covering import Choice, reduce_table
from contactlogic.minimize.primes import primes
from contactlogic.truth import Target

Answer = tuple[tuple[int, int], bool]
"""(literals, terms) of the columns chosen, and whether they are proved least."""


def weights(choice: Choice) -> list[int]:
    """Literals first, then terms, in one number."""
    scale = len(choice.rows) + 1
    return [cube.literals * scale + 1 for cube in choice.columns]


def size(choice: Choice, chosen: list[int]) -> tuple[int, int]:
    return sum(choice.columns[i].literals for i in chosen), len(chosen)


def maxsat(
    choice: Choice, seconds: float, stratified: bool = False, exhaust: bool = False
) -> Answer:
    import threading

    from pysat.examples.rc2 import RC2, RC2Stratified
    from pysat.formula import WCNF

    formula = WCNF()
    for row in choice.rows:
        formula.append([c + 1 for c in row])
    for i, weight in enumerate(weights(choice)):
        formula.append([-(i + 1)], weight=weight)
    engine = RC2Stratified if stratified else RC2
    with engine(formula, solver="g4", adapt=True, exhaust=exhaust, minz=exhaust) as solver:
        alarm = threading.Timer(seconds, solver.interrupt)
        alarm.start()
        model = solver.compute(expect_interrupt=True)
        alarm.cancel()
        if model is None:
            return (0, 0), False
        return size(choice, [v - 1 for v in model if 0 < v <= len(choice.columns)]), True


def stratified(choice: Choice, seconds: float) -> Answer:
    return maxsat(choice, seconds, stratified=True, exhaust=True)


def mip(engine: str, parameters: str = "") -> Callable[[Choice, float], Answer]:
    def solve(choice: Choice, seconds: float) -> Answer:
        from ortools.linear_solver import pywraplp

        solver = pywraplp.Solver.CreateSolver(engine)
        used = [solver.BoolVar("") for _ in choice.columns]
        for row in choice.rows:
            solver.Add(sum(used[c] for c in row) >= 1)
        solver.Minimize(sum(w * u for w, u in zip(weights(choice), used, strict=True)))
        if parameters and not solver.SetSolverSpecificParametersAsString(parameters):
            raise ValueError(f"{engine} does not take {parameters}")
        solver.SetTimeLimit(int(seconds * 1000))
        gap = pywraplp.MPSolverParameters()  # the default gap of 1e-4 would prove too little
        gap.SetDoubleParam(gap.RELATIVE_MIP_GAP, 0.0)
        status = solver.Solve(gap)
        if status not in (solver.OPTIMAL, solver.FEASIBLE):
            return (0, 0), False
        chosen = [i for i, u in enumerate(used) if u.solution_value() > 0.5]
        proved = solver.Objective().BestBound() > sum(weights(choice)[i] for i in chosen) - 0.5
        return size(choice, chosen), proved

    return solve


ENGINES: dict[str, Callable[[Choice, float], Answer]] = {
    "RC2": maxsat,
    "RC2 stratified": stratified,
    "CP-SAT": mip("SAT", "num_workers:1"),
    "CP-SAT with LP": mip("SAT", "num_workers:1 linearization_level:2"),
    "SCIP": mip("SCIP"),
    "HiGHS": mip("HIGHS"),
}


def samples(n: int, count: int) -> list[Choice]:
    """Reduced tables of random functions, every other one with free rows, and of a symmetric one.

    The symmetric one (2 to n-2 relays operated) has no essential prime and many equal covers.
    """
    found: list[Target] = []
    for k in range(count):
        source = random.Random(1000 * n + k)
        on = source.getrandbits(1 << n)
        free = source.getrandbits(1 << n) & source.getrandbits(1 << n) & ~on if k % 2 else 0
        found.append(Target(n, on, free))
    found.append(Target(n, sum(1 << row for row in range(1 << n) if 2 <= row.bit_count() <= n - 2)))
    return [reduce_table(target.on, primes(target), n) for target in found]


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--inputs", type=int, nargs="+", default=[6, 7, 8, 9, 10])
    parser.add_argument("--count", type=int, default=10)
    parser.add_argument("--seconds", type=float, default=30.0)
    parser.add_argument("--engines", nargs="+", choices=ENGINES, default=list(ENGINES))
    arguments = parser.parse_args()
    for name in arguments.engines:  # imports are not what is compared
        ENGINES[name](samples(4, 1)[0], 1.0)
    print(f"{'inputs':>6} {'engine':<15} {'median s':>9} {'worst s':>9} {'proved':>7}")
    for n in arguments.inputs:
        choices = samples(n, arguments.count)
        least: list[set[tuple[int, int]]] = [set() for _ in choices]
        for name in arguments.engines:
            times, proved = [], 0
            for choice, known in zip(choices, least, strict=True):
                start = time.perf_counter()
                cost, done = ENGINES[name](choice, arguments.seconds)
                times.append(time.perf_counter() - start)
                if done:
                    proved += 1
                    known.add(cost)
            print(
                f"{n:>6} {name:<15} {statistics.median(times):>9.3f} {max(times):>9.3f} "
                f"{proved:>3}/{len(choices)}",
                flush=True,
            )
        if any(len(known) > 1 for known in least):
            raise SystemExit(f"engines disagree at {n} inputs: {least}")


if __name__ == "__main__":
    main()
