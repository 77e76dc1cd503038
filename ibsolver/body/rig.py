"""The rig: one base body and the flaps hinged on it, as rigid links that a configuration puts in place.

Every link has its own frame (s along it, n to its left when looking along s). The base frame has its origin at the
pivot and s along the chord from leading to trailing edge; a flap's frame has its origin at the hinge and s toward
its tip. A closed flap lies on its parent, tip toward the parent's trailing edge, and opens away from its side.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from ibsolver.body.points import distance_to_segment, smooth_step

LEAST_WEIGHT = 1e-4


@dataclass(frozen=True)
class Configuration:
    """Where the rig is and how it moves (radians, chords, convective times).

    `openings` and `opening_rates` have one entry a flap.
    """

    incidence: float = 0.0
    incidence_rate: float = 0.0
    heave: float = 0.0
    heave_rate: float = 0.0
    openings: tuple[float, ...] = ()
    opening_rates: tuple[float, ...] = ()


@dataclass(frozen=True, eq=False)
class Link:
    """One rigid body of the rig.

    Parameters
    ----------
    name : str
    points : ndarray, shape (n, 2)
        (s, n) of its Lagrangian points in its own frame (chords).
    ds : ndarray, shape (n,)
        Length each point stands for.
    outline : ndarray, shape (k, 2)
        Corners for drawing, in its own frame: two ends of a plate, the curve of a closed body.
    parent : int
        Index of the link it is hinged on; -1 for the base.
    hinge : float
        Position of the hinge along the parent's s (chords).
    side : int
        +1 opens to the parent's left (upper side of the plate), -1 to its right.
    area, centroid, polar_moment
        Of a closed body, in its own frame, the moment about the centroid; 0 for a plate.
    layer : float
        Thickness of the fluid that a regularised thin plate holds (chords); 0 for a closed body.
    """

    name: str
    points: np.ndarray
    ds: np.ndarray
    outline: np.ndarray
    parent: int = -1
    hinge: float = 0.0
    side: int = 1
    length: float = 1.0
    area: float = 0.0
    centroid: tuple[float, float] = (0.0, 0.0)
    polar_moment: float = 0.0
    layer: float = 0.0


@dataclass(frozen=True, eq=False)
class Placement:
    """The rig in one configuration.

    Parameters
    ----------
    points, velocities : ndarray, shape (n, 2)
        Of all Lagrangian points, link after link (chords, tow speeds).
    origins, angles, rates : ndarray, shape (links, 2), (links,), (links,)
        Frame origin, direction of s (counter-clockwise from +x) and its rate.
    origin_velocities : ndarray, shape (links, 2)
    """

    points: np.ndarray
    velocities: np.ndarray
    origins: np.ndarray
    angles: np.ndarray
    rates: np.ndarray
    origin_velocities: np.ndarray


@dataclass(frozen=True, eq=False)
class Rig:
    """Base body first, then flaps in an order in which parents come before children.

    Attributes
    ----------
    merge : tuple of float
        `ibsolver.body.regularisation.Regularisation.merge`.
    link_of_point : ndarray of int, shape (n,)
    ds : ndarray, shape (n,)
        Length each Lagrangian point stands for.
    held : ndarray, shape (n,)
        Area of fluid that each point of a thin plate holds.
    """

    links: tuple[Link, ...] = ()
    merge: tuple[float, float] = (0.5, 1.5)
    link_of_point: np.ndarray = field(init=False)
    ds: np.ndarray = field(init=False)
    held: np.ndarray = field(init=False)

    def __post_init__(self) -> None:
        owner = [np.full(link.ds.size, k) for k, link in enumerate(self.links)] or [np.zeros(0, dtype=int)]
        object.__setattr__(self, "link_of_point", np.concatenate(owner))
        object.__setattr__(self, "ds", np.concatenate([link.ds for link in self.links] or [np.zeros(0)]))
        held = [link.layer * link.ds for link in self.links] or [np.zeros(0)]
        object.__setattr__(self, "held", np.concatenate(held))

    @property
    def size(self) -> int:
        """Number of Lagrangian points."""
        return int(self.ds.size)

    @property
    def flaps(self) -> tuple[Link, ...]:
        """All links but the base."""
        return self.links[1:]

    def place(self, configuration: Configuration) -> Placement:
        """Return positions and velocities of everything in a configuration."""
        count = len(self.links)
        origins, origin_velocities = np.zeros((count, 2)), np.zeros((count, 2))
        angles, rates = np.zeros(count), np.zeros(count)
        points, velocities = [np.zeros((0, 2))], [np.zeros((0, 2))]
        for k, link in enumerate(self.links):
            if link.parent < 0:
                origins[k], origin_velocities[k] = (0.0, configuration.heave), (0.0, configuration.heave_rate)
                angles[k], rates[k] = -configuration.incidence, -configuration.incidence_rate
            else:
                parent = link.parent
                arm = link.hinge * _direction(angles[parent])
                origins[k] = origins[parent] + arm
                origin_velocities[k] = origin_velocities[parent] + rates[parent] * _turned(arm)
                angles[k] = angles[parent] + link.side * configuration.openings[k - 1]
                rates[k] = rates[parent] + link.side * configuration.opening_rates[k - 1]
            arms = link.points @ _axes(angles[k])
            points.append(origins[k] + arms)
            velocities.append(origin_velocities[k] + rates[k] * _turned(arms))
        return Placement(np.concatenate(points), np.concatenate(velocities), origins, angles, rates, origin_velocities)

    @cached_property
    def points_beyond(self) -> tuple[np.ndarray, ...]:
        """For every link, which points (mask of shape (n,)) belong to it or to anything that hangs on it."""
        families = []
        for k in range(len(self.links)):
            family = {k}
            for index in range(k + 1, len(self.links)):
                if self.links[index].parent in family:
                    family.add(index)
            families.append(np.isin(self.link_of_point, list(family)))
        return tuple(families)

    def per_opening_rate(self, placement: Placement, flap: int) -> np.ndarray:
        """Return the velocity of all points, shape (n, 2), per unit opening rate of one flap (0 is the first)."""
        mine = self.points_beyond[flap + 1]
        velocity = np.zeros_like(placement.points)
        arms = placement.points[mine] - placement.origins[flap + 1]
        velocity[mine] = self.links[flap + 1].side * _turned(arms)
        return velocity

    def shapes(self, placement: Placement) -> dict[str, np.ndarray]:
        """Return the outline of every link on the grid, by name, each of shape (k, 2)."""
        return {
            link.name: placement.origins[k] + link.outline @ _axes(placement.angles[k])
            for k, link in enumerate(self.links)
        }

    def weights(self, placement: Placement, spacing: float) -> np.ndarray:
        """Return the share of force each point may carry, 1 for all but flap points close to another link.

        A flap point that comes close to a link listed before its own would share grid cells with it; its weight
        goes smoothly to (nearly) zero, so forces do not jump as a flap opens and a closed flap leaves the plate's
        own answer.

        Returns
        -------
        ndarray, shape (n,)
            Between `LEAST_WEIGHT` and 1.
        """
        weight = np.ones(self.size)
        for k in range(1, len(self.links)):
            mine = self.link_of_point == k
            points = placement.points[mine]
            distance = np.full(points.shape[0], np.inf)
            for other in range(k):
                start, end = placement.origins[other] + self.links[other].outline[[0, -1]] @ _axes(
                    placement.angles[other]
                )
                distance = np.minimum(distance, distance_to_segment(points, start, end))
            share = (distance / spacing - self.merge[0]) / (self.merge[1] - self.merge[0])
            weight[mine] = np.maximum(smooth_step(share), LEAST_WEIGHT)
        return weight


def _direction(angle: float) -> np.ndarray:
    return np.array([np.cos(angle), np.sin(angle)])


def _axes(angle: float) -> np.ndarray:
    """Return the matrix that takes (s, n), as a row, to (x, y)."""
    c, s = np.cos(angle), np.sin(angle)
    return np.array([[c, s], [-s, c]])


def _turned(vectors: np.ndarray) -> np.ndarray:
    """Return vectors turned by a right angle counter-clockwise: velocity per unit angular rate."""
    return np.stack([-vectors[..., 1], vectors[..., 0]], axis=-1)
