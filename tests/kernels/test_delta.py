"""Regularised deltas: discrete moments hold exactly, interpolation and spreading are adjoint."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ibsolver.kernels import delta
from tests.grids import plain

KINDS = (delta.ROMA, delta.HAT, delta.QUADRATIC, delta.CUBIC, delta.QUINTIC)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("form", [lambda k: k, plain])
@settings(max_examples=50, deadline=None)
@given(position=st.floats(-20, 20))
def test_weights_sum_to_one_and_keep_the_first_moment(kind, form, position):
    weight = np.empty(delta.WIDTHS[kind])
    lowest = form(delta.weights)(kind, position, weight)
    where = lowest + np.arange(delta.WIDTHS[kind])
    assert abs(weight.sum() - 1) < 1e-13
    assert abs(weight @ where - position) < 1e-12


@settings(max_examples=50, deadline=None)
@given(position=st.floats(-5, 5))
def test_roma_sum_of_squares_does_not_depend_on_the_position(position):
    """Roma, Peskin & Berger (1999): the squares add up to 1/2 wherever the point lies."""
    weight = np.empty(delta.WIDTHS[delta.ROMA])
    delta.weights(delta.ROMA, position, weight)
    assert abs(weight @ weight - 0.5) < 1e-12


@pytest.mark.parametrize("form", [lambda k: k, plain])
def test_spread_is_the_adjoint_of_interpolate(form):
    rng = np.random.default_rng(2)
    points = rng.uniform(0.3, 0.7, (6, 2))
    index, weight = np.zeros((6, 2), dtype=np.int64), np.zeros((6, 2, delta.WIDTHS[delta.ROMA]))
    form(delta.locate)(delta.ROMA, points, 0.0, 0.0, 0.05, index, weight)
    field, force = rng.standard_normal((21, 22)), rng.standard_normal((6, 2))
    here, spread = np.zeros((6, 2)), np.zeros_like(field)
    form(delta.interpolate)(field, index, weight, 1, here)
    form(delta.spread)(force, 1, 1.0, index, weight, spread)
    assert here[:, 1] @ force[:, 1] == pytest.approx((spread * field).sum(), rel=1e-12)
    assert (here[:, 0] == 0).all()


def test_interpolation_of_a_linear_field_is_exact():
    rng = np.random.default_rng(4)
    points = rng.uniform(0.3, 0.7, (9, 2))
    index, weight = np.zeros((9, 2), dtype=np.int64), np.zeros((9, 2, delta.WIDTHS[delta.ROMA]))
    h = 0.05
    delta.locate(delta.ROMA, points, 0.1, -0.2, h, index, weight)
    x, y = 0.1 + h * np.arange(25), -0.2 + h * np.arange(25)
    field = 2.0 + 3.0 * x[None, :] - 0.7 * y[:, None]
    out = np.zeros((9, 2))
    delta.interpolate(field, index, weight, 0, out)
    np.testing.assert_allclose(out[:, 0], 2.0 + 3.0 * points[:, 0] - 0.7 * points[:, 1], rtol=1e-13)
