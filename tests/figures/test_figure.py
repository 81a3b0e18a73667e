"""The figure for print: labels, page, bytes."""

from __future__ import annotations

import re
import subprocess
import sys
from dataclasses import replace
from itertools import combinations

import builders
import numpy as np
import pytest
from matplotlib.lines import Line2D

from linewright.errors import InputRefused
from linewright.publish import figure, figure_labels
from linewright.publish.figure_style import FigureStyle
from linewright.session import edits

STYLES = [
    FigureStyle(),
    FigureStyle(width="one-column"),
    FigureStyle(rows=3, width="one-column", range=(5050.0, 5150.0)),
    FigureStyle(rows=4, width=120.0),
]


@pytest.fixture(scope="module")
def made():
    return builders.session(250, seed=3)


@pytest.fixture(scope="module")
def spectrum(made):
    return builders.spectrum_of(made)


@pytest.fixture(scope="module", params=STYLES, ids=range(len(STYLES)))
def page(request, made, spectrum):
    """(figure, report, boxes of the line labels, boxes of all other text), drawn at 300 dpi."""
    drawn, report = figure.draw_figure(made, spectrum, request.param)
    drawn.set_dpi(300)
    drawn.canvas.draw()
    labels = [t for t in drawn.texts if t.get_gid() == "line-label"]
    others = [t for t in drawn.texts if t.get_gid() != "line-label"]
    for axes in drawn.axes:
        others += [axes.xaxis.label, axes.yaxis.label]
        # the ticks that are really drawn; others lie outside the axis limits
        others += [t.label1 for axis in (axes.xaxis, axes.yaxis) for t in axis._update_ticks()]
    return drawn, report, _boxes(drawn, labels), _boxes(drawn, others)


def _boxes(drawn, texts):
    renderer = drawn.canvas.get_renderer()
    return [(t.get_text(), t.get_window_extent(renderer)) for t in texts if t.get_text()]


def _overlap(one, other):
    wide = min(one.x1, other.x1) - max(one.x0, other.x0)
    tall = min(one.y1, other.y1) - max(one.y0, other.y0)
    return wide > 0 and tall > 0


def test_no_label_overlaps_another(page):
    _, report, labels, _ = page
    assert len(labels) == report.shown > 20
    for (first, one), (second, other) in combinations(labels, 2):
        assert not _overlap(one, other), f"{first} lies over {second}"


def test_no_other_text_overlaps_a_label_or_its_like(page):
    _, _, labels, others = page
    assert len(others) > 15
    for first, one in others:
        for second, other in labels:
            assert not _overlap(one, other), f"{first} lies over {second}"
    for (first, one), (second, other) in combinations(others, 2):
        assert not _overlap(one, other), f"{first} lies over {second}"


def test_no_text_leaves_the_page(page):
    drawn, _, labels, others = page
    edge = drawn.bbox
    for text, box in [*labels, *others]:
        assert box.x0 >= edge.x0 and box.x1 <= edge.x1, f"{text} leaves the page sideways"
        assert box.y0 >= edge.y0 and box.y1 <= edge.y1, f"{text} leaves the page"


def _elbows(drawn):
    return [a for a in drawn.artists if isinstance(a, Line2D) and len(a.get_xdata()) == 4]


def test_what_is_not_shown_is_counted(made, spectrum):
    drawn, report = figure.draw_figure(made, spectrum, FigureStyle(width="one-column"))
    marks = figure_labels.marks_between(made, 0.0, 1e5)
    assert report.left_out > 0
    assert report.shown + report.left_out == len(marks.labels)
    notes = [t.get_text() for t in drawn.texts if "not shown" in t.get_text()]
    assert notes == [f"{report.left_out} labels not shown"]


def test_the_most_significant_are_kept(made, spectrum):
    drawn, _ = figure.draw_figure(made, spectrum, FigureStyle(width="one-column"))
    labels = figure_labels.marks_between(made, 0.0, 1e5).labels
    shown = {t.get_text() for t in drawn.texts if t.get_gid() == "line-label"}
    best = max(labels, key=lambda label: label.importance)
    kept = np.mean([label.importance for label in labels if label.text in shown])
    dropped = np.mean([label.importance for label in labels if label.text not in shown])
    assert best.text in shown and kept > 2 * dropped


def test_a_persons_claim_comes_first(made, spectrum):
    weakest = int(made.features.number[np.argmin(made.features.significance)])
    named = edits.set_species(made, weakest, "Eu II")
    drawn, _ = figure.draw_figure(named, spectrum, FigureStyle(width="one-column"))
    assert "Eu II" in {t.get_text() for t in drawn.texts}


def test_leaders_end_at_their_features(made, spectrum):
    style = FigureStyle(range=(5100.0, 5140.0))
    drawn, report = figure.draw_figure(made, spectrum, style)
    axes = drawn.axes[0]
    to_data = drawn.transFigure + axes.transData.inverted()
    feet = sorted(
        to_data.transform((e.get_xdata()[0], e.get_ydata()[0]))[0] for e in _elbows(drawn)
    )
    labels = figure_labels.marks_between(made, *style.range).labels
    assert len(feet) == report.shown == len(labels)
    np.testing.assert_allclose(feet, sorted(label.wave for label in labels), atol=1e-6)


def test_standing_is_told_by_the_line(made, spectrum):
    only = {"firm": None, "likely": None, "tentative": None}
    for standing in only:
        number = int(made.features.number[0])
        one = edits.set_standing(edits.set_species(made, number, "Fe I"), number, standing)
        single = replace(one, features=one.features.take([0]), claims=one.claims[:1])
        drawn, _ = figure.draw_figure(single, spectrum, FigureStyle())
        only[standing] = _elbows(drawn)[0]._dash_pattern
    assert len({str(pattern) for pattern in only.values()}) == 3


def test_a_line_seen_in_two_orders_is_named_once():
    made = builders.named_session([("Fe I", 5269.537, 0.5), ("Fe I", 5269.537, 0.5)])
    assert len(figure_labels.marks_between(made, 5000.0, 5500.0).labels) == 1


def test_a_feature_table_is_drawn_as_sticks(made):
    drawn, report = figure.draw_figure(made, None, FigureStyle())
    assert report.shown > 20 and drawn.axes[0].get_ylabel() == "1 - depth"
    unknown = replace(made.features, depth=np.full(len(made.features), np.nan))
    drawn, _ = figure.draw_figure(replace(made, features=unknown), None, FigureStyle())
    axes = drawn.axes[0]
    assert axes.get_ylabel() == "depths not given" and len(axes.get_yticks()) == 0


@pytest.mark.parametrize(
    ("medium", "name"),
    [
        ("air", "wavelength in air (Å)"),
        ("vacuum", "wavelength in vacuum (Å)"),
        ("unknown", "wavelength, air or vacuum unknown (Å)"),
    ],
)
def test_the_axis_says_the_medium(made, spectrum, medium, name):
    other = replace(made, spectrum=replace(made.spectrum, medium=medium))
    drawn, _ = figure.draw_figure(other, spectrum, FigureStyle())
    assert drawn.axes[0].get_xlabel() == name


@pytest.mark.parametrize(("width", "mm"), [("one-column", 88.0), ("two-column", 180.0), (130, 130)])
def test_pdf_page_width_and_embedded_fonts(made, spectrum, tmp_path, width, mm):
    # Widths: author's guide of Astronomy & Astrophysics (figures)
    path = tmp_path / "f.pdf"
    figure.write_figure(made, spectrum, path, width=width)
    data = path.read_bytes()
    box = re.search(rb"/MediaBox \[\s*([\d. ]+)\]", data).group(1).split()
    assert (float(box[2]) - float(box[0])) / 72 * 25.4 == pytest.approx(mm, abs=0.5)
    assert b"/FontFile2" in data and b"/Type3" not in data
    assert b"/Subtype /Image" not in data, "nothing may be a raster"
    assert b"CreationDate" not in data


@pytest.mark.parametrize("suffix", figure.SUFFIXES)
def test_the_same_figure_has_the_same_bytes_in_another_process(suffix, tmp_path):
    script = (
        "import sys; sys.path.insert(0, sys.argv[2]); import builders\n"
        "from linewright.publish.figure import write_figure\n"
        "made = builders.session(30, seed=3)\n"
        "write_figure(made, builders.spectrum_of(made), sys.argv[1])\n"
    )
    folder = builders.__file__.rsplit("builders", 1)[0]
    paths = [tmp_path / f"{turn}{suffix}" for turn in (0, 1)]
    subprocess.run([sys.executable, "-c", script, paths[0], folder], check=True)
    made = builders.session(30, seed=3)
    figure.write_figure(made, builders.spectrum_of(made), paths[1])
    assert paths[0].read_bytes() == paths[1].read_bytes()


def test_global_settings_are_left_alone(made, spectrum, tmp_path):
    import matplotlib

    before, backend = matplotlib.rcParams.copy(), matplotlib.rcParams._get("backend")
    figure.write_figure(made, spectrum, tmp_path / "f.svg")
    after = matplotlib.rcParams.copy()
    assert {k: v for k, v in before.items() if after[k] != v} == {}
    assert matplotlib.rcParams._get("backend") == backend
    assert "matplotlib.pyplot" not in sys.modules


def test_refusals_come_in_one_line(made, spectrum, tmp_path):
    path = tmp_path / "f.pdf"
    with pytest.raises(InputRefused, match="lies outside the spectrum"):
        figure.write_figure(made, spectrum, path, range=(9000.0, 9100.0))
    with pytest.raises(InputRefused, match="no width"):
        figure.write_figure(made, spectrum, path, width="wide")
    with pytest.raises(InputRefused, match="rows"):
        figure.write_figure(made, spectrum, path, rows=0)
    with pytest.raises(InputRefused, match="no figure format"):
        figure.write_figure(made, spectrum, tmp_path / "f.gif")
    path.write_text("mine")
    with pytest.raises(InputRefused, match="exists already"):
        figure.write_figure(made, spectrum, path)
    assert path.read_text() == "mine"


def test_large_and_small_fluxes_take_out_a_power_of_ten(made, spectrum):
    for factor, name in [(3e9, "flux (10⁹)"), (3e-15, "flux (10⁻¹⁵)"), (30.0, "flux")]:
        segment = replace(spectrum.segments[0], flux=spectrum.segments[0].flux * factor)
        bright = replace(made, continuum=())
        drawn, _ = figure.draw_figure(bright, replace(spectrum, segments=(segment,)), FigureStyle())
        drawn.canvas.draw()
        axes = drawn.axes[0]
        assert axes.get_ylabel() == name and axes.yaxis.get_offset_text().get_text() == ""
        assert axes.get_ylim()[1] < 1000


def test_gaps_and_masked_samples_break_the_trace(made, spectrum):
    segment = spectrum.segments[0]
    mask = np.zeros(len(segment.wave), dtype=bool)
    mask[5000:5100] = True
    keep = np.ones(len(mask), dtype=bool)
    keep[9000:9500] = False
    holed = replace(segment, wave=segment.wave[keep], flux=segment.flux[keep], mask=mask[keep])
    drawn, _ = figure.draw_figure(made, replace(spectrum, segments=(holed,)), FigureStyle())
    trace = max(drawn.axes[0].lines, key=lambda line: len(line.get_xdata()))
    assert np.isnan(trace.get_ydata()).sum() >= 101


def test_the_continuum_stops_at_gaps(made):
    from linewright.publish.figure_trace import continuum_traces
    from linewright.spectra.medium import to_medium

    nodes = made.continuum[0]
    low, high = float(nodes.wave[0]), float(nodes.wave[-1])
    third = (high - low) / 3
    halves = ((low, low + third), (high - third, high))
    gapped = replace(made, continuum=(nodes,), spectrum=replace(made.spectrum, coverage=halves))
    drawn = continuum_traces(gapped, 0.0, 1e5)
    assert len(drawn) == 2
    for trace, ends in zip(drawn, halves):
        np.testing.assert_allclose(trace.wave[[0, -1]], to_medium(np.array(ends), made.spectrum.medium))
    whole = replace(gapped, spectrum=replace(made.spectrum, coverage=()))
    assert len(continuum_traces(whole, 0.0, 1e5)) == 1
