"""The sample spectra are what their listing and truth tables say, and can be made again."""

from __future__ import annotations

import importlib.util
import json
import sys
from pathlib import Path

import numpy as np
import pytest
from astropy.io import fits
from astropy.table import Table

from linewright.lines.loading import load_catalogue
from linewright.spectra.medium import C_KM_S, air_to_vacuum, from_medium
from linewright.spectra.reading import read_spectrum

FOLDER = Path(__file__).resolve().parents[2] / "sample_spectra"
LISTED = json.loads((FOLDER / "samples.json").read_text(encoding="utf-8"))
NAMES = [row["file"].split(".")[0] for row in LISTED]


def _script():
    spec = importlib.util.spec_from_file_location("make_samples", FOLDER / "make_samples.py")
    module = importlib.util.module_from_spec(spec)
    sys.modules["make_samples"] = module
    spec.loader.exec_module(module)
    return module


make_samples = _script()
SCENES = {scene.name: scene for scene in make_samples.SCENES}


def _truth(name: str) -> Table:
    return Table.read(FOLDER / f"{name}_truth.ecsv", format="ascii.ecsv")


@pytest.mark.parametrize("name", NAMES)
def test_making_a_sample_again_gives_the_same_bytes(name, tmp_path):
    made = make_samples.make(SCENES[name], tmp_path)
    assert len(made) == 2
    for file, size in made:
        assert (tmp_path / file).read_bytes() == (FOLDER / file).read_bytes(), file
        assert size < 3_000_000


def test_the_listing_is_the_one_the_script_writes():
    assert (FOLDER / "samples.json").read_text(encoding="utf-8") == make_samples.listing()
    assert sum(p.stat().st_size for p in FOLDER.rglob("*") if p.is_file()) < 12_000_000


@pytest.mark.parametrize("row", LISTED, ids=NAMES)
def test_opens_as_listed(row):
    spectrum = read_spectrum(FOLDER / row["file"], **row["read_options"])
    assert (spectrum.medium, spectrum.frame) == (row["medium"], row["frame"])
    assert spectrum.resolution is None  # nothing but the light tells it
    camera = SCENES[row["file"].split(".")[0]].camera
    low, high = spectrum.own_range()
    assert low == pytest.approx(camera.ranges[0][0], rel=0.005)
    assert high == pytest.approx(camera.ranges[-1][1], rel=0.01)
    for segment in spectrum.segments:
        used = ~segment.mask
        assert used.mean() > 0.97
        assert np.isfinite(segment.flux[used]).all() and (segment.uncertainty[used] > 0).all()


@pytest.mark.parametrize("name", [n for n in NAMES if SCENES[n].layout not in ("text", "ecsv")])
def test_no_header_gives_the_velocity_away_or_bears_a_date(name):
    speeds = {round(v, 1) for v in np.unique(_truth(name)["velocity"]) if v}
    with fits.open(FOLDER / SCENES[name].file) as hdus:
        for hdu in hdus:
            assert not [k for k in hdu.header if "DATE" in k or k == "CHECKSUM"]
            numbers = [v for v in hdu.header.values() if isinstance(v, float)]
            assert not [v for v in numbers if round(v, 1) in speeds]


@pytest.mark.parametrize("name", NAMES)
def test_the_truth_is_no_mirror_of_the_catalogue(name):
    truth = _truth(name)
    own = truth[np.isin(truth["origin"], ["stellar", "nebular"])]
    amount = np.asarray(own["flux" if SCENES[name].nebula else "depth"])
    absent, unlisted = own["status"] == "absent", own["status"] == "unlisted"
    first = own["component"] == 1
    assert (amount[absent] == 0).all() and (amount[~absent] > 0).all()
    assert 0.01 < absent[first].mean() < 0.09
    assert 0.02 < unlisted[first].mean() < 0.12
    assert (own["species"][unlisted] == "unlisted").all()
    assert (own["listed_wave"][unlisted] == 0).all()
    moved = np.asarray(own["wave"] - own["listed_wave"])[~unlisted]
    assert np.median(np.abs(moved)) > 5e-4
    assert np.percentile(np.abs(moved), 99) < 0.25


def test_lines_move_by_the_catalogue_errors():
    """(simulated - listed) / stated error has zero mean and unit width over the G dwarf."""
    catalogue = load_catalogue(origins="stellar")
    truth = _truth("g_dwarf")
    own = truth[(truth["origin"] == "stellar") & (truth["status"] == "listed")]
    listed = from_medium(np.asarray(own["listed_wave"]), "air")
    near = np.searchsorted(catalogue.wave, listed).clip(1, len(catalogue) - 1)
    near -= listed - catalogue.wave[near - 1] < catalogue.wave[near] - listed
    same = (np.abs(catalogue.wave[near] - listed) < 2e-4) & (
        np.array(catalogue.species_names)[catalogue.species[near]] == own["species"])
    if same.mean() < 0.9:
        pytest.skip("the samples were drawn from an earlier catalogue")
    pulls = (np.asarray(own["wave"] - own["listed_wave"]) / catalogue.wave_err[near])[same]
    assert abs(pulls.mean()) < 5 / np.sqrt(len(pulls))
    assert 0.9 < pulls.std() < 1.1


def test_redrawing_is_seeded(tmp_path):
    first = make_samples.redrawn(SCENES["nebula"])
    again = make_samples.redrawn(SCENES["nebula"])
    for column in first[0]:
        assert np.array_equal(first[0][column], again[0][column]), column


def test_interstellar_sodium_has_the_linear_curve_of_growth():
    """W = 8.852821e-21 N f lambda^2: D2 19.69 mA at N = 1e11 cm-2 (f = 0.641, NIST)."""
    from dataclasses import replace

    from studio import drawing
    from studio.scenes import Cloud

    scene = replace(SCENES["a_star"], clouds=(Cloud(0.0, 2.0, (("Na I", 11.0),)),))
    lines = drawing.interstellar_lines(scene, 0, load_catalogue(), np.random.default_rng(0))
    d2 = np.abs(lines["wave"] - 5889.95) < 0.05
    assert d2.sum() == 1
    tau, b = 10.0 ** lines["log_tau"][d2][0], lines["width"][d2][0]
    width = np.sqrt(np.pi) * tau * b / C_KM_S * air_to_vacuum(5889.95) * 1000
    assert width == pytest.approx(19.69, rel=0.01)


def test_the_anchor_line_has_its_equivalent_width():
    """Fe I 6173.334 alone, summed over the fine grid, has what the scene asks of it."""
    from studio import drawing

    star = SCENES["g_dwarf"].stars[0]
    lines = load_catalogue(origins="stellar").between(6165.0, 6185.0)
    mass = drawing.masses(lines)
    scale = drawing.anchored(star, lines, mass)
    names = np.array(lines.species_names)[lines.species]
    row = int(np.nonzero((names == "Fe I") & (
        np.abs(lines.wave - air_to_vacuum(6173.334)) < 0.05))[0][0])
    b = float(drawing.doppler(mass[row], star.temperature, star.turbulence))
    tau = 10.0 ** (drawing._strength(star, lines)[row] - np.log10(b) + scale)
    assert drawing.equivalent_width(tau, b, lines.wave[row], star) == pytest.approx(68.0, rel=0.03)


def test_kernels_have_the_stated_widths():
    """FWHM c/R; second moment of a limb-darkened rotation profile (Gray's textbook form).

    Moments of the two parts over |x| < 1: 1/4 for the half circle, 1/5 for the parabola.
    """
    from studio.broadening import LIMB, instrument_kernel, rotation_kernel

    step = 0.1
    kernel = instrument_kernel(48000.0, step)
    v = (np.arange(len(kernel)) - len(kernel) // 2) * step
    sigma = np.sqrt(np.sum(kernel * v**2) / kernel.sum())
    assert 2.35482 * sigma == pytest.approx(C_KM_S / 48000.0, rel=1e-3)
    kernel = rotation_kernel(25.0, step)
    v = (np.arange(len(kernel)) - len(kernel) // 2) * step
    parts = np.pi * (1 - LIMB), np.pi * LIMB / 2 * 4 / 3
    expected = (parts[0] / 4 + parts[1] / 5) / sum(parts) * 25.0**2
    assert np.sum(kernel * v**2) == pytest.approx(expected, rel=1e-3)


def test_the_noise_is_what_the_error_column_says():
    """Two exposures of the B star differ by their errors (no continuum enters)."""
    scene = SCENES["hot_star"]
    lines, _ = make_samples.kept(scene, FOLDER)
    seen = make_samples.light.received(scene, lines)
    one, two = (make_samples.detector.chips(scene, seen, np.random.default_rng(seed))[0]
                for seed in (11, 12))
    pulls = (one.flux - two.flux) / np.hypot(one.error, two.error)
    noise = np.diff(pulls) / np.sqrt(2.0)  # the slow ripple of the normalisation drops out
    assert 0.97 < noise.std() < 1.03
