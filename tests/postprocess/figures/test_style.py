"""Colours that everyone can tell apart, whole files, headings."""

from __future__ import annotations

import itertools
import subprocess
import sys
from pathlib import Path

import matplotlib
import numpy as np
import pytest
from matplotlib.colors import to_rgb

from ibsolver.errors import StorageError
from postprocess.figures import style
from tests.postprocess.figures.looks import lab, lightness, linear, png_size

ROOT = Path(__file__).resolve().parents[3]

# Complete dichromacy: Machado, Oliveira & Fernandes (2009), IEEE Trans. Vis. Comput. Graph. 15, 1291, severity 1.0
# (from memory; each row must sum to 1, since greys look the same to all).
DICHROMATS = {
    "protan": [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
    "deutan": [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
    "tritan": [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]],
}


def seen(colours: np.ndarray, kind: str) -> np.ndarray:
    """Return L*a*b* of sRGB colours as a dichromat sees them."""
    matrix = np.array(DICHROMATS[kind])
    np.testing.assert_allclose(matrix.sum(axis=1), 1.0, atol=2e-6)
    return lab(linear(colours) @ matrix.T)


def test_vorticity_colours_are_white_in_the_middle_and_as_dark_on_either_side():
    level = np.linspace(0.0, 1.0, 41)
    clockwise = lightness(style.ROTATION(0.5 - 0.5 * level)[:, :3])
    counter = lightness(style.ROTATION(0.5 + 0.5 * level)[:, :3])
    assert clockwise[0] > 98 and counter[0] > 98
    assert np.all(np.diff(clockwise) < 0) and np.all(np.diff(counter) < 0)
    assert np.abs(clockwise - counter).max() < 7
    assert min(clockwise[-1], counter[-1]) > lightness(np.array(to_rgb(style.BODY))) + 15


@pytest.mark.parametrize("kind", DICHROMATS)
def test_the_two_senses_of_rotation_differ_to_a_colour_blind_reader(kind):
    """A difference of 2.3 in CIE 1976 L*a*b* is just noticeable (common practice); ten times that is plain."""
    level = np.linspace(0.3, 1.0, 15)
    senses = [seen(style.ROTATION(0.5 + sign * 0.5 * level)[:, :3], kind) for sign in (-1, 1)]
    assert np.linalg.norm(senses[0] - senses[1], axis=1).min() > 23


@pytest.mark.parametrize("kind", DICHROMATS)
def test_curves_differ_to_a_colour_blind_reader(kind):
    curves = (style.LIFT, style.DRAG, style.THIRD, style.FOURTH)
    pairs = [*itertools.combinations(curves, 2), (style.LIFT, style.INK), (style.DRAG, style.INK)]
    for pair in pairs:
        first, second = seen(np.array([to_rgb(colour) for colour in pair]), kind)
        assert np.linalg.norm(first - second) > 23, pair


def test_small_print_is_dark_enough():
    """A contrast of at least 4.5 to 1 (W3C, WCAG 2.2, criterion 1.4.3)."""
    light = float(linear(np.array(to_rgb(style.QUIET))) @ [0.2126, 0.7152, 0.0722])
    assert 1.05 / (light + 0.05) > 4.5


def test_a_failed_save_leaves_the_old_file(tmp_path):
    figure = style.new_figure(2, 1)
    path = style.save(figure, tmp_path / "a.png")
    assert png_size(path) == (300, 150)
    with pytest.raises(StorageError):
        style.save(figure, tmp_path / "no folder" / "a.png")
    assert png_size(path) == (300, 150) and [p.name for p in tmp_path.iterdir()] == ["a.png"]


def test_a_users_own_defaults_stay_outside_and_are_given_back():
    with matplotlib.rc_context({"font.size": 31.0, "axes.grid": True, "axes.titlesize": 40}):
        with style.style():
            assert matplotlib.rcParams["font.size"] == 9 and not matplotlib.rcParams["axes.grid"]
        assert matplotlib.rcParams["font.size"] == 31.0 and matplotlib.rcParams["axes.grid"]


@pytest.mark.parametrize(
    ("title", "reynolds", "words"),
    [
        ("Plate, Re 1200", 1200.0, "Plate, Re 1200"),
        ("Reference plate", 1200.0, "Reference plate, Re = 1,200"),
        ("Return of the carriage", 0.4567, "Return of the carriage, Re = 0.457"),
        ("Plate", None, "Plate"),
    ],
)
def test_heading_names_the_reynolds_number_once(title, reynolds, words):
    assert style.heading({"title": title, "reynolds": reynolds}) == words


def test_lines_keep_a_reynolds_number_with_its_value():
    lines = style.wrapped("A plate that is towed at Re = 1,200 through water\nsecond line", 28).split("\n")
    assert lines == ["A plate that is towed at", "Re\N{NO-BREAK SPACE}=\N{NO-BREAK SPACE}1,200 through water", "second line"]
    assert max(len(line) for line in style.wrapped("word " * 60, 33).split("\n")) <= 33


def test_a_long_heading_stays_within_the_figure():
    figure = style.new_figure(4, 3)
    style.put_heading(figure, "A WIDE title in CAPITALS and with many many words " * 4)
    style.put_small_print(figure, "")
    box = figure.texts[0].get_window_extent(figure.canvas.get_renderer())
    assert box.width < 0.99 * figure.bbox.width and len(figure.texts) == 1


def test_figures_load_no_window_system(tmp_path):
    code = (
        "import sys\n"
        "from postprocess.figures import case_picture, forces, style, vorticity\n"
        "from tests.postprocess.figures import made_up\n"
        "vorticity.draw_vorticity([made_up.frame()], {'title': 'Plate'}, sys.argv[1])\n"
        "print([m for m in ('matplotlib.pyplot', 'tkinter', 'numba', 'h5py') if m in sys.modules])\n"
    )
    path = tmp_path / "w.png"
    out = subprocess.run(
        [sys.executable, "-c", code, str(path)], capture_output=True, text=True, check=True, cwd=ROOT
    ).stdout
    assert out.strip() == "[]" and png_size(path)[0] > 1000
