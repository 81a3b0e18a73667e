"""The set-up script: usage, and one line where the system lacks something."""

from __future__ import annotations

import os
import shutil
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
TOOLS = ("dirname", "id", "cat", "mktemp", "rm", "tail", "env")
pytestmark = pytest.mark.skipif(shutil.which("sh") is None or os.name == "nt",
                                reason="needs a POSIX shell")
FAKE_PYTHON = """#!/bin/sh
# Claims the version is right, and reports the packages named in FAKE_MISSING.
if [ "$1" = "-" ]; then cat >/dev/null; echo "$FAKE_MISSING"; fi
"""


def _bare_path(folder: Path, python: bool) -> str:
    """A search path with a few tools, no apt-get and, if wanted, an imitated Python."""
    folder.mkdir()
    for tool in TOOLS:
        (folder / tool).symlink_to(shutil.which(tool))
    if python:
        (folder / "python3").write_text(FAKE_PYTHON, encoding="utf-8")
        (folder / "python3").chmod(0o755)
    return str(folder)


def _setup(*arguments: str, **environment: str) -> subprocess.CompletedProcess:
    return subprocess.run(
        [shutil.which("sh"), str(ROOT / "app/setup.sh"), *arguments], capture_output=True,
        text=True, stdin=subprocess.DEVNULL, timeout=60, env={**os.environ, **environment})


@pytest.mark.parametrize("arguments", [(), ("install",), ("--help",)])
def test_other_words_are_wrong_usage(arguments):
    done = _setup(*arguments)
    assert done.returncode == 2 and done.stderr.startswith("usage: sh app/setup.sh run | test")


def test_without_python_one_line_says_what_to_install(tmp_path):
    done = _setup("test", PATH=_bare_path(tmp_path / "bin", python=False), PYTHON="")
    assert done.returncode == 3
    assert done.stderr.splitlines() == [
        "Python 3.11 or newer is missing: apt-get install -y python3 python3-venv"]


def test_without_venv_one_line_names_every_package(tmp_path):
    done = _setup("run", PATH=_bare_path(tmp_path / "bin", python=True), PYTHON="",
                  FAKE_MISSING="python3-venv libegl1")
    assert done.returncode == 3
    assert done.stderr.splitlines() == [
        "System packages missing: python3-venv libegl1 "
        "(Debian: apt-get install -y python3-venv libegl1)",
        "Cannot go on without them."]


def test_ci_run_calls_the_same_command():
    script = (ROOT / ".ci/run").read_text(encoding="utf-8")
    assert "sh app/setup.sh test </dev/null" in script
    assert os.access(ROOT / ".ci/run", os.X_OK)
    for name in ("QT_QPA_PLATFORM=offscreen", "PIP_NO_INPUT=1", "PYTHONFAULTHANDLER=1"):
        assert name in script
