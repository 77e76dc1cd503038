"""Lagrangian points of lines and closed curves."""

from __future__ import annotations

import numpy as np
import pytest

from ibsolver.body import points as layout


def test_points_of_a_line_share_its_whole_length():
    s, ds = layout.along_line(-0.25, 0.75, 0.02, 0.01, 0.013)
    assert s[0] == pytest.approx(-0.24) and s[-1] == pytest.approx(0.737)
    assert ds.sum() == pytest.approx(1.0)
    assert np.ptp(np.diff(s)) < 1e-12


def test_a_line_shorter_than_its_retractions_is_one_point():
    s, ds = layout.along_line(0.0, 0.01, 0.02, 0.01, 0.01)
    assert s == pytest.approx([0.005]) and ds == pytest.approx([0.01])


def test_points_of_a_circle_lie_inside_by_the_retraction():
    points, ds = layout.along_closed_curve(layout.circle(0.5), 1 / 40, 0.01)
    radius = np.hypot(*points.T)
    np.testing.assert_allclose(radius, 0.49, atol=2e-4)
    assert ds.sum() == pytest.approx(np.pi, rel=1e-4)


def test_area_and_centroid_of_a_circle_and_a_triangle():
    area, centroid = layout.polygon_area(layout.circle(0.5) + [0.3, -0.2])
    assert area == pytest.approx(np.pi / 4, rel=1e-12)
    np.testing.assert_allclose(centroid, [0.3, -0.2], atol=1e-12)
    area, centroid = layout.polygon_area(np.array([[0.0, 0.0], [3.0, 0.0], [0.0, 3.0]]))
    assert area == pytest.approx(4.5)
    np.testing.assert_allclose(centroid, [1.0, 1.0])


def test_a_closed_curve_too_small_for_the_grid_is_refused():
    with pytest.raises(layout.BodyError, match="Raise cells_per_chord"):
        layout.along_closed_curve(layout.circle(0.01), 1 / 32, 0.01)


def test_distance_to_a_segment():
    points = np.array([[0.5, 1.0], [-3.0, 4.0], [1.0, -2.0], [4.0, 4.0]])
    have = layout.distance_to_segment(points, np.array([0.0, 0.0]), np.array([1.0, 0.0]))
    np.testing.assert_allclose(have, [1.0, 5.0, 2.0, 5.0])


def test_smooth_step_is_flat_at_both_ends():
    x = np.array([-1.0, 0.0, 1e-4, 0.5, 1 - 1e-4, 1.0, 2.0])
    y = layout.smooth_step(x)
    assert y[0] == y[1] == 0 and y[-1] == y[-2] == 1
    assert y[3] == 0.5 and y[2] < 1e-10 and 1 - y[4] < 1e-10
