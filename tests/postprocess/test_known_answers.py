"""Post-processing of a run directory made of formulas: every number is known beforehand."""

from __future__ import annotations

import json
import math
import shutil

import numpy as np
import pytest

import postprocess
from ibsolver.case import scales
from ibsolver.errors import StorageError, UsageError
from ibsolver.runfile.frame import read_frame
from tests.postprocess.synthetic import BALANCE, FLAP, MEAN, PLATE, STROUHAL, SWING, Vortex, make_run


@pytest.fixture(scope="module")
def long_run(tmp_path_factory):
    """A run long enough that the second half holds fifteen batches of five periods; not to be changed."""
    return make_run(tmp_path_factory.mktemp("long"), travel=800.0, dt=0.1)


@pytest.fixture(scope="module")
def short_run(tmp_path_factory):
    return make_run(tmp_path_factory.mktemp("short"))


def columns_of(path):
    lines = [line for line in path.read_text().splitlines() if not line.startswith("#")]
    names = [name.partition(" [")[0] for name in lines[0].split(",")]
    return dict(zip(names, np.loadtxt(lines[1:], delimiter=",").T, strict=True))


def forces(run, folder, **options):
    return postprocess.forces(run, folder / "f.csv", folder / "f.png", **options)


def test_means_peaks_and_strouhal_number_are_those_of_the_formula(long_run, tmp_path):
    summary = forces(long_run, tmp_path)
    json.dumps(summary)
    for name, mean in summary["means"].items():
        if name in MEAN:
            assert abs(mean["mean"] - MEAN[name]) <= mean["half_width_95"]
            assert mean["mean"] == pytest.approx(MEAN[name], abs=2e-4)
            assert mean["rms"] == pytest.approx(SWING[name] / math.sqrt(2), rel=1e-3)
            assert mean["interval_trusted"] is True
    assert summary["strouhal"]["value"] == pytest.approx(STROUHAL, abs=0.02 * summary["strouhal"]["resolution"])
    assert summary["balance_error"] == pytest.approx(BALANCE / 1.5, rel=1e-3)
    assert summary["filter"] is None and summary["peaks_filtered"] is None


def test_peaks_are_the_largest_in_size_with_sign_time_and_newtons(short_run, tmp_path):
    case = postprocess.open_run(short_run).case
    peaks = forces(short_run, tmp_path)["peaks"]
    assert peaks["CL"]["value"] == pytest.approx(1.5, rel=1e-4)
    assert peaks["CM"]["value"] == pytest.approx(-0.4, rel=1e-4)
    quarter = (peaks["CL"]["travel"] * STROUHAL) % 1
    assert quarter == pytest.approx(0.25, abs=2e-3)
    assert (peaks["CM"]["travel"] * STROUHAL) % 1 == pytest.approx(0.75, abs=2e-3)
    assert peaks["lift_mN"]["value"] == pytest.approx(1500 * scales.force_scale(case), rel=1e-4)
    assert peaks["CL"]["time_s"] == pytest.approx(peaks["CL"]["travel"] * scales.convective_time(case), rel=1e-9)


def test_a_short_window_is_not_trusted(short_run, tmp_path):
    summary = forces(short_run, tmp_path)
    assert not any(mean["interval_trusted"] for mean in summary["means"].values())
    assert forces(short_run, tmp_path, window=(0.5, 1.5))["strouhal"] is None


@pytest.mark.parametrize(("zero_phase", "gain"), [(True, 0.5), (False, math.sqrt(0.5))])
def test_at_its_cutoff_a_butterworth_filter_halves_the_power(long_run, tmp_path, zero_phase, gain):
    """|H|^2 = 1/2 at the cut-off (Butterworth 1930); run forward and backward it acts twice."""
    summary = forces(long_run, tmp_path, cutoff=STROUHAL, zero_phase=zero_phase)
    table = columns_of(tmp_path / "f.csv")
    inside = (table["travel"] > 200) & (table["travel"] < 600)
    swing = math.sqrt(2) * np.std(table["CL_filtered"][inside])
    assert swing == pytest.approx(gain * SWING["CL"], rel=0.01)
    late = -table["CM_filtered"][inside].min() - 0.3
    assert late == pytest.approx(gain * SWING["CM"], rel=0.01)
    assert summary["peaks_filtered"]["CL"]["value"] < summary["peaks"]["CL"]["value"]


def test_a_spike_at_the_start_spoils_neither_balance_nor_peak_nor_filter(tmp_path):
    run = make_run(tmp_path, spike=300.0)
    summary = forces(run, tmp_path, cutoff=2.0, zero_phase=False)
    assert summary["balance_error"] == pytest.approx(BALANCE / 1.5, rel=0.01)
    assert summary["peaks"]["CL"]["value"] == pytest.approx(1.5, rel=1e-3)
    assert "still water before the tow" in summary["filter"]
    table = columns_of(tmp_path / "f.csv")
    assert abs(table["CL_filtered"][0]) < 5.0
    forces(run, tmp_path, cutoff=2.0, zero_phase=False, pre_roll=0.0)
    assert columns_of(tmp_path / "f.csv")["CL_filtered"][0] == pytest.approx(300.0, rel=1e-3)


def test_times_and_travels_are_those_of_the_frames(tmp_path):
    """A resumed run may have changed its interval, and a frame may have been lost: the frames themselves tell."""
    travels = (0.0, 0.1, 0.2, 0.3, 0.8, 1.3, 1.8)
    run = make_run(tmp_path, travels=travels)
    view = postprocess.open_run(run)
    assert view.travels.tolist() == pytest.approx(travels) and view.times.shape == (7,)
    assert [f.travel for f in view.frames_at([0.8, 1.25, 0.31, 9.0])] == [0.8, 1.3, 0.3, 1.8]
    assert len(view.frames_at([1.3, 1.31, 1.29])) == 1
    (run / "frames" / "000001.h5").unlink()
    assert [f.travel for f in postprocess.open_run(run).frames_at([0.3])] == [0.3]
    assert postprocess.open_run(run).frame(-1).travel == 1.8


def test_a_run_without_frames_has_no_times_and_no_picture(tmp_path):
    run = make_run(tmp_path, travels=())
    assert postprocess.open_run(run).travels.shape == (0,)
    with pytest.raises(StorageError, match="no frames yet"):
        postprocess.picture(run)


def test_a_damaged_case_or_frame_is_a_sentence(short_run, tmp_path):
    run = tmp_path / "run"
    shutil.copytree(short_run, run)
    (run / "frames" / "000001.h5").write_bytes(b"\x89HDF")
    with pytest.raises(StorageError, match=r"000001\.h5: damaged"):
        postprocess.picture(run)
    (run / "resolved.json").write_text("{}")
    with pytest.raises(StorageError, match=r"resolved\.json: damaged"):
        _ = postprocess.open_run(run).case


def test_the_synthetic_vortex_has_its_circulation_and_peak_speed(tmp_path):
    """Circulation by the sum over corners; peak speed 0.63817 Gamma/(2 pi r_c) at 1.12091 r_c (Lamb-Oseen, exact)."""
    vortex = Vortex(circulation=-2.0, radius=0.12)
    make_run(tmp_path, travels=(0.0,), vortex=vortex)
    frame = read_frame(tmp_path / "run" / "frames" / "000000.h5")
    cell = (frame.x_faces[1] - frame.x_faces[0]) * (frame.y_faces[1] - frame.y_faces[0])
    assert frame.vorticity.sum() * cell == pytest.approx(-2.0, rel=1e-3)
    u, _ = vortex.velocity(np.array([vortex.x]), np.array([vortex.y + 1.12091 * 0.12]))
    assert u[0] == pytest.approx(0.63817 * 2.0 / (2 * math.pi * 0.12), rel=1e-4)


def test_a_picture_shows_the_vortex_where_it_is_and_the_bodies_where_they_are(tmp_path):
    """Axes swapped, flipped or shifted by a cell would move the darkest place away from the formula's centre."""
    from postprocess.figures import style
    from postprocess.figures.vorticity import draw_panel

    run = make_run(tmp_path, travels=(0.0, 1.0))
    frame = postprocess.open_run(run).frame(-1)
    ax = style.new_figure(4, 3).subplots()
    mesh = draw_panel(ax, frame, (-0.7, 2.3, -0.8, 0.9), 20.0)
    place = np.unravel_index(np.argmin(mesh.get_array()), mesh.get_coordinates().shape[:2])
    assert mesh.get_coordinates()[place].tolist() == pytest.approx([0.55 + 0.5, 0.21], abs=0.02)
    drawn = dict(zip(frame.shapes, (line.get_xydata() for line in ax.lines), strict=True))
    np.testing.assert_allclose(drawn["plate"], PLATE, atol=1e-6)
    np.testing.assert_allclose(drawn["front"], FLAP, atol=1e-6)
    assert mesh.cmap(mesh.norm(0.0))[:3] == pytest.approx((1, 1, 1), abs=0.02)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"region": (100, 101, 0, 1)}, "domain"),
        ({"region": (0, 0.001, 0, 1)}, "too slender"),
        ({"region": (1, 0, 0, 1)}, "region"),
        ({"region": (math.nan, 1, 0, 1)}, "region"),
        ({"limit": math.nan}, "above 0"),
        ({"limit": -3.0}, "above 0"),
        ({"travels": [0.1] * 60}, "60 panels asked for"),
        ({"travels": [math.nan]}, "No frame at a travel of nan"),
    ],
)
def test_pictures_that_cannot_be_drawn_are_sentences(short_run, tmp_path, options, words):
    with pytest.raises(UsageError, match=words):
        postprocess.picture(short_run, tmp_path / "w.png", **options)
    assert not (tmp_path / "w.png").exists()


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"cutoff_hz": 0.0}, "cut-off of 0"),
        ({"cutoff": math.inf}, "cut-off of inf"),
        ({"cutoff": 0.5, "rate_hz": 0.0}, "there are 0"),
        ({"cutoff": 0.5, "rate_hz": math.nan}, "there are nan"),
        ({"cutoff": 0.5, "rate_hz": 1e12}, "at most 20,000,000"),
        ({"cutoff": 1e9}, "at most 20,000,000"),
        ({"cutoff": 0.5, "pre_roll": -1.0}, "pre-roll of -1"),
        ({"cutoff": 0.5, "pre_roll": math.inf}, "pre-roll of inf"),
        ({"cutoff": 0.5, "cutoff_hz": 0.5}, "not both"),
    ],
)
def test_filters_that_cannot_be_made_are_sentences(short_run, tmp_path, options, words):
    with pytest.raises(UsageError, match=words):
        forces(short_run, tmp_path, **options)
    assert not list(tmp_path.iterdir())
