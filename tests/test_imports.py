"""Which room may import which; what may be loaded when. The table stands in DEVELOPERS.md too."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

from ibsolver.cli import VERBS

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
    "ibsolver.cli": {"errors", "_version", "commands"},
    "ibsolver.__main__": {"cli"},
    "ibsolver.run": {"errors", "case", "grid", "body", "motion", "kernels", "flow", "runfile"},
}
POSTPROCESS = {"ibsolver.runfile", "ibsolver.case", "ibsolver.errors"}
ONLY_IN = {
    "h5py": "ibsolver/runfile/",
    "meshio": "ibsolver/case/outline_file.py",
    "matplotlib": "postprocess/figures/",
    "numba": "ibsolver/kernels/_jit.py",
}
HEAVY = (
    "numpy", "scipy", "numba", "matplotlib", "h5py", "meshio", "rich", "postprocess", "ibsolver.run", "ibsolver.flow",
    "ibsolver.kernels", "ibsolver.grid", "ibsolver.body", "ibsolver.motion",
)  # fmt: skip


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


def test_every_room_has_its_row():
    rooms = {f"ibsolver.{path.stem}" for path in (ROOT / "ibsolver").iterdir() if path.suffix in ("", ".py")}
    free = {"ibsolver.__init__", "ibsolver.commands", "ibsolver.__pycache__"}
    assert rooms - free == set(MAY_IMPORT)


def test_the_package_itself_imports_only_its_version_before_it_is_asked():
    found = {n.module for n in ast.parse((ROOT / "ibsolver" / "__init__.py").read_text()).body if hasattr(n, "module")}
    assert found == {"__future__", "typing", "ibsolver._version"}


def test_commands_load_what_is_heavy_only_when_they_are_executed():
    for path in files("ibsolver.commands"):
        for node in ast.parse(path.read_text()).body:
            names = [a.name for a in node.names] if isinstance(node, ast.Import) else [getattr(node, "module", "")]
            for name in filter(None, names):
                assert not name.startswith(HEAVY), f"{path.name} imports {name} at its top"


def test_the_map_in_the_package_holds():
    import doctest

    import ibsolver

    result = doctest.testmod(ibsolver)
    assert result.attempted >= 3 and result.failed == 0


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


@pytest.mark.parametrize("verb", [verb.name for verb in VERBS])
def test_help_of_a_verb_loads_nothing_heavy(verb):
    loaded = loaded_after(f"from ibsolver.cli import main\nmain(['{verb}', '--help'])")
    assert not loaded & {"numpy", "numba", "scipy", "matplotlib", "h5py", "meshio", "rich"}


def test_reading_a_case_loads_no_compiler_and_no_plotting():
    loaded = loaded_after(
        "import ibsolver\nfrom pathlib import Path\n"
        "for path in ('towed_plate_with_flap', 'free_flap', 'pitching_plate', 'outline_from_csv', 'cylinder_re40'):\n"
        "    ibsolver.load_case(f'cases/{path}.toml')"
    )
    assert not loaded & {"numba", "scipy", "matplotlib", "h5py", "meshio"}


def test_a_case_with_faults_is_told_without_loading_the_solver(tmp_path):
    (tmp_path / "wrong.toml").write_text("[plate]\nincidence = 18\n")
    for verb in ("check", "run"):
        loaded = loaded_after(f"from ibsolver.cli import main\nassert main([{verb!r}, {str(tmp_path / 'wrong.toml')!r}]) == 3")
        assert not loaded & {"numba", "scipy", "matplotlib", "h5py", "meshio"}


FIRST = ("import ibsolver.run.loop, ibsolver", "import ibsolver", "from ibsolver import run; import ibsolver")


@pytest.mark.parametrize("first", FIRST)
def test_run_is_callable_in_either_order_of_import(first):
    loaded_after(
        f"{first}\nassert callable(ibsolver.run)\nfrom ibsolver.run import loop\nassert callable(ibsolver.run)"
    )


def test_the_compiler_comes_only_when_run_is_called():
    loaded = loaded_after("import ibsolver\nassert callable(ibsolver.run)\nassert callable(ibsolver.load_case)")
    assert "numba" not in loaded
    assert "numba" in loaded_after(
        "import ibsolver\ntry:\n    ibsolver.run(None, out='nowhere')\nexcept AttributeError:\n    pass"
    )
