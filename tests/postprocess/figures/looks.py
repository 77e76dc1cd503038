"""What every figure must satisfy, whatever it shows."""

from __future__ import annotations

import struct
import zlib
from pathlib import Path

import numpy as np
from matplotlib.figure import Figure
from matplotlib.text import Text


def png_size(path: Path) -> tuple[int, int]:
    """Return width and height of a PNG in pixels after checking every chunk of it (ISO/IEC 15948, 5.2 and 5.3)."""
    data = path.read_bytes()
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    place, kinds, size = 8, [], (0, 0)
    while place < len(data):
        (length,) = struct.unpack(">I", data[place : place + 4])
        kind, body = data[place + 4 : place + 8], data[place + 8 : place + 8 + length]
        (check,) = struct.unpack(">I", data[place + 8 + length : place + 12 + length])
        assert check == zlib.crc32(kind + body), f"chunk {kind!r} is damaged"
        if kind == b"IHDR":
            size = struct.unpack(">II", body[:8])
        kinds.append(kind)
        place += 12 + length
    assert kinds[0] == b"IHDR" and kinds[-1] == b"IEND" and b"IDAT" in kinds
    return size


def texts(figure: Figure) -> list[str]:
    """Return every text that is shown."""
    return [text.get_text() for text in shown(figure)]


def shown(figure: Figure) -> list[Text]:
    """Return the text artists that are visible and not empty."""
    return [text for text in figure.findobj(Text) if text.get_visible() and text.get_text().strip()]


def check_print(figure: Figure, path: Path) -> None:
    """Check size of file and letters, and that no text leaves the figure."""
    assert png_size(path) == tuple(int(side) for side in figure.get_size_inches() * 150 + 1e-6)
    assert min(text.get_fontsize() for text in shown(figure)) >= 8.0
    renderer = figure.canvas.get_renderer()
    width, height = figure.bbox.width, figure.bbox.height
    for ax in figure.axes:
        box = ax.get_tightbbox(renderer) if ax.get_visible() else None
        if box is not None:
            assert box.x0 > -2 and box.y0 > -2 and box.x1 < width + 2 and box.y1 < height + 2, ax.get_ylabel()
    for text in figure.texts:
        box = text.get_window_extent(renderer)
        assert box.x0 > -2 and box.x1 < width + 2 and box.y0 > -2 and box.y1 < height + 2, text.get_text()


def lightness(colours: np.ndarray) -> np.ndarray:
    """Return CIE L* of sRGB colours (CIE 15:2018; sRGB per IEC 61966-2-1)."""
    return lab(linear(colours))[..., 0]


def linear(colours: np.ndarray) -> np.ndarray:
    """Return linear-light values of sRGB colours in 0 to 1."""
    return np.where(colours <= 0.04045, colours / 12.92, ((colours + 0.055) / 1.055) ** 2.4)


def lab(light: np.ndarray) -> np.ndarray:
    """Return CIE L*a*b* (D65) of linear-light sRGB values."""
    to_xyz = np.array(
        [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]]
    )
    ratio = (np.clip(light, 0, 1) @ to_xyz.T) / to_xyz.sum(axis=1)
    f = np.where(ratio > (6 / 29) ** 3, np.cbrt(ratio), ratio / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.stack([116 * f[..., 1] - 16, 500 * (f[..., 0] - f[..., 1]), 200 * (f[..., 1] - f[..., 2])], axis=-1)
