"""A small mixed-integer programme, solved by HiGHS, with several objectives one after the other."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import highspy
import numpy as np

INFINITY = highspy.kHighsInf
Terms = Mapping[int, float]


class Cancelled(Exception):
    """The person stopped the search."""


class Unsolved(Exception):
    """The time ran out before any answer was found."""


@dataclass(frozen=True)
class Solution:
    """Values of all variables; gap: how far the last objective sought may be from its best, as a share."""

    values: tuple[float, ...]
    gap: float
    finished: bool


class _Quiet(highspy.Highs):
    """A solver that writes nothing: the library prints a header when its callbacks are made ready."""

    def __init__(self) -> None:
        super().__init__()  # type: ignore[no-untyped-call]

    def enableCallbacks(self) -> None:
        self.setOptionValue("output_flag", False)
        super().enableCallbacks()  # type: ignore[no-untyped-call]


class Programme:
    """Variables and rows are added, then `solve` runs the objectives in their order."""

    def __init__(self) -> None:
        self._lower: list[float] = []
        self._upper: list[float] = []
        self._whole: list[bool] = []
        self._rows: list[tuple[dict[int, float], float, float]] = []

    def variable(self, lower: float = 0.0, upper: float = INFINITY, *, whole: bool = False) -> int:
        """Add a variable and give its number."""
        self._lower.append(lower)
        self._upper.append(upper)
        self._whole.append(whole)
        return len(self._lower) - 1

    def row(self, terms: Terms, lower: float = -INFINITY, upper: float = INFINITY) -> None:
        """Add lower <= sum of terms <= upper."""
        self._rows.append((dict(terms), lower, upper))

    def solve(
        self,
        objectives: tuple[Terms, ...],
        *,
        time_limit_s: float = 5.0,
        relative_gap: float = 1e-3,
        cancelled: Callable[[], bool] | None = None,
    ) -> Solution:
        """Minimise the objectives one after the other, each kept when the next is sought.

        Each starts from the answer of the one before, so that none makes an earlier one worse. Raises Cancelled when
        `cancelled` says so, Unsolved when the first finds nothing in time. The time limit holds for each objective.
        """
        rows = list(self._rows)
        solution = Solution((), 0.0, True)
        for number, objective in enumerate(objectives):
            if cancelled is not None and cancelled():
                raise Cancelled
            found = self._solve_one(objective, rows, solution.values, time_limit_s, relative_gap, cancelled)
            solution = replace(found, finished=found.finished and solution.finished)
            if number < len(objectives) - 1:
                reached = sum(cost * solution.values[column] for column, cost in objective.items())
                slack = max(1e-6, 1e-6 * abs(reached), relative_gap * abs(reached) if solution.gap > 0 else 0.0)
                rows.append((dict(objective), -INFINITY, reached + slack))
        return solution

    def _solve_one(
        self,
        objective: Terms,
        rows: list[tuple[dict[int, float], float, float]],
        start: tuple[float, ...],
        time_limit_s: float,
        relative_gap: float,
        cancelled: Callable[[], bool] | None,
    ) -> Solution:
        solver = _Quiet()
        solver.setOptionValue("threads", 1)
        solver.setOptionValue("random_seed", 1)
        solver.setOptionValue("time_limit", time_limit_s)
        solver.setOptionValue("mip_rel_gap", relative_gap)
        solver.passModel(self._model(objective, rows))
        if start:
            known = highspy.HighsSolution()
            known.col_value = list(start)
            solver.setSolution(known)
        if cancelled is not None:

            def watch(event: highspy.HighsCallbackEvent) -> None:
                if cancelled():
                    event.interrupt()

            solver.cbMipInterrupt.subscribe(watch)
        solver.run()
        if cancelled is not None and cancelled():
            raise Cancelled
        status = solver.getModelStatus()
        if status == highspy.HighsModelStatus.kInfeasible:
            raise AssertionError(f"the elastic programme has no solution: {solver.modelStatusToString(status)}")
        if solver.getInfo().primal_solution_status != highspy.SolutionStatus.kSolutionStatusFeasible:
            if not start:
                raise Unsolved
            return Solution(start, float("inf"), False)
        gap = float(solver.getInfo().mip_gap)
        values = tuple(solver.getSolution().col_value)
        return Solution(values, gap if np.isfinite(gap) else 0.0, status == highspy.HighsModelStatus.kOptimal)

    def _model(self, objective: Terms, rows: list[tuple[dict[int, float], float, float]]) -> highspy.HighsLp:
        model = highspy.HighsLp()
        model.num_col_, model.num_row_ = len(self._lower), len(rows)
        cost = np.zeros(len(self._lower))
        for column, value in objective.items():
            cost[column] = value
        model.col_cost_ = cost
        model.col_lower_, model.col_upper_ = np.array(self._lower), np.array(self._upper)
        model.integrality_ = [
            highspy.HighsVarType.kInteger if whole else highspy.HighsVarType.kContinuous for whole in self._whole
        ]
        model.row_lower_ = np.array([lower for _, lower, _ in rows])
        model.row_upper_ = np.array([upper for _, _, upper in rows])
        model.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
        model.a_matrix_.start_ = np.cumsum([0, *(len(terms) for terms, _, _ in rows)])
        model.a_matrix_.index_ = np.array([column for terms, _, _ in rows for column in terms], dtype=np.int32)
        model.a_matrix_.value_ = np.array([value for terms, _, _ in rows for value in terms.values()])
        return model
