"""The picture of a case before it runs."""

from __future__ import annotations

import numpy as np
import pytest

from postprocess.figures.case_picture import close_region, draw_case
from tests.postprocess.figures.looks import check_print, texts
from tests.postprocess.figures.made_up import case_picture, circle


def test_a_plate_with_a_flap_shows_domain_core_cells_and_tow(drawn, tmp_path):
    picture = case_picture()
    path = draw_case(picture, tmp_path / "c.png")
    figure = drawn[-1]
    check_print(figure, path)
    words = texts(figure)
    assert {*picture["sides"].values(), "fine core", "time (s)", "time (c/U)", "tow speed (U)"} <= set(words)
    assert any("every cell" in word and "(180)" in word for word in words)
    assert any("Re\N{NO-BREAK SPACE}=" in word and "6 chords" in word for word in words)
    assert len(figure.axes) == 4


def test_the_closest_view_shows_every_cell_at_the_hinge(sketched, tmp_path):
    picture = case_picture()
    box, hinge = close_region(picture), picture["shapes"]["front"][0]
    assert box[0] < hinge[0] < box[1] and box[2] < hinge[1] < box[3]
    draw_case(picture, tmp_path / "c.png")
    (cells,) = [ax for ax in sketched[-1].axes if "every cell" in ax.get_title(loc="left")]
    drawn_x = {round(path.vertices[0, 0], 9) for path in cells.collections[0].get_paths()}
    inside = [x for x in picture["x_faces"] if box[0] <= x <= box[1]]
    assert {round(x, 9) for x in inside} <= drawn_x and 30 < len(inside) < 60
    dots = cells.lines[-1].get_xydata()
    np.testing.assert_array_equal(dots, picture["points"])


def test_thinned_lines_are_told_and_keep_the_outermost(sketched, tmp_path):
    picture = case_picture()
    draw_case(picture, tmp_path / "c.png")
    (domain,) = [ax for ax in sketched[-1].axes if ax.get_title(loc="left").startswith("domain")]
    places = [path.vertices[0, 0] for path in domain.collections[0].get_paths()]
    assert min(places) == picture["x_faces"][0] and max(places) == picture["x_faces"][-1]
    cells = picture["x_faces"].size - 1
    every = int(domain.get_title(loc="left").split("one line in ")[1].split()[0])
    assert f"domain, {cells} x {picture['y_faces'].size - 1} cells" in domain.get_title(loc="left")
    assert abs(len(places) - cells / every) < 2


def test_a_closed_body_is_seen_at_its_leading_end(drawn, tmp_path):
    picture = case_picture() | {"shapes": circle(), "points": circle()["cylinder"][:-1], "length_word": "diameter"}
    box = close_region(picture)
    assert box[0] < -0.5 < box[1] and box[2] < 0.0 < box[3]
    path = draw_case(picture, tmp_path / "c.png")
    check_print(drawn[-1], path)
    assert "x (diameters)" in texts(drawn[-1])


def test_a_case_without_a_body_shows_domain_and_tow_only(drawn, tmp_path):
    picture = case_picture(body=False)
    picture["core"] = (picture["x_faces"][0], picture["x_faces"][-1], picture["y_faces"][0], picture["y_faces"][-1])
    path = draw_case(picture, tmp_path / "c.png")
    check_print(drawn[-1], path)
    assert len(drawn[-1].axes) == 2 and "fine core" not in texts(drawn[-1])


@pytest.mark.parametrize("seconds", [None, "nan"])
def test_a_dimensionless_case_has_no_axis_of_seconds(seconds, sketched, tmp_path):
    picture = case_picture(seconds=False)
    if seconds == "nan":
        picture["tow_seconds"] = np.full(400, np.nan)
    del picture["notes"]
    draw_case(picture, tmp_path / "c.png")
    assert "time (s)" not in texts(sketched[-1])
