"""Integer linear programs, solved by CP-SAT.

CP-SAT was chosen for covers by measurement (tests/bench/bench_cover.py); it needs its linear
relaxation at full strength there.  It is reached through `pywraplp`, which starts in a fifth of
the time of the engine's own Python layer.  One worker and a fixed seed, so that equal input gives
an equal answer.

The engine is native code: what may take long or is large belongs in a child process (`child`).
"""

from __future__ import annotations

from typing import Any

__all__ = ["Program"]


class Program:
    """A program under construction, and its best answer once `solve` has found one.

    Variables are the engine's: add and multiply them, compare sums to state a constraint.
    """

    def __init__(self, *, seed: int, effort: float | None = None) -> None:
        """Args:
        seed: of the engine.
        effort: limit in the engine's deterministic seconds, None for none.
        """
        from ortools.linear_solver import pywraplp

        self._engine = pywraplp.Solver.CreateSolver("SAT")
        limit = "" if effort is None else f" max_deterministic_time:{effort}"
        self._engine.SetSolverSpecificParametersAsString(
            f"num_workers:1 linearization_level:2 random_seed:{seed % 2**31}{limit}"
        )
        self._exactly = pywraplp.MPSolverParameters()
        # by default it stops 1e-4 short of a proof
        self._exactly.SetDoubleParam(self._exactly.RELATIVE_MIP_GAP, 0.0)

    def binary(self) -> Any:
        """A new variable, 0 or 1."""
        return self._engine.BoolVar("")

    def integer(self, low: int, high: int) -> Any:
        """A new variable of whole numbers from `low` to `high`."""
        return self._engine.IntVar(low, high, "")

    def add(self, constraint: Any) -> None:
        """Demand a constraint; `True` and `False` stand for what holds always or never."""
        self._engine.Add(constraint)

    def minimize(self, objective: Any) -> None:
        self._engine.Minimize(objective)

    def solve(self, seconds: float | None = None) -> bool:
        """Whether an answer was found (in `seconds`); `value` and `least` then tell of it."""
        if seconds is not None:
            self._engine.SetTimeLimit(max(1, int(seconds * 1000)))
        status = self._engine.Solve(self._exactly)
        self._optimal: bool = status == self._engine.OPTIMAL
        return self._optimal or bool(status == self._engine.FEASIBLE)

    def value(self, variable: Any) -> int:
        """Of a variable in the answer."""
        found: float = variable.solution_value()
        return round(found)

    @property
    def cost(self) -> int:
        """The objective of the answer, whose coefficients are whole numbers."""
        found: float = self._engine.Objective().Value()
        return round(found)

    @property
    def at_least(self) -> int:
        """What the engine proved of the objective of every answer."""
        if self._optimal:
            return self.cost
        return int(-(-(self._engine.Objective().BestBound() - 1e-6) // 1))
