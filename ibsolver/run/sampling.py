"""What is recorded: one history row a step, and the arrays of a frame."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np

from ibsolver.body.rig import Link, Rig
from ibsolver.case import scales
from ibsolver.case.model import Case
from ibsolver.flow.advance import Problem, StepReport
from ibsolver.flow.loads import Acceleration, hydrodynamic
from ibsolver.flow.moving import FlapReport, configuration_of
from ibsolver.flow.state import FlowState
from ibsolver.kernels import momentum

SIGNS = (
    "x along the stream seen from the carriage, y up; drag positive along +x, lift along +y; incidence and moment "
    "positive nose-up; hinge opening positive away from the plate surface; loads act on the body"
)


def history_columns(rig: Rig, moving: bool) -> dict[str, str]:
    """Return the history's columns with their meaning and unit, in order."""
    columns = {
        "step": "number of the time step [1]",
        "time_s": "time since the start of the tow [s]; nan in a dimensionless run",
        "time": "time since the start of the tow [c/U]",
        "travel": "distance towed [chords]",
        "tow_speed": "tow speed at this time [U]",
        "incidence_deg": "incidence at this time [deg]",
        "CL": "lift coefficient, mean over the step that ends here [1]",
        "CD": "drag coefficient, mean over the step [1]",
        "CM": "moment coefficient about the pivot, nose-up, mean over the step [1]",
        "CL_momentum": "lift coefficient from the momentum balance over a control volume [1]",
        "CD_momentum": "drag coefficient from the momentum balance [1]",
        "courant": "largest (|u|/dx + |v|/dy) dt after the step [1]",
        "slip": "largest slip on the bodies after the step [U]",
        "divergence": "largest |div u| after the step [U/c]",
        "dt": "length of the step [c/U]",
        "repeats": "Poisson solves of the step [1]",
    }
    if moving:
        columns["heave"] = "heave of the pivot [chords]"
        columns["power_pitch"] = "power that the pitch drive gives to the fluid, mean over the step [rho U^3 c]"
        columns["power_heave"] = "power that the heave drive gives to the fluid, mean over the step [rho U^3 c]"
    for link in rig.flaps:
        name = link.name
        columns[f"opening_deg_{name}"] = f"opening of flap {name} [deg]"
        columns[f"CH_{name}"] = f"moment of the fluid on flap {name} about its hinge, over rho U^2/2 length^2 [1]"
        if moving:
            columns[f"opening_rate_{name}"] = f"opening rate of flap {name} [rad U/c]"
            columns[f"CH_spring_{name}"] = "the same of spring and damper [1]"
            columns[f"CH_stop_{name}"] = "the same of a stop [1]"
            columns[f"power_{name}"] = f"power of the drive of flap {name}, mean over the step [rho U^3 c]"
            columns[f"energy_{name}"] = f"kinetic energy of flap {name} and energy of its spring [rho U^2 c^2]"
    return columns


class HistorySampler:
    """Turns step reports into history rows.

    Parameters
    ----------
    case : Case
    problem : Problem
    """

    def __init__(self, case: Case, problem: Problem):
        self._problem = problem
        self._instantaneous = case.tow.coefficient_speed == "instantaneous"
        self._seconds = scales.convective_time(case)
        self.columns = history_columns(problem.rig, problem.moving)

    def row(self, state: FlowState, report: StepReport) -> dict[str, float]:
        """Return one row, in the order of `columns`."""
        problem, loads = self._problem, report.loads
        speed = problem.tow_speed(state.time)
        scale = self._coefficient_scale(state, report)
        here = configuration_of(problem, state)
        row = {
            "step": state.step,
            "time_s": state.time * self._seconds if self._seconds is not None else math.nan,
            "time": state.time,
            "travel": state.travel,
            "tow_speed": speed,
            "incidence_deg": math.degrees(here.incidence),
            "CL": scale * loads.lift,
            "CD": scale * loads.drag,
            "CM": scale * loads.moment,
            "CL_momentum": scale * report.momentum_lift,
            "CD_momentum": scale * report.momentum_drag,
            "courant": report.courant,
            "slip": report.slip,
            "divergence": report.divergence,
            "dt": report.dt,
            "repeats": report.repeats,
        }
        if problem.moving:
            row["heave"] = here.heave
            row["power_pitch"] = -loads.moment * here.incidence_rate
            row["power_heave"] = -loads.lift * here.heave_rate
        for k, link in enumerate(problem.rig.flaps):
            row |= self._flap_entries(link, here.openings[k], loads.hinge_moments[k], scale / link.length**2)
            if problem.moving:
                row |= self._moving_entries(link, report.flaps[k], scale / link.length**2)
        return row

    @staticmethod
    def _flap_entries(link: Link, opening: float, moment: float, scale: float) -> dict[str, float]:
        return {f"opening_deg_{link.name}": math.degrees(opening), f"CH_{link.name}": scale * moment}

    @staticmethod
    def _moving_entries(link: Link, flap: FlapReport, scale: float) -> dict[str, float]:
        return {
            f"opening_rate_{link.name}": flap.rate,
            f"CH_spring_{link.name}": scale * flap.spring,
            f"CH_stop_{link.name}": scale * flap.stop,
            f"power_{link.name}": flap.power,
            f"energy_{link.name}": flap.energy,
        }

    def _coefficient_scale(self, state: FlowState, report: StepReport) -> float:
        """Return what turns a load in rho U^2 c into a coefficient on the chosen reference speed."""
        if not self._instantaneous:
            return 2.0
        speed = self._problem.tow_speed(state.time - 0.5 * report.dt)
        return 2.0 / speed**2 if speed > 0 else math.nan


def frame_arrays(state: FlowState, problem: Problem, felt: Acceleration) -> dict[str, np.ndarray]:
    """Return the datasets of a frame (`ibsolver.runfile.layout`)."""
    grid = problem.grid
    vorticity = np.empty((grid.ny + 1, grid.nx + 1))
    momentum.corner_vorticity(state.u, state.v, grid.x_metrics, grid.y_metrics, vorticity)
    on_body = hydrodynamic(problem.rig, state.force, felt)
    return {
        "x_faces": grid.x_faces,
        "y_faces": grid.y_faces,
        "u": state.u[1:-1, 1:-1],
        "v": state.v[1:-1, 1:-1],
        "p": state.p[1:-1, 1:-1] - _far_pressure(state, problem),
        "vorticity": vorticity,
        "points": problem.placement.points,
        "load": on_body / problem.rig.ds[:, None],
        "body": problem.rig.link_of_point,
    }


def _far_pressure(state: FlowState, problem: Problem) -> float:
    """Return the pressure at the upstream end, which frames take as zero."""
    return float(state.p[1:-1, 1].mean()) if problem.sides.left.kind == "inflow" else 0.0


def frame_attributes(case: Case, state: FlowState, case_hash: str) -> dict[str, Any]:
    """Return the attributes of a frame."""
    seconds = scales.seconds(case, state.time)
    reference: Mapping[str, Any] = {
        "chord_m": scales.reference_length(case),
        "speed_m_s": scales.velocity_scale(case),
        "reynolds": case.tow.reynolds,
        "density_kg_m3": case.fluid.density if case.fluid else None,
    }
    return {
        "time": state.time,
        "travel": state.travel,
        "time_s": math.nan if seconds is None else seconds,
        "step": state.step,
        "case_hash": case_hash,
        "sign_convention": SIGNS,
        "title": case.title,
        **{key: value for key, value in reference.items() if value is not None},
    }
