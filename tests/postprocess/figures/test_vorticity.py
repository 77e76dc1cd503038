"""Vorticity: colour range, window, bodies, panels, true places on a stretched grid."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.image import imread

from ibsolver.errors import UsageError
from postprocess.figures import style
from postprocess.figures.vorticity import default_limit, default_region, draw_bodies, draw_panel, draw_vorticity
from tests.postprocess.figures.looks import check_print, texts
from tests.postprocess.figures.made_up import circle, frame, plate_and_flap, vortex

INFO = {"title": "Invented plate", "reynolds": 1200.0, "chord_mm": 60.0}
NAN = float("nan")


def panels(figure):
    return [ax for ax in figure.axes if ax.get_visible() and ax.get_aspect() == 1.0]


@pytest.mark.parametrize("count", [1, 3, 4, 8])
def test_any_number_of_panels(count, drawn, tmp_path):
    frames = [frame(0.5 + 0.3 * k, spacing=1 / 24) for k in range(count)]
    path = draw_vorticity(frames, INFO, tmp_path / "w.png")
    figure = drawn[-1]
    check_print(figure, path)
    shown = panels(figure)
    assert len(shown) == count
    meshes = [ax.collections[0] for ax in shown]
    limits = {mesh.get_clim() for mesh in meshes}
    assert len(limits) == 1 and (low_high := limits.pop())[0] == -low_high[1] < 0
    scales = {round(ax.get_window_extent().width / np.ptp(ax.get_xlim()), 3) for ax in shown}
    assert len(scales) == 1
    below = [ax for ax in shown if ax.get_xlabel()]
    assert len(below) == min(count, {1: 1, 3: 2, 4: 2, 8: 3}[count])
    words = texts(figure)
    assert words.count("50 mm") == 1 and "travel 0.50 chords   t = 3.00 s" in words


def test_a_dimensionless_run_names_convective_time_and_no_scale_bar(drawn, tmp_path):
    path = draw_vorticity(
        [frame(2.0, circle(), NAN, 1 / 24)], {"title": "Cylinder", "reynolds": 100, "length_word": "diameter"},
        tmp_path / "w.png",
    )  # fmt: skip
    check_print(drawn[-1], path)
    words = texts(drawn[-1])
    assert "travel 2.00 diameters   t = 2.50 c/U" in words and "x (diameters)" in words
    assert not any("mm" in word for word in words)


def test_thin_bodies_are_lines_and_closed_ones_filled():
    ax = style.new_figure(4, 3).subplots()
    draw_bodies(ax, plate_and_flap())
    assert len(ax.lines) == 2 and not ax.patches and min(line.get_linewidth() for line in ax.lines) >= 1.5
    np.testing.assert_allclose(ax.lines[1].get_xydata()[0], plate_and_flap()["front"][0])
    draw_bodies(ax, circle())
    assert len(ax.lines) == 2 and len(ax.patches) == 1 and ax.patches[0].get_closed()


def test_a_chosen_limit_and_region_are_kept(sketched, tmp_path):
    draw_vorticity([frame(spacing=1 / 24)], INFO, tmp_path / "w.png", limit=7.5, region=(-1.0, 2.0, -0.5, 0.8))
    ax = panels(sketched[-1])[0]
    assert ax.collections[0].get_clim() == (-7.5, 7.5)
    assert ax.get_xlim() == (-1.0, 2.0) and ax.get_ylim() == (-0.5, 0.8)


def test_the_window_holds_body_and_near_wake_and_never_leaves_the_domain():
    shapes = plate_and_flap()
    low_x, high_x, low_y, high_y = default_region([frame(shapes=shapes)])
    corners = np.concatenate(list(shapes.values()))
    assert low_x < corners[:, 0].min() - 0.4 and high_x > corners[:, 0].max() + 1.5
    assert low_y < corners[:, 1].min() - 0.4 and high_y > corners[:, 1].max() + 0.4
    far = frame(shapes={"plate": shapes["plate"] + [5.9, 0.0]})
    assert default_region([far])[1] <= far.x_faces[-1]
    bare = frame(shapes={})
    assert default_region([bare]) == tuple(float(f[k]) for f in (bare.x_faces, bare.y_faces) for k in (0, -1))


def test_the_colour_limit_holds_three_quarters_of_a_vortex():
    """Of a Lamb-Oseen vortex, a share w / w_peak of the circulation has vorticity below w: exp(-r^2/a^2), integrated.

    So the limit is 0.75 w_peak before it is rounded up: 13.5 becomes 15, whatever the grid and the number of frames.
    """
    place, peak = np.array([1.6, 0.2]), 18.0
    for spacing in (1 / 24, 1 / 96):
        alone = frame(spacing=spacing)
        alone.vorticity = vortex(alone.x_faces, alone.y_faces, place, peak * np.pi * 0.3**2, 0.3)
        assert default_limit([alone], (-0.8, 3.0, -1.0, 1.2)) == 15.0
        assert default_limit([alone], (-0.8, 3.0, -1.0, 1.2)) == default_limit([alone] * 3, (-0.8, 3.0, -1.0, 1.2))


def test_the_boundary_layer_does_not_set_the_colours():
    box = (-0.8, 2.3, -0.9, 0.9)
    plain, layered = frame(), frame()
    plate = plate_and_flap()["plate"]
    for share in np.linspace(0, 1, 200):
        place = plate[0] + share * (plate[1] - plate[0])
        layered.vorticity = layered.vorticity + vortex(layered.x_faces, layered.y_faces, place, 0.03, 0.008)
    assert layered.vorticity.max() > 5 * plain.vorticity.max()
    assert default_limit([layered], box) == default_limit([plain], box)


@pytest.mark.parametrize("value", [0.0, np.nan, 1e7])
def test_odd_fields_are_drawn(value, drawn, tmp_path):
    odd = frame(spacing=1 / 24)
    odd.vorticity = np.full_like(odd.vorticity, value)
    path = draw_vorticity([odd], INFO, tmp_path / "w.png")
    check_print(drawn[-1], path)


def test_colours_stand_at_their_true_place_on_a_stretched_grid(drawn, tmp_path):
    """The darkest pixel of a lone vortex in the stretched part lies where the vortex is."""
    lone, place = frame(shapes={}), np.array([2.6, -1.4])
    lone.vorticity = vortex(lone.x_faces, lone.y_faces, place, -3.0, 0.35)
    path = draw_vorticity([lone], {"title": "Vortex"}, tmp_path / "w.png", region=(1.5, 4.0, -2.2, -0.4), limit=40.0)
    ax = panels(drawn[-1])[0]
    image = imread(path)[::-1, :, :3].mean(axis=2)
    box = ax.get_window_extent()
    rows, columns = slice(int(box.y0) + 4, int(box.y1) - 4), slice(int(box.x0) + 4, int(box.x1) - 4)
    dark = np.argwhere(image[rows, columns] <= np.quantile(image[rows, columns], 0.002)).mean(axis=0)
    seen = ax.transData.inverted().transform((dark[1] + columns.start + 0.5, dark[0] + rows.start + 0.5))
    cell = np.diff(lone.x_faces)[np.searchsorted(lone.x_faces, place[0])]
    np.testing.assert_allclose(seen, place, atol=0.5 * cell)


def test_one_sign_colours_are_one_side_of_the_map():
    """Counter-clockwise is rust: more red than blue; clockwise is teal."""
    ax = style.new_figure(3, 2).subplots()
    one = frame(spacing=1 / 24)
    mesh = draw_panel(ax, one, default_region([one]), 10.0)
    red, blue = mesh.cmap(mesh.norm(8.0)), mesh.cmap(mesh.norm(-8.0))
    assert red[0] > red[2] + 0.3 and blue[2] > blue[0] + 0.2
    assert mesh.cmap(mesh.norm(0.0))[:3] == pytest.approx((1, 1, 1), abs=0.02)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"frames": []}, "No frame to draw"),
        ({"limit": 0.0}, "colour limit 0 U/c"),
        ({"limit": NAN}, "colour limit nan U/c"),
        ({"region": (50.0, 60.0, 0.0, 1.0)}, "region x 50 to 60, y 0 to 1 shows no part of the domain"),
        ({"region": (1.0, -1.0, 0.0, 1.0)}, "Give X0 < X1"),
    ],
)
def test_what_cannot_be_drawn_is_a_sentence(arguments, words, tmp_path):
    frames = arguments.pop("frames", [frame(spacing=1 / 24)])
    with pytest.raises(UsageError, match=words):
        draw_vorticity(frames, INFO, tmp_path / "w.png", **arguments)
    assert not list(tmp_path.iterdir())
