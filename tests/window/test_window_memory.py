"""What is done with is let go: requests, their spectra, closed desks, steps of undo."""

from __future__ import annotations

import gc
import weakref

import numpy as np
import window_builders as build

from linewright.session.document import Document
from linewright.window.acts import opening
from linewright.window.tasks import Request, Tasks
from linewright.window.workbench import Desk


class Load:
    """Something a request holds."""


def test_finished_failed_and_cancelled_requests_are_let_go(qtbot):
    tasks, refs, ended = Tasks(), [], []

    def ask(key: str, work) -> None:
        load = Load()
        refs.append(weakref.ref(load))
        tasks.start(Request(key, "", lambda progress, load=load: work(load), ended.append,
                            ended.append))

    for k in range(10):
        ask(f"done {k}", lambda load: 1)
        ask(f"failed {k}", lambda load: 1 / 0)
        ask("replaced", lambda load: 2)
    qtbot.waitUntil(lambda: len(ended) >= 21, timeout=5000)
    assert tasks.close()
    qtbot.wait(50)
    ended.clear()  # the tracebacks hold what failed
    gc.collect()
    assert sum(ref() is not None for ref in refs) <= 1  # a pool thread may hold its last


def test_a_closed_desk_is_let_go(window, invented, qtbot):
    refs = []
    for _ in range(3):
        spectrum = build.spectrum_of(invented)
        session = build.session_of(spectrum, invented)
        refs += [weakref.ref(spectrum), weakref.ref(session)]
        window.bench.add_desk(Desk(spectrum, Document(session)))
        qtbot.wait(150)
        window.bench.view.select(5)
        opening.drop(window.bench, window.bench.desk)
        del spectrum, session
    qtbot.waitUntil(lambda: not window.tasks._current, timeout=5000)
    gc.collect()
    # the last one shown may stay until another is
    assert sum(ref() is not None for ref in refs[:4]) == 0


def test_a_step_of_undo_holds_no_whole_session(invented):
    from linewright.session import edits

    session = build.session_of(build.spectrum_of(invented), invented)
    document, refs = Document(session), []
    for k in range(20):
        document.apply(edits.set_note, 1 + k, "seen")
        refs.append(weakref.ref(document.session))
    gc.collect()
    assert [ref() is not None for ref in refs] == [False] * 19 + [True]
    while document.undo():
        pass
    assert document.session is session and document.saved
    while document.redo():
        pass
    assert np.count_nonzero([c.note == "seen" for c in document.session.claims]) == 20
