"""Closed outlines from CSV and mesh files."""

from __future__ import annotations

import math
import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ibsolver.case.outline_file import (
    MOST_POINTS,
    boundary_edges,
    chain,
    normalised_outline,
    read_outline,
    signed_area,
    without_repeats,
)
from ibsolver.case.values import ValueFault

from .helpers import BARE, one_fault, read

SQUARE = "x,y\n0,-50\n100,-50\n100,50\n0,50\n"


def circle(count, reverse=False):
    angles = [2 * math.pi * i / count for i in range(count)]
    points = [(10 + 5 * math.cos(a), 5 * math.sin(a)) for a in angles]
    return points[::-1] if reverse else points


def test_a_square_is_scaled_to_its_chord(tmp_path):
    (tmp_path / "square.csv").write_text(SQUARE)
    assert read_outline("square.csv", tmp_path) == ((0, -0.5), (1, -0.5), (1, 0.5), (0, 0.5))


@pytest.mark.parametrize(
    "content", [SQUARE.replace("x,y\n", ""), "# c\ny,x,id\n-50,0,1\n-50,100,2\n50,100,3\n50,0,4\n"]
)
def test_header_and_order_of_columns(tmp_path, content):
    (tmp_path / "square.csv").write_text(content)
    assert read_outline("square.csv", tmp_path) == ((0, -0.5), (1, -0.5), (1, 0.5), (0, 0.5))


@pytest.mark.parametrize("reverse", [False, True])
def test_a_circle_is_counter_clockwise_and_has_its_area(reverse):
    points = normalised_outline(circle(360, reverse), "c")
    exact = 0.25 * 360 / (2 * math.pi) * math.sin(2 * math.pi / 360) * math.pi  # area of the polygon
    assert signed_area(list(points)) == pytest.approx(exact, rel=1e-9)
    assert min(x for x, _ in points) == 0 and max(x for x, _ in points) == 1


def test_repeated_points_and_the_closing_point_are_dropped():
    doubled = [point for point in circle(40) for _ in range(2)]
    assert len(normalised_outline(doubled + [doubled[0]], "c")) == 40
    assert without_repeats([(0, 0), (0, 1e-12), (1, 0), (0, 0)]) == [(0, 0), (1, 0)]


@pytest.mark.parametrize(
    ("content", "problem"),
    [
        ("0,-1\n2,1\n2,-1\n0,1\n",
         "crosses or touches itself: the sides after points 1 and 3 of the outline meet."),
        ("0,-1\n2,-1\n2,1\n1,-1\n0,1\n",
         "crosses or touches itself: the sides after points 1 and 3 of the outline meet."),
        ("0,-1\n2,-1\n1,-1\n1,1\n0,1\n",
         "crosses or touches itself: the sides after points 1 and 2 of the outline meet."),
        ("0,0\n1,0\n2,0\n", "encloses nothing: its points lie on a line."),
        ("0,0\n0,1\n0,2\n", "encloses nothing: its points lie on a line."),
        ("1,1\n1,1\n1,1\n", "encloses nothing: its points lie on a line."),
        ("0,0\n1,1\n", "has 2 different points; 3 to 5000 are taken."),
        ("0,10\n1,10\n1,11\n0,11\n", "lies beside its own chord line y = 0."),
        ("0,0,0\n1,1,0\n1,0,0\n", "needs two columns, x and y."),
        ("a,b\n0,0\n1,1\n1,0\n", "has a header without x and y."),
        ("0;0\n1;0\n1;1\n", "has semicolons between its fields."),
        ("0,0\n1,nan\n1,1\n", "is not a finite number."),
    ],
)  # fmt: skip
def test_curves_that_are_no_outline(tmp_path, content, problem):
    (tmp_path / "body.csv").write_text(content)
    with pytest.raises(ValueFault) as caught:
        read_outline("body.csv", tmp_path)
    assert caught.value.problem == problem and caught.value.suggestion


def test_too_many_points_are_refused_and_the_greatest_number_is_taken():
    with pytest.raises(ValueFault, match="has 5001 different points"):
        normalised_outline(circle(MOST_POINTS + 1), "c")
    assert len(normalised_outline(circle(MOST_POINTS), "c")) == MOST_POINTS


@given(st.lists(st.tuples(st.floats(-1e3, 1e3), st.floats(-1e3, 1e3)), min_size=1, max_size=12))
def test_any_points_are_an_outline_or_refused(points):
    try:
        outline = normalised_outline(points, "c")
    except ValueFault:
        return
    assert signed_area(list(outline)) > 0
    assert min(x for x, _ in outline) == 0 and max(x for x, _ in outline) == pytest.approx(1)


def test_an_outline_in_a_case(tmp_path):
    (tmp_path / "square.csv").write_text(SQUARE)
    text = BARE.replace('[plate]\nincidence = "15 deg"', '[outline]\nfile = "square.csv"\nincidence = "5 deg"')
    case = read(text, tmp_path)
    assert case.outline.file == "square.csv" and len(case.outline.points) == 4
    assert case.outline.incidence == pytest.approx(math.radians(5)) and case.outline.pivot == 0.25
    assert one_fault(text.replace("square", "sqare"), tmp_path).problem == "is not there."


# Mesh files


def write_mesh(path, points, cells):
    meshio = pytest.importorskip("meshio")
    kind = {"file_format": "gmsh", "binary": False} if path.suffix == ".msh" else {}
    meshio.write_points_cells(path, points, cells, **kind)


def ring(count, radius, start):
    angles = [2 * math.pi * i / count for i in range(count)]
    points = [[radius * math.cos(a), radius * math.sin(a), 0.0] for a in angles]
    return points, [[start + i, start + (i + 1) % count] for i in range(count)]


@pytest.mark.parametrize("suffix", ["vtk", "vtu", "msh", "mesh"])
def test_boundary_lines_of_a_mesh_are_chained_and_the_outer_loop_taken(tmp_path, suffix):
    inner, inner_lines = ring(12, 1.0, 0)
    outer, outer_lines = ring(24, 4.0, 12)
    lines = inner_lines[::2] + outer_lines[::-1] + inner_lines[1::2]
    write_mesh(tmp_path / f"body.{suffix}", inner + outer, [("line", lines)])
    outline = read_outline(f"body.{suffix}", tmp_path)
    assert len(outline) == 24
    exact = 0.25 * 24 / 2 * math.sin(2 * math.pi / 24)  # polygon of 24 corners, radius 1/2
    assert signed_area(list(outline)) == pytest.approx(exact, rel=1e-6)


def test_a_mesh_of_cells_without_lines_gives_its_boundary(tmp_path):
    points = [[0, -1, 0], [1, -1, 0], [2, -1, 0], [0, 1, 0], [1, 1, 0], [2, 1, 0]]
    write_mesh(tmp_path / "body.vtk", points, [("quad", [[0, 1, 4, 3]]), ("triangle", [[1, 2, 5], [1, 5, 4]])])
    outline = read_outline("body.vtk", tmp_path)
    assert len(outline) == 6 and signed_area(list(outline)) == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("points", "cells", "problem"),
    [
        ([[0, 0, 0], [1, 0, 0], [1, 1, 0]], [("line", [[0, 1], [1, 2]])], "do not form closed curves"),
        ([[0, 0, 0], [1, 0, 0], [1, 1, 0]], [("vertex", [[0]])], "neither line elements nor cells"),
        ([[0, 0, 0], [1, 0, 1], [1, 1, 2]], [("line", [[0, 1], [1, 2], [2, 0]])], "is not flat: z varies."),
    ],
)
def test_meshes_that_hold_no_outline(tmp_path, points, cells, problem):
    write_mesh(tmp_path / "body.vtk", points, cells)
    with pytest.raises(ValueFault, match=problem):
        read_outline("body.vtk", tmp_path)


@pytest.mark.parametrize("name", ["body.vtk", "body.msh", "body.vtu", "body.su2", "body.obj", "body.ply"])
def test_damaged_mesh_files_are_refused_in_silence(tmp_path, capfd, name):
    (tmp_path / name).write_bytes(b"# vtk DataFile Version 3.0\n\x00\xff nonsense $MeshFormat")
    with pytest.raises(ValueFault) as caught:
        read_outline(name, tmp_path)
    assert caught.value.problem.startswith("cannot be read as a mesh") and caught.value.file == name
    assert capfd.readouterr() == ("", "")


@pytest.mark.parametrize("name", ["body", "body.xdmf", "body.inp", "body.png", "body.csv.gz"])
def test_other_kinds_of_files_are_refused(tmp_path, name):
    (tmp_path / name).write_text(SQUARE)
    with pytest.raises(ValueFault, match="is of a kind that is not read as an outline"):
        read_outline(name, tmp_path)


def test_quadratic_lines_keep_their_middle_points():
    assert boundary_edges([("line3", [[0, 2, 1]])]) == [(0, 1), (1, 2)]


def test_chain_knows_open_and_branched_curves():
    assert chain([(0, 1), (1, 2), (2, 0)]) == [[0, 1, 2]] or len(chain([(0, 1), (1, 2), (2, 0)])[0]) == 3
    assert chain([(0, 1), (1, 2)]) is None
    assert chain([(0, 1), (1, 2), (2, 0), (2, 3), (3, 2)]) is None
    assert chain([]) == []


def test_meshio_is_loaded_for_mesh_files_only(tmp_path):
    (tmp_path / "square.csv").write_text(SQUARE)
    code = (
        "import sys, pathlib; from ibsolver.case.outline_file import read_outline; "
        "read_outline('square.csv', pathlib.Path(sys.argv[1])); print('meshio' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", code, str(tmp_path)], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"
