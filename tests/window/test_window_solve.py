"""Solving beside the window: progress, cancel, outdated results dropped, acts kept."""

from __future__ import annotations

import threading
import time

import pytest
from PySide6.QtCore import QThread

from linewright.errors import InputRefused
from linewright.job.view_session import unsolved_session
from linewright.window.acts import opening


class Engine:
    """A stand-in for the engine that waits to be told to go on."""

    def __init__(self, answer):
        self.answer, self.go, self.calls = answer, threading.Event(), []
        self.threads = []

    def __call__(self, _process, spectrum, options, progress):
        self.calls.append((spectrum, options))
        self.threads.append(QThread.currentThread())
        for k in range(1000):
            progress.report("measuring", k / 1000)
            if self.go.wait(0.01):
                break
        if isinstance(self.answer, Exception):
            raise self.answer
        return self.answer


@pytest.fixture
def unsolved(window, invented):
    import window_builders as build

    from linewright.session.document import Document
    from linewright.window.workbench import Desk

    spectrum = build.spectrum_of(invented)
    window.bench.add_desk(Desk(spectrum, Document(unsolved_session(spectrum))))
    return window


@pytest.fixture
def engine(unsolved, invented, monkeypatch):
    import window_builders as build

    from linewright.window.acts import solving

    engine = Engine(build.session_of(unsolved.bench.spectrum, invented))
    monkeypatch.setattr(solving, "_solved", engine)
    yield engine
    engine.go.set()


def test_solving_shows_progress_and_fills_the_ledger(unsolved, engine, qtbot, invented):
    unsolved.bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: unsolved.status.bar.isVisible() and unsolved.status.bar.value() > 0,
                    timeout=5000)
    assert "measuring" in unsolved.status.stage.text()
    assert not unsolved.bench.allows("spectrum.solve")
    engine.go.set()
    qtbot.waitUntil(lambda: unsolved.ledger.model.rowCount() == len(invented), timeout=5000)
    assert engine.threads[0] is not unsolved.thread()
    assert unsolved.bench.view.now.velocity == 12.0
    assert unsolved.bench.allows("spectrum.solve")
    assert "features" in unsolved.notices.current.text
    unsolved.bench.run("edit.undo")
    assert unsolved.ledger.model.rowCount() == 0


def test_cancel_stops_and_changes_nothing(unsolved, engine, qtbot):
    before = unsolved.bench.session
    unsolved.bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: bool(engine.calls), timeout=5000)
    start = time.monotonic()
    unsolved.bench.run("spectrum.stop")
    assert not unsolved.bench.tasks.busy("solve")
    assert unsolved.tasks._pool.waitForDone(2000)
    assert time.monotonic() - start < 1.0
    qtbot.wait(50)
    assert unsolved.bench.session is before


def test_the_result_for_another_medium_is_dropped(unsolved, engine, qtbot):
    unsolved.bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: bool(engine.calls), timeout=5000)
    opening.set_medium(unsolved.bench, "vacuum")
    now = unsolved.bench.session
    engine.go.set()
    assert unsolved.tasks._pool.waitForDone(5000)
    qtbot.wait(50)
    assert unsolved.bench.session is now


def test_a_refusal_is_a_quiet_notice(unsolved, engine, qtbot):
    engine.answer = InputRefused("invented.txt", "nothing to measure", "give more samples")
    engine.go.set()
    unsolved.bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: unsolved.notices.current is not None, timeout=5000)
    assert unsolved.notices.current.text == (
        "invented.txt: nothing to measure; give more samples")


def test_a_fault_of_the_engine_is_a_notice_with_a_log(unsolved, engine, qtbot):
    engine.answer = IndexError("an invented fault")
    engine.go.set()
    unsolved.bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: unsolved.notices.current is not None, timeout=5000)
    assert "troubles.log" in unsolved.notices.current.text
    assert unsolved.bench.allows("spectrum.solve")


def test_what_a_person_said_survives_solving_again(unsolved, engine, qtbot, invented):
    bench = unsolved.bench
    engine.go.set()
    bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: len(bench.session.features) > 0, timeout=5000)
    bench.view.select(8)
    bench.run("claim.accept2")
    said = bench.session.claims[7]
    bench.view.select(20)
    bench.run("claim.aside")
    bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: bench.desk.document.undo_label == "solve", timeout=5000)
    now = bench.session
    assert now.claims[7].by == "person" and now.claims[7].line == said.line
    assert now.claims[19].standing == "set aside"
    assert now.claims[7].probability == engine.answer.claims[7].probability
    assert all(c.by == "machine" for i, c in enumerate(now.claims) if i not in (7, 19))


def test_choices_are_read_refused_and_used(unsolved, engine, qtbot):
    unsolved.bench.run("spectrum.choices")
    panel = unsolved._choices
    panel.edits["temperature"].setText("hot")
    panel.solve()
    assert "is no number" in panel.trouble.text() and not engine.calls
    panel.edits["temperature"].setText("4800")
    panel.edits["velocity_range"].setText("-80:120")
    panel.edits["species"].setText("Fe I, Ti II")
    panel.solve()
    qtbot.waitUntil(lambda: bool(engine.calls), timeout=5000)
    options = engine.calls[0][1]
    assert options.temperature == 4800.0
    assert options.velocity_range == (-80.0, 120.0)
    assert options.species == ("Fe I", "Ti II")
    unsolved.bench.run("spectrum.choices")
    assert panel.edits["temperature"].text() == "4800"
    panel.hide()


def test_closing_the_window_stops_the_solve(unsolved, engine, qtbot):
    unsolved.bench.run("spectrum.solve")
    qtbot.waitUntil(lambda: bool(engine.calls), timeout=5000)
    unsolved.close()
    assert not unsolved.isVisible()
    assert unsolved.tasks._pool.activeThreadCount() == 0
