"""A real small run, read back: loads, files, pictures."""

from __future__ import annotations

import json
import subprocess
import sys

import numpy as np
import pytest

import postprocess
from ibsolver.errors import StorageError, UsageError
from postprocess.loads import load_table


def test_open_run_reads_history_frames_and_case(small_run):
    run = postprocess.open_run(small_run)
    assert run.history["CL"].size == run.history["step"].size > 50
    assert run.frames == 7 and run.frame(-1).travel == pytest.approx(0.6, abs=0.02)
    assert run.case.flaps[0].name == "front" and run.has_body
    assert set(run.frame(0).shapes) == {"plate", "front"}
    assert [f.travel for f in run.frames_at([0.31, 99.0])] == pytest.approx([0.3, 0.6], abs=0.02)
    with pytest.raises(UsageError, match="frame 7 asked for; there are 7"):
        run.frame(7)


def test_a_folder_that_is_no_run_is_a_sentence(tmp_path):
    with pytest.raises(UsageError, match="no such run directory"):
        postprocess.open_run(tmp_path / "nothing")
    with pytest.raises(StorageError, match="Is this a run directory"):
        len(postprocess.open_run(tmp_path).history)


def test_newtons_are_rho_u2_c_span_over_2(small_run):
    """With nu = mu/rho at 21 degC: U = Re nu / c, force = rho U^2 c span / 2 times the coefficient."""
    run = postprocess.open_run(small_run)
    table, fluid = load_table(run), run.case.fluid
    speed = 300 * fluid.kinematic_viscosity / 0.06
    scale = 1e3 * 0.5 * fluid.density * speed**2 * 0.06 * 0.2
    np.testing.assert_allclose(table["lift_mN"], scale * table["CL"], rtol=1e-12)
    np.testing.assert_allclose(table["moment_mNm"], scale * 0.06 * table["CM"], rtol=1e-12)


def test_forces_writes_csv_plot_and_summary(small_run, tmp_path):
    summary = postprocess.forces(small_run, tmp_path / "f.csv", tmp_path / "f.png", cutoff_hz=0.05, window=(0.2, 0.6))
    json.dumps(summary)
    assert summary["balance_error"] < 0.01 and "butterworth" in summary["filter"]
    text = (tmp_path / "f.csv").read_text().splitlines()
    header = next(line for line in text if not line.startswith("#"))
    assert "CL [1]" in header and "lift_mN_filtered [mN]" in header and "time_s [s]" in header
    assert any("Two-dimensional" in line for line in text[:6])
    assert (tmp_path / "f.png").read_bytes()[:8] == b"\x89PNG\r\n\x1a\n"


def test_filter_above_the_sampling_is_a_sentence(small_run, tmp_path):
    with pytest.raises(UsageError, match="cut-off"):
        postprocess.forces(small_run, tmp_path / "f.csv", tmp_path / "f.png", cutoff_hz=10.0, rate_hz=15.0)
    with pytest.raises(UsageError, match="does not lie in the travel"):
        postprocess.forces(small_run, tmp_path / "f.csv", tmp_path / "f.png", window=(0.5, 9.0))


@pytest.mark.parametrize("travels", [None, [0.3], [0.1, 0.2, 0.6]])
def test_picture_draws_the_frames_asked_for(small_run, tmp_path, travels):
    file = postprocess.picture(small_run, tmp_path / "w.png", travels=travels, region=(-0.6, 1.2, -0.6, 0.5))
    assert file.read_bytes()[:8] == b"\x89PNG\r\n\x1a\n" and file.stat().st_size > 20_000


def test_picture_beyond_the_last_frame_is_a_sentence(small_run, tmp_path):
    with pytest.raises(UsageError, match="No frame at a travel of 5 chords; there are frames from 0 to 0.6"):
        postprocess.picture(small_run, tmp_path / "w.png", travels=[5.0])


def test_colour_range_is_symmetric_and_bodies_are_drawn(small_run):
    from postprocess.figures import style
    from postprocess.figures.vorticity import default_limit, default_region, draw_panel

    frame = postprocess.open_run(small_run).frame(-1)
    box = default_region([frame])
    limit = default_limit([frame], box)
    ax = style.new_figure(4, 3).subplots()
    mesh = draw_panel(ax, frame, box, limit)
    assert mesh.get_clim() == (-limit, limit)
    assert len(ax.lines) == 2 and ax.get_aspect() == 1.0
    assert box[0] < -0.25 and box[1] > 0.75


def test_drawing_needs_no_window_system(small_run, tmp_path):
    code = (
        "import sys, postprocess; postprocess.picture(sys.argv[1], sys.argv[2]);"
        "assert 'matplotlib.pyplot' not in sys.modules and 'numba' not in sys.modules"
    )
    subprocess.run([sys.executable, "-c", code, str(small_run), str(tmp_path / "w.png")], check=True)


def test_a_title_with_a_dollar_sign_is_no_formula(small_run, tmp_path):
    from postprocess.figures.vorticity import draw_vorticity

    frame = postprocess.open_run(small_run).frame(-1)
    info = {"title": r"Plate of 5 $\frac alloy", "reynolds": 300.0, "length_word": "chord"}
    assert draw_vorticity([frame], info, tmp_path / "w.png").exists()
