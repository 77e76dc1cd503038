"""What the tests of figures share: the figures behind the files."""

from __future__ import annotations

from pathlib import Path

import pytest

from postprocess.figures import style


@pytest.fixture
def drawn(monkeypatch):
    """Collect every figure that is saved while a test runs; files are written all the same."""
    figures, save = [], style.save

    def keep(figure, path):
        figures.append(figure)
        return save(figure, path)

    monkeypatch.setattr(style, "save", keep)
    return figures


@pytest.fixture
def sketched(monkeypatch):
    """Collect every figure and write no file: for what can be read off the figure itself, and many times faster."""
    figures = []

    def keep(figure, path):
        figures.append(figure)
        return Path(path)

    monkeypatch.setattr(style, "save", keep)
    return figures
