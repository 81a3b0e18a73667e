"""Import directions (import-linter) and what fresh interpreters load."""

from __future__ import annotations

import os
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
LINTER = "import sys; from importlinter.cli import lint_imports_command; lint_imports_command()"
ROOMS = ("spectra", "lines", "measure", "claims", "session", "job", "publish", "batch", "cli",
         "window", "window/panels")


def _environment(*folders: Path) -> dict[str, str]:
    return {**os.environ, "PYTHONPATH": os.pathsep.join(map(str, folders)),
            "PYTHONDONTWRITEBYTECODE": "1"}


def lint(package_parent: Path, cwd: Path) -> tuple[int, str]:
    """(exit status, output) of the project's contracts on the package in that folder."""
    done = subprocess.run(
        [sys.executable, "-c", LINTER, "--config", str(ROOT / "pyproject.toml"), "--no-cache"],
        cwd=cwd, env=_environment(package_parent), capture_output=True, text=True, timeout=100,
    )
    return done.returncode, done.stdout + done.stderr


def test_the_contracts_hold(tmp_path):
    status, output = lint(ROOT / "app", tmp_path)
    assert status == 0, output
    assert re.search(r"Contracts: 3 kept, 0 broken", output), output


def _toy(folder: Path) -> Path:
    """A package of empty rooms with the modules the contracts name."""
    package = folder / "linewright"
    for room in ("", *ROOMS):
        (package / room).mkdir(parents=True, exist_ok=True)
        (package / room / "__init__.py").write_text("", encoding="utf-8")
    for name in ("errors", "progress", "resources", "__main__"):
        (package / f"{name}.py").write_text("", encoding="utf-8")
    for name in _contract("panels")["modules"]:
        (package / "window/panels" / f"{name.split('.')[-1]}.py").write_text("", encoding="utf-8")
    return package


def _contract(name: str) -> dict:
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    return next(c for c in settings["tool"]["importlinter"]["contracts"] if c["id"] == name)


def test_a_toy_package_passes(tmp_path):
    _toy(tmp_path)
    status, output = lint(tmp_path, tmp_path)
    assert status == 0, output


@pytest.mark.parametrize(
    ("module", "line", "broken"),
    [
        ("spectra/a.py", "import linewright.lines", "A room imports only the rooms above it"),
        ("claims/a.py", "from linewright import session", "A room imports only the rooms"),
        ("errors.py", "def f():\n    import linewright.spectra", "A room imports only the rooms"),
        ("stray.py", "x = 1", "A room imports only the rooms above it"),
        ("cli/a.py", "import PySide6", "No Qt outside the window"),
        ("job/a.py", "def f():\n    import pyqtgraph", "No Qt outside the window"),
        ("window/panels/ledger.py", "from . import evidence", "Panels are independent"),
    ],
)
def test_each_contract_can_fail(tmp_path, module, line, broken):
    (_toy(tmp_path) / module).write_text(line + "\n", encoding="utf-8")
    status, output = lint(tmp_path, tmp_path)
    assert status == 1, output
    assert re.search(rf"{broken}.* BROKEN", output), output


def test_every_room_but_the_window_is_under_the_qt_contract():
    listed = {m.split(".")[1] for m in _contract("no-qt")["source_modules"]}
    rooms = {p.parent.name for p in (ROOT / "app/linewright").glob("*/__init__.py")}
    assert rooms - {"window"} <= listed


def loaded(code: str) -> set[str]:
    """Top-level packages in sys.modules after running ``code`` in a fresh interpreter."""
    report = "; import sys; print('LOADED', *sorted({m.split('.')[0] for m in sys.modules}))"
    done = subprocess.run([sys.executable, "-c", code + report], capture_output=True, text=True,
                          env=_environment(ROOT / "app"), timeout=100)
    assert done.returncode == 0, done.stderr
    line = next(ln for ln in done.stdout.splitlines() if ln.startswith("LOADED "))
    return set(line.split()[1:])


def test_importing_the_package_loads_neither_astropy_nor_scipy():
    assert loaded("import linewright").isdisjoint({"astropy", "scipy", "PySide6", "matplotlib"})


def test_naming_the_library_entrances_loads_no_heavy_package():
    code = "from linewright import read_spectrum, load_catalogue, SolveOptions"
    assert loaded(code).isdisjoint({"astropy", "scipy", "PySide6", "matplotlib"})


@pytest.mark.parametrize("arguments", [["inspect"], ["lines", "--range", "5180:5190", "-o", "-"]])
def test_the_command_line_never_loads_qt(arguments):
    if arguments == ["inspect"]:
        arguments = ["inspect", str(ROOT / "sample_spectra/g_dwarf.fits"), "--json"]
    code = ("import importlib; main = importlib.import_module('linewright.cli.main').main; "
            f"status = main({arguments!r}); assert not status, status")
    assert loaded(code).isdisjoint({"PySide6", "pyqtgraph"})


def test_the_fresh_interpreter_report_can_fail():
    assert "scipy" in loaded("import linewright, scipy")
