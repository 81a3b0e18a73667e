"""Plain text in the shapes people save spectra in."""

from __future__ import annotations

import bz2
import gzip

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.spectra.reading import read_spectrum

WAVE = np.linspace(5000.0, 5010.0, 101)
FLUX = 1.0 - 0.5 * np.exp(-0.5 * ((WAVE - 5005.0) / 0.3) ** 2)
ERROR = 0.01 * np.ones(101)


def _write(folder, rows, head="", name="s.txt"):
    path = folder / name
    path.write_text(head + "\n".join(rows) + "\n", encoding="utf-8")
    return path


def _rows(pattern):
    return [pattern.format(w=w, f=f, e=e) for w, f, e in zip(WAVE, FLUX, ERROR, strict=True)]


@pytest.mark.parametrize(
    ("pattern", "head"),
    [
        ("{w:.6f} {f:.8f}", ""),
        ("  {w:.6f}   {f:.8f}  ", "# a star\n# wave flux\n"),
        ("{w:.6f},{f:.8f}", "wavelength,flux\n"),
        ("{w:.6f}\t{f:.8f}", "Wavelength [A]\tFlux\n"),
        ("{w:.6f};{f:.8f}", "; observed\n"),
        ("{f:.8f} {w:.6f}", "flux lambda\n"),
        ("{w:.6f} {f:.8e}", "! comment\n\n"),
        ("{w:.6f}, {f:.8f}, {e}", "wave, flux, error\n"),
        ('"{w:.6f}","{f:.8f}"', '"wave","flux"\n'),
    ],
)
def test_delimiters_comments_headers_and_order(tmp_path, pattern, head):
    spectrum = read_spectrum(_write(tmp_path, _rows(pattern), head), medium="vacuum")
    segment = spectrum.segments[0]
    assert np.allclose(segment.wave, WAVE, rtol=1e-9)
    assert np.allclose(segment.flux, FLUX, atol=1e-8)


def test_fortran_exponents_and_broken_lines(tmp_path):
    rows = [r.replace("e", "D") for r in _rows("{w:.6e} {f:.8e}")]
    rows[50] = "---- page break ----"
    spectrum = read_spectrum(_write(tmp_path, rows), medium="vacuum")
    assert spectrum.samples == 100
    assert any("1 lines" in w and "left out" in w for w in spectrum.warnings)


@pytest.mark.parametrize(("opener", "name"), [(gzip.open, "s.gz"), (bz2.open, "s.bz2")])
def test_packed_text(tmp_path, opener, name):
    with opener(tmp_path / name, "wt") as handle:
        handle.write("\n".join(_rows("{w:.6f} {f:.8f}")))
    spectrum = read_spectrum(tmp_path / name, medium="vacuum")
    assert np.allclose(spectrum.segments[0].flux, FLUX, atol=1e-8)
    assert "zip" in spectrum.layout


def test_windows_line_ends_and_byte_order_mark(tmp_path):
    path = tmp_path / "s.csv"
    text = "wave,flux\r\n" + "\r\n".join(_rows("{w:.6f},{f:.8f}"))
    path.write_bytes(b"\xef\xbb\xbf" + text.encode())
    assert read_spectrum(path, medium="vacuum").samples == 101


def test_a_third_column_of_small_positive_numbers_is_the_error_and_said(tmp_path):
    spectrum = read_spectrum(_write(tmp_path, _rows("{w:.6f} {f:.8f} {e}")), medium="vacuum")
    assert np.allclose(spectrum.segments[0].uncertainty, 0.01)
    assert any("third column taken as the error" in w for w in spectrum.warnings)


def test_columns_by_number_and_by_name(tmp_path):
    path = _write(tmp_path, _rows("{e} {f:.8f} {w:.6f} 7"), "a b c d\n")
    for columns in ("wave=3,flux=2,err=1", {"wave": "c", "flux": "b", "err": "a"}):
        spectrum = read_spectrum(path, columns=columns, medium="air")
        assert np.allclose(spectrum.segments[0].flux, FLUX, atol=1e-8)
        assert np.allclose(spectrum.segments[0].uncertainty, 0.01)
    again = read_spectrum(path, **spectrum.read_options)
    assert np.array_equal(again.segments[0].wave, spectrum.segments[0].wave)


@pytest.mark.parametrize(
    ("columns", "words"),
    [("wave=9,flux=2", "no column 9"), ("wave=nope,flux=2", "no column 'nope'"),
     ("wavelength=1", "is no role"), ("wave", "not understood")],
)
def test_columns_that_do_not_fit_are_refused(tmp_path, columns, words):
    path = _write(tmp_path, _rows("{w:.6f} {f:.8f}"), "lam flux\n")
    with pytest.raises(InputRefused, match=words):
        read_spectrum(path, columns=columns)


@pytest.mark.parametrize(
    ("factor", "unit"), [(0.1, "nm"), (1e-4, "micron"), (1e-10, "m"), (1.0, "ANGSTROMS")])
def test_units_on_request(tmp_path, factor, unit):
    rows = [f"{w * factor:.12e} {f:.8f}" for w, f in zip(WAVE, FLUX, strict=True)]
    spectrum = read_spectrum(_write(tmp_path, rows), unit=unit, medium="vacuum")
    assert np.allclose(spectrum.segments[0].wave, WAVE, rtol=1e-9)


@pytest.mark.parametrize(
    ("values", "head"),
    [(WAVE * 0.1, "wave(nm) flux\n"), (WAVE * 1e-4, "lambda[um] flux\n"),
     (np.log10(WAVE), "loglam flux\n"), (WAVE * 0.1, "wave_nm flux\n")])
def test_units_in_a_column_name(tmp_path, values, head):
    rows = [f"{w:.14f} {f:.8f}" for w, f in zip(values, FLUX, strict=True)]
    spectrum = read_spectrum(_write(tmp_path, rows, head), medium="vacuum")
    assert np.allclose(spectrum.segments[0].wave, WAVE, rtol=1e-9)


def test_numbers_that_could_be_several_units_are_refused(tmp_path):
    rows = [f"{w * 0.1:.6f} {f:.8f}" for w, f in zip(WAVE, FLUX, strict=True)]
    with pytest.raises(InputRefused, match="unit not stated.*--unit nm"):
        read_spectrum(_write(tmp_path, rows))


@pytest.mark.parametrize(
    ("head", "medium", "frame"),
    [
        ("# Wavelengths are in vacuum, heliocentric frame\n", "vacuum", "heliocentric"),
        ("# air wavelengths\n", "air", "unknown"),
        ("# in air, barycentric rest frame\n", "air", "barycentric"),
        ("# airmass 1.2 at start\n", "unknown", "unknown"),
        ("# wavelengths in air\n# vacuum wavelengths\n", "unknown", "unknown"),
        ("wave_air flux\n", "air", "unknown"),
    ],
)
def test_medium_and_frame_from_comments(tmp_path, head, medium, frame):
    spectrum = read_spectrum(_write(tmp_path, _rows("{w:.6f} {f:.8f}"), head))
    assert (spectrum.medium, spectrum.frame) == (medium, frame)


def test_contradicting_comments_are_said(tmp_path):
    head = "# wavelengths in air\n# vacuum wavelengths\n"
    spectrum = read_spectrum(_write(tmp_path, _rows("{w:.6f} {f:.8f}"), head))
    assert any("contradicts itself" in w for w in spectrum.warnings)


def test_a_user_who_contradicts_the_file_is_obeyed_and_told(tmp_path):
    path = _write(tmp_path, _rows("{w:.6f} {f:.8f}"), "# vacuum wavelengths\n")
    spectrum = read_spectrum(path, medium="air")
    assert spectrum.medium == "air" and spectrum.medium_from == "given by the user"
    assert any("the file says vacuum" in w for w in spectrum.warnings)


def test_below_2000_angstrom_the_medium_is_vacuum(tmp_path):
    rows = [f"{w - 3500:.6f} {f:.8f}" for w, f in zip(WAVE, FLUX, strict=True)]
    spectrum = read_spectrum(_write(tmp_path, rows), unit="Angstrom")
    assert spectrum.medium == "vacuum" and "convention" in spectrum.medium_from


def test_orders_one_after_another_become_segments(tmp_path):
    rows = [f"{w + shift:.6f} {f:.8f}" for shift in (0.0, 8.0)
            for w, f in zip(WAVE, FLUX, strict=True)]
    spectrum = read_spectrum(_write(tmp_path, rows), medium="vacuum")
    assert len(spectrum.segments) == 2
    assert spectrum.segments[1].wave[0] == pytest.approx(5008.0)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("the quick brown fox\njumps over\n", "without rows of numbers"),
        ("5000 1\n5001 1\n", "too few"),
        ("\n".join("5000 1" for _ in range(50)), "make no sense"),
        ("\n".join(f"{w} nan" for w in WAVE), "no sample has a usable flux"),
        ("<?xml version='1.0'?><html></html>", "no VOTable"),
    ],
)
def test_text_that_is_no_spectrum_is_refused(tmp_path, text, words):
    path = tmp_path / "x.txt"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputRefused, match=words):
        read_spectrum(path)
