"""One look for all figures: legible in print, distinct to colour-blind readers."""

from __future__ import annotations

import io
import re
import textwrap
from contextlib import AbstractContextManager
from pathlib import Path
from typing import Any

import matplotlib.style
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import LinearSegmentedColormap
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties

from ibsolver.runfile.atomic import write_bytes

DPI = 150
INK = "#22252b"
QUIET = "#5a6069"  # small print: grey, and still above a contrast of 6 to 1 on white
FAINT = "#8b9099"  # lines only, never letters
GRID = "#b9bec6"
# Of middling lightness, so that thin dark dashes inside a curve are seen; apart in hue and in lightness.
LIFT, DRAG, THIRD, FOURTH = "#2f86bb", "#cf6f2e", "#1f5c3a", "#4a2d63"
BODY = "#14161a"

# Clockwise rotation deep teal, counter-clockwise rust, nothing white: the lightness falls equally on both sides.
# The ends stay well lighter than a body's black, so that a plate is seen inside its own boundary layer.
ROTATION = LinearSegmentedColormap.from_list(
    "rotation",
    ["#0c4152", "#17667a", "#3d93a3", "#a5d0d3", "#ffffff", "#f0c6a4", "#d1854a", "#a34d18", "#702c08"],
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
}


def style() -> AbstractContextManager[None]:
    """Return the context in which a figure is made; a user's own plotting defaults do not reach into it."""
    return matplotlib.style.context(_STYLE, after_reset=True)


def new_figure(width: float, height: float, layout: str = "constrained") -> Figure:
    """Return an empty figure of a size in inches, drawn without any window system."""
    figure = Figure(figsize=(width, height), dpi=DPI, layout=layout)
    FigureCanvasAgg(figure)
    figure.get_layout_engine().set(w_pad=0.08, h_pad=0.05)  # inches; less, and panels of equal scale push labels out
    return figure


def save(figure: Figure, path: Path | str) -> Path:
    """Write the figure as PNG, whole or not at all.

    Raises
    ------
    StorageError
        If the file cannot be written; an older file of that name is untouched.
    """
    buffer = io.BytesIO()
    figure.savefig(buffer, format="png", dpi=DPI)
    write_bytes(path, buffer.getvalue())
    return Path(path)


def heading(info: dict[str, Any]) -> str:
    """Return the title of a run with its Reynolds number, unless the title says it already."""
    title, reynolds = str(info["title"]), info.get("reynolds")
    if reynolds is None or re.search(r"\b(Re|Reynolds)\b", title):
        return title
    return f"{title}, Re = {reynolds:,.0f}" if reynolds >= 10 else f"{title}, Re = {reynolds:.3g}"


def put_heading(figure: Figure, text: str) -> None:
    """Put a title over the figure, broken into as many lines as the width asks for."""
    figure.suptitle(fitted(figure, text, 10), fontsize=10, x=0.01, ha="left", parse_math=False)


def put_small_print(figure: Figure, text: str) -> None:
    """Put small grey text under the figure."""
    if text:
        figure.supxlabel(fitted(figure, text, 8), fontsize=8, color=QUIET, x=0.01, ha="left")


def trim_height(figure: Figure, margin: float = 0.08) -> None:
    """Take away the height that panels of equal scale leave empty; `margin` in inches remains above and below."""
    figure.draw_without_rendering()
    figure.set_figheight(min(figure.get_figheight(), figure.get_tightbbox().height + 2.0 * margin))


def label_panel(ax: Axes, text: str) -> None:
    """Put a panel's title at its left edge."""
    ax.set_title(text, loc="left", fontsize=9)


def fitted(figure: Figure, text: str, points: float, share: float = 0.96) -> str:
    """Return a text broken into lines no wider than a share of the figure, on the average of its own letters."""
    if not text:
        return text
    canvas = figure.canvas.get_renderer()
    longest = max(text.splitlines(), key=len)
    width = canvas.get_text_width_height_descent(longest, FontProperties(size=points), False)[0] / figure.dpi
    return wrapped(text, max(20, int(len(longest) * share * figure.get_figwidth() / max(width, 0.1))))


def wrapped(text: str, width: int) -> str:
    """Return a text broken into lines of at most `width` characters; line breaks of its own are kept.

    A Reynolds number stays together with its value.
    """
    together = re.sub(r"\bRe (= )?(?=\d)", lambda found: found.group().replace(" ", "\N{NO-BREAK SPACE}"), text)
    return "\n".join("\n".join(textwrap.wrap(line, width)) for line in together.splitlines())
