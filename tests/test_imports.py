"""Which room may import which; what may be loaded when. The table stands in DEVELOPERS.md too."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent

MAY_IMPORT = {
    "ibsolver.errors": set(),
    "ibsolver._version": set(),
    "ibsolver.case": {"errors"},
    "ibsolver.grid": {"errors"},
    "ibsolver.motion": {"errors", "case.model"},
    "ibsolver.body": {"errors", "grid", "case.model"},
    "ibsolver.kernels": set(),
    "ibsolver.flow": {"errors", "kernels", "grid", "body"},
    "ibsolver.runfile": {"errors", "_version"},
    "ibsolver.run": {"errors", "case", "grid", "body", "motion", "kernels", "flow", "runfile"},
}
POSTPROCESS = {"ibsolver.runfile", "ibsolver.case", "ibsolver.errors"}
ONLY_IN = {
    "h5py": "ibsolver/runfile/",
    "meshio": "ibsolver/case/outline_file.py",
    "matplotlib": "postprocess/figures/",
    "numba": "ibsolver/kernels/_jit.py",
}


def imports_of(path: Path) -> set[str]:
    """Return the modules a file imports anywhere, relative imports counting as faults of their own."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: imports are absolute"
            found |= {node.module} | {f"{node.module}.{alias.name}" for alias in node.names}
    return found


def files(package: str) -> list[Path]:
    place = ROOT / package.replace(".", "/")
    return sorted(place.rglob("*.py")) if place.is_dir() else [place.with_suffix(".py")]


@pytest.mark.parametrize("room", MAY_IMPORT)
def test_rooms_import_only_what_they_may(room):
    allowed = {f"ibsolver.{name}" for name in MAY_IMPORT[room]} | {room}
    for path in files(room):
        for name in imports_of(path):
            if name.startswith(("ibsolver", "postprocess")) and name != "ibsolver":
                assert any(name == a or name.startswith(a + ".") or a.startswith(name + ".") for a in allowed), (
                    f"{path.relative_to(ROOT)} imports {name}"
                )


def test_postprocess_imports_no_solver():
    for path in files("postprocess"):
        for name in imports_of(path):
            if name.startswith("ibsolver."):
                assert any(name == a or name.startswith(a + ".") for a in POSTPROCESS), (
                    f"{path.relative_to(ROOT)} imports {name}"
                )


@pytest.mark.parametrize("library", ONLY_IN)
def test_libraries_stay_in_their_rooms(library):
    for path in [*files("ibsolver"), *files("postprocess")]:
        place = path.relative_to(ROOT).as_posix()
        if any(name == library or name.startswith(library + ".") for name in imports_of(path)):
            assert place.startswith(ONLY_IN[library]), f"{place} imports {library}"


def loaded_after(code: str) -> set[str]:
    script = f"import sys\n{code}\nprint(' '.join(sorted(m.partition('.')[0] for m in sys.modules)))"
    out = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True, cwd=ROOT).stdout
    return set(out.splitlines()[-1].split())


def test_help_loads_nothing_heavy():
    loaded = loaded_after("from ibsolver.cli import main\nmain(['--help'])")
    assert not loaded & {"numpy", "numba", "scipy", "matplotlib", "h5py", "meshio", "rich"}


@pytest.mark.parametrize("verb", ["new", "check", "run", "forces", "picture"])
def test_help_of_a_verb_loads_nothing_heavy(verb):
    loaded = loaded_after(f"from ibsolver.cli import main\nmain(['{verb}', '--help'])")
    assert not loaded & {"numpy", "numba", "scipy", "matplotlib", "h5py", "meshio", "rich"}


def test_reading_a_case_loads_no_compiler_and_no_plotting():
    loaded = loaded_after("import ibsolver\nibsolver.load_case('cases/towed_plate_with_flap.toml')")
    assert not loaded & {"numba", "scipy", "matplotlib", "h5py", "meshio"}


@pytest.mark.parametrize("first", ["import ibsolver.run.loop, ibsolver", "import ibsolver"])
def test_run_is_callable_in_either_order_of_import(first):
    loaded_after(
        f"{first}\nassert callable(ibsolver.run)\nfrom ibsolver.run import loop\nassert callable(ibsolver.run)"
    )
