"""The Velocity track: dragged, stepped or typed, the rake follows."""

from __future__ import annotations

import numpy as np


def test_dragging_slides_the_rake_and_only_letting_go_is_an_edit(solved):
    bench, track = solved.bench, solved.space.track
    before = bench.session
    for v in (12.5, 13.0, 14.25):
        track.velocityChanged.emit(v, False)
        assert solved.spectrum_view.state.velocity == v
        assert bench.session is before
    track.velocityChanged.emit(15.0, True)
    assert bench.session.velocity.velocity == 15.0
    assert bench.session.velocity.how == "given"
    bench.run("edit.undo")
    assert bench.session is before
    assert bench.view.now.velocity == before.velocity.velocity
    assert solved.spectrum_view.state.velocity == before.velocity.velocity


def test_typing_a_velocity(solved, qtbot):
    solved.bench.run("spectrum.velocity")
    field = solved.space.track.field
    field.setValue(-37.5)
    assert solved.bench.session.velocity.velocity == -37.5
    assert solved.spectrum_view.state.velocity == -37.5


def test_stepping_by_keys(solved):
    solved.bench.run("spectrum.faster")
    assert solved.bench.view.now.velocity == 13.0
    solved.bench.run("spectrum.slower")
    solved.bench.run("spectrum.slower")
    assert solved.bench.view.now.velocity == 11.0


def test_the_groove_shows_the_score_curve_and_rivals(solved):
    result = solved.bench.session.velocity
    assert np.isclose(solved.space.track.velocity(), result.velocity)
    assert "± 0.05" in solved.space.track.error.text()


def test_a_velocity_beyond_the_curve_widens_the_track(solved):
    from linewright.window.acts import viewing

    viewing.slide(solved.bench, 800.0, True)
    assert solved.space.track.velocity() == 800.0
