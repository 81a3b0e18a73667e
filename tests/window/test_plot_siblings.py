"""Sibling strips: shared velocity axis, the expected place, click and keys."""

from __future__ import annotations

import numpy as np
import plot_scenes as scenes
import pytest
from PySide6.QtCore import Qt

from linewright.window.plot import SiblingStrips, Strip
from linewright.window.theme import DARK, LIGHT


def strips(count: int) -> list[Strip]:
    velocity = np.linspace(-80, 80, 321)
    flux = 1 - 0.5 * np.exp(-((velocity / 6) ** 2))
    return [Strip(f"{5000 + 7 * i}.12", velocity, flux, "seen") for i in range(count)]


@pytest.fixture
def widget(qtbot):
    made = SiblingStrips()
    qtbot.addWidget(made)
    made.resize(320, 420)
    made.show()
    made.set_strips(strips(5), LIGHT.colour("Ti II"))
    return made


def test_zero_velocity_is_marked_in_every_strip(widget):
    picture = scenes.pixels(widget).astype(int)
    close = np.abs(picture - scenes.rgb(LIGHT.colour("Ti II"))).sum(axis=2) < 120
    for index in range(5):
        cell = widget.cell(index)
        part = close[int(cell.top()) + 25 : int(cell.bottom()) - 4]
        columns = np.nonzero(part.sum(axis=0) > 8)[0]
        middle = cell.left() + cell.width() / 2
        assert np.any(np.abs(columns - middle) <= 2)


def test_click_and_keys_activate(widget, qtbot):
    with qtbot.waitSignal(widget.stripActivated) as signal:
        qtbot.mouseClick(
            widget, Qt.MouseButton.LeftButton, pos=widget.cell(3).center().toPoint()
        )
    assert signal.args == [3]
    qtbot.keyClick(widget, Qt.Key.Key_Up)
    assert widget.current == 1
    qtbot.keyClick(widget, Qt.Key.Key_Left)
    qtbot.keyClick(widget, Qt.Key.Key_Left)
    assert widget.current == 0
    with qtbot.waitSignal(widget.stripActivated) as signal:
        qtbot.keyClick(widget, Qt.Key.Key_Return)
    assert signal.args == [0]


def test_strips_outside_the_data_and_none_at_all(widget):
    gone = Strip("6000.00", np.zeros(0), np.zeros(0), "in a gap")
    blank = Strip("6001.00", np.linspace(-80, 80, 50), np.full(50, np.nan), "masked")
    widget.set_strips([*strips(1), gone, blank], LIGHT.accent)
    assert widget.velocity_range() == (-80.0, 80.0)
    filled = scenes.pixels(widget)
    widget.set_strips([], LIGHT.accent)
    hint = scenes.pixels(widget)
    assert np.any(filled != hint) and len(np.unique(hint.reshape(-1, 3), axis=0)) > 2


def test_theme(widget):
    widget.set_theme(DARK)
    assert np.array_equal(scenes.pixels(widget)[0, 0], scenes.rgb(DARK.base))


@pytest.mark.parametrize("reach", [45.0, 85.0, 240.0, 600.0, 1500.0])
def test_numbers_of_the_axis_do_not_touch(qtbot, monkeypatch, reach):
    """At every width of strip at least three velocities are written, none over another."""
    from PySide6.QtGui import QPainter

    widget = SiblingStrips()
    qtbot.addWidget(widget)
    widget.resize(280, 200)
    velocity = np.linspace(-reach, reach, 50)
    widget.set_strips([Strip("5183.60", velocity, np.ones(50)) for _ in range(2)], "#0072b2")
    written = []
    original = QPainter.drawText
    monkeypatch.setattr(QPainter, "drawText", lambda self, box, flags, text: (
        written.append((box, text)), original(self, box, flags, text))[1])
    with qtbot.waitExposed(widget):
        widget.show()
    written.clear()
    widget.repaint()
    metrics = widget.fontMetrics()
    numbers = sorted((box.center().x(), text) for box, text in written
                     if text.replace("−", "").isdigit())
    assert len(numbers) >= 6
    for (x1, one), (x2, other) in zip(numbers, numbers[1:]):
        halves = 0.5 * (metrics.horizontalAdvance(one) + metrics.horizontalAdvance(other))
        assert x2 - x1 >= 0.9 * halves
