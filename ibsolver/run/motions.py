"""Prescribed motions of a case: incidence, heave and openings against time."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ibsolver.body.rig import Configuration, Rig
from ibsolver.case.model import Case, Motion
from ibsolver.motion.prescribed import Prescribed


@dataclass(frozen=True, eq=False)
class Motions:
    """Prescribed motions in the order of the rig; free flaps keep their start values here.

    Parameters
    ----------
    incidence, heave : Prescribed
    openings : tuple of Prescribed
    free : tuple of bool
        Whether each flap's opening is found with the fluid.
    free_rates : tuple of float
        Start rates of the flaps (rad per c/U), 0 for those not free.
    """

    incidence: Prescribed
    heave: Prescribed
    openings: tuple[Prescribed, ...]
    free: tuple[bool, ...]
    free_rates: tuple[float, ...]

    def configuration(self, time: float) -> Configuration:
        """Return the prescribed configuration at a time."""
        flaps = zip(self.openings, self.free, self.free_rates, strict=True)
        rates = [start if free else opening.rate(time) for opening, free, start in flaps]
        return Configuration(
            incidence=self.incidence.value(time),
            incidence_rate=self.incidence.rate(time),
            heave=self.heave.value(time),
            heave_rate=self.heave.rate(time),
            openings=tuple(p.value(time) for p in self.openings),
            opening_rates=tuple(rates),
        )

    def moving_points(self, rig: Rig) -> np.ndarray | None:
        """Return the Lagrangian points that move on the grid, None where all do."""
        if not (self.incidence.still and self.heave.still):
            return None
        moving: set[int] = set()
        for k, link in enumerate(rig.links[1:], start=1):
            own = self.free[k - 1] or not self.openings[k - 1].still
            if own or link.parent in moving:
                moving.add(k)
        return np.flatnonzero(np.isin(rig.link_of_point, list(moving)))


def anything_moves(case: Case) -> bool:
    """Return whether any body of a case moves on the grid."""
    motions = [case.incidence_motion, case.heave_motion, *(flap.motion for flap in case.flaps)]
    prescribed = any(motion is not None and not Prescribed(motion).still for motion in motions)
    return prescribed or any(flap.mount == "free" for flap in case.flaps)


def motions_of(case: Case, rig: Rig) -> Motions:
    """Return the prescribed motions of a case."""
    body = case.plate or case.outline
    still = Motion("constant", value=body.incidence if body is not None else 0.0)
    flaps = {flap.name: flap for flap in case.flaps}
    ordered = [flaps[link.name] for link in rig.flaps]
    seconds = _convective_time(case)
    return Motions(
        incidence=Prescribed(case.incidence_motion or still),
        heave=Prescribed(case.heave_motion or Motion("constant")),
        openings=tuple(Prescribed(f.motion or Motion("constant", value=f.opening)) for f in ordered),
        free=tuple(f.mount == "free" for f in ordered),
        free_rates=tuple(f.opening_rate * seconds if f.mount == "free" else 0.0 for f in ordered),
    )


def _convective_time(case: Case) -> float:
    from ibsolver.case import scales

    return scales.convective_time(case) or 1.0
