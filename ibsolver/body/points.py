"""Lagrangian points along lines and closed curves, in the frame of their body."""

from __future__ import annotations

import numpy as np

from ibsolver.errors import IbsolverError


class BodyError(IbsolverError):
    """A body that cannot be put on the grid."""

    exit_status = 3


def along_line(
    start: float, end: float, spacing: float, retract_start: float, retract_end: float
) -> tuple[np.ndarray, np.ndarray]:
    """Return positions and shares of points on a straight line.

    Parameters
    ----------
    start, end : float
        Ends of the line (chords).
    spacing : float
        Wanted distance between points.
    retract_start, retract_end : float
        Distance of the first and last point from the ends.

    Returns
    -------
    s, ds : ndarray, shape (n,)
        Positions and the length that each point stands for; the shares add up to the whole line.
    """
    first, last = start + retract_start, end - retract_end
    if last <= first:
        middle = 0.5 * (start + end)
        return np.array([middle]), np.array([end - start])
    s = np.linspace(first, last, max(2, round((last - first) / spacing) + 1))
    ds = np.full(s.size, s[1] - s[0])
    ds[0] = 0.5 * ds[0] + retract_start
    ds[-1] = 0.5 * ds[-1] + retract_end
    return s, ds


def along_closed_curve(curve: np.ndarray, spacing: float, inward: float) -> tuple[np.ndarray, np.ndarray]:
    """Return evenly spaced points of a closed polygon, moved inward along the normal.

    Parameters
    ----------
    curve : ndarray, shape (k, 2)
        Corners, counter-clockwise, first not repeated (chords).
    spacing : float
        Wanted distance between points.
    inward : float
        Distance by which the points lie inside.

    Returns
    -------
    points : ndarray, shape (n, 2)
    ds : ndarray, shape (n,)
        Arc length of the curve that each point stands for.

    Raises
    ------
    BodyError
        If the curve is too small to hold points at this spacing.
    """
    closed = np.vstack([curve, curve[:1]])
    arc = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(closed, axis=0).T))])
    count = round(arc[-1] / spacing)
    if count < 6:
        raise BodyError(
            f"The closed body has a circumference of {arc[-1]:.3g} chords, only {count} points at this resolution; "
            "at least 6 are needed. Raise cells_per_chord."
        )
    s = (np.arange(count) + 0.5) * arc[-1] / count
    points = np.column_stack([np.interp(s, arc, closed[:, 0]), np.interp(s, arc, closed[:, 1])])
    tangent = np.roll(points, -1, axis=0) - np.roll(points, 1, axis=0)
    tangent /= np.hypot(*tangent.T)[:, None]
    normal_inward = np.column_stack([-tangent[:, 1], tangent[:, 0]])
    return points + inward * normal_inward, np.full(count, arc[-1] / count)


def circle(radius: float, corners: int = 720) -> np.ndarray:
    """Return a counter-clockwise polygon of a circle about the origin with the circle's own area."""
    angle = 2.0 * np.pi * np.arange(corners) / corners
    fitted = radius * np.sqrt(2.0 * np.pi / (corners * np.sin(2.0 * np.pi / corners)))
    return fitted * np.column_stack([np.cos(angle), np.sin(angle)])


def polygon_area(curve: np.ndarray) -> tuple[float, np.ndarray]:
    """Return area and centroid, shape (2,), of a counter-clockwise polygon (shoelace formula)."""
    following = np.roll(curve, -1, axis=0)
    cross = curve[:, 0] * following[:, 1] - following[:, 0] * curve[:, 1]
    area = 0.5 * float(cross.sum())
    return area, ((curve + following) * cross[:, None]).sum(axis=0) / (6.0 * area)


def polygon_polar_moment(curve: np.ndarray) -> float:
    """Return the polar second moment of area about the centroid of a counter-clockwise polygon."""
    area, centroid = polygon_area(curve)
    here = curve - centroid
    following = np.roll(here, -1, axis=0)
    cross = here[:, 0] * following[:, 1] - following[:, 0] * here[:, 1]
    squares = (here**2).sum(axis=1) + (here * following).sum(axis=1) + (following**2).sum(axis=1)
    return float((cross * squares).sum() / 12.0)


def distance_to_segment(points: np.ndarray, start: np.ndarray, end: np.ndarray) -> np.ndarray:
    """Return the distance of each point, shape (n, 2), to the straight segment from `start` to `end`."""
    along = end - start
    share = np.clip((points - start) @ along / (along @ along), 0.0, 1.0)
    return np.hypot(*(points - start - share[:, None] * along).T)


def smooth_step(x: np.ndarray) -> np.ndarray:
    """Return 0 below 0, 1 above 1 and the quintic with two vanishing derivatives at both ends between."""
    x = np.clip(x, 0.0, 1.0)
    return x**3 * (10.0 - 15.0 * x + 6.0 * x**2)
