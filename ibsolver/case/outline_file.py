"""A closed outline from a file: CSV of x,y, or the boundary of a mesh file.

This is the only module of the project's case reading that touches meshio, and it does so only for a mesh file.
The line y = 0 of the file is the chord line; the extent along x is the chord.
"""

from __future__ import annotations

import contextlib
import io
from pathlib import Path

from ibsolver.case.csv_columns import read_columns
from ibsolver.case.files import file_beside
from ibsolver.case.values import ValueFault

MOST_BYTES = 64_000_000
MOST_POINTS = 5000
EXAMPLE = "0.25, 0.06"
TEXT_FILES = (".csv", ".txt", ".dat")
MESH_FILES = (".msh", ".vtk", ".vtu", ".mesh", ".su2", ".obj", ".ply", ".off")  # formats that name no other file

Points = list[tuple[float, float]]


def read_outline(name: str, folder: Path | None) -> tuple[tuple[float, float], ...]:
    """Return the outline in chords: x from 0 to 1, counter-clockwise, first point not repeated.

    Parameters
    ----------
    name : str
        As the case names it; its ending is one of `TEXT_FILES` (rows of x,y) or `MESH_FILES`.
    folder : Path or None
        Folder of the case.

    Raises
    ------
    ValueFault
        The file cannot be read, or the curve crosses itself, is not closed, or encloses nothing.
    """
    path = file_beside(name, folder, MOST_BYTES)
    suffix = Path(name).suffix.lower()
    if suffix in TEXT_FILES:
        return normalised_outline(_csv_points(path, name), name)
    if suffix in MESH_FILES:
        return normalised_outline(_mesh_points(path, name), name)
    known = ", ".join((*TEXT_FILES, *MESH_FILES))
    raise ValueFault("is of a kind that is not read as an outline.", f"Give a file of one of {known}.", name)


def normalised_outline(points: Points, name: str) -> tuple[tuple[float, float], ...]:
    """Return points scaled to the chord, without repeats, counter-clockwise (see `read_outline`)."""
    low = min(x for x, _ in points)
    chord = max(x for x, _ in points) - low
    height = max(y for _, y in points) - min(y for _, y in points)
    if not 0 < chord < 1e150 or not 0 < height < 1e150 or chord < 1e-150:
        raise ValueFault("encloses nothing: its points lie on a line.", "Write the points around the body.", name)
    kept = without_repeats([((x - low) / chord, y / chord) for x, y in points])
    low = min(x for x, _ in kept)  # once more: an end of the curve may have been dropped as a repeat
    chord = max(x for x, _ in kept) - low
    scaled = [((x - low) / chord, y / chord) for x, y in kept]
    if not 3 <= len(scaled) <= MOST_POINTS:
        raise ValueFault(f"has {len(scaled)} different points; 3 to {MOST_POINTS} are taken.", "Thin it out.", name)
    crossing = first_crossing(scaled)
    if crossing is not None:
        i, j = crossing
        raise ValueFault(
            f"crosses or touches itself: the sides after points {i + 1} and {j + 1} of the outline meet.",
            "Write the points in order around the body, each once.",
            name,
        )
    if not min(y for _, y in scaled) <= 0 <= max(y for _, y in scaled):
        raise ValueFault("lies beside its own chord line y = 0.", "Move it so that y = 0 runs through the body.", name)
    return tuple(scaled if signed_area(scaled) > 0 else scaled[::-1])


def without_repeats(points: Points) -> Points:
    """Return points without neighbours closer than 1e-9 chords, and without the closing repeat of the first."""
    kept: Points = []
    for point in points:
        if not kept or max(abs(point[0] - kept[-1][0]), abs(point[1] - kept[-1][1])) > 1e-9:
            kept.append(point)
    while len(kept) > 1 and max(abs(kept[0][0] - kept[-1][0]), abs(kept[0][1] - kept[-1][1])) <= 1e-9:
        kept.pop()
    return kept


def signed_area(points: Points) -> float:
    """Return the enclosed area, positive where the points run counter-clockwise."""
    following = points[1:] + points[:1]
    return 0.5 * sum(x * y1 - x1 * y for (x, y), (x1, y1) in zip(points, following, strict=True))


def first_crossing(points: Points) -> tuple[int, int] | None:
    """Return the indices of two sides that meet without being neighbours, or of two that fold back, or None."""
    import numpy as np

    folded = _first_fold(points)
    if folded is not None:
        return folded
    start = np.array(points)
    end = np.roll(start, -1, axis=0)
    count = len(points)
    for i in range(count - 2):
        stop = count - 1 if i == 0 else count  # the last side is a neighbour of the first
        meets = _sides_meet(start[i], end[i], start[i + 2 : stop], end[i + 2 : stop])
        if meets.any():
            return i, i + 2 + int(meets.argmax())
    return None


def _first_fold(points: Points) -> tuple[int, int] | None:
    """Return the indices of the first two neighbouring sides that lie on one another, or None."""
    count = len(points)
    for i in range(count):
        a, b, c = points[i], points[(i + 1) % count], points[(i + 2) % count]
        ux, uy, vx, vy = b[0] - a[0], b[1] - a[1], c[0] - b[0], c[1] - b[1]
        along = ux * vx + uy * vy
        if along < 0 and abs(ux * vy - uy * vx) <= 1e-12 * -along:
            return i, (i + 1) % count
    return None


def _sides_meet(a, b, c, d):
    """Return whether side a-b meets each of the sides c-d, shape (n,)."""
    import numpy as np

    def turn(p, q, r):
        return (q[..., 0] - p[..., 0]) * (r[..., 1] - p[..., 1]) - (q[..., 1] - p[..., 1]) * (r[..., 0] - p[..., 0])

    d1, d2, d3, d4 = turn(c, d, a), turn(c, d, b), turn(a, b, c), turn(a, b, d)
    boxes = np.all(
        (np.maximum(a, b) >= np.minimum(c, d)) & (np.maximum(c, d) >= np.minimum(a, b)), axis=-1
    )
    return boxes & (d1 * d2 <= 0) & (d3 * d4 <= 0)


def _csv_points(path: Path, name: str) -> Points:
    columns = read_columns(path, name, EXAMPLE)
    x, y = 0, 1
    if columns.header:
        if "x" not in columns.header or "y" not in columns.header:
            found = ", ".join(columns.header)[:60]
            line = columns.lines[0] - 1
            raise ValueFault("has a header without x and y.", "Head the columns x,y.", name, line, found)
        x, y = columns.header.index("x"), columns.header.index("y")
    elif len(columns.rows[0]) != 2:
        raise columns.fault(0, "needs two columns, x and y.", f"Write rows such as: {EXAMPLE}")
    return list(zip(columns.column(x), columns.column(y), strict=True))


def _mesh_points(path: Path, name: str) -> Points:
    """Return the outer boundary of a mesh file as a chain of points."""
    coordinates, edges = _read_mesh(path, name)
    loops = chain(edges)
    if loops is None:
        raise ValueFault(
            "has boundary lines that do not form closed curves.", "Close the curve, or export it as a CSV of x,y.", name
        )
    if not loops:
        raise ValueFault("has neither line elements nor cells with a boundary.", "Export the outline as x,y.", name)
    curves = [[coordinates[node] for node in loop] for loop in loops]
    return max(curves, key=lambda curve: abs(signed_area(curve)))


def _read_mesh(path: Path, name: str) -> tuple[Points, list[tuple[int, int]]]:
    """Return (points, boundary edges) of a mesh file."""
    import meshio
    import numpy as np

    said = io.StringIO()
    try:
        with contextlib.redirect_stdout(said), contextlib.redirect_stderr(said):
            mesh = meshio.read(path)
    except (Exception, SystemExit) as error:  # readers of damaged files fail in any way, even by leaving Python
        why = " ".join((str(error) or type(error).__name__).split())[:120]
        raise ValueFault(f"cannot be read as a mesh: {why}.", "Export the outline as a CSV of x,y.", name) from None
    points = np.asarray(mesh.points, dtype=float)
    if points.ndim != 2 or points.shape[1] < 2 or not len(points) or not np.isfinite(points).all():
        raise ValueFault("has no usable points.", "Export the outline as a CSV of x,y.", name)
    if points.shape[1] > 2 and np.ptp(points[:, 2]) > 1e-9 * np.ptp(points[:, 0]):
        raise ValueFault("is not flat: z varies.", "Export a plane section.", name)
    edges = boundary_edges([(block.type, block.data.tolist()) for block in mesh.cells])
    if any(not 0 <= node < len(points) for edge in edges for node in edge):
        raise ValueFault("names points that it does not have.", "Export the mesh again.", name)
    return [(float(x), float(y)) for x, y in points[:, :2]], edges


def boundary_edges(blocks: list[tuple[str, list[list[int]]]]) -> list[tuple[int, int]]:
    """Return the line elements of a mesh, or where it has none the edges that belong to one cell only."""
    lines: list[tuple[int, int]] = []
    uses: dict[tuple[int, int], int] = {}
    for kind, cells in blocks:
        for cell in cells:
            if kind == "line":
                lines.append((cell[0], cell[1]))
            elif kind == "line3":
                lines += [(cell[0], cell[2]), (cell[2], cell[1])]
            elif kind in ("triangle", "quad"):
                for edge in zip(cell, cell[1:] + cell[:1], strict=True):
                    ordered = (min(edge), max(edge))
                    uses[ordered] = uses.get(ordered, 0) + 1
    return lines or [edge for edge, count in uses.items() if count == 1]


def chain(edges: list[tuple[int, int]]) -> list[list[int]] | None:
    """Return the closed loops that edges form, each as a list of nodes; None where one is open or branches."""
    neighbours: dict[int, list[int]] = {}
    for a, b in {(min(edge), max(edge)) for edge in edges if edge[0] != edge[1]}:
        neighbours.setdefault(a, []).append(b)
        neighbours.setdefault(b, []).append(a)
    if any(len(near) != 2 for near in neighbours.values()):
        return None
    loops, seen = [], set()
    for start in neighbours:
        if start not in seen:
            loops.append(_loop(start, neighbours, seen))
    return loops


def _loop(start: int, neighbours: dict[int, list[int]], seen: set[int]) -> list[int]:
    loop, before, node = [], -1, start
    while node not in seen:
        seen.add(node)
        loop.append(node)
        first, second = neighbours[node]
        before, node = node, (first if first != before else second)
    return loop
