"""The Rake: teeth stand at lambda (1 + v/c) in the spectrum's own medium."""

from __future__ import annotations

import numpy as np
import plot_scenes as scenes
import pytest

from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air
from linewright.window.plot import RakeData, SpectrumView
from linewright.window.plot.extremes import PixelScale
from linewright.window.plot.rake_teeth import RakeTeeth
from linewright.window.theme import LIGHT


def random_rake(count: int, rows: int, seed=0) -> RakeData:
    rng = np.random.default_rng(seed)
    wave = np.sort(rng.uniform(4900, 5200, count))
    return RakeData(
        wave, rng.uniform(0, 1, count), rng.integers(0, rows, count), tuple("ABCDEF"[:rows])
    )


@pytest.mark.parametrize("medium", ["air", "vacuum"])
@pytest.mark.parametrize("velocity", [0.0, 123.4, -480.0])
@pytest.mark.parametrize("count", [5, 300, 40_000])
def test_strongest_tooth_of_each_column(medium, velocity, count):
    data = random_rake(count, 3)
    scale = PixelScale(5000.0, 5080.0, 66.3, 901.7)
    found = RakeTeeth(data).columns(3, scale, medium, velocity)
    wave = data.wave * (1 + velocity / C_KM_S)
    wave = vacuum_to_air(wave) if medium == "air" else wave
    column = np.floor(scale.pixels(wave)).astype(int) - scale.first_column()
    wanted = np.full(found.shape, -1.0)
    inside = (column >= 0) & (column < found.shape[1])
    np.maximum.at(wanted, (data.row[inside], column[inside]), data.depth[inside])
    np.testing.assert_array_equal(np.nan_to_num(found, nan=-1.0), wanted)


def tooth_columns(view) -> np.ndarray:
    """Pixel columns painted in the tooth's colour just under the bar."""
    picture = scenes.pixels(view.rake)
    row = picture[4 + 2]
    return np.nonzero(np.all(row == scenes.rgb(LIGHT.colour("Fe I")), axis=1))[0]


@pytest.fixture
def view(qtbot):
    widget = SpectrumView()
    qtbot.addWidget(widget)
    widget.resize(900, 500)
    widget.set_spectrum(scenes.spectrum())
    widget.show()
    return widget


def test_teeth_move_by_one_plus_v_over_c(view):
    rest = float(air_to_vacuum(5050.0))
    view.set_rake(RakeData(np.array([rest]), np.array([0.8]), np.array([0]), ("Fe I",)))
    view.set_view(5040.0, 5060.0)
    for velocity in (0.0, 100.0, -250.0):
        view.set_velocity(velocity)
        expected = view.rake.scale().pixels(vacuum_to_air(rest * (1 + velocity / C_KM_S)))
        columns = tooth_columns(view)
        columns = columns[columns > 66]
        assert len(columns) in (1, 2)
        assert abs(columns[0] - np.floor(expected)) <= 1


def test_a_longer_tooth_for_a_deeper_line(view):
    waves = air_to_vacuum(np.array([5045.0, 5055.0]))
    view.set_rake(RakeData(waves, np.array([0.2, 1.0]), np.zeros(2, int), ("Fe I",)))
    view.set_view(5040.0, 5060.0)
    picture = scenes.pixels(view.rake)
    blue = np.all(picture == scenes.rgb(LIGHT.colour("Fe I")), axis=2)
    x = np.floor(view.rake.scale().pixels([5045.0, 5055.0])).astype(int)
    lengths = [int(blue[:, at - 1 : at + 3].any(axis=1).sum()) for at in x]
    assert lengths[1] > 3 * lengths[0] > 0


def test_velocity_repaints_the_rake_only(view, qtbot):
    view.set_rake(random_rake(2000, 3))
    qtbot.wait(20)
    lanes = (view.strip, view.plot, view.axis, view.rake)
    before = [lane.paints for lane in lanes]
    view.set_velocity(12.0)
    qtbot.wait(20)
    assert [lane.paints - b for lane, b in zip(lanes, before)] == [0, 0, 0, 1]


def test_a_missing_line_is_marked_by_a_ring(view):
    waves = air_to_vacuum(np.array([5045.0, 5055.0]))
    plain = RakeData(waves, np.full(2, 0.5), np.zeros(2, int), ("Fe I",))
    view.set_view(5040.0, 5060.0)
    view.set_rake(plain)
    without = scenes.pixels(view.rake)
    view.set_rake(
        RakeData(waves, np.full(2, 0.5), np.zeros(2, int), ("Fe I",), np.array([True, False]))
    )
    changed = np.any(scenes.pixels(view.rake) != without, axis=2)
    columns = np.nonzero(changed.any(axis=0))[0]
    at = float(view.rake.scale().pixels(5045.0))
    assert len(columns) and abs(columns.mean() - at) < 2 and np.ptp(columns) <= 10


def test_the_tooth_under_the_pointer_has_a_name(view):
    rest = air_to_vacuum(np.array([5045.0, 5055.0]))
    view.set_rake(RakeData(rest, np.array([0.25, 0.5]), np.array([0, 1]), ("Fe I", "Mg I")))
    view.set_view(5040.0, 5060.0)
    view.set_velocity(60.0)
    x = float(view.rake.scale().pixels(5055.0 * (1 + 60.0 / C_KM_S)))
    assert view.rake.tooth_text(x, 35) == "Mg I 5055.000 Å, predicted depth 0.50"
    assert view.rake.tooth_text(x, 10) == ""
    assert view.rake.tooth_text(x + 20, 35) == ""


def test_rows_beyond_the_room_are_told(view):
    count = 20
    names = tuple(f"X{i} I" for i in range(count))
    waves = np.linspace(5000, 5100, count)
    view.set_rake(RakeData(waves, np.full(count, 0.5), np.arange(count), names))
    assert view.rake.shown_rows == 12
    assert "8 more species" in view.rake.toolTip()
    assert view.rake.height() < 180


def test_wrong_columns_are_refused():
    one, zero = np.ones(2), np.zeros(2, int)
    with pytest.raises(ValueError, match="length"):
        RakeData(np.ones(3), one, zero, ("Fe I",))
    with pytest.raises(ValueError, match="ascending"):
        RakeData(np.array([2.0, 1.0]), one, zero, ("Fe I",))
    with pytest.raises(ValueError, match="row"):
        RakeData(np.array([1.0, 2.0]), one, zero + 1, ("Fe I",))
