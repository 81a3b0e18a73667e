"""The commands correct, convert and inspect on spectra, and remembered choices."""

from __future__ import annotations

import json

import numpy as np
import pytest
from astropy.io import fits

from linewright.cli.main import main
from linewright.spectra.contents import contents
from linewright.spectra.earth_motion import correction
from linewright.spectra.reading import read_spectrum
from linewright.spectra.remembered import config_folder, offer, remember, shape_of

WAVE = 5000.0 + 0.1 * np.arange(400)


@pytest.fixture
def observed(tmp_path):
    """A topocentric image that knows its place, star and time (tau Ceti from Cerro Tololo)."""
    hdu = fits.PrimaryHDU(np.random.default_rng(2).normal(1, 0.01, 400))
    hdu.header.update({
        "CTYPE1": "AWAV", "CUNIT1": "Angstrom", "CRVAL1": 5000.0, "CDELT1": 0.1, "CRPIX1": 1.0,
        "SPECSYS": "TOPOCENT", "OBSERVAT": "CTIO", "RA": "01:44:05.1275",
        "DEC": "-15:56:22.4006", "DATE-OBS": "2017-09-03T11:55:00", "EXPTIME": 600.0})
    path = tmp_path / "observed.fits"
    hdu.writeto(path)
    return path


@pytest.fixture
def columns(tmp_path):
    """Text with several fluxes and no statement of medium."""
    path = tmp_path / "many.txt"
    rows = "".join(f"{w:.2f} 1.0 2.0 3.0\n" for w in WAVE)
    path.write_text("lambda first second third\n" + rows)
    return path


def test_correct_shows_number_and_sign_and_writes_nothing(observed, capsys, tmp_path):
    assert main(["correct", str(observed)]) == 0
    told = capsys.readouterr().out
    assert "barycentric correction +15.4" in told and "lambda x (1 + 15.4" in told
    assert "nothing applied" in told and "DATE-OBS + half of 600 s" in told
    assert [p.name for p in tmp_path.iterdir() if p.suffix] == ["observed.fits"]


def test_the_header_gives_what_the_typed_values_give(observed, capsys):
    """15407.49 m/s is the published correction with full astrometry (Wright & Eastman 2014)."""
    typed = ["--site=-30.169283,-70.806789,2241.9", "--coordinates", "26.0213645867,-15.9395557246",
             "--proper-motion=-1721.05,854.16", "--parallax", "273.96", "--time", "2458000.0"]
    assert main(["correct", str(observed), *typed]) == 0
    assert "+15.4075 km/s" in capsys.readouterr().out
    assert correction(read_spectrum(observed).observation).velocity == pytest.approx(15.41, abs=0.02)


def test_correct_applies_once(observed, tmp_path, capsys):
    out = tmp_path / "moved.fits"
    assert main(["correct", str(observed), "-o", str(out)]) == 0
    before, after = read_spectrum(observed), read_spectrum(out)
    ratio = after.segments[0].wave / before.segments[0].wave - 1
    assert np.allclose(299792.458 * ratio, after.observer_velocity, atol=1e-6)
    capsys.readouterr()
    assert main(["correct", str(out), "-o", str(tmp_path / "twice.fits")]) == 1
    assert "not applied again" in capsys.readouterr().err
    assert not (tmp_path / "twice.fits").exists()


def test_a_correction_can_be_given_to_any_command(observed, capsys):
    assert main(["inspect", str(observed), "--barycentric", "-10.5", "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    assert told["frame"] == "barycentric" and told["observer_velocity"] == -10.5
    assert told["read_options"]["barycentric"] == -10.5


def test_a_zero_point_comes_from_a_file_or_as_typed(observed, tmp_path, capsys):
    saved = tmp_path / "zero.json"
    saved.write_text('{"zero_point_kms": 0.5, "error_kms": 0.1}')
    told = []
    for value in (str(saved), "0.5:0.1"):
        assert main(["inspect", str(observed), "--zero-point", value, "--json"]) == 0
        told.append(json.loads(capsys.readouterr().out))
    assert told[0]["range"] == told[1]["range"]
    assert told[0]["range"][0] == pytest.approx(5000.0 / (1 + 0.5 / 299792.458), abs=1e-4)
    assert "+0.5000 +- 0.1000 km/s removed" in told[0]["corrections"][0]
    assert main(["inspect", str(observed), "--zero-point", "nonsense"]) == 2


def test_what_lacks_is_named(tmp_path, capsys):
    hdu = fits.PrimaryHDU(np.ones(400))
    hdu.header.update(CTYPE1="AWAV", CUNIT1="Angstrom", CRVAL1=5000.0, CDELT1=0.1,
                      SPECSYS="TOPOCENT")
    hdu.writeto(tmp_path / "bare.fits")
    assert main(["correct", str(tmp_path / "bare.fits")]) == 1
    line = capsys.readouterr().err
    assert "--site" in line and "--coordinates" in line and "--time" in line
    assert main(["correct", str(tmp_path / "bare.fits"), "--velocity", "12.3"]) == 0
    assert "as given" in capsys.readouterr().out
    assert main(["correct", str(tmp_path / "bare.fits"), "--site", "Atlantis"]) == 1


def test_convert_writes_what_was_asked(observed, tmp_path, capsys):
    out = tmp_path / "out.ecsv"
    arguments = ["convert", str(observed), "-o", str(out), "--to-medium", "vacuum", "--rest",
                 "--velocity", "30"]
    assert main(arguments) == 0
    again = read_spectrum(out)
    assert (again.medium, again.frame) == ("vacuum", "rest")
    first = read_spectrum(observed).segments[0].wave
    assert np.allclose(again.segments[0].wave, first / (1 + 30 / 299792.458), rtol=1e-12)
    capsys.readouterr()
    assert main(arguments) == 1 and "exists already" in capsys.readouterr().err
    assert main(["convert", str(observed), "-o", str(tmp_path / "x.fits"), "--rest"]) == 1
    assert "no velocity is known" in capsys.readouterr().err


def test_choices_are_remembered_for_the_shape_and_offered(columns, tmp_path, capsys):
    assert main(["inspect", str(columns), "--columns", "wave=1,flux=3", "--medium", "air"]) == 0
    other = tmp_path / "next.txt"
    other.write_text(columns.read_text().replace("1.0 2.0", "1.5 2.5"))
    capsys.readouterr()
    assert main(["inspect", str(other)]) == 0
    told = capsys.readouterr().out
    assert "you chose" in told and "--as-before" in told and "medium:      unknown" in told
    assert main(["inspect", str(other), "--as-before", "--json"]) == 0
    facts = json.loads(capsys.readouterr().out)
    assert facts["medium"] == "air" and "flux=second" in facts["layout"]
    shaped_otherwise = tmp_path / "other.txt"
    shaped_otherwise.write_text("lambda only\n" + "".join(f"{w:.2f} 1.0\n" for w in WAVE))
    assert main(["inspect", str(shaped_otherwise)]) == 0
    assert "you chose" not in capsys.readouterr().out


def test_the_memory_is_one_small_file_and_survives_damage(columns):
    shape = shape_of(columns)
    remember(shape, {"medium": "air", "barycentric": 3.0})
    assert offer(shape) == {"medium": "air"}  # a correction belongs to one observation
    file = config_folder() / "readings.json"
    assert json.loads(file.read_text()) == {shape: {"medium": "air"}}
    file.write_text("{broken")
    assert offer(shape) == {}
    remember(shape, {"medium": "vacuum"})
    assert offer(shape) == {"medium": "vacuum"}


def test_a_file_offers_its_spectra(tmp_path, columns):
    assert [o.words.split("flux=")[-1] for o in contents(columns)] == ["first", "second", "third"]
    rows = fits.BinTableHDU.from_columns([
        fits.Column("WAVE", "400D", unit="Angstrom", array=[WAVE] * 5),
        fits.Column("FLUX", "400D", array=[WAVE] * 5)], name="STARS")
    single = fits.BinTableHDU.from_columns([
        fits.Column("WAVE", "D", unit="Angstrom", array=WAVE),
        fits.Column("FLUX", "D", array=WAVE)])
    path = tmp_path / "several.fits"
    fits.HDUList([fits.PrimaryHDU(), rows, single]).writeto(path)
    found = contents(path)
    assert [(o.hdu, o.rows, o.samples) for o in found] == [(1, 5, 400), (2, 1, 400)]
    for choice in found:
        assert read_spectrum(path, medium="air", hdu=choice.hdu, row=choice.rows if
                             choice.rows > 1 else None).samples == choice.samples


def test_the_lines_are_asked_when_wanted(capsys):
    """A sample of our own, its vacuum or air stated; then as text that states nothing."""
    from linewright.resources import samples_dir

    star = samples_dir() / "g_dwarf.fits"
    assert main(["inspect", str(star), "--lines", "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    assert told["medium_odds"] is None and len(told["lines_say"]) >= 1
    assert main(["inspect", str(star)]) == 0 and "lines:" not in capsys.readouterr().out


def test_the_odds_of_a_spectrum_that_does_not_say(tmp_path, capsys):
    from linewright.resources import samples_dir
    from linewright.spectra.medium import to_medium

    star = read_spectrum(samples_dir() / "g_dwarf.fits")
    rows = np.concatenate([np.column_stack([to_medium(s.wave, star.medium), s.flux])[~s.mask]
                           for s in star.segments])
    np.savetxt(tmp_path / "star.txt", rows, fmt="%.5f")
    assert main(["inspect", str(tmp_path / "star.txt"), "--lines", "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    odds = told["medium_odds"]
    assert odds["air"] + odds["vacuum"] == pytest.approx(1.0)
    assert odds[star.medium] > 0.5 and "calibration tilt" in told["lines_say"][0]


def test_a_session_reads_the_corrected_spectrum_again(observed, tmp_path):
    from linewright.job.view_session import unsolved_session
    from linewright.session.file import load_session, save_session
    from linewright.session.reopen import reopen_spectrum

    choices = {"barycentric": 15.4, "zero_point": (0.2, 0.05)}
    moved = read_spectrum(observed, **choices)
    save_session(unsolved_session(moved), tmp_path / "a.linewright.json")
    again = reopen_spectrum(load_session(tmp_path / "a.linewright.json"))
    assert np.array_equal(again.segments[0].wave, moved.segments[0].wave)
    assert (again.frame, again.corrections) == ("barycentric", moved.corrections)
