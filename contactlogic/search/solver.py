"""The SAT solvers, met in this module alone (python-sat).

`Session` is one solver with its clauses, asked repeatedly under a deadline or a conflict budget.
The choice of solver is by measurement: `tests/bench/bench_solvers.py` prints the table.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from time import monotonic
from types import TracebackType
from typing import Any, Literal

__all__ = ["SOLVER", "WINDOW_SOLVER", "Session", "Status"]

SOLVER = "cadical153"
"""For proofs: long single calls."""

WINDOW_SOLVER = "minisat22"
"""For windows: thousands of calls of a few milliseconds, clauses added between them."""

_FIRST_SLICE = 2000  # conflicts; well under a tenth of a second on small problems
_SLICE_SECONDS = 0.5

Status = Literal["sat", "unsat", "unknown"]


class Session:
    """One solver and its clauses; a context manager that frees the solver's memory."""

    def __init__(self, clauses: Iterable[Sequence[int]] = (), *, solver: str = SOLVER) -> None:
        from pysat.solvers import Solver

        self._solver: Any = Solver(name=solver, bootstrap_with=clauses)

    def __enter__(self) -> Session:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """Free the solver; the session must not be used after."""
        self._solver.delete()

    def add(self, clauses: Iterable[Sequence[int]]) -> None:
        """Add clauses."""
        self._solver.append_formula(clauses)

    def solve(
        self,
        assumptions: Sequence[int] = (),
        *,
        conflicts: int | None = None,
        seconds: float | None = None,
    ) -> Status:
        """Ask once; "unknown" if the conflicts or seconds ran out first.

        Not every solver can be interrupted, but all that are of use here take a conflict budget
        and go on where they stopped.  So a deadline is kept by slices of conflicts, sized by the
        rate seen so far; control returns to Python between them, also for Ctrl-C.
        """
        deadline = None if seconds is None else monotonic() + seconds
        slice_ = _FIRST_SLICE
        left = conflicts
        while True:
            now = slice_ if left is None else min(slice_, left)
            if now <= 0:
                return "unknown"
            before, start = self.conflicts, monotonic()
            self._solver.conf_budget(now)
            answer = self._solver.solve_limited(assumptions=list(assumptions))
            if answer is not None:
                return "sat" if answer else "unsat"
            spent = max(self.conflicts - before, now)
            if left is not None:
                left -= spent
            took = max(monotonic() - start, 1e-6)
            goal = _SLICE_SECONDS
            if deadline is not None:
                if monotonic() >= deadline:
                    return "unknown"
                goal = min(goal, deadline - monotonic())
            slice_ = max(100, min(4 * slice_, int(spent * goal / took)))

    @property
    def conflicts(self) -> int:
        """Conflicts since the session began."""
        return int(self._solver.accum_stats()["conflicts"])

    def model(self) -> list[int]:
        """The last satisfying assignment."""
        found: list[int] = self._solver.get_model()
        return found
