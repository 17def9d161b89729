"""Integer programs: the one place that meets the solver.

Minimise several costs one after the other over whole numbers under linear bounds, by OR-Tools'
modelling layer with its constraint solver underneath, which works in whole numbers throughout.
What it answers is checked against every bound before it is believed.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import timedelta
from time import monotonic

from contactlogic.child import ChildCrashed, ChildTimedOut, run
from contactlogic.errors import InternalError

__all__ = ["Bound", "Program", "Solution", "solve", "solved"]

_GRACE = 5.0  # seconds for starting the solver and bringing its answer back
_SMALL = 20_000  # variables times bounds; up to here a child's start takes longer than solving


@dataclass(frozen=True)
class Bound:
    """The sum of `terms` (variable, coefficient) is at least `least`."""

    terms: tuple[tuple[int, int], ...]
    least: int


@dataclass(frozen=True)
class Program:
    """Whole-number variables from 0 to `most`, bounds, and costs to minimise, the first first.

    Every cost is a coefficient, not negative, for each variable.
    """

    most: tuple[int, ...]
    bounds: tuple[Bound, ...]
    costs: tuple[tuple[int, ...], ...]


@dataclass(frozen=True)
class Solution:
    """What was found.

    Args:
        values: of the variables; None if there is no solution, or none was found in time.
        feasible: False if proved that there is none.
        proved: whether the first cost is proved least.
        at_least: proved of the first cost.
    """

    values: tuple[int, ...] | None
    feasible: bool = True
    proved: bool = False
    at_least: int = 0


def solved(program: Program, seconds: float | None) -> Solution:
    """`solve` within a time limit (None for none), anything large in a child process."""
    if seconds is None or len(program.most) * len(program.bounds) <= _SMALL:
        found = solve(program, seconds)
    else:
        try:
            found = run(solve, program, seconds, seconds=seconds + _GRACE)
        except (ChildCrashed, ChildTimedOut):
            return Solution(None)
    if found.values is not None and not _keeps(program, found.values):
        raise InternalError("the integer program's answer does not keep its bounds")
    return found


def _keeps(program: Program, values: tuple[int, ...]) -> bool:
    inside = all(0 <= value <= most for value, most in zip(values, program.most, strict=True))
    return inside and all(
        sum(values[k] * factor for k, factor in bound.terms) >= bound.least
        for bound in program.bounds
    )


def solve(program: Program, seconds: float | None) -> Solution:
    """Minimise the costs in turn, each held at its least while the next is minimised."""
    from ortools.math_opt.python import mathopt

    end = None if seconds is None else monotonic() + seconds
    model = mathopt.Model()
    variables = [model.add_integer_variable(lb=0, ub=most) for most in program.most]
    for bound in program.bounds:
        terms = mathopt.LinearSum(factor * variables[k] for k, factor in bound.terms)
        model.add_linear_constraint(terms >= bound.least)
    best: tuple[int, ...] | None = None
    proved, at_least = False, 0
    for turn, costs in enumerate(program.costs):
        total = mathopt.LinearSum(c * v for c, v in zip(costs, variables, strict=True) if c)
        model.minimize(total)
        settings = mathopt.SolveParameters(
            threads=1, random_seed=0, relative_gap_tolerance=0.0, absolute_gap_tolerance=0.0
        )
        settings.cp_sat.linearization_level = 2  # without it small programs take minutes
        if end is not None:
            settings.time_limit = timedelta(seconds=max(0.1, end - monotonic()))
        answer = mathopt.solve(model, mathopt.SolverType.CP_SAT, params=settings)
        reason = answer.termination.reason
        if reason == mathopt.TerminationReason.INFEASIBLE:
            return Solution(None, feasible=False)
        if reason not in (mathopt.TerminationReason.OPTIMAL, mathopt.TerminationReason.FEASIBLE):
            break
        values = answer.variable_values(variables)
        best = tuple(round(value) for value in values)
        least = sum(c * v for c, v in zip(costs, best, strict=True))
        optimal = reason == mathopt.TerminationReason.OPTIMAL
        if not turn:
            proved = optimal
            # rounding up must not lift a bound that lies a hair above a whole number
            dual = answer.termination.objective_bounds.dual_bound
            at_least = least if optimal else max(0, int(-(-(dual - 1e-4) // 1)))
        if not optimal:
            break
        model.add_linear_constraint(total <= least)
    return Solution(best, True, proved, at_least)
