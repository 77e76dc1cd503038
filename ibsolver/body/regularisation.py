"""How points stand for a sharp body: spacing, retraction from edges, the fluid they hold, all in cells.

A regularised plate acts longer and thicker than its points, by amounts that belong to the delta function. The numbers come
from convergence studies against a body-fitted computation (DEVELOPERS.md, "Edges").

Bodies at rest use Roma's narrow kernel, which is sharper. Moving ones use the quintic B-spline: as a body crosses the cells
its effective length swings by a tenth of a cell with Roma's kernel and by a hundredth with the quintic, and each swing of
its added mass is a spurious force.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Regularisation:
    """Numbers of one delta function, in cells.

    Parameters
    ----------
    kernel : {"roma", "quintic"}
    spacing : float
        Between points of a plate, about. At 1.0 the answer depends more on how the plate lies between the cells.
    edge_retraction : float
        By which the last point stays inside the edge of a plate.
    held_layer : float
        Thickness of the fluid that a plate holds, whose inertia its points feel.
    closed_spacing, closed_retraction : float
        Of closed curves: spacing, and by how much the points lie inside.
    merge : tuple of float
        Distance from another link below which a flap point carries no force, and above which it carries all.
    """

    kernel: str
    spacing: float
    edge_retraction: float
    held_layer: float
    closed_spacing: float
    closed_retraction: float
    merge: tuple[float, float]


AT_REST = Regularisation("roma", 1.3, 0.65, 1.57, 1.2, 0.4, (0.5, 1.5))
MOVING = Regularisation("quintic", 1.3, 0.85, 2.0, 1.3, 0.6, (0.75, 2.0))
