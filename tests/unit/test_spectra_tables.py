"""ECSV and VOTable spectra."""

from __future__ import annotations

import numpy as np
import pytest
from astropy import units as u
from astropy.io.votable import from_table
from astropy.table import MaskedColumn, Table

from linewright.errors import InputRefused
from linewright.spectra.reading import read_spectrum

WAVE = np.linspace(5000.0, 5080.0, 300)
FLUX = 1.0 - 0.5 * np.exp(-0.5 * ((WAVE - 5040.0) / 0.3) ** 2)


pytestmark = pytest.mark.filterwarnings("ignore::astropy.units.UnitsWarning")


def _table(unit=u.nm):
    table = Table({"flux": FLUX, "wavelength": (WAVE * u.AA).to(unit), "ivar": np.full(300, 1e4)})
    table["flux"].unit = "erg / (s cm2 Angstrom)"
    return table


@pytest.mark.parametrize("unit", [u.AA, u.nm, u.um, 1 / u.cm, u.THz])
def test_ecsv(tmp_path, unit):
    table = Table({"flux": FLUX, "spectral_axis": (WAVE * u.AA).to(unit, u.spectral())})
    table.meta["comments"] = ["observed in heliocentric frame"]
    table.write(tmp_path / "s.ecsv")
    spectrum = read_spectrum(tmp_path / "s.ecsv", medium="vacuum")
    assert np.allclose(spectrum.segments[0].wave, WAVE, rtol=1e-9)
    assert np.allclose(spectrum.segments[0].flux, FLUX)
    assert spectrum.frame == "heliocentric"


def test_ecsv_statements_errors_and_units(tmp_path):
    table = _table()
    table.meta.update({"MEDIUM": "air", "SPECSYS": "BARYCENT", "OBJECT": "Vega"})
    table.write(tmp_path / "s.ecsv")
    spectrum = read_spectrum(tmp_path / "s.ecsv")
    assert (spectrum.medium, spectrum.frame, spectrum.name) == ("air", "barycentric", "Vega")
    assert np.allclose(spectrum.segments[0].uncertainty, 0.01)
    assert "erg" in spectrum.flux_unit


def test_a_masked_column_is_masked(tmp_path):
    table = _table()
    table["flux"] = MaskedColumn(FLUX, mask=np.arange(300) == 7)
    table.write(tmp_path / "s.ecsv")
    spectrum = read_spectrum(tmp_path / "s.ecsv", medium="air")
    assert np.flatnonzero(spectrum.segments[0].mask).tolist() == [7]


def _votable(folder, ucd, utype=""):
    document = from_table(_table(u.AA))
    for field in document.get_first_table().fields:
        if field.name == "wavelength":
            field.ucd, field.utype = ucd, utype or None
    document.to_xml(str(folder / "s.vot"))
    return folder / "s.vot"


@pytest.mark.parametrize(
    ("ucd", "utype", "medium"),
    [("em.wl;obs.atmos", "", "air"),
     ("em.wl", "spec:Spectrum.Data.SpectralAxis.Value", "vacuum"), ("em.wl", "", "unknown")],
)
def test_votable_ucds(tmp_path, ucd, utype, medium):
    spectrum = read_spectrum(_votable(tmp_path, ucd, utype))
    assert spectrum.medium == medium
    assert "VOTable" in spectrum.layout and spectrum.samples == 300
    assert np.allclose(spectrum.segments[0].flux, FLUX)


def test_a_votable_with_entities_is_refused(tmp_path):
    bomb = ('<?xml version="1.0"?><!DOCTYPE x [<!ENTITY a "aaaa">' +
            "".join(f'<!ENTITY {c} "&{p};&{p};&{p};">' for p, c in ("ab", "bc", "cd")) +
            "]><VOTABLE>&d;</VOTABLE>")
    (tmp_path / "bomb.vot").write_text(bomb, encoding="utf-8")
    with pytest.raises(InputRefused, match="entity"):
        read_spectrum(tmp_path / "bomb.vot")


def test_a_table_without_flux_is_refused_with_its_columns(tmp_path):
    Table({"name": ["a", "b"], "ra": [1.0, 2.0]}).write(tmp_path / "s.ecsv")
    with pytest.raises(InputRefused, match="name, ra"):
        read_spectrum(tmp_path / "s.ecsv")


def test_a_list_of_features_is_opened_with_a_warning(tmp_path):
    rng = np.random.default_rng(3)
    table = Table({"wave": np.sort(rng.uniform(4000.0, 6000.0, 200)), "flux": np.ones(200)})
    table.write(tmp_path / "list.ecsv")
    spectrum = read_spectrum(tmp_path / "list.ecsv", medium="air")
    assert any("--features" in w for w in spectrum.warnings)
    _table().write(tmp_path / "s.ecsv")
    regular = read_spectrum(tmp_path / "s.ecsv", medium="air")
    assert not any("--features" in w for w in regular.warnings)
