"""The top level of the project and the rooms of the package are as DEVELOPERS.md says."""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
TOP_LEVEL = {
    "README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE", "app", "linedata", "tests",
    "sample_spectra", ".ci", ".gitignore", ".gitattributes",
}
ROOMS = {"spectra", "lines", "measure", "claims", "session", "job", "publish", "batch", "cli",
         "window"}
LOOSE_MODULES = {"__init__.py", "__main__.py", "errors.py", "progress.py", "resources.py"}


def strangers(tracked: list[str]) -> list[str]:
    """Tracked paths that do not belong where they stand."""
    found = {path.split("/")[0] for path in tracked} - TOP_LEVEL
    for path in tracked:
        parts = path.split("/")
        if parts[0] == "app" and parts[1:2] not in (["linewright"], ["setup.sh"]):
            found.add(path)
        if parts[:2] == ["app", "linewright"] and len(parts) == 3 and parts[2] not in LOOSE_MODULES:
            found.add(path)
        if parts[:2] == ["app", "linewright"] and len(parts) > 3 and parts[2] not in ROOMS:
            found.add(path)
    return sorted(found)


def _tracked() -> list[str]:
    if shutil.which("git") is None:
        pytest.skip("git is not installed")
    done = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True)
    if done.returncode != 0:
        pytest.skip("not a git checkout")
    return done.stdout.splitlines()


def test_only_the_listed_entries_at_the_top_level():
    assert strangers(_tracked()) == []


def test_the_top_level_documents_exist():
    for name in ("README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE", ".ci/run"):
        assert (ROOT / name).is_file(), name


def test_every_folder_with_modules_is_a_package():
    bare = [str(folder.relative_to(ROOT)) for folder in (ROOT / "app/linewright").rglob("*")
            if folder.is_dir() and any(folder.glob("*.py")) and not
            (folder / "__init__.py").is_file()]
    assert bare == []


@pytest.mark.parametrize(
    "path",
    ["notes.txt", "src/linewright/x.py", "app/other/x.py", "app/linewright/helpers.py",
     "app/linewright/utils/x.py", "app/__init__.py"],
)
def test_the_checker_reports_strangers(path):
    found = strangers(["README.md", "app/linewright/spectra/reading.py", path])
    assert found and found[0] in (path, path.split("/")[0])
