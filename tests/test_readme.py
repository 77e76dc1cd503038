"""The README's promises that can be checked without running them."""

from __future__ import annotations

import re
import shutil
import subprocess
from pathlib import Path

from ibsolver.cli import VERBS

ROOT = Path(__file__).resolve().parent.parent
README = (ROOT / "README.md").read_text()


def test_ci_runs_the_test_command_of_the_readme():
    script = (ROOT / ".ci" / "run").read_text()
    line = next(line for line in script.splitlines() if "pytest" in line and not line.startswith("#"))
    assert line in README


def test_every_command_stands_in_the_table_and_the_other_way_round():
    assert {verb.name for verb in VERBS} == set(re.findall(r"^\| `(\w+)", README, re.M))


def test_every_file_that_is_named_exists():
    for name in re.findall(r"\]\(([^)#]+)\)", README) + re.findall(r"ibsolver run (cases/\S+\.toml)", README):
        assert (ROOT / name).exists(), name


def test_every_case_stands_in_the_list_of_cases():
    text = (ROOT / "cases" / "README.md").read_text()
    for path in (ROOT / "cases").glob("*.toml"):
        assert f"`{path.name}`" in text, path.name


def tracked() -> list[str]:
    """Return the tracked files; none where git or its folder is absent, as in an unpacked archive."""
    if shutil.which("git") is None:
        return []
    listed = subprocess.run(["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, text=True)
    return [name for name in listed.stdout.split("\0") if name]


def test_no_machine_path_and_no_registry_host_in_any_tracked_text():
    files = [ROOT / name for name in tracked() if not name.endswith(".png")] or [ROOT / "README.md"]
    hosts = re.compile("|".join(["pypi" + r"\.org", "python" + "hosted", "npmjs" + r"\.", "ana" + r"conda\.org"]))
    for path in files:
        text = path.read_text(encoding="utf-8", errors="replace") if path.exists() else ""
        assert not hosts.search(text), path
        assert "/ho" + "me/" not in text and "/ro" + "ot/" not in text, path
