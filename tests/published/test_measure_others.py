"""Real spectra of other kinds: a nebula, an M dwarf, Vega.

Rest wavelengths in air of the nebular lines: NIST, as in any textbook of nebulae.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from truths import SPECTRA

from linewright.measure import measure_spectrum
from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air
from linewright.spectra.spectrum import Segment, Spectrum

NEBULA = SPECTRA / "nebula" / "full-spectrum-by-area.tab"
MDWARF = SPECTRA / "mdwarf_r115000_s1d.fits"
NEBULAR = (4861.33, 4958.91, 5006.84, 5875.6, 6300.30, 6548.05, 6562.80, 6583.45, 6716.44, 6730.82)
BALMER = (3970.08, 4101.73, 4340.46, 4861.33, 6562.80)


def _spectrum(wave, flux, medium="air"):
    vacuum = air_to_vacuum(wave) if medium == "air" else wave
    return Spectrum((Segment(vacuum, flux, None, ~np.isfinite(flux)),), medium=medium)


@pytest.mark.skipif(not NEBULA.exists(), reason=f"the shared data ({NEBULA.name}) are absent")
@pytest.mark.parametrize("column", [1, 2, 6, 9])
def test_nebular_lines_are_emission_and_not_eaten(column):
    table = np.loadtxt(NEBULA, skiprows=1)
    measured = measure_spectrum(_spectrum(table[:, 10], table[:, column]))
    f = measured.features
    air = vacuum_to_air(f.wave)
    for line in NEBULAR:
        k = np.argmin(np.abs(air - line))
        velocity = (air[k] / line - 1) * C_KM_S
        assert f.sign[k] == -1, line
        assert abs(velocity) < 45, (line, velocity)  # ionised gas near +9, others to +28 km/s
        assert f.significance[k] > 20
    level = measured.segments[0].continuum_at(air_to_vacuum(table[:, 10]))
    # the continuum passes under H alpha: the line towers over it
    top = np.argmin(np.abs(table[:, 10] - 6562.8))
    assert level[top] < 0.2 * table[top, column]


@pytest.mark.skipif(not MDWARF.exists(), reason=f"the shared data ({MDWARF.name}) are absent")
def test_an_m_dwarf_with_negative_samples_and_a_filled_gap():
    from astropy.io import fits

    with fits.open(MDWARF) as hdus:
        flux, head = hdus[0].data.astype(float), hdus[0].header
    wave = head["CRVAL1"] + head["CDELT1"] * np.arange(len(flux))
    measured = measure_spectrum(_spectrum(wave, flux))
    zero = air_to_vacuum(wave[flux == 0])
    inside = [(low, high) for low, high in measured.coverage]
    middle = np.median(zero)
    assert not any(low < middle < high for low, high in inside)
    f = measured.features
    assert len(f) > 3000
    assert np.mean(f.sign > 0) > 0.9
    assert np.all(np.isfinite(f.significance)) and np.all(f.continuum > 0)
    # Na D2 of a dwarf at -9.45 km/s (5889.951 in air): a broad trough
    wave_d2 = air_to_vacuum(5889.951) * (1 - 9.45 / C_KM_S)
    assert np.min(np.abs(f.wave[f.depth > 0.5] - wave_d2)) < 0.5


def test_vega_at_low_resolution_shows_its_balmer_lines():
    sedpy = pytest.importorskip("sedpy", reason="the package with the spectrum of Vega is absent")
    from astropy.io import fits

    files = list(Path(sedpy.__file__).parent.rglob("alpha_lyr_stis_011.fits"))
    if not files:
        pytest.skip("this version of the package carries no spectrum of Vega")
    with fits.open(files[0]) as hdus:
        wave = hdus[1].data["WAVELENGTH"].astype(float)
        flux = hdus[1].data["FLUX"].astype(float)
    observed = wave < 10200
    f = measure_spectrum(_spectrum(wave[observed], flux[observed], "vacuum")).features
    for line in BALMER:
        vacuum = air_to_vacuum(line)
        k = np.argmin(np.abs(f.wave - vacuum))
        assert f.sign[k] == 1
        assert abs(f.wave[k] - vacuum) < 0.15 * vacuum / 500, (line, f.wave[k])
        assert f.depth[k] > 0.2
