"""Work by hand in the window: brackets, splits, profiles and anchors, with real mouse events."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import window_builders as build
from astropy.table import Table
from measured_session import nearest, session_of
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest

from linewright.session.document import Document
from linewright.session.file import load_session, save_session
from linewright.spectra.medium import from_medium, to_medium
from linewright.window.workbench import Desk


@pytest.fixture
def bench(window, qtbot, monkeypatch):
    """A measured spectrum of well separated lines; core calls in a thread, no claims."""
    from linewright.window import anchor_keeper, fit_follower
    from linewright.window.acts import fitting, picking

    for module in (anchor_keeper, fit_follower, fitting):
        monkeypatch.setattr(module, "free_engine", lambda bench: None)
    monkeypatch.setattr(picking, "_weigh", lambda *rest: None)
    spectrum = with_twin(build.spectrum_of(build.catalogue_of(60)))
    window.bench.add_desk(Desk(spectrum, Document(session_of(spectrum))))
    window.ledger.refresh()
    return window.bench


TWIN = 5240.0  # Angstrom, vacuum: two lines so near that detection sees one


def with_twin(spectrum):
    s = spectrum.segments[0]
    flux = np.where(np.abs(s.wave - TWIN) < 1.0, 1.0 + 0.002 * np.sin(1e4 * s.wave), s.flux)
    for centre, depth in ((TWIN - 0.035, 0.3), (TWIN + 0.035, 0.25)):
        flux = flux - depth * np.exp(-0.5 * ((s.wave - centre) / 0.05) ** 2)
    return replace(spectrum, segments=(replace(s, flux=flux),))


def select(bench, qtbot, wave=5200.0, widths=12.0) -> int:
    """Selects the feature nearest to a wavelength and looks at it closely."""
    number = nearest(bench.session, wave)
    row = bench.session.index_of(number)
    own = float(to_medium(bench.session.features.wave[row], "air"))
    half = widths * float(bench.session.features.fwhm[row])
    bench.view.change(span=(own - half, own + half))
    bench.view.select(number)
    qtbot.wait(30)
    return number


def row_of(bench, number):
    return bench.session.features.take([bench.session.index_of(number)])


def drag(bench, qtbot, start: QPoint, steps) -> None:
    plot = bench.window.spectrum_view.plot
    QTest.mousePress(plot, Qt.MouseButton.LeftButton, pos=start)
    for x, y in steps:
        QTest.mouseMove(plot, QPoint(x, y))
        qtbot.wait(15)
    QTest.mouseRelease(plot, Qt.MouseButton.LeftButton, pos=QPoint(*steps[-1]))


def bracket(bench, side: int) -> QPoint:
    plot = bench.window.spectrum_view.plot
    return QPoint(round(plot.grips[0].pixels(plot)[side]), plot.height() // 2)


def test_a_dragged_bracket_fits_between_the_new_limits_in_one_step(bench, qtbot):
    number, before = select(bench, qtbot), bench.session
    plot = bench.window.spectrum_view.plot
    at = bracket(bench, 1)
    span, paints = bench.view.now.span, plot.paints
    drag(bench, qtbot, at, [(at.x() + k, at.y()) for k in (4, 9, 15, 22)])
    qtbot.waitUntil(lambda: bench.session is not before, timeout=20000)
    assert plot.paints > paints and not plot.failed
    assert bench.view.now.span == span, "the view does not pan"
    fit = bench.session.fit_of(number)
    shown = plot.wave_at(at.x() + 22)
    assert fit.limits[1] == pytest.approx(float(from_medium(shown, "air")), abs=1e-6)
    assert bench.desk.document.undo_label == "fit features"
    assert "hand" in row_of(bench, number).flags[0].split()
    assert bench.window.spectrum_view.hand.limits.limits[1] == pytest.approx(shown, abs=1e-6)
    bench.run("edit.undo")
    assert bench.session is before and before.fit_of(number) is None


def test_the_curve_follows_while_the_bracket_is_held(bench, qtbot):
    select(bench, qtbot)
    view = bench.window.spectrum_view
    before, profile = bench.session, view.plot.profile
    at = bracket(bench, 0)
    QTest.mousePress(view.plot, Qt.MouseButton.LeftButton, pos=at)
    QTest.mouseMove(view.plot, QPoint(at.x() - 12, at.y()))
    qtbot.waitUntil(lambda: view.hand.limits.words != "", timeout=20000)
    assert view.plot.profile is not profile and bench.session is before
    assert view.hand.limits.words.startswith("depth 0.") and "EW" in view.hand.limits.words
    QTest.mouseRelease(view.plot, Qt.MouseButton.LeftButton, pos=QPoint(at.x() - 12, at.y()))
    qtbot.waitUntil(lambda: bench.session is not before, timeout=20000)
    assert view.hand.limits.words == ""


def test_brackets_never_cross_the_feature(bench, qtbot):
    number = select(bench, qtbot)
    centre = float(row_of(bench, number).wave[0])
    at, before = bracket(bench, 0), bench.session
    plot = bench.window.spectrum_view.plot
    drag(bench, qtbot, at, [(at.x() + 10, at.y()), (plot.width() - 40, at.y())])
    assert float(from_medium(plot.grips[0].limits[0], "air")) < centre
    qtbot.waitUntil(lambda: not bench.tasks.busy("fit") and not bench.tasks.busy("fit ready"),
                    timeout=20000)
    if bench.session is not before:  # half a line may be too little to fit, and is refused then
        low, high = bench.session.fit_of(number).limits
        assert low < centre < high


def test_a_click_on_a_bracket_is_a_click_on_what_is_under_it(bench, qtbot):
    number = select(bench, qtbot)
    before = bench.session
    QTest.mouseClick(bench.window.spectrum_view.plot, Qt.MouseButton.LeftButton,
                     pos=bracket(bench, 0))
    qtbot.wait(50)
    assert bench.session.fits == before.fits and number in bench.session.features.number


def test_a_wide_view_has_no_brackets(bench, qtbot):
    select(bench, qtbot)
    bench.run("view.whole")
    plot = bench.window.spectrum_view.plot
    assert plot.grips[0].pixels(plot) is None


@pytest.mark.parametrize("command, profile", [
    ("fit.voigt", "voigt"), ("fit.rotational", "rotational"), ("fit.core-wings", "core-wings")])
def test_a_profile_is_chosen_from_the_menu(bench, qtbot, command, profile):
    number = select(bench, qtbot)
    bench.run(command)
    qtbot.waitUntil(lambda: bench.session.fit_of(number) is not None, timeout=20000)
    assert bench.session.fit_of(number).profile == profile
    assert bench.commands[command].checked(bench)
    assert bench.view.now.selected == number


def test_split_merge_and_undo(bench, qtbot):
    number = select(bench, qtbot, TWIN)
    count, before = len(bench.session.features), bench.session
    bench.run("fit.split")
    qtbot.waitUntil(lambda: len(bench.session.features) == count + 1, timeout=20000)
    two = bench.session
    pair = two.fit_of(number).features
    waves = [float(row_of(bench, n).wave[0]) for n in pair]
    assert np.allclose(waves, [TWIN - 0.035, TWIN + 0.035], atol=0.01)
    assert bench.view.now.selected == number
    bench.run("fit.merge_next" if number == pair[0] else "fit.merge_previous")
    qtbot.waitUntil(lambda: len(bench.session.features) == count, timeout=20000)
    assert bench.view.now.selected in bench.session.features.number
    bench.run("edit.undo")
    assert bench.session is two
    bench.run("edit.undo")
    assert bench.session is before


def test_a_split_of_one_line_is_refused(bench, qtbot):
    select(bench, qtbot)
    before = bench.session
    bench.run("fit.split_more")
    bench.window.ask_bar.edit.setText("9")
    QTest.keyClick(bench.window.ask_bar.edit, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: bench.window.notices.current is not None, timeout=20000)
    assert bench.window.notices.current.kind == "refused" and bench.session is before


def test_limits_are_typed_and_nudged(bench, qtbot):
    number = select(bench, qtbot)
    bench.run("fit.limits")
    assert bench.window.ask_bar.isVisible()
    low, high = (float(x) for x in bench.window.ask_bar.edit.text().split(":"))
    bench.window.ask_bar.edit.setText(f"{low - 0.1:.3f}:{high + 0.1:.3f}")
    QTest.keyClick(bench.window.ask_bar.edit, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: bench.session.fit_of(number) is not None, timeout=20000)
    typed = bench.session.fit_of(number).limits
    assert float(to_medium(typed[0], "air")) == pytest.approx(low - 0.1, abs=2e-3)
    bench.run("fit.high_out")
    qtbot.waitUntil(lambda: bench.session.fit_of(number).limits != typed, timeout=20000)
    wider = bench.session.fit_of(number).limits
    assert wider[1] - typed[1] == pytest.approx(0.05 * (typed[1] - typed[0]), rel=1e-6)
    for text in ("5200", "5201:5200", "a:b"):
        from linewright.window.acts.fitting import set_limits

        set_limits(bench, text)
        assert "are no limits" in bench.window.notices.current.text


def test_what_cannot_be_fitted_is_said_and_changes_nothing(bench, qtbot):
    select(bench, qtbot)
    before = bench.session
    bench.run("fit.p-cygni")
    qtbot.waitUntil(lambda: "no emission" in (bench.window.notices.current.text
                                              if bench.window.notices.current else ""),
                    timeout=20000)
    assert bench.session is before


def test_hand_work_is_seen_in_the_ledger_and_outlives_saving(bench, qtbot, tmp_path):
    number = select(bench, qtbot)
    bench.run("fit.voigt")
    qtbot.waitUntil(lambda: bench.session.fit_of(number) is not None, timeout=20000)
    model, row = bench.window.ledger.model, bench.session.index_of(number)
    flags = next(c for c in model.columns if c.title == "flags").text(row).split()
    assert flags[0] == "hand" and "voigt" in flags
    save_session(bench.session, tmp_path / "a.linewright.json")
    assert load_session(tmp_path / "a.linewright.json").fit_of(number).profile == "voigt"


def anchor(bench, k: int) -> QPoint:
    plot = bench.window.spectrum_view.plot
    points = plot.grips[1]
    return QPoint(round(float(plot.scale().pixels(points.wave[k]))),
                  round(float(plot.y_of(points.value[k]))))


def show_anchors(bench, qtbot) -> int:
    """Enters the mode and looks at an anchor; its index."""
    bench.run("fit.anchors")
    wave = bench.window.spectrum_view.plot.grips[1].wave
    k = len(wave) // 2
    reach = 1.5 * float(np.median(np.diff(wave)))
    bench.view.change(span=(float(wave[k]) - reach, float(wave[k]) + reach))
    qtbot.wait(30)
    return k


def test_an_anchor_is_dragged_and_the_features_under_it_are_measured_again(bench, qtbot):
    k = show_anchors(bench, qtbot)
    plot, before = bench.window.spectrum_view.plot, bench.session
    at, span = anchor(bench, k), bench.view.now.span
    QTest.mousePress(plot, Qt.MouseButton.LeftButton, pos=at)
    QTest.mouseMove(plot, QPoint(at.x(), at.y() - 10))
    held = np.interp(plot.grips[1].wave[k], *plot.continuum[0])
    assert held > 1.002 and bench.session is before, "the drawn continuum follows at once"
    QTest.mouseRelease(plot, Qt.MouseButton.LeftButton, pos=QPoint(at.x(), at.y() - 10))
    qtbot.waitUntil(lambda: bench.session is not before, timeout=30000)
    assert bench.view.now.span == span
    assert bench.desk.document.undo_label == "set anchors"
    grew = bench.session.features.ew - before.features.ew
    assert np.nanmax(grew) > 0 and np.sum(np.abs(grew) > 1e-9) < len(grew)
    bench.run("edit.undo")
    assert bench.session is before
    assert np.interp(plot.grips[1].wave[k], *plot.continuum[0]) == pytest.approx(
        before.continuum[0].value[0], abs=0.01)


def test_anchors_are_added_chosen_raised_and_removed_without_the_mouse(bench, qtbot):
    show_anchors(bench, qtbot)
    before = bench.session
    count = len(bench.window.spectrum_view.plot.grips[1].wave)
    bench.run("fit.anchor_next")
    assert bench.allows("fit.anchor_up")
    bench.run("fit.anchor_up")
    bench.run("fit.anchor_up")  # while the first is measured: it waits
    qtbot.waitUntil(lambda: len(bench.session.history) == 2 and not bench.tasks.busy("anchors"),
                    timeout=30000)
    chosen = bench.window.spectrum_view.plot.grips[1].chosen
    value = bench.session.anchors[0].value[chosen]
    assert value == pytest.approx(1.002**2 * np.interp(
        bench.session.anchors[0].wave[chosen], before.continuum[0].wave,
        before.continuum[0].value), rel=1e-6)
    bench.run("fit.anchor_remove")
    qtbot.waitUntil(lambda: len(bench.session.history) == 3, timeout=30000)
    assert len(bench.session.anchors[0].wave) == count - 1
    bench.run("fit.anchor_add")
    bench.window.ask_bar.edit.setText("5250.0 1.0")
    QTest.keyClick(bench.window.ask_bar.edit, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: len(bench.session.history) == 4, timeout=30000)
    assert len(bench.session.anchors[0].wave) == count
    bench.run("fit.anchors")
    assert not bench.window.spectrum_view.plot.grips[1].shown


def test_a_click_on_the_continuum_adds_an_anchor_only_in_the_mode(bench, qtbot):
    k = show_anchors(bench, qtbot)
    plot = bench.window.spectrum_view.plot
    wave = 0.5 * float(plot.grips[1].wave[k] + plot.grips[1].wave[k + 1])
    level = float(np.interp(wave, *plot.continuum[0]))
    place = QPoint(round(float(plot.scale().pixels(wave))), round(float(plot.y_of(level))))
    count = len(plot.grips[1].wave)
    QTest.mouseClick(plot, Qt.MouseButton.LeftButton, pos=place)
    qtbot.waitUntil(lambda: len(bench.session.history) == 1, timeout=30000)
    assert len(bench.session.anchors[0].wave) == count + 1
    bench.run("fit.anchors")
    assert not plot.grips[1].clicked(None, place, plot)


def test_an_anchor_outside_the_spectrum_is_refused(bench, qtbot):
    show_anchors(bench, qtbot)
    before = bench.session
    for wave in (4000.0, 9000.0):
        bench.window.refresher.anchors.add(wave, 1.0)
        assert "outside" in bench.window.notices.current.text
    bench.window.refresher.anchors.add(5200.0, -1.0)
    assert "above zero" in bench.window.notices.current.text
    assert bench.session is before and not bench.tasks.busy("anchors")


def test_the_window_writes_a_repeat_measurement(bench, qtbot, tmp_path):
    """The same spectrum as a file of its own, in no stated medium: nothing differs."""
    from linewright.window.acts import saving

    build.write_text(bench.spectrum, tmp_path / "other.txt")
    out = tmp_path / "again.ecsv"
    saving.measure_again(bench, tmp_path / "other.txt", out)
    qtbot.waitUntil(lambda: not bench.tasks.busy("again"), timeout=60000)
    assert "features measured again" in bench.window.notices.current.text
    assert "taken for air" in bench.window.notices.current.text
    table = Table.read(out)
    assert len(table) == len(bench.session.features)
    assert np.nanmax(np.abs(table["ew_diff"] / table["ew_diff_err"])) < 1.0
