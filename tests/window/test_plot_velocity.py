"""The velocity track: drag, type, step; what it shows and what it emits."""

from __future__ import annotations

import numpy as np
import plot_scenes as scenes
import pytest
from PySide6.QtCore import QPoint, Qt

from linewright.window.plot import VelocityTrack
from linewright.window.theme import DARK, LIGHT


@pytest.fixture
def track(qtbot):
    widget = VelocityTrack()
    qtbot.addWidget(widget)
    widget.resize(900, 60)
    widget.show()
    qtbot.waitExposed(widget)
    grid = np.linspace(-500, 500, 4001)
    widget.set_curve(grid, np.exp(-(((grid - 120) / 8) ** 2)))
    return widget


def record(track):
    heard = []
    track.velocityChanged.connect(lambda v, final: heard.append((v, final)))
    return heard


def x_of(track, velocity: float) -> QPoint:
    return QPoint(round(float(track.groove.scale().pixels(velocity))), 20)


def test_dragging_emits_all_the_way_and_final_once(track, qtbot):
    heard = record(track)
    groove = track.groove
    qtbot.mousePress(groove, Qt.MouseButton.LeftButton, pos=x_of(track, 0))
    for velocity in (40, 80, 120):
        qtbot.mouseMove(groove, x_of(track, velocity))
    qtbot.mouseRelease(groove, Qt.MouseButton.LeftButton, pos=x_of(track, 120))
    assert [final for _, final in heard] == [False, False, False, False, True]
    step = groove.scale().per_pixel
    assert heard[-1][0] == pytest.approx(120, abs=step)
    assert track.velocity() == heard[-1][0]
    assert track.field.value() == pytest.approx(heard[-1][0], abs=0.006)
    assert track.error.text() == "by hand"


def test_setting_shows_without_emitting(track):
    heard = record(track)
    track.set_velocity(-12.34, 0.05)
    assert heard == []
    assert track.field.value() == pytest.approx(-12.34)
    assert track.error.text() == "± 0.05 km/s"
    track.set_velocity(30.0, declared=False)
    assert track.error.text() == "not certain"
    track.set_velocity(float("nan"), float("nan"))
    assert track.velocity() == 0.0 and track.error.text() == ""


def test_a_guess_looks_different(track):
    track.set_velocity(50.0, 0.1)
    sure = scenes.pixels(track.groove)
    track.set_velocity(50.0, 0.1, declared=False)
    assert np.any(scenes.pixels(track.groove) != sure)


def test_typing_and_stepping(track, qtbot):
    heard = record(track)
    track.field.setFocus()
    track.field.selectAll()
    qtbot.keyClicks(track.field, "-33.5")
    qtbot.keyClick(track.field, Qt.Key.Key_Return)
    assert heard[-1] == (pytest.approx(-33.5), True)
    assert track.velocity() == pytest.approx(-33.5)
    for key, modifier, wanted in (
        (Qt.Key.Key_Right, Qt.KeyboardModifier.NoModifier, -33.0),
        (Qt.Key.Key_Right, Qt.KeyboardModifier.ShiftModifier, -28.0),
        (Qt.Key.Key_Left, Qt.KeyboardModifier.ControlModifier, -28.05),
        (Qt.Key.Key_PageUp, Qt.KeyboardModifier.NoModifier, -3.05),
        (Qt.Key.Key_Home, Qt.KeyboardModifier.NoModifier, 0.0),
    ):
        qtbot.keyClick(track.groove, key, modifier)
        assert heard[-1] == (pytest.approx(wanted), True)


def test_the_curve_peaks_where_the_score_does(track):
    picture = scenes.pixels(track.groove).astype(int)
    track.set_curve([], [])
    changed = np.abs(picture - scenes.pixels(track.groove)).sum(axis=2) > 30
    columns = np.nonzero(changed[:12].any(axis=0))[0]
    assert len(columns)
    assert abs(columns.mean() - x_of(track, 120).x()) <= 2


def test_rivals_are_marked_and_can_be_clicked_exactly(track, qtbot):
    plain = scenes.pixels(track.groove)
    track.set_rivals([(-217.25, 8.0)])
    changed = np.any(scenes.pixels(track.groove) != plain, axis=2)
    columns = np.nonzero(changed.any(axis=0))[0]
    assert abs(columns.mean() - x_of(track, -217.25).x()) <= 1.5
    heard = record(track)
    qtbot.mouseClick(track.groove, Qt.MouseButton.LeftButton, pos=x_of(track, -216.5))
    assert heard[-1] == (-217.25, True)


def test_range_confines(track, qtbot):
    track.set_range(-50, 80)
    track.set_velocity(500.0)
    assert track.velocity() == 80.0
    with pytest.raises(ValueError, match="ascend"):
        track.set_range(10, 10)


def test_solve_button_and_theme(track, qtbot):
    with qtbot.waitSignal(track.solveRequested):
        qtbot.mouseClick(track.button, Qt.MouseButton.LeftButton)
    track.set_busy(True)
    assert not track.button.isEnabled()
    track.set_busy(False)
    assert track.button.isEnabled()
    assert np.array_equal(scenes.pixels(track.groove)[5, 2], scenes.rgb(LIGHT.base))
    track.set_theme(DARK)
    assert np.array_equal(scenes.pixels(track.groove)[5, 2], scenes.rgb(DARK.base))
