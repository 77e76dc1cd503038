"""`picture`: vorticity at chosen travels."""

from __future__ import annotations

from pathlib import Path

from ibsolver.case import scales
from ibsolver.errors import StorageError, UsageError
from postprocess.run_view import open_run

PANELS, MOST_PANELS = 4, 24
SLENDEREST = 8.0  # longer side of a region over its shorter one


def picture(
    run_dir: Path | str,
    out: Path | str | None = None,
    *,
    travels: list[float] | None = None,
    limit: float | None = None,
    region: tuple[float, float, float, float] | None = None,
) -> Path:
    """Draw the vorticity of a run at chosen travels and return the file.

    Parameters
    ----------
    run_dir : path
        Run directory, finished or not.
    out : path, optional
        PNG file; `vorticity.png` in the run directory by default.
    travels : list of float, optional
        Chords; the nearest frames are drawn. By default four evenly spaced ones up to the last.
    limit : float, optional
        Vorticity at the ends of the colour scale (U/c); a round number that suits the frames by default.
    region : tuple of float, optional
        (x low, x high, y low, y high) in chords from the pivot; the body and its near wake by default.

    Raises
    ------
    StorageError
        If there are no frames yet.
    UsageError
        If a travel lies beyond the last frame, the limit is not above 0, or the region is empty, outside the domain or
        a mere sliver.
    """
    run = open_run(run_dir)
    if run.frames == 0:
        raise StorageError(f"{run_dir}: no frames yet; let the run go on for a while.")
    end = float(run.travels[-1])
    chosen = travels or [end * (k + 1) / PANELS for k in range(PANELS)]
    if len(chosen) > MOST_PANELS:
        raise UsageError(f"{len(chosen)} panels asked for; at most {MOST_PANELS} fit on one picture.")
    beyond = [travel for travel in chosen if not 0 <= travel <= end + run.case.output.frame_every]
    if beyond:
        raise UsageError(f"No frame at a travel of {beyond[0]:g} chords; there are frames from 0 to {end:.3g}.")
    frames = run.frames_at(chosen)
    if region is not None:
        _require_proportions(region)
    length = scales.reference_length(run.case)
    info = {
        "title": run.case.title,
        "reynolds": run.case.tow.reynolds,
        "chord_mm": None if length is None else 1e3 * length,
        "length_word": "diameter" if run.case.cylinder is not None else "chord",
    }
    from postprocess.figures.vorticity import draw_vorticity

    target = Path(out) if out else run.directory / "vorticity.png"
    return draw_vorticity(frames, info, target, limit=limit, region=region)


def _require_proportions(region: tuple[float, float, float, float]) -> None:
    """Refuse a mere sliver, whose picture would be too large for memory; what else can be wrong the figure tells."""
    wide, high = region[1] - region[0], region[3] - region[2]
    if wide > 0 and high > 0 and max(wide / high, high / wide) > SLENDEREST:
        asked = " ".join(f"{value:g}" for value in region)
        raise UsageError(f"The region {asked} is too slender; its sides may differ by a factor of {SLENDEREST:g}.")
