"""Settings of every test: no display, one thread, the shared data found beside the checkout."""

from __future__ import annotations

import os
import sys
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
os.environ.setdefault("MPLBACKEND", "Agg")
for _name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS"):
    os.environ.setdefault(_name, "1")

import pytest  # noqa: E402

ROOT = Path(__file__).resolve().parents[1]
SHARED = ROOT.parent / "shared"
if str(ROOT / "tests") not in sys.path:
    sys.path.insert(0, str(ROOT / "tests"))
if str(ROOT / "app") not in sys.path:
    sys.path.insert(0, str(ROOT / "app"))


@pytest.hookimpl(tryfirst=True)
def pytest_configure(config):
    """One clean line instead of an abort where Qt's system libraries are missing."""
    from linewright.window.needs import complaint

    problem = complaint()
    if problem:
        pytest.exit(problem, returncode=3)


@pytest.fixture(autouse=True)
def own_configuration(request, monkeypatch, tmp_path_factory):
    """No test reads or writes the user's remembered choices; each starts with none."""
    name = f"configuration-{abs(hash(request.node.nodeid))}"
    monkeypatch.setenv("LINEWRIGHT_CONFIG", str(tmp_path_factory.getbasetemp() / name))
