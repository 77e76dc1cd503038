"""Filters, statistics and spectra on signals of known answer."""

from __future__ import annotations

import math

import numpy as np
import pytest

from ibsolver.errors import UsageError
from postprocess import filters, statistics
from postprocess.spectrum import spectrum


@pytest.mark.parametrize("order", [2, 4])
@pytest.mark.parametrize("ratio", [0.5, 1.0, 2.0])
def test_butterworth_gain_is_the_formula(order, ratio):
    """|H|^2 = 1 / (1 + (f/f_c)^(2 n)) (Butterworth 1930); run twice it is squared."""
    rate, cutoff = 200.0, 2.0
    t = np.arange(0, 60, 1 / rate)
    wave = np.sin(2 * np.pi * ratio * cutoff * t)
    middle = slice(t.size // 4, -t.size // 4)
    gain = 1 / math.sqrt(1 + ratio ** (2 * order))
    once = filters.low_pass(wave, rate, cutoff, order, zero_phase=False)
    twice = filters.low_pass(wave, rate, cutoff, order)
    size = np.std(wave[middle])
    assert np.std(once[middle]) / size == pytest.approx(gain, rel=0.01)
    assert np.std(twice[middle]) / size == pytest.approx(gain**2, rel=0.01)


def test_zero_phase_keeps_the_time_of_a_peak_and_causal_delays_it():
    rate = 100.0
    t = np.arange(0, 20, 1 / rate)
    bump = np.exp(-(((t - 10) / 0.5) ** 2))
    at = t[np.argmax(filters.low_pass(bump, rate, 1.0))]
    late = t[np.argmax(filters.low_pass(bump, rate, 1.0, zero_phase=False))]
    assert at == pytest.approx(10.0, abs=0.011)
    assert late > 10.1


def test_a_constant_passes_unchanged():
    for kind in filters.KINDS:
        for zero_phase in (True, False):
            out = filters.low_pass(np.full(500, 3.0), 100.0, 5.0, 3, kind, zero_phase)
            np.testing.assert_allclose(out, 3.0, rtol=1e-9)


@pytest.mark.parametrize(
    ("changes", "words"),
    [({"cutoff": 60.0}, "cut-off of 60"), ({"order": 0}, "order 0"), ({"kind": "elliptic"}, "butterworth, bessel")],
)
def test_impossible_filters_are_sentences(changes, words):
    with pytest.raises(UsageError, match=words):
        filters.low_pass(np.zeros(100), **{"rate": 100.0, "cutoff": 5.0, **changes})


def test_resampling_never_overshoots():
    t = np.sort(np.random.default_rng(0).uniform(0, 10, 50))
    even, value = filters.resample(t, np.where(t > 5, 1.0, 0.0), 37.0)
    assert value.min() >= 0 and value.max() <= 1 and np.allclose(np.diff(even), 1 / 37.0)


def test_window_mean_weights_by_time():
    t = np.concatenate([np.linspace(0, 1, 1000), np.linspace(1, 2, 11)[1:]])
    mean = statistics.window_mean(t, t, (0.0, 2.0))
    assert mean.value == pytest.approx(1.0, rel=1e-9)


def test_batch_means_cover_the_true_mean_of_a_correlated_process():
    """First-order autoregression with known mean 0: about 95 % of the intervals must hold it."""
    rng = np.random.default_rng(5)
    covered = 0
    for _ in range(200):
        noise = rng.standard_normal(6000)
        x = np.empty(6000)
        x[0] = noise[0]
        for k in range(1, 6000):
            x[k] = 0.9 * x[k - 1] + noise[k]
        mean = statistics.window_mean(np.arange(6000.0), x, (500.0, 5999.0))
        covered += abs(mean.value) < mean.half_width
    assert 0.90 <= covered / 200 <= 0.99


def test_student_factor_is_that_of_the_tables():
    """t(0.975, 14) = 2.145 (any table of Student's distribution, e.g. NIST/SEMATECH e-Handbook, 1.3.6.7.2)."""
    t = np.arange(1501.0)
    steps = np.repeat(np.arange(15.0), 100)
    x = np.append(steps, steps[-1])
    mean = statistics.window_mean(t, x, (0.0, 1500.0))
    means = [np.trapezoid(np.interp(np.linspace(a, a + 100, 5001), t, x), dx=0.02) / 100 for a in range(0, 1500, 100)]
    assert mean.half_width == pytest.approx(2.145 * np.std(means, ddof=1) / math.sqrt(15), rel=1e-3)


def test_peak_between_samples():
    t = np.linspace(0, 1, 21)
    top = statistics.peak(t, -((t - 0.512) ** 2) + 4.0)
    assert top.time == pytest.approx(0.512) and top.value == pytest.approx(4.0)


def test_strouhal_number_of_a_sine_on_uneven_steps():
    rng = np.random.default_rng(1)
    t = np.cumsum(rng.uniform(0.01, 0.03, 6000))
    found = spectrum(t, 1.3 + 0.3 * np.sin(2 * np.pi * 0.1643 * t))
    assert found.dominant == pytest.approx(0.1643, abs=0.05 * found.resolution)


def test_a_straight_line_has_no_strouhal_number():
    t = np.linspace(0, 10, 500)
    assert math.isnan(spectrum(t, 2.0 + 0.1 * t).dominant)
