"""Fixtures of the window's tests: settings isolated, an invented catalogue, a window."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).parent))


@pytest.fixture(autouse=True)
def isolated_settings(tmp_path):
    """No test reads or writes the user's own settings or log."""
    from PySide6.QtCore import QSettings, QStandardPaths

    QStandardPaths.setTestModeEnabled(True)
    QSettings.setPath(
        QSettings.Format.IniFormat, QSettings.Scope.UserScope, str(tmp_path / "settings"))


@pytest.fixture
def invented(monkeypatch):
    """An invented catalogue in place of the shipped one, with its own depths."""
    import window_builders as build

    from linewright.window import rake

    catalogue = build.catalogue_of()
    monkeypatch.setattr(rake, "_loaded", lambda progress: catalogue)
    monkeypatch.setattr(
        rake, "predicted_depths", lambda c, *rest: np.asarray(10.0 ** (c.loggf + 1.0)))
    return catalogue


@pytest.fixture
def window(qtbot, invented, monkeypatch):
    """A shown window without a spectrum; closed without questions."""
    from linewright.job.view_reweigh import Weighed
    from linewright.window.acts import reweighing
    from linewright.window.main_window import MainWindow

    monkeypatch.setattr(MainWindow, "_warm_engine", lambda self: None)
    monkeypatch.setattr(reweighing, "_made_ready", lambda engine, session: None)
    monkeypatch.setattr(reweighing, "_weighed",
                        lambda engine, session, progress: Weighed(session, session, ()))
    window = MainWindow()
    qtbot.addWidget(window, before_close_func=lambda w: setattr(w, "_leaving", True))
    window.resize(1440, 860)
    window.show()
    yield window
    assert window.tasks.close(10000), "a task would not stop"


@pytest.fixture
def solved(window, invented, qtbot):
    """The window on an invented spectrum with its solved session."""
    import window_builders as build

    from linewright.session.document import Document
    from linewright.window.workbench import Desk

    spectrum = build.spectrum_of(invented)
    desk = Desk(spectrum, Document(build.session_of(spectrum, invented)))
    desk.velocity = build.VELOCITY
    window.bench.add_desk(desk)
    qtbot.waitUntil(lambda: window.bench.depth is not None, timeout=5000)
    return window
