"""Face positions: exact ends, uniform core, smooth growth."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ibsolver.grid.staggered import GridError, StaggeredGrid
from ibsolver.grid.stretching import growing_widths, stretched_faces, uniform_faces


@settings(max_examples=80, deadline=None)
@given(
    first=st.floats(1e-3, 0.1),
    distance=st.floats(0.0, 30.0),
    ratio=st.floats(1.0, 1.2),
    largest=st.floats(0.1, 2.0),
)
def test_widths_fill_the_distance_and_never_grow_too_fast(first, distance, ratio, largest):
    widths = growing_widths(first, distance, ratio, largest)
    if widths.size == 0:
        assert distance < 1e-6 * first
        return
    assert widths.sum() == pytest.approx(distance, rel=1e-12)
    assert (widths > 0).all()
    if distance > 3 * first:
        assert widths[0] <= first * ratio * 1.5
        assert (widths[1:] / widths[:-1] <= ratio * (1 + 1e-9)).all()
        assert widths.max() <= largest * (1 + 1e-9) + first * 0.5


def test_core_faces_lie_on_whole_multiples_of_the_spacing():
    h = 1 / 48
    faces = stretched_faces(-6.0, -0.41, 0.93, 10.0, h, 1.04, 0.5)
    assert faces[0] == -6.0 and faces[-1] == 10.0
    core = faces[(faces > -0.41 - h) & (faces < 0.93 + h)]
    np.testing.assert_allclose(core / h, np.round(core / h), atol=1e-9)
    assert core[0] <= -0.41 and core[-1] >= 0.93


def test_growth_stops_at_the_largest_cell():
    faces = stretched_faces(-30.0, -0.5, 0.5, 30.0, 1 / 32, 1.1, 0.5)
    assert np.diff(faces).max() <= 0.5 + 1e-12


def test_symmetric_domain_gives_a_symmetric_stretch():
    widths = np.diff(stretched_faces(-5.0, -0.5, 0.5, 5.0, 1 / 32, 1.04, 0.5))
    np.testing.assert_allclose(widths, widths[::-1], rtol=1e-10)


def test_uniform_faces():
    np.testing.assert_allclose(uniform_faces(0.0, 2.0, 0.25), np.arange(9) * 0.25)


def test_ghost_widths_mirror_or_wrap():
    faces = np.array([0.0, 1.0, 3.0, 6.0])
    box = (0.0, 6.0, 0.0, 6.0)
    assert list(StaggeredGrid(faces, faces, box, 1.0).dx) == [1, 1, 2, 3, 3]
    assert list(StaggeredGrid(faces, faces, box, 1.0, periodic_x=True).dx) == [3, 1, 2, 3, 1]


def test_faces_that_do_not_increase_are_refused():
    with pytest.raises(GridError, match="increasing"):
        StaggeredGrid(np.array([0.0, 1.0, 1.0, 2.0]), np.arange(5.0), (0, 1, 0, 1), 1.0)
