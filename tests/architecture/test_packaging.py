"""The package can be installed three ways and finds its tables and samples each time."""

from __future__ import annotations

import importlib.util
import os
import subprocess
import sys
import venv
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
REPORT = (
    "import pathlib, linewright, linewright.resources as r; "
    "print(linewright.__version__, pathlib.Path(linewright.__file__).parent, "
    "len(list(r.tables_dir().glob('*.npz'))), len(list(r.samples_dir().glob('*.fits'))), "
    "r.tables_dir(), sep='|')"
)
pytestmark = pytest.mark.skipif(
    importlib.util.find_spec("hatchling") is None or importlib.util.find_spec("pip") is None,
    reason="building needs hatchling and pip in this environment (the test extra brings them)",
)


def _environment() -> dict[str, str]:
    kept = {k: v for k, v in os.environ.items() if k != "PYTHONPATH"}
    return {**kept, "PIP_NO_INDEX": "1", "PIP_NO_INPUT": "1", "PIP_DISABLE_PIP_VERSION_CHECK": "1",
            "PYTHONDONTWRITEBYTECODE": "1"}


def _run(command: list[str], cwd: Path) -> str:
    done = subprocess.run(command, cwd=cwd, env=_environment(), capture_output=True, text=True,
                          timeout=110)
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def _wheel(folder: Path) -> Path:
    _run([sys.executable, "-m", "pip", "wheel", "--quiet", "--no-deps", "--no-build-isolation",
          "--wheel-dir", str(folder), str(ROOT)], folder)
    return next(folder.glob("linewright-*.whl"))


def _fresh_python(folder: Path) -> Path:
    """A virtual environment that sees this one's packages, but not this one's Linewright."""
    venv.create(folder, with_pip=False)
    python = folder / ("Scripts/python.exe" if os.name == "nt" else "bin/python")
    site = Path(_run([str(python), "-c", "import site; print(site.getsitepackages()[0])"],
                     folder).strip())
    parents = [p for p in sys.path if p.endswith(("site-packages", "dist-packages"))]
    (site / "parents.pth").write_text("\n".join(parents), encoding="utf-8")
    return python


def _installed(python: Path, *what: str) -> list[str]:
    """Fields of REPORT after installing with pip into a fresh environment."""
    _run([sys.executable, "-m", "pip", "--python", str(python), "install", "--quiet", "--no-deps",
          "--no-build-isolation", "--ignore-installed", *what], python.parent)
    return _run([str(python), "-c", REPORT], python.parent).strip().split("|")


@pytest.fixture(scope="module")
def wheel(tmp_path_factory) -> Path:
    return _wheel(tmp_path_factory.mktemp("wheel"))


def missing_from(names: list[str]) -> list[str]:
    """What a wheel must carry and does not."""
    wanted = ["linewright/spectra/reading.py", "linewright/session/schema_v2.json",
              "linewright/linedata/tables/manifest.json", "linewright/sample_spectra/g_dwarf.fits"]
    wanted += [f"linewright/linedata/tables/{p.name}"
               for p in (ROOT / "linedata/tables").glob("*.npz")]
    return [name for name in wanted if name not in names]


def test_the_wheel_carries_tables_samples_and_licence(wheel):
    names = zipfile.ZipFile(wheel).namelist()
    assert missing_from(names) == []
    assert any(name.endswith("licenses/LICENSE") for name in names)
    assert not any(part in name for name in names for part in ("tests/", "builders/", ".ci"))


def test_a_wheel_without_tables_would_be_noticed(wheel):
    names = [n for n in zipfile.ZipFile(wheel).namelist() if "linedata" not in n]
    assert "linewright/linedata/tables/manifest.json" in missing_from(names)


def test_the_wheel_installs(wheel, tmp_path):
    version, home, tables, samples, folder = _installed(_fresh_python(tmp_path / "env"), str(wheel))
    assert version == "0.1.0"
    assert home.startswith(str(tmp_path)) and folder.startswith(str(tmp_path))
    assert int(tables) >= 1 and int(samples) >= 1


def test_the_checkout_installs(tmp_path):
    _, home, tables, samples, folder = _installed(_fresh_python(tmp_path / "env"), str(ROOT))
    assert home.startswith(str(tmp_path)) and folder.startswith(str(tmp_path))
    assert int(tables) >= 1 and int(samples) >= 1


def test_the_checkout_installs_editable(tmp_path):
    _, home, tables, samples, folder = _installed(
        _fresh_python(tmp_path / "env"), "--editable", str(ROOT))
    assert Path(home) == ROOT / "app/linewright"
    assert Path(folder) == ROOT / "linedata/tables"
    assert int(tables) >= 1 and int(samples) >= 1
