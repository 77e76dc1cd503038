"""Lift and drag: scales, units, spikes, runs without seconds."""

from __future__ import annotations

import numpy as np
import pytest

from postprocess.figures.forces import draw_forces, grows, load_limits, moving_angles
from tests.postprocess.figures.looks import check_print, texts
from tests.postprocess.figures.made_up import loads

INFO = {
    "title": "Invented plate", "reynolds": 1200.0, "flaps": ["front", "rear"],
    "caution": "Two-dimensional computation; loads for choosing tests and load cells, not for strength.",
}  # fmt: skip


def labels(figure) -> list[str]:
    return [ax.get_ylabel() for ax in figure.axes]


def draw(table, figures, tmp_path, info=INFO, **more):
    path = draw_forces(table, info, tmp_path / "forces.png", **more)
    if path.exists():
        check_print(figures[-1], path)
    return figures[-1]


def test_a_dimensional_run_has_chords_seconds_and_millinewtons(drawn, tmp_path):
    figure = draw(loads(), drawn, tmp_path)
    words = texts(figure)
    assert {"travel (chords)", "time (s)", "lift (mN)", "drag (mN)", "tow (U)"} <= set(words)
    assert any(word.startswith("Invented plate, Re") for word in words)
    assert any("choosing tests" in word for word in words) and not any("outside" in word for word in words)
    assert labels(figure) == ["lift coefficient $C_L$", "drag coefficient $C_D$", "tow (U)"]
    lift, drag = figure.axes[0].child_axes[0], figure.axes[1].child_axes[0]
    for panel, newtons in ((figure.axes[0], lift), (figure.axes[1], drag)):
        np.testing.assert_allclose(newtons.get_ylim(), 2.3 * np.array(panel.get_ylim()), rtol=1e-6)


def test_the_axis_of_seconds_follows_the_start(sketched, tmp_path):
    """Along 10 x^3 - 15 x^4 + 6 x^5 over T = 1, half a chord is towed at t = 1: a lag of T / 2 ever after."""
    figure = draw(loads(), sketched, tmp_path)
    seconds = figure.axes[0].child_axes[-1]
    assert seconds.get_xlabel() == "time (s)"
    forward, backward = seconds._functions
    assert forward(np.array([0.5, 4.0])) == pytest.approx(3.06 * np.array([1.0, 4.5]), rel=2e-3)
    x = np.array([0.3, 2.0, 9.0])
    np.testing.assert_allclose(backward(forward(x)), x, rtol=1e-9)


def test_a_dimensionless_run_has_neither_seconds_nor_newtons(sketched, tmp_path):
    words = texts(draw(loads(dimensional=False), sketched, tmp_path))
    assert not any("(s)" in word or "(mN)" in word for word in words) and "travel (chords)" in words


def test_the_spike_of_an_impulsive_start_is_cut_and_told(drawn, tmp_path):
    table = loads("impulsive")
    figure = draw(table, drawn, tmp_path)
    assert figure.axes[0].get_ylim()[1] < 5 < table["CL"].max()
    assert any(f"peak {table['CL'].max():.3g} at" in word and "outside" in word for word in texts(figure))
    assert labels(figure)[-1] != "tow (U)"  # the speed never changes


@pytest.mark.parametrize("sign", [1, -1])
def test_limits_leave_out_only_narrow_spikes(sign):
    time = np.linspace(0, 8, 801)
    smooth = sign * (1.0 + 0.5 * np.sin(time))
    low, high, peak = load_limits(smooth, time)
    assert peak is None and low < smooth.min() and high > smooth.max() and low <= 0 <= high
    spike = smooth + sign * 40 * (time < 0.03)
    low, high, peak = load_limits(spike, time)
    assert peak is not None and spike[peak] == pytest.approx(sign * 41, abs=0.1) and high - low < 2.5
    hump = smooth + sign * 40 * (time < 0.5)  # broad: this belongs to the flow
    low, high, peak = load_limits(hump, time)
    assert peak is None and low <= hump.min() and high >= hump.max()


def test_limits_do_not_depend_on_how_steps_crowd():
    """The same spike in even steps, and in steps a hundred times shorter while it lasts."""
    even = np.linspace(0, 8, 4001)
    crowded = np.concatenate([np.linspace(0, 0.05, 2000, endpoint=False), np.linspace(0.05, 8, 800)])
    for time in (even, crowded):
        low, high, peak = load_limits(2.0 - 0.1 * time + 50 * np.exp(-time / 0.005), time)
        assert peak == 0 and high < 2.6 and low < 0


@pytest.mark.parametrize("value", [[np.nan] * 3, [0.0] * 3, [np.nan, 1.0, 2.0], [5.0]])
def test_limits_of_odd_records_are_finite(value):
    value = np.array(value)
    low, high, peak = load_limits(value, np.arange(value.size, dtype=float))
    assert np.isfinite([low, high]).all() and low < high and peak is None
    assert load_limits(value, np.zeros(value.size))[0] < load_limits(value, np.zeros(value.size))[1]


def test_a_carriage_that_stops_is_sketched_against_time(sketched, tmp_path):
    table = loads("stops", flaps=True)
    assert not grows(table) and grows(loads()) and grows(loads("impulsive"))
    figure = draw(table, sketched, tmp_path)
    assert figure.axes[-1].get_xlabel() == "time (c/U)"
    np.testing.assert_allclose(figure.axes[-1].get_xlim(), (0, 8))
    returning = loads()
    returning["travel"] = np.sin(returning["time"])
    assert not grows(returning)


def test_only_angles_that_vary_get_a_panel(sketched, tmp_path):
    table = loads(flaps=True)
    assert moving_angles(table, ["front", "rear", "absent"]) == {"opening_deg_front": "opening of flap front"}
    figure = draw(table, sketched, tmp_path)
    assert labels(figure)[2] == "angle (deg)" and len(figure.axes[2].lines) == 1
    table["incidence_deg"] = 18 + table["tow_speed"]
    assert len(draw(table, sketched, tmp_path).axes[2].lines) == 2


def test_newtons_get_their_own_curve_where_no_one_factor_holds(drawn, tmp_path):
    """Coefficients on the momentary speed: mN per coefficient changes along the tow."""
    table = loads()
    for name in ("CL", "CD", "CL_momentum", "CD_momentum"):
        table[name] = table[name] / table["tow_speed"] ** 2
    figure = draw(table, drawn, tmp_path)
    curves = [ax for ax in figure.axes if "mN" in ax.get_ylabel()]
    assert len(curves) == 2
    np.testing.assert_array_equal(curves[0].lines[0].get_ydata(), table["lift_mN"])
    assert figure.axes[0].get_ylim()[1] < 12  # the quotient of two small numbers at the start does not set the scale


def test_filtered_loads_lie_over_the_computed_ones(sketched, tmp_path):
    table = loads()
    even = np.linspace(table["time"][0], 8, 300)
    filtered = {"travel": np.interp(even, table["time"], table["travel"]), "time": even}
    filtered |= {f"{name}_filtered": np.interp(even, table["time"], table[name]) for name in ("CL", "CD")}
    figure = draw(table, sketched, tmp_path, filtered=filtered)
    by_label = {line.get_label(): line for line in figure.axes[0].lines}
    assert {"as computed", "filtered", "momentum balance"} <= set(by_label)
    assert by_label["filtered"].get_zorder() > by_label["as computed"].get_zorder()


def test_no_loads_at_all_are_drawn_too(drawn, tmp_path):
    """A case without a body: every load is zero."""
    table = {name: column * (0 if name.startswith(("C", "l", "d")) else 1) for name, column in loads().items()}
    draw(table, drawn, tmp_path, {"title": "Empty channel", "reynolds": 100.0})
