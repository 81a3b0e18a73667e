"""The same features in another spectrum: simulated, with differences whose truth is known."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest
from astropy.table import Table
from measured_session import nearest, session_of

from linewright.cli.main import main
from linewright.errors import InputRefused
from linewright.job.again import again, relative_velocity
from linewright.job.hand_edits import refit
from linewright.publish.again import again_table
from linewright.publish.writers import SUFFIXES, table_bytes
from linewright.session.file import save_session
from linewright.spectra.medium import C_KM_S, vacuum_to_air
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment, Spectrum

WAVE = 5000 + 0.02 * np.arange(5000)
CENTRES = np.sort(5003 + 94 * np.random.default_rng(4).random(40))
CENTRES = CENTRES[np.r_[True, np.diff(CENTRES) > 0.8]]
VELOCITY = 33.7


def made(factor: float, depth: float, noise: float, seed: int, name: str) -> Spectrum:
    """Lines of one depth; factor: of all wavelengths, the sampling with them."""
    y = sum(depth * np.exp(-0.5 * ((WAVE - c) / 0.06) ** 2) for c in CENTRES)
    flux = 1 - y + noise * np.random.default_rng(seed).standard_normal(len(WAVE))
    segment = Segment(WAVE * factor, flux, np.full(len(WAVE), noise),
                      np.zeros(len(WAVE), dtype=bool))
    return Spectrum((segment,), "vacuum", "test", "rest", "test", "", name, "", "0" * 64, "text")


@pytest.fixture(scope="module")
def pair():
    return (made(1.0, 0.3, 0.005, 1, "first"),
            made(1 + VELOCITY / C_KM_S, 0.36, 0.004, 2, "second"))


@pytest.fixture(scope="module")
def session(pair):
    return session_of(pair[0])


def test_velocity_and_differences_are_found_with_their_errors(pair, session):
    result = again(session, pair[1])
    assert abs(result.velocity - VELOCITY) < 5 * result.velocity_err < 1.0
    table = again_table(session, result)
    sure = (session.features.significance > 8)
    # the lines grew by 0.06 in depth and by a fifth in equivalent width; nothing moved
    for name, true in (("depth", 0.06), ("ew", 0.06 * np.sqrt(2 * np.pi) * 60.0), ("wave", 0.0)):
        shift = result.velocity - VELOCITY if name == "wave" else 0.0
        pulls = (table[f"{name}_diff"] - true + WAVE.mean() * shift / C_KM_S) / table[
            f"{name}_diff_err"]
        pulls = np.asarray(pulls[sure])
        assert len(pulls) > 25 and abs(np.mean(pulls)) < 4 / np.sqrt(len(pulls))
        assert 0.6 < np.std(pulls) < 1.4
    assert np.allclose(table["ew_again"] - table["ew"], table["ew_diff"])
    assert table.meta["second_spectrum"] == "second"


def test_a_fit_by_hand_is_made_again_with_its_profile(pair, session):
    number = nearest(session, CENTRES[5])
    hand = refit(pair[0], session, (number,), profile="voigt")
    table = again_table(hand, again(hand, pair[1], VELOCITY))
    row = list(table["feature"]).index(number)
    assert "voigt" in table["flags_again"][row].split()
    assert abs(table["depth_diff"][row] - 0.06) < 4 * table["depth_diff_err"][row]


def test_what_the_second_does_not_show_is_masked(pair, session):
    half = pair[1].segments[0]
    part = slice(0, 2500)
    cut = replace(pair[1], segments=(Segment(half.wave[part], half.flux[part],
                                             half.uncertainty[part], half.mask[part]),))
    table = again_table(session, again(session, cut, VELOCITY))
    beyond = np.asarray(table["wave"]) > 5051.0
    assert np.all(table["ew_again"].mask[beyond]) and np.all(table["ew_diff"].mask[beyond])
    assert not np.any(table["ew"].mask)
    assert np.any(~table["ew_again"].mask)


def test_spectra_that_share_nothing_are_refused(pair, session):
    noise = replace(pair[1], segments=(replace(
        pair[1].segments[0],
        flux=1 + 0.004 * np.random.default_rng(3).standard_normal(len(WAVE))),))
    with pytest.raises(InputRefused, match="no velocity"):
        again(session, noise)
    far = replace(pair[1], segments=(replace(pair[1].segments[0], wave=WAVE + 3000),))
    with pytest.raises(InputRefused, match="none of the session's features"):
        again(session, far, 0.0)
    with pytest.raises(InputRefused, match="medium"):
        again(session, replace(pair[1], medium="unknown"), 0.0)


def test_votes_are_not_fooled_by_lines_at_random(session):
    rng = np.random.default_rng(9)
    order = np.sort(rng.uniform(5003, 5097, len(session.features)))
    with pytest.raises(InputRefused):
        relative_velocity(session.features, replace(session.features, wave=order))


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_every_table_format_takes_it(pair, session, suffix):
    table = again_table(session, again(session, pair[1], VELOCITY))
    data = table_bytes(table, suffix)
    assert len(data) > 1000 and data == table_bytes(table, suffix)


def test_the_command_measures_again(tmp_path, pair, capsys):
    paths = []
    for spectrum, air in zip(pair, (False, True)):
        s = spectrum.segments[0]
        wave = vacuum_to_air(s.wave) if air else s.wave
        paths.append(tmp_path / f"{spectrum.name}.txt")
        np.savetxt(paths[-1], np.column_stack([wave, s.flux, s.uncertainty]), fmt="%.6f")
    held = tmp_path / "a.linewright.json"
    save_session(session_of(read_spectrum(paths[0], medium="vacuum")), held)
    out = tmp_path / "d.ecsv"
    arguments = ["again", str(held), str(paths[1]), "--medium", "air", "-o", str(out)]
    assert main(arguments) == 0, capsys.readouterr().err
    told = capsys.readouterr().out
    assert f"at +{VELOCITY:.1f}"[:6] in told and "features measured again" in told
    table = Table.read(out)
    assert table["ew_diff"].unit is not None and table["ew_diff_err"].description
    assert np.median(table["depth_diff"]) == pytest.approx(0.06, abs=0.01)
    assert main(arguments) == 1 and "exists already" in capsys.readouterr().err
    assert json.loads(held.read_text())["format"] == "linewright-session"
