"""Opening, saving and exporting, with the dialogs answered by the test."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDropEvent
from PySide6.QtWidgets import QFileDialog

from linewright.spectra.medium import air_to_vacuum
from linewright.window.acts import opening


@pytest.fixture
def text_file(tmp_path, invented) -> Path:
    """Two columns without a header: the medium is not stated."""
    import window_builders as build

    path = tmp_path / "invented.txt"
    build.write_text(build.spectrum_of(invented, samples=8000), path)
    return path


def answer(monkeypatch, path) -> None:
    monkeypatch.setattr(QFileDialog, "getOpenFileNames", lambda *a, **k: ([str(path)], ""))
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *a, **k: (str(path), ""))


def opened(window, qtbot, count: int = 1) -> None:
    qtbot.waitUntil(lambda: len(window.bench.desks) == count, timeout=15000)


def button(window, text: str):
    return next(b for b in window.notices._buttons if b.text() == text)


def test_open_by_dialog(window, qtbot, monkeypatch, text_file):
    answer(monkeypatch, text_file)
    window.bench.run("file.open")
    opened(window, qtbot)
    assert window.pages.currentWidget() is window.space
    assert "invented.txt" in window.status.text.text()
    from linewright.window import layout_memory as memory

    assert memory.recent_files() == [str(text_file)]


def test_open_by_drag_and_drop(window, qtbot, text_file):
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(text_file))])
    event = QDropEvent(QPointF(50, 50), Qt.DropAction.CopyAction, data,
                       Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier)
    window.dropEvent(event)
    opened(window, qtbot)
    assert window.bench.spectrum.samples == 8000


def test_open_from_the_command_line(window, qtbot, text_file):
    from linewright.window.app import open_later

    open_later(window, [str(text_file)])
    opened(window, qtbot)


def test_opening_the_same_file_again_shows_it(window, qtbot, text_file, tmp_path):
    other = tmp_path / "other.txt"
    other.write_bytes(text_file.read_bytes())
    opening.open_files(window.bench, [text_file])
    opened(window, qtbot)
    opening.open_files(window.bench, [other])
    opened(window, qtbot, 2)
    assert window.space.desks.isVisible() and window.space.desks.count() == 2
    opening.open_files(window.bench, [text_file])
    assert window.bench.desk is window.bench.desks[0]
    window.bench.run("file.next")
    assert window.bench.desk.name == "other.txt"


def test_an_unknown_medium_is_asked_about_quietly(window, qtbot, text_file):
    opening.open_files(window.bench, [text_file])
    opened(window, qtbot)
    assert window.notices.current.topic == "medium"
    numbers = window.bench.spectrum.segments[0].wave
    qtbot.mouseClick(button(window, "Air"), Qt.MouseButton.LeftButton)
    assert window.bench.session.spectrum.medium == "air"
    assert np.allclose(window.bench.spectrum.segments[0].wave, air_to_vacuum(numbers))
    assert window.notices.current is None or window.notices.current.topic != "medium"
    window.bench.run("edit.undo")
    assert window.bench.spectrum.medium == "unknown"
    assert np.allclose(window.bench.spectrum.segments[0].wave, numbers)
    window.bench.run("edit.redo")
    assert window.bench.spectrum.medium == "air"


def test_solving_without_a_medium_asks_and_goes_on(
        window, qtbot, text_file, monkeypatch, invented):
    import window_builders as build

    opening.open_files(window.bench, [text_file])
    opened(window, qtbot)
    window.notices.dismiss()
    window.bench.run("spectrum.solve")
    assert window.notices.current.topic == "medium"
    assert not window.bench.tasks.busy("solve")
    from linewright.window.acts import solving

    monkeypatch.setattr(solving, "_solved", lambda *a: build.session_of(a[1], invented))
    qtbot.mouseClick(button(window, "Air"), Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: window.ledger.model.rowCount() == len(invented), timeout=15000)


@pytest.mark.parametrize("content", [b"", b"no numbers here\n", b"\x89PNG\r\n\x1a\n", b"{\"a\":1}"])
def test_what_is_no_spectrum_is_refused_with_the_cause(window, qtbot, tmp_path, content):
    path = tmp_path / "thing.txt"
    path.write_bytes(content)
    opening.open_files(window.bench, [path])
    qtbot.waitUntil(lambda: window.notices.current is not None, timeout=15000)
    notice = window.notices.current
    assert notice.kind == "refused" and "thing.txt" in notice.text
    assert "Traceback" not in notice.text and "inside Linewright" not in notice.text
    assert window.pages.currentWidget() is window.welcome


def test_a_missing_file_is_refused(window, qtbot, tmp_path):
    opening.open_files(window.bench, [tmp_path / "gone.fits"])
    qtbot.waitUntil(lambda: window.notices.current is not None, timeout=15000)
    assert "gone.fits" in window.notices.current.text


def test_save_reopen_and_continue(window, qtbot, monkeypatch, text_file, tmp_path, invented):
    import window_builders as build

    opening.open_files(window.bench, [text_file])
    opened(window, qtbot)
    opening.set_medium(window.bench, "air")
    bench = window.bench
    solved = build.session_of(bench.spectrum, invented)
    bench.desk.document.replace(
        _with_reference(solved, bench.session.spectrum), "solve")
    bench.view.select(5)
    bench.run("claim.accept2")
    path = tmp_path / "work.linewright.json"
    answer(monkeypatch, path)
    assert not bench.desk.saved
    bench.run("file.save")
    qtbot.waitUntil(lambda: bench.desk.saved, timeout=15000)
    said = bench.session.claims[4]
    bench.run("file.close")
    assert bench.desk is None and window.pages.currentWidget() is window.welcome
    bench.run("file.open")
    opened(window, qtbot)
    again = bench.session.claims[4]
    assert (again.species, again.by, again.line) == (said.species, "person", said.line)
    assert bench.spectrum is not None and bench.spectrum.medium == "air"
    bench.view.select(6)
    bench.run("claim.aside")
    bench.run("file.save")
    qtbot.waitUntil(lambda: bench.desk.saved, timeout=15000)
    assert window.status.text.text().endswith("saved")


def _with_reference(session, reference):
    from dataclasses import replace

    return replace(session, spectrum=replace(reference, coverage=session.spectrum.coverage))


def test_a_session_whose_spectrum_has_gone_still_opens(window, qtbot, tmp_path, invented):
    import window_builders as build

    from linewright.session.file import save_session

    spectrum = build.spectrum_of(invented, path=str(tmp_path / "gone.txt"))
    path = tmp_path / "work.linewright.json"
    save_session(build.session_of(spectrum, invented), path)
    opening.open_files(window.bench, [path])
    opened(window, qtbot)
    assert window.bench.spectrum is None
    assert window.ledger.model.rowCount() == len(invented)
    assert "without its spectrum" in window.notices.current.text
    assert not window.bench.allows("spectrum.solve")
    window.bench.view.select(3)


@pytest.mark.parametrize("suffix", ["ecsv", "mrt"])
def test_export_of_the_ledger(solved, qtbot, monkeypatch, tmp_path, suffix):
    path = tmp_path / f"ledger.{suffix}"
    answer(monkeypatch, path)
    solved.bench.run("file.table")
    qtbot.waitUntil(lambda: not solved.bench.tasks.busy("table"), timeout=30000)
    assert path.stat().st_size > 1000
    assert str(path) in solved.notices.current.text


def test_the_table_in_front_is_exported(solved, qtbot, monkeypatch, tmp_path):
    path = tmp_path / "species.ecsv"
    answer(monkeypatch, path)
    solved.space.tables.setCurrentIndex(1)
    solved.bench.run("file.table")
    qtbot.waitUntil(lambda: path.exists(), timeout=30000)
    assert "p_chance" in path.read_text()


def test_an_unknown_suffix_is_refused(solved, qtbot, monkeypatch, tmp_path):
    answer(monkeypatch, tmp_path / "ledger.docx")
    solved.bench.run("file.table")
    qtbot.waitUntil(lambda: solved.notices.current is not None, timeout=15000)
    assert "docx" in solved.notices.current.text and solved.notices.current.kind == "refused"


@pytest.mark.parametrize("suffix", ["pdf"])
def test_export_of_the_figure_in_view(solved, qtbot, monkeypatch, tmp_path, suffix):
    path = tmp_path / f"figure.{suffix}"
    answer(monkeypatch, path)
    solved.bench.view.change(span=(5150.0, 5160.0))
    solved.bench.run("file.figure")
    qtbot.waitUntil(lambda: not solved.bench.tasks.busy("figure"), timeout=60000)
    start = {"pdf": b"%PDF", "svg": b"<?xml", "png": b"\x89PNG"}[suffix]
    assert path.read_bytes().startswith(start)


def test_unsaved_work_is_asked_about_before_closing(solved, qtbot):
    solved.bench.view.select(5)
    solved.bench.run("claim.aside")
    solved.close()
    assert solved.isVisible()
    assert solved.notices.current.topic == "close"
    qtbot.mouseClick(button(solved, "Close without saving"), Qt.MouseButton.LeftButton)
    assert not solved.isVisible()


def test_closing_one_spectrum_asks_about_its_work(solved, qtbot):
    solved.bench.view.select(5)
    solved.bench.run("claim.aside")
    solved.bench.run("file.close")
    assert solved.bench.desk is not None
    qtbot.mouseClick(button(solved, "Close without saving"), Qt.MouseButton.LeftButton)
    assert solved.bench.desk is None


def test_a_file_is_read_another_way(window, qtbot, tmp_path):
    path = tmp_path / "many.txt"
    wave = np.linspace(500.0, 510.0, 900)
    np.savetxt(path, np.column_stack([np.arange(900), np.ones(900), wave]), fmt="%.5f")
    opening.open_files(window.bench, [path])
    qtbot.waitUntil(lambda: not window.bench.tasks.busy(f"open {path}"), timeout=15000)
    window.bench.run("file.reread")
    window.ask_bar.edit.setText("columns wave=3,flux=2 unit nm medium air")
    window.ask_bar.edit.returnPressed.emit()
    qtbot.waitUntil(lambda: window.bench.spectrum is not None
                    and window.bench.spectrum.medium == "air", timeout=15000)
    assert window.bench.spectrum.own_range() == pytest.approx((5000.0, 5100.0))
    assert len(window.bench.desks) == 1
    window.bench.run("file.reread")
    window.ask_bar.edit.setText("colums 3")
    window.ask_bar.edit.returnPressed.emit()
    assert "not understood" in window.notices.current.text


def test_nothing_is_saved_among_the_samples(solved, tmp_path):
    from dataclasses import replace

    from linewright.resources import samples_dir
    from linewright.window import layout_memory as memory
    from linewright.window.acts import saving

    desk = solved.bench.desk
    session = desk.document.session
    sample = replace(session, spectrum=replace(
        session.spectrum, path=str(samples_dir() / "a_star.txt.gz")))
    desk.document.replace(sample, "test")
    memory.keep("save folder", str(tmp_path))
    assert saving.suggested(solved.bench, ".ecsv") == str(tmp_path / "a_star.ecsv")
