"""Filters, statistics and spectra on signals of known answer."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.signal import lfilter

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


def test_a_step_after_still_water_overshoots_as_the_textbooks_say():
    """Second order, damping 1/sqrt(2): overshoot exp(-pi) (any text on control, e.g. Ogata, Modern Control Engineering)."""
    rate = 400.0
    step = filters.low_pass(np.ones(4000), rate, 1.0, 2, zero_phase=False, pre_roll=3.0)
    assert abs(step[0]) < 1e-3 and step[-1] == pytest.approx(1.0, abs=1e-6)
    assert step.max() - 1.0 == pytest.approx(math.exp(-math.pi), rel=1e-3)


@pytest.mark.parametrize("kind", filters.KINDS)
def test_without_phase_a_step_becomes_a_curve_symmetric_about_it(kind):
    """A filter without phase cannot tell forward from backward; still water before the trace is zeros before it."""
    step = filters.low_pass(np.repeat([0.0, 1.0], 1000), 100.0, 1.0, 3, kind)
    np.testing.assert_allclose(step[999::-1] + step[1000:], 1.0, atol=1e-6)
    after = filters.low_pass(np.ones(1000), 100.0, 1.0, 3, kind, pre_roll=10.0)
    np.testing.assert_allclose(after, step[1000:], atol=1e-12)


@pytest.mark.parametrize("zero_phase", [True, False])
@pytest.mark.parametrize("ratio", [0.5, 1.0, 1.5, 2.2576])
def test_moving_average_gain_is_the_formula(ratio, zero_phase):
    """|H| = |sin(pi f T) / (pi f T)|, T the length of the mean; 1/sqrt(2) at the cut-off, nothing at f T = 1."""
    rate, cutoff = 1000.0, 2.0
    t = np.arange(0, 40, 1 / rate)
    wave = np.sin(2 * np.pi * ratio * cutoff * t)
    middle = slice(t.size // 4, -t.size // 4)
    smooth = filters.low_pass(wave, rate, cutoff, kind="moving average", zero_phase=zero_phase)[middle]
    x = math.pi * ratio * filters.HALF_POWER
    assert np.std(smooth) / np.std(wave[middle]) == pytest.approx(abs(math.sin(x) / x), abs=5e-3)
    lag = 0.0 if zero_phase else 0.5 * filters.HALF_POWER / cutoff
    if ratio == 1.0:
        assert np.sqrt(2) * np.mean(smooth * np.sin(2 * np.pi * cutoff * (t[middle] - lag))) == pytest.approx(0.5, abs=5e-3)


@pytest.mark.parametrize("length", [1, 2, 5, 6])
def test_a_centred_mean_of_any_length_does_not_shift_a_ramp(length):
    ramp = np.arange(50.0)
    smooth = filters.low_pass(ramp, 1.0, filters.HALF_POWER / length, kind="moving average") if length > 1 else ramp
    assert smooth.size == 50
    np.testing.assert_allclose(smooth[10:-10], ramp[10:-10], atol=1e-9)


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


def test_batch_means_find_the_variance_of_the_mean_of_a_correlated_process():
    """x_k = a x_(k-1) + e_k: the mean of n values has variance 1 / (n (1 - a)^2) for long n (any text on time series)."""
    rng = np.random.default_rng(11)
    n, squares = 6000, []
    for _ in range(300):
        x = lfilter([1.0], [1.0, -0.8], rng.standard_normal(n + 500))[500:]
        mean = statistics.window_mean(np.arange(float(n)), x, (0.0, n - 1.0))
        squares.append((mean.half_width / 2.145) ** 2)
    assert np.mean(squares) == pytest.approx(1 / (n * 0.2**2), rel=0.08)


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


def test_the_spectrum_of_noise_is_flat_at_its_variance_over_half_the_rate():
    """One-sided density 2 sigma^2 / rate; and the density of a sine sums up to half its amplitude squared."""
    rng = np.random.default_rng(2)
    t = np.arange(0, 400, 0.02)
    noise = spectrum(t, 0.7 * rng.standard_normal(t.size), segments=40)
    inner = (noise.frequency > 1) & (noise.frequency < 24)
    assert np.mean(noise.density[inner]) == pytest.approx(2 * 0.49 / 50.0, rel=0.03)
    sine = spectrum(t, 0.3 * np.sin(2 * np.pi * 1.7 * t))
    assert np.trapezoid(sine.density, sine.frequency) == pytest.approx(0.045, rel=0.01)
