"""SpectrumView on the screen: drawn exactly, once per change, and answering the hand."""

from __future__ import annotations

import numpy as np
import plot_scenes as scenes
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication

from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.spectrum import Segment, Spectrum
from linewright.window.plot import SpectrumView
from linewright.window.theme import DARK, LIGHT

DIPS = (5020.0, 5040.0, 5060.0)


@pytest.fixture
def view(qtbot):
    widget = SpectrumView()
    qtbot.addWidget(widget)
    widget.resize(1000, 600)
    widget.set_spectrum(scenes.spectrum(dips=DIPS))
    widget.show()
    qtbot.waitExposed(widget)
    qtbot.wait(20)
    return widget


def point_at(view, wave: float, height: float = 0.7) -> QPoint:
    """A point of the plot lane over ``wave``, a share of its height down."""
    x = float(view.plot.scale().pixels(wave))
    return QPoint(round(x), round(height * view.plot.height()))


def turn_wheel(view, point: QPoint, notches: int, modifiers=Qt.KeyboardModifier.NoModifier):
    event = QWheelEvent(
        QPointF(point), QPointF(view.plot.mapToGlobal(point)), QPoint(0, 0),
        QPoint(0, 120 * notches), Qt.MouseButton.NoButton, modifiers,
        Qt.ScrollPhase.NoScrollPhase, False,
    )
    QApplication.sendEvent(view.plot, event)


def lanes(view):
    return view.strip, view.plot, view.rake, view.axis


def test_one_paint_per_range_change(view, qtbot):
    view.set_session(scenes.session(DIPS))
    qtbot.wait(20)
    for change in (
        lambda: view.set_view(5010, 5030),
        lambda: view.step(0.1),
        lambda: view.zoom(2.0),
        view.zoom_all,
    ):
        before = [lane.paints for lane in lanes(view)]
        change()
        qtbot.wait(20)
        assert [lane.paints - b for lane, b in zip(lanes(view), before)] == [1, 1, 1, 1]


def test_several_changes_before_a_frame_are_one_paint(view, qtbot):
    before = view.plot.paints
    for _ in range(10):
        view.step(0.01)
    qtbot.wait(20)
    assert view.plot.paints - before == 1


@pytest.mark.parametrize("samples", [900_000, 60_000, 3_000])
def test_every_one_sample_spike_is_drawn_in_its_column(view, samples):
    wave = np.linspace(5000.0, 5100.0, samples)
    flux = np.ones(samples)
    spikes = np.random.default_rng(1).choice(np.arange(50, samples - 50), 30, replace=False)
    flux[spikes] = 0.0
    segment = Segment(wave, flux, None, np.zeros(samples, bool))
    view.set_spectrum(Spectrum((segment,), medium="vacuum"))
    view.set_flux_range(-0.1, 1.3)
    picture = scenes.pixels(view.plot)
    middle = int(0.5 * (view.plot.labels.height + view.plot.height()))
    dark = np.nonzero(picture[middle].sum(axis=1) < 500)[0]
    columns = np.floor(view.plot.scale().pixels(wave[spikes]))
    assert all(np.min(np.abs(dark - column)) <= 1 for column in columns)
    inside = dark[(dark > 67) & (dark < picture.shape[1] - 13)]
    assert all(np.min(np.abs(columns - at)) <= 1 for at in inside), "a line of no sample"


def test_nothing_is_drawn_across_a_gap_or_a_mask(view):
    own = np.concatenate([np.arange(5000, 5040, 0.01), np.arange(5060, 5100, 0.01)])
    mask = (own > 5010) & (own < 5020)
    segment = Segment(own, np.ones(len(own)), None, mask)
    view.set_spectrum(Spectrum((segment,), medium="vacuum"))
    view.set_flux_range(0.0, 2.0)
    picture = scenes.pixels(view.plot)
    ink = np.all(np.abs(picture - scenes.rgb(LIGHT.ink)) < 40, axis=2)
    scale = view.plot.scale()

    def inked(low, high):
        left, right = scale.pixels([low, high]).astype(int)
        return ink[int(view.plot.labels.height) :, left:right].any(axis=0).mean()

    assert inked(5001, 5009) == 1.0 and inked(5061, 5099) == 1.0
    assert inked(5041, 5059) == 0.0 and inked(5011, 5019) == 0.0


def test_a_spectrum_prepared_in_a_worker_looks_the_same(view):
    from concurrent.futures import ThreadPoolExecutor

    long = scenes.spectrum(samples=700_000, dips=DIPS)
    view.set_spectrum(long)
    plain = scenes.pixels(view.plot)
    with ThreadPoolExecutor(1) as pool:
        prepared = pool.submit(SpectrumView.prepare, long).result()
    view.set_spectrum(scenes.spectrum())
    view.set_spectrum(long, prepared)
    assert np.array_equal(scenes.pixels(view.plot), plain)


def test_view_is_in_the_own_medium_and_reported(view, qtbot):
    assert view.axis.title() == "wavelength in air (Å)"
    low, high = view.view()
    assert low == pytest.approx(4999.5) and high == pytest.approx(5100.5)
    with qtbot.waitSignal(view.viewChanged) as signal:
        view.set_view(5010, 5020)
    assert signal.args == [5010.0, 5020.0]
    view.set_view(0, 1)
    assert view.view()[0] > 4900, "the view must not lose the spectrum"


def test_wheel_zooms_about_the_pointer(view):
    point = point_at(view, 5040.0)
    wave = view.plot.wave_at(point.x())
    width = np.diff(view.view())[0]
    turn_wheel(view, point, 3)
    assert np.diff(view.view())[0] == pytest.approx(width / 1.25**3)
    assert view.plot.wave_at(point.x()) == pytest.approx(wave, abs=1e-6)


def test_shift_wheel_scales_the_flux_about_the_pointer(view, qtbot):
    point = point_at(view, 5040.0)
    seen, flux = view.view(), view.plot.flux_at(point.y())
    before = view.plot.flux_shown
    turn_wheel(view, point, 2, Qt.KeyboardModifier.ShiftModifier)
    qtbot.wait(20)
    assert view.view() == seen
    after = view.plot.flux_shown
    assert np.diff(after)[0] == pytest.approx(np.diff(before)[0] / 1.25**2)
    assert view.plot.flux_at(point.y()) == pytest.approx(flux)
    view.auto_flux()
    qtbot.wait(20)
    assert view.plot.flux_shown == pytest.approx(before)


def test_drag_pans_and_does_not_pick(view, qtbot):
    view.set_view(5030, 5050)
    picked = []
    view.pickRequested.connect(picked.append)
    start = point_at(view, 5040.0)
    qtbot.mousePress(view.plot, Qt.MouseButton.LeftButton, pos=start)
    qtbot.mouseMove(view.plot, start + QPoint(60, 3))
    qtbot.mouseMove(view.plot, start + QPoint(120, 3))
    qtbot.mouseRelease(view.plot, Qt.MouseButton.LeftButton, pos=start + QPoint(120, 3))
    shift = 120 * view.plot.scale().per_pixel
    assert view.view()[0] == pytest.approx(5030 - shift)
    assert picked == []


def test_click_on_bare_spectrum_asks_to_pick_in_vacuum(view, qtbot):
    view.set_session(scenes.session(DIPS[:1]))
    point = point_at(view, 5060.0)
    with qtbot.waitSignal(view.pickRequested) as signal:
        qtbot.mouseClick(view.plot, Qt.MouseButton.LeftButton, pos=point)
    assert signal.args[0] == pytest.approx(float(air_to_vacuum(5060.0)), abs=0.1)


def test_click_on_a_feature_selects_it(view, qtbot):
    view.set_session(scenes.session(DIPS))
    picked = []
    view.pickRequested.connect(picked.append)
    with qtbot.waitSignal(view.featureClicked) as signal:
        qtbot.mouseClick(view.plot, Qt.MouseButton.LeftButton, pos=point_at(view, 5040.0))
    assert signal.args == [2] and picked == []


def test_click_on_a_label_selects_its_feature(view, qtbot):
    view.set_session(scenes.session(5040 + 0.05 * np.arange(6)))
    qtbot.wait(20)
    placed = view.plot.labels.placed
    assert len(placed.rects) == 6
    rect = placed.rects[5]
    with qtbot.waitSignal(view.featureClicked) as signal:
        qtbot.mouseClick(view.plot, Qt.MouseButton.LeftButton, pos=rect.center().toPoint())
    assert signal.args == [6]


@pytest.mark.parametrize("count", [3, 60, 900])
def test_labels_do_not_overlap(view, qtbot, count):
    rng = np.random.default_rng(count)
    view.set_session(scenes.session(np.sort(rng.uniform(5001, 5099, count))))
    for low, high in ((5000, 5100), (5020, 5050), (5030, 5033)):
        view.set_view(low, high)
        qtbot.wait(20)
        rects = view.plot.labels.placed.rects
        lefts = np.array([r.left() for r in rects])
        assert np.all(np.diff(lefts) >= rects[0].width() - 1e-6) if rects else True
        assert all(0 <= r.left() and r.right() <= view.plot.width() for r in rects)
        assert all(r.bottom() <= view.plot.labels.height for r in rects)
    view.set_view(5000, 5100)
    qtbot.wait(20)
    assert len(view.plot.labels.placed.rects) >= min(count, 40)


def test_the_selected_label_is_always_placed(view, qtbot):
    waves = np.linspace(5001, 5099, 900)
    view.set_session(scenes.session(waves))
    for number in (1, 333, 900):
        view.select(number)
        qtbot.wait(20)
        shown = view.plot.labels.marks.number[view.plot.labels.placed.rows]
        assert number in shown


def test_selecting_brings_the_feature_into_view(view, qtbot):
    view.set_session(scenes.session(DIPS))
    view.set_view(5018, 5022)
    view.select(3)
    low, high = view.view()
    assert low < 5060 < high and high - low == pytest.approx(4.0)
    plain = scenes.pixels(view.plot)
    view.select(None)
    assert np.any(scenes.pixels(view.plot) != plain)
    view.select(99)
    assert view.plot.labels.selected is None


def test_standings_differ_without_colour(view):
    standings = ["firm", "likely", "tentative", "unclaimed", "set aside"]
    waves = [5010, 5030, 5050, 5070, 5090]
    view.set_session(scenes.session(waves, standings=standings, species=["Fe I"]))
    picture = scenes.pixels(view.plot).astype(int)
    band = slice(int(view.plot.labels.height) - 28, int(view.plot.labels.height) - 4)
    ground = scenes.rgb(LIGHT.base)
    shapes = []
    for wave in waves:
        x = int(view.plot.scale().pixels(wave))
        cut = picture[band, x - 6 : x + 7]
        shapes.append((np.abs(cut - ground).sum(axis=2) > 60).tobytes())
    assert len(set(shapes)) == 5


def test_keys(view, qtbot):
    view.set_session(scenes.session(DIPS))
    view.set_view(5030, 5050)
    view.plot.setFocus()
    press = lambda key, mod=Qt.KeyboardModifier.NoModifier: qtbot.keyClick(view.plot, key, mod)  # noqa: E731
    press(Qt.Key.Key_Right)
    assert view.view() == pytest.approx((5032, 5052))
    press(Qt.Key.Key_Left)
    press(Qt.Key.Key_Up)
    assert np.diff(view.view())[0] == pytest.approx(20 / 1.5)
    press(Qt.Key.Key_Minus)
    assert view.view() == pytest.approx((5030, 5050))
    press(Qt.Key.Key_PageDown)
    assert view.view() == pytest.approx((5048, 5068))
    press(Qt.Key.Key_Home)
    assert view.view()[0] == pytest.approx(4999.5)
    with qtbot.waitSignal(view.featureClicked) as signal:
        press(Qt.Key.Key_Right, Qt.KeyboardModifier.ShiftModifier)
    assert signal.args == [3]  # the middle of the view is beyond the second feature
    with qtbot.waitSignal(view.featureClicked) as signal:
        press(Qt.Key.Key_Left, Qt.KeyboardModifier.ShiftModifier)
    assert signal.args == [2]


def test_the_keyboard_can_pick(view, qtbot):
    view.set_view(5045, 5065)
    view.plot.setFocus()
    qtbot.keyClick(view.plot, Qt.Key.Key_Right, Qt.KeyboardModifier.ControlModifier)
    assert view.plot.caret == pytest.approx(5060.0, abs=0.05)
    with qtbot.waitSignal(view.pickRequested) as signal:
        qtbot.keyClick(view.plot, Qt.Key.Key_Return)
    assert signal.args[0] == pytest.approx(float(air_to_vacuum(5060.0)), abs=0.05)


def test_focus_is_visible(view, qtbot):
    view.strip.setFocus()
    unfocused = scenes.pixels(view.plot)
    view.plot.setFocus()
    qtbot.wait(20)
    if not view.plot.hasFocus():
        pytest.skip("the platform gives no focus to an inactive window")
    assert np.any(scenes.pixels(view.plot)[0:3] != unfocused[0:3])


def test_theme_switch_recolours_at_once(view):
    view.set_session(scenes.session(DIPS))
    assert np.array_equal(scenes.pixels(view.plot)[-6, -6], scenes.rgb(LIGHT.base))
    view.set_theme(DARK)
    for lane in lanes(view):
        assert np.array_equal(scenes.pixels(lane)[-6, -6], scenes.rgb(DARK.base))
    view.set_theme(LIGHT)
    assert np.array_equal(scenes.pixels(view.plot)[-6, -6], scenes.rgb(LIGHT.base))


def test_profile_and_uncertainty_show_and_go(view):
    view.set_view(5058, 5062)
    plain = scenes.pixels(view.plot)
    own = np.linspace(5059.5, 5060.5, 50)
    view.show_profile(air_to_vacuum(own), np.full(50, 0.7))
    colour = np.all(np.abs(scenes.pixels(view.plot) - scenes.rgb(LIGHT.profile)) < 30, axis=2)
    columns = np.nonzero(colour.any(axis=0))[0]
    ends = view.plot.scale().pixels([5059.5, 5060.5])
    assert abs(columns[0] - ends[0]) <= 2 and abs(columns[-1] - ends[1]) <= 2
    view.show_profile(None, None)
    assert np.array_equal(scenes.pixels(view.plot), plain)
    part = scenes.spectrum(dips=DIPS).segments[0]
    noisy = Segment(part.wave, part.flux, np.full(len(part.wave), 0.05), part.mask)
    view.set_spectrum(Spectrum((noisy,), medium="air"))
    before = scenes.pixels(view.plot)
    view.set_uncertainty_shown(True)
    assert np.any(scenes.pixels(view.plot) != before)


def test_automatic_flux_ignores_one_wild_sample_but_keeps_lines(view, qtbot):
    part = scenes.spectrum(dips=DIPS).segments[0]
    rng = np.random.default_rng(0)
    flux = part.flux + 0.01 * rng.standard_normal(len(part.flux))
    flux[777] = 1e6
    view.set_spectrum(Spectrum((Segment(part.wave, flux, None, part.mask),), medium="air"))
    qtbot.wait(20)
    low, high = view.plot.flux_shown
    assert low < 0.4 and high < 60


def test_context_bracket_drags_the_view(view, qtbot):
    view.set_view(5040, 5060)
    left, right = view.strip.bracket()
    start = QPoint(round(0.5 * (left + right)), 30)
    qtbot.mousePress(view.strip, Qt.MouseButton.LeftButton, pos=start)
    qtbot.mouseMove(view.strip, start + QPoint(90, 0))
    qtbot.mouseRelease(view.strip, Qt.MouseButton.LeftButton, pos=start + QPoint(90, 0))
    shift = 90 * view.strip.whole_scale().per_pixel
    assert view.view() == pytest.approx((5040 + shift, 5060 + shift), abs=1e-6)
    end = QPoint(round(view.strip.bracket()[1]), 30)
    low = view.view()[0]
    qtbot.mousePress(view.strip, Qt.MouseButton.LeftButton, pos=end)
    qtbot.mouseMove(view.strip, end - QPoint(40, 0))
    qtbot.mouseRelease(view.strip, Qt.MouseButton.LeftButton, pos=end - QPoint(40, 0))
    assert view.view()[0] == pytest.approx(low)
    assert view.view()[1] < 5060 + shift


def test_keys_on_the_context_strip_move_the_view(view, qtbot):
    view.set_view(5040, 5060)
    qtbot.keyClick(view.strip, Qt.Key.Key_Right)
    assert view.view() == pytest.approx((5042, 5062))


def test_an_empty_view_says_what_to_do(qtbot):
    widget = SpectrumView()
    qtbot.addWidget(widget)
    widget.resize(600, 400)
    widget.show()
    assert len(np.unique(scenes.pixels(widget.plot).reshape(-1, 3), axis=0)) > 2
    qtbot.mouseClick(widget.plot, Qt.MouseButton.LeftButton, pos=QPoint(300, 100))
    qtbot.keyClick(widget.plot, Qt.Key.Key_Right, Qt.KeyboardModifier.ControlModifier)
    widget.set_spectrum(scenes.spectrum())
    widget.set_spectrum(None)
    widget.set_session(None)
    assert widget.plot.failed == ""


def test_no_lane_reported_a_drawing_failure(view, qtbot, capfd):
    view.set_session(scenes.session(DIPS))
    for size in ((1000, 600), (300, 120), (80, 60), (2500, 300)):
        view.resize(*size)
        for span in ((5000, 5100), (5059.999, 5060.001), (5100, 5102)):
            view.set_view(*span)
            qtbot.wait(5)
            view.grab()
    assert all(lane.failed == "" for lane in lanes(view)), capfd.readouterr().err
