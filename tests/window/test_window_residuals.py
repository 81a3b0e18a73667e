"""Velocity residuals: the numbers, and selection both ways in the real window."""

from __future__ import annotations

import re
import subprocess
import sys
from dataclasses import replace

import numpy as np
import pytest
from window_builders import VELOCITY

from linewright.job.view_residuals import residuals, steps, steps_words, trend
from linewright.spectra.medium import C_KM_S


def test_offsets_are_against_the_component(solved):
    session = solved.bench.session
    found = residuals(session)
    row = int(np.nonzero(session.features.number == found.number[3])[0][0])
    line = session.claims[row].line
    expected = C_KM_S * (session.features.wave[row] / line.wave - 1) - line.velocity
    assert found.offset[3] == pytest.approx(expected, abs=1e-9)
    assert all(session.claims[int(np.nonzero(session.features.number == n)[0][0])].standing
               in ("firm", "likely") for n in found.number)
    assert line.velocity == pytest.approx(VELOCITY)


def test_a_stretched_scale_is_found_as_a_slope():
    """1 km/s per 1000 Angstrom put in; an outlier of 80 km/s is left out."""
    rng = np.random.default_rng(4)
    x = np.linspace(4000.0, 7000.0, 400)
    offset = 1e-3 * (x - 5500.0) + rng.normal(0, 0.05, len(x))
    offset[17] = 80.0
    start, slope, error = trend(x, offset)
    assert abs(slope - 1e-3) < 4 * error
    # standard error of a slope: sigma / (spread of x times sqrt n)
    assert error == pytest.approx(0.05 / (np.std(x) * np.sqrt(len(x))), rel=0.15)
    assert start + slope * 5500.0 == pytest.approx(0.0, abs=0.01)
    assert np.isnan(trend(x[:3], offset[:3])).all()


def test_an_order_off_the_rest_is_found_as_a_step():
    """0.5 km/s put into 5200-5300 of 4800-5800 Angstrom."""
    rng = np.random.default_rng(6)
    x = np.sort(rng.uniform(4800.0, 5800.0, 400))
    offset = rng.normal(0, 0.15, len(x)) - 0.5 * ((x > 5200) & (x < 5300))
    edges, middle, error = steps(x, offset)
    assert len(edges) == len(middle) + 1 and edges[0] == x[0] and edges[-1] == x[-1]
    worst = int(np.argmin(middle))
    assert 5150 < edges[worst] < 5300 and middle[worst] == pytest.approx(-0.5, abs=0.12)
    # error of a median: 1.2533 sigma / sqrt n (normal distribution)
    assert np.median(error) == pytest.approx(1.2533 * 0.15 / np.sqrt(25), rel=0.3)
    said = steps_words(edges, middle, error)
    low, high, size = re.search(r"(\d+)–(\d+) Å .* by (−[\d.]+) ±", said).groups()
    assert 5150 < int(low) < int(high) < 5350
    assert float(size.replace("−", "-")) == pytest.approx(-0.5, abs=0.12)
    assert steps_words(*steps(x[:20], offset[:20])) == ""


def test_points_and_features_select_one_another(solved, qtbot):
    bench = solved.bench
    bench.run("view.residuals")
    window = solved.residuals
    qtbot.waitExposed(window)
    found = window.found
    assert len(found) > 50 and f"{len(found):,} firm and likely" in window.words.text()
    assert "stands off most" in window.words.text()
    assert len(window.steps.getData()[0]) >= 4
    bench.view.select(int(found.number[7]))
    x, y = window.marks[0].getData()
    assert x[0] == pytest.approx(window.columns()[0][7]) and y[0] == pytest.approx(found.offset[7])
    point = window.points[1].points()[11]
    window.points[1].sigClicked.emit(window.points[1], [point], None)
    assert bench.view.now.selected == int(point.data())
    bench.run("claim.aside")
    assert int(point.data()) not in window.found.number
    solved.choose_theme("dark")
    assert window.area.backgroundBrush().color().name() == bench.theme.base


def test_without_claims_it_says_so(solved):
    bench = solved.bench
    bench.run("view.residuals")
    empty = replace(bench.session, claims=tuple(
        replace(c, standing="unclaimed") for c in bench.session.claims))
    bench.desk.document.replace(empty, "test")
    assert "No confident claims" in solved.residuals.words.text()


def test_the_plotting_library_loads_only_here():
    code = ("import os; os.environ['QT_QPA_PLATFORM'] = 'offscreen'; import sys;"
            "from linewright.window.app import application, new_window; a = application([]);"
            "w = new_window(); w.show(); w.work_page(); a.processEvents();"
            "assert 'pyqtgraph' not in sys.modules; w.show_residuals();"
            "assert 'pyqtgraph' in sys.modules; w.close()")
    subprocess.run([sys.executable, "-c", code], check=True, timeout=120)
