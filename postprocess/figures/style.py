"""One look for all figures: legible in print, distinct to colour-blind readers."""

from __future__ import annotations

import io
from pathlib import Path

from matplotlib import rc_context
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import LinearSegmentedColormap
from matplotlib.figure import Figure

from ibsolver.runfile.atomic import write_bytes

DPI = 150
INK = "#22252b"
FAINT = "#8b9099"
LIFT, DRAG, THIRD, FOURTH = "#0b5c8a", "#b3501e", "#5b7f2a", "#6d4c8f"
BODY = "#14161a"

# Clockwise rotation deep teal, counter-clockwise rust, nothing white: the lightness falls equally on both sides.
ROTATION = LinearSegmentedColormap.from_list(
    "rotation",
    ["#0a2f3c", "#14596b", "#3d93a3", "#a5d0d3", "#ffffff", "#f0c6a4", "#d1854a", "#964413", "#4c1d05"],
    N=256,
)

_STYLE = {
    "font.family": "DejaVu Sans",
    "font.size": 9,
    "axes.labelsize": 9.5,
    "axes.titlesize": 9.5,
    "xtick.labelsize": 8.5,
    "ytick.labelsize": 8.5,
    "legend.fontsize": 8.5,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "axes.linewidth": 0.8,
    "lines.linewidth": 1.4,
    "legend.frameon": False,
    "axes.spines.top": False,
}


def style() -> rc_context:
    """Return the context in which a figure is made."""
    return rc_context(_STYLE)


def new_figure(width: float, height: float, layout: str = "constrained") -> Figure:
    """Return an empty figure of a size in inches, drawn without any window system."""
    figure = Figure(figsize=(width, height), dpi=DPI, layout=layout)
    FigureCanvasAgg(figure)
    return figure


def save(figure: Figure, path: Path | str) -> Path:
    """Write the figure as PNG, whole or not at all."""
    buffer = io.BytesIO()
    figure.savefig(buffer, format="png", dpi=DPI)
    write_bytes(path, buffer.getvalue())
    return Path(path)


def heading(info: dict[str, object]) -> str:
    """Return the title of a run with its Reynolds number, unless the title says it already."""
    title = str(info["title"])
    return title if "Re" in title else f"{title}, Re = {info['reynolds']:,.0f}"


def wrapped(text: str, width: int) -> str:
    """Return a text broken into lines of at most `width` characters."""
    import textwrap

    return "\n".join(textwrap.wrap(text, width))
