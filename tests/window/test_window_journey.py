"""A new user's way with nothing replaced: sample, solve, why, correct, save, table, figure."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtWidgets import QFileDialog

from linewright.spectra.medium import to_medium


@pytest.fixture
def real_window(qtbot):
    from linewright.window.main_window import MainWindow

    window = MainWindow()
    qtbot.addWidget(window, before_close_func=lambda w: setattr(w, "_leaving", True))
    window.resize(1440, 860)
    window.show()
    yield window
    assert window.tasks.close(20000)


def press(window, command_id: str) -> None:
    action = window.menus.actions[command_id]
    assert action.isEnabled(), command_id
    action.trigger()


@pytest.mark.timeout(300)
def test_from_a_sample_to_a_table_and_a_figure(real_window, qtbot, tmp_path, monkeypatch):
    window, bench = real_window, real_window.bench
    sample = next(b for b in window.welcome.buttons if "nebula" in b.text().lower())
    qtbot.mouseClick(sample, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: bench.spectrum is not None, timeout=60000)
    press(window, "spectrum.solve")
    qtbot.waitUntil(lambda: len(bench.session.features) > 0, timeout=240000)
    qtbot.waitUntil(lambda: window.ledger.model.rowCount() == len(bench.session.features),
                    timeout=10000)
    # the sample's own truth: an H II region, so H beta must be there and named
    wave = to_medium(bench.session.features.wave, "air")
    expected = 4861.33 * (1 + bench.view.now.velocity / 299792.458)
    row = int(np.argmin(np.abs(wave - expected)))
    assert abs(wave[row] - expected) < 0.5
    assert bench.session.claims[row].species == "H I"
    why_in_one_click(window, qtbot, row)
    correct_in_two(window, qtbot)
    for command_id, name in (("file.table", "nebula.csv"), ("file.figure", "nebula.svg"),
                             ("file.save", "nebula.linewright.json")):
        path = tmp_path / name
        monkeypatch.setattr(QFileDialog, "getSaveFileName",
                            lambda *a, path=path, **k: (str(path), ""))
        press(window, command_id)
        qtbot.waitUntil(path.exists, timeout=120000)
    assert "H I" in (tmp_path / "nebula.csv").read_text()


def why_in_one_click(window, qtbot, row: int) -> None:
    bench = window.bench
    f = bench.session.features
    centre = float(to_medium(f.wave[row], "air"))
    bench.view.change(span=(centre - 10, centre + 10))
    qtbot.wait(100)
    place = window.spectrum_view.feature_rect(int(f.number[row])).center()
    plot = window.spectrum_view.plot
    qtbot.mouseClick(plot, Qt.MouseButton.LeftButton,
                     pos=plot.mapFrom(window.spectrum_view, QPoint(place)))
    qtbot.waitUntil(lambda: bench.view.now.selected == int(f.number[row]), timeout=3000)
    evidence = window.space.evidence
    assert evidence.rows[0].name.text().startswith("H I")
    assert "+ " in evidence.rows[0].why.text()
    evidence.siblings.cut_now()
    assert evidence.siblings.title.text() == "Siblings of H I"
    assert len(evidence.siblings.strips.strips) >= 3


def correct_in_two(window, qtbot) -> None:
    field = window.space.evidence.species
    press(window, "claim.species")
    qtbot.keyClicks(field, "He II")
    qtbot.keyClick(field, Qt.Key.Key_Return)
    claim = window.bench.session.claims[window.bench.selected_row()]
    assert (claim.species, claim.by) == ("He II", "person")
    press(window, "edit.undo")
    claim = window.bench.session.claims[window.bench.selected_row()]
    assert claim.species == "H I"
