"""Ledger, Roll call and Orphans as tables and files."""

from __future__ import annotations

import warnings
from dataclasses import replace

import builders
import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.publish import ledger, writers
from linewright.session import edits, feature_edits

CONTRACT = (
    "feature, segment, component, kind, wave, wave_err, significance, depth, depth_err, fwhm, "
    "fwhm_err, ew, ew_err, species, wave_lab, wave_lab_err, e_low, loggf, velocity, velocity_err, "
    "probability, p_line, p_unlisted, standing, by, origin, blend, runner_up, flags, note, source"
).split(", ")
METADATA = (
    "medium, frame, velocity_kms, velocity_err_kms, temperature_k, coverage, spectrum_sha256, "
    "linewright_version, temperatures, instrument_width_from"
).split(", ")


@pytest.fixture
def made():
    return builders.session(30, segments=2)


def _read(path):
    from astropy.table import Table

    return Table.read(path, format="ascii.ecsv")


def test_ledger_columns_and_metadata_follow_the_contract(made, tmp_path):
    path = tmp_path / "l.ecsv"
    writers.write_table(ledger.ledger_table(made), path)
    table = _read(path)
    assert table.colnames[: len(CONTRACT)] == CONTRACT
    assert list(table.meta) == METADATA
    units = {name: str(table[name].unit) for name in ("wave", "fwhm", "ew", "e_low", "velocity")}
    assert units == {
        "wave": "Angstrom", "fwhm": "Angstrom", "ew": "mAngstrom", "e_low": "eV",
        "velocity": "km / s",
    }  # fmt: skip
    assert all(table[name].description for name in CONTRACT)
    assert table.meta["velocity_kms"] == 12.5 and table.meta["temperature_k"] == 5500.0
    adopted, growth = table.meta["temperatures"]
    assert (adopted["label"], adopted["value"], adopted["error"]) == ("adopted", 5500.0, 90.0)
    assert growth["note"] == "40 lines" and growth["used"] is True


def test_intrinsic_widths_follow_the_contract_columns(made):
    """With a resolving power given: fwhm^2 = intrinsic^2 + (wave/R)^2 (Gaussians)."""
    given = replace(made, options=made.options | {"resolution": 50_000.0})
    table = ledger.ledger_table(given)
    widths = ["fwhm_intrinsic", "fwhm_intrinsic_err", "fwhm_instrument"]
    peaks = ["peak_separation", "peak_separation_err", "peak_ratio", "peak_ratio_err"]
    assert table.colnames[len(CONTRACT):] == widths + peaks
    assert {str(table[n].unit) for n in widths} == {"Angstrom"}
    assert [str(table[n].unit) for n in peaks] == ["km / s", "km / s", "None", "None"]
    assert table.meta["instrument_width_from"] == "resolving power given"
    instrument = made.features.wave / 50_000.0
    np.testing.assert_allclose(table["fwhm_instrument"], instrument)
    own = table["fwhm_intrinsic"]
    seen = ~own.mask
    assert seen.any()
    np.testing.assert_allclose(np.hypot(own, instrument)[seen], made.features.fwhm[seen])
    np.testing.assert_array_equal(seen, ~table["fwhm_intrinsic_err"].mask)
    broad = made.features.fwhm - instrument > 3 * made.features.fwhm_err
    np.testing.assert_array_equal(seen, broad)
    unknown = ledger.ledger_table(made)
    assert unknown["fwhm_intrinsic"].mask.all() and unknown["fwhm_instrument"].mask.all()
    assert unknown.meta["instrument_width_from"] == "not known"


def test_absent_numbers_are_masked_never_zero(made, tmp_path):
    path = tmp_path / "l.ecsv"
    writers.write_table(ledger.ledger_table(made), path)
    table = _read(path)
    np.testing.assert_array_equal(table["fwhm"].mask, np.isnan(made.features.fwhm))
    bare = np.array([claim.line is None for claim in made.claims])
    assert bare.any() and not bare.all()
    for name in ("wave_lab", "e_low", "velocity", "species", "source"):
        np.testing.assert_array_equal(table[name].mask, bare)
    no_gf = np.array([c.line is None or np.isnan(c.line.loggf) for c in made.claims])
    np.testing.assert_array_equal(table["loggf"].mask, no_gf)


def test_wavelengths_are_air_where_the_spectrum_is():
    # Air and vacuum wavelength of Na D2, Ciddor (1996): 5889.951 air, 5891.583 vacuum.
    made = builders.named_session([("Na I", 5889.951, 0.9)])
    table = ledger.ledger_table(made)
    assert table["wave"][0] == pytest.approx(5889.951, abs=1e-6)
    assert table["wave_lab"][0] == pytest.approx(5889.951, abs=1e-6)
    assert made.features.wave[0] == pytest.approx(5891.583, abs=2e-3)
    vacuum = replace(made, spectrum=replace(made.spectrum, medium="vacuum"))
    assert ledger.ledger_table(vacuum)["wave"][0] == made.features.wave[0]


def test_velocity_is_the_vacuum_doppler_shift():
    made = builders.named_session([("Fe I", 5269.537, 0.5)])
    shifted = replace(made.features, wave=made.features.wave * (1 + 30.0 / 299792.458))
    table = ledger.ledger_table(replace(made, features=shifted))
    assert table["velocity"][0] == pytest.approx(30.0, abs=1e-7)
    errors = np.hypot(shifted.wave_err[0], 0.001 * (1 + 30.0 / 299792.458))
    assert table["velocity_err"][0] == pytest.approx(299792.458 * errors / 5271.0, rel=1e-3)


def test_a_species_without_a_line_masks_the_line(made):
    table = ledger.ledger_table(edits.set_species(made, 1, "Eu II"))
    row = table[0]
    assert row["species"] == "Eu II" and row["by"] == "person"
    assert np.ma.is_masked(row["wave_lab"]) and np.ma.is_masked(row["velocity"])


def test_blends_list_species_wavelength_and_share_in_own_medium(made):
    # vacuum 5168.94 is air 5167.50 by Ciddor (1996), refractive index 1.0002784 there
    marked = edits.mark_blend(made, 1, [["Fe I", 5168.94, 0.25], ["Mg I", float("nan"), 0.1]])
    assert ledger.ledger_table(marked)["blend"][0] == "Fe I 5167.501 0.25; Mg I 0.10"


def test_orphans_named_or_removed_by_a_person_leave_the_list(made):
    assert list(ledger.orphans_table(made)["feature"]) == [3]
    rest = ledger.orphans_table(made)["wave_rest"][0]
    own = ledger.orphans_table(made)["wave"][0]
    assert own / rest == pytest.approx(1 + 12.5 / 299792.458, abs=1e-9)
    assert len(ledger.orphans_table(edits.set_species(made, 3, "Fe I"))) == 0
    assert len(ledger.orphans_table(feature_edits.remove_feature(made, 3))) == 0


def test_orphans_without_velocity_have_no_rest_wavelength(made):
    unknown = replace(made, velocity=replace(made.velocity, velocity=np.nan))
    table = ledger.orphans_table(unknown)
    assert np.ma.is_masked(table["wave_rest"][0])
    assert table.meta["velocity_kms"] is None


def test_roll_call_columns(made):
    contract = "species expected seen missing p_chance offset_dex offset_err verdict".split()
    names = ledger.rollcall_table(made).colnames
    assert names[: len(contract)] == contract
    assert names[len(contract) :] == ["limit_dex", "limit_wave", "limit_ew"]
    with pytest.raises(InputRefused, match="no such table"):
        ledger.session_table(made, "menu")


FORMATS = {
    ".ecsv": "ascii.ecsv",
    ".csv": "ascii.csv",
    ".vot": "votable",
    ".mrt": "ascii.mrt",
}


@pytest.fixture(params=["ledger", "rollcall", "orphans"])
def table(request, made):
    return ledger.session_table(made, request.param)


@pytest.mark.parametrize("suffix", writers.SUFFIXES)
def test_the_same_table_gives_the_same_bytes(table, suffix, made, tmp_path):
    for name in "ab":
        writers.write_table(table, tmp_path / f"{name}{suffix}")
    assert (tmp_path / f"a{suffix}").read_bytes() == (tmp_path / f"b{suffix}").read_bytes()


def _back(table, suffix, tmp_path):
    from astropy.table import Table

    path = tmp_path / f"a{suffix}"
    writers.write_table(table, path)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return Table.read(path, format=FORMATS[suffix])


@pytest.mark.parametrize("suffix", [".ecsv", ".csv", ".vot"])
def test_exact_formats_come_back_exactly(table, suffix, tmp_path):
    back = _back(table, suffix, tmp_path)
    assert back.colnames == table.colnames and len(back) == len(table)
    for name in table.colnames:
        if table[name].dtype.kind == "f":
            np.testing.assert_array_equal(
                np.ma.filled(back[name], -99.0), np.ma.filled(table[name], -99.0), name
            )


def test_machine_readable_tables_come_back_rounded(table, tmp_path):
    back = _back(table, ".mrt", tmp_path)
    assert len(back) == len(table)
    if "wave" in back.colnames:
        np.testing.assert_allclose(back["wave"], table["wave"], atol=6e-5)


def test_latex_has_one_line_a_row_and_escapes(made, tmp_path):
    named = edits.set_note(made, 1, "50% & more_")
    writers.write_table(ledger.ledger_table(named), tmp_path / "a.tex")
    text = (tmp_path / "a.tex").read_text()
    rows = [line for line in text.splitlines() if line.endswith(r"\\")]
    assert len(rows) == len(made.features) + 2
    assert r"50\% \& more\_" in text and r"wave\_lab" in text


@pytest.mark.parametrize("suffix", writers.SUFFIXES)
@pytest.mark.parametrize("what", ["ledger", "rollcall", "orphans"])
def test_an_empty_table_is_written_or_refused(suffix, what, tmp_path):
    made = replace(builders.session(0), roll_call=())
    table = ledger.session_table(made, what)
    if suffix == ".mrt":
        with pytest.raises(InputRefused, match="the table is empty"):
            writers.write_table(table, tmp_path / "a.mrt")
    elif suffix == ".tex":
        writers.write_table(table, tmp_path / "a.tex")
        assert "tabular" in (tmp_path / "a.tex").read_text()
    else:
        back = _back(table, suffix, tmp_path)
        assert len(back) == 0 and back.colnames == table.colnames


def test_existing_tables_and_unknown_suffixes_are_refused(made, tmp_path):
    table = ledger.ledger_table(made)
    path = tmp_path / "l.csv"
    path.write_text("mine")
    with pytest.raises(InputRefused, match="exists already"):
        writers.write_table(table, path)
    assert path.read_text() == "mine"
    writers.write_table(table, path, force=True)
    assert path.read_text().startswith("feature,segment")
    with pytest.raises(InputRefused, match="no table format"):
        writers.write_table(table, tmp_path / "l.xlsx")
