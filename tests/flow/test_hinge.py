"""The hinge equations by themselves: stops, several hinges, limits of mass and spring."""

from __future__ import annotations

import math

import numpy as np
import pytest

from ibsolver.flow.hinge import FREE, LOWER, UPPER, HingeTerms


def terms(matrix, right, angle, rate, limits, dt=0.01):
    m = len(right)
    nothing = np.zeros((m, 1, 2))
    as_array = [np.array(x, dtype=float) for x in (matrix, right, angle, rate, limits)]
    return HingeTerms(np.arange(m), nothing, nothing, *as_array, dt)


NO_FORCE = np.zeros((1, 2))


def march(inertia, torque, angle, rate, limits, steps, dt=0.01):
    """March one hinge I theta'' = torque(t, theta) without fluid."""
    held, history = np.array([FREE]), []
    for k in range(steps):
        t = terms([[inertia / dt]], [inertia / dt * rate + torque(k * dt, angle)], [angle], [rate], [limits], dt)
        rates, held, reaction = t.solve(NO_FORCE, held)
        angle, rate = float(t.angles_after(rates, held)[0]), float(rates[0])
        history.append((angle, rate, float(held[0]), float(reaction[0])))
    return np.array(history)


def test_a_flap_pushed_against_its_stop_rests_there_without_chatter():
    out = march(1.0, lambda t, a: 5.0, 0.0, 0.0, (0.0, 0.5), 200)
    landed = int(np.argmax(out[:, 2] == UPPER))
    assert 40 < landed < 50  # 0.5 = 5 t^2 / 2 at t = 0.447
    assert (out[landed:, 0] == 0.5).all() and (out[landed:, 1] == 0).all() and (out[landed:, 2] == UPPER).all()
    # The stop holds what pushes: -5, once the shock of the landing is over.
    np.testing.assert_allclose(out[landed + 1 :, 3], -5.0)


def test_it_is_let_go_when_the_torque_turns():
    out = march(1.0, lambda t, a: 5.0 if t < 1.0 else -2.0, 0.0, 0.0, (0.0, 0.5), 200)
    released = int(np.argmax((out[:, 2] == FREE) & (np.arange(200) > 60)))
    assert released in (100, 101)
    later = 150
    since = (later - released + 1) * 0.01
    assert out[later, 0] == pytest.approx(0.5 - since**2, abs=0.02)


@pytest.mark.parametrize("side", [LOWER, UPPER])
def test_both_stops_work_alike(side):
    out = march(1.0, lambda t, a: side * 3.0, 0.25, 0.0, (0.0, 0.5), 150)
    assert out[-1, 2] == side and out[-1, 3] == pytest.approx(-3.0 * side)


def test_two_coupled_hinges_of_which_one_is_held():
    """With the first at rest on its stop the second moves as if alone; the stop takes the coupling."""
    matrix = np.array([[3.0, 1.0], [1.0, 2.0]])
    t = terms(matrix, [-4.0, 2.0], [0.0, 0.3], [0.0, 0.0], [(0.0, 1.0), (0.0, 1.0)])
    rates, held, reaction = t.solve(NO_FORCE, np.array([LOWER, FREE]))
    np.testing.assert_allclose(rates, [0.0, 1.0])
    assert held.tolist() == [LOWER, FREE]
    np.testing.assert_allclose(reaction, [5.0, 0.0])


def test_undamped_oscillator_keeps_its_energy_and_period():
    """Trapezoidal rule: energy exact, period too long by (omega dt)^2/12."""
    k, dt = 4.0 * math.pi**2, 0.01
    angle, rate, crossings = 0.1, 0.0, []
    for step in range(1000):
        matrix = 1.0 / dt + 0.25 * dt * k
        right = rate / dt - k * (angle + 0.25 * dt * rate)
        t = terms([[matrix]], [right], [angle], [rate], [(-1.0, 1.0)], dt)
        rates, held, _ = t.solve(NO_FORCE, np.array([FREE]))
        new = float(t.angles_after(rates, held)[0])
        if angle > 0 >= new:
            crossings.append((step + angle / (angle - new)) * dt)
        angle, rate = new, float(rates[0])
    energy = 0.5 * rate**2 + 0.5 * k * angle**2
    assert energy == pytest.approx(0.5 * k * 0.01, rel=1e-10)
    wanted = 1.0 * (1 + (2 * math.pi * dt) ** 2 / 12)
    assert np.diff(crossings).mean() == pytest.approx(wanted, rel=2e-5)
