"""March a case in memory, without files: what verification and validation tests need."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ibsolver.case.model import Case
from ibsolver.flow.advance import Problem, StepReport, advance
from ibsolver.flow.state import FlowState
from ibsolver.kernels import _jit
from ibsolver.run.assemble import assemble, start_state


@dataclass
class March:
    """A finished march: problem, last state, and all step reports with the time at their end."""

    problem: Problem
    state: FlowState
    times: np.ndarray
    reports: list[StepReport]

    @property
    def mid_times(self) -> np.ndarray:
        """Middle of each step, where its mean loads belong."""
        return self.times - 0.5 * np.array([r.dt for r in self.reports])

    def lift(self) -> np.ndarray:
        """Lift coefficients of all steps."""
        return np.array([2.0 * r.loads.lift for r in self.reports])

    def drag(self) -> np.ndarray:
        """Drag coefficients of all steps."""
        return np.array([2.0 * r.loads.drag for r in self.reports])

    def column(self, name: str) -> np.ndarray:
        """A field of all reports."""
        return np.array([getattr(r, name) for r in self.reports])


def march(case: Case, until: float, disturb=None) -> March:
    """March a case to a time; `disturb(problem, state)` may change the start field."""
    with _jit.one_blas_thread():
        problem = assemble(case)
        _jit.set_threads(_jit.sensible_threads(problem.grid.cells))
        state = start_state(case, problem)
        if disturb is not None:
            disturb(problem, state)
        times, reports = [], []
        while state.time < until - 1e-12:
            report = advance(state, problem, problem.rule.next_step(state.rate, state.dt))
            assert not report.trouble, report.trouble
            times.append(state.time)
            reports.append(report)
    _jit.set_threads(None)
    return March(problem, state, np.array(times), reports)
