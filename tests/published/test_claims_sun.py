"""The Sun's lines named, against published identifications.

Truth: Moore, Minnaert & Houtgast 1966, NBS Monograph 61; Melendez et al. 2014, ApJ 791, 14.
"""

from __future__ import annotations

import numpy as np
import pytest
from truths import SPECTRA, TELLURIC_WINDOWS, solar_lines, with_invented, within

from linewright.claims.identify import identify
from linewright.claims.options import ClaimOptions
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.spectra.medium import C_KM_S, vacuum_to_air
from linewright.spectra.reading import read_spectrum
from linewright.spectra.velocity import difference, shift

SUN = SPECTRA / "sun_r47000.txt"
pytestmark = pytest.mark.skipif(not SUN.is_file(), reason="the Sun is not beside the checkout")
STRONG = {
    5889.951: "Na I", 5895.924: "Na I", 5183.604: "Mg I", 5172.684: "Mg I", 6562.80: "H I",
    4861.33: "H I", 5269.54: "Fe I", 5328.04: "Fe I", 4957.60: "Fe I", 6162.17: "Ca I",
    5018.44: "Fe II",
}  # fmt: skip


@pytest.fixture(scope="module")
def spectrum():
    return read_spectrum(SUN, medium="air")


@pytest.fixture(scope="module")
def session(spectrum):
    return solve(spectrum)


def rest_air(session):
    return vacuum_to_air(session.features.wave / (1 + session.velocity.velocity / C_KM_S))


def matched(session):
    """(truth line, claim) of the published lines that were found, and the number missed."""
    air, found, missed = rest_air(session), [], 0
    absorbing = session.features.sign > 0
    for wave, _, species in solar_lines():
        if within([wave], TELLURIC_WINDOWS)[0]:
            continue
        distance = np.where(absorbing, np.abs(air - wave), np.inf)
        i = int(np.argmin(distance))
        if distance[i] > 0.06:
            missed += 1
        else:
            found.append(((wave, species), session.claims[i]))
    return found, missed


@pytest.mark.parametrize("wave", sorted(STRONG))
def test_strong_lines_are_firm(session, wave):
    i = int(np.argmin(np.abs(rest_air(session) - wave)))
    assert abs(rest_air(session)[i] - wave) < 0.15
    assert (session.claims[i].species, session.claims[i].standing) == (STRONG[wave], "firm")


def test_published_lines_are_found_and_named(session):
    found, missed = matched(session)
    assert len(found) / (len(found) + missed) >= 0.95
    right = [c.species in species for (_, species), c in found]
    assert np.mean(right) >= 0.97


def test_confident_claims_on_published_lines_are_right(session):
    found, _ = matched(session)
    wrong = [
        (wave, c.species)
        for (wave, species), c in found
        if c.probability >= 0.95 and c.species not in species
    ]
    assert len(wrong) <= 2, wrong


def test_half_of_all_features_are_confident(session):
    outside = ~within(rest_air(session), TELLURIC_WINDOWS)
    sure = np.array([c.probability >= 0.95 for c in session.claims])
    assert sure[outside].mean() >= 0.5


def test_shifted_sun_gives_its_velocity_and_the_same_names(spectrum, session):
    moved = solve(shift(spectrum, -412.8))
    found = difference(moved.velocity.velocity, session.velocity.velocity)
    assert found == pytest.approx(-412.8, abs=0.1)
    places = moved.features.wave / (1 - 412.8 / C_KM_S)
    index = np.clip(np.searchsorted(places, session.features.wave), 1, len(places) - 1)
    left = np.abs(places[index - 1] - session.features.wave)
    index = index - (left < np.abs(places[index] - session.features.wave))
    same = [
        moved.claims[j].species == claim.species
        for claim, j in zip(session.claims, index)
        if claim.probability >= 0.5
    ]
    assert np.mean(same) >= 0.98


def test_invented_features_are_refused(session):
    """At most 3 % of invented features firm (one draw; the study makes 30)."""
    features, invented = with_invented(
        session.features, session.spectrum.coverage, np.random.default_rng(5)
    )
    found = identify(
        features,
        session.spectrum.coverage,
        load_catalogue(),
        ClaimOptions(temperature=session.temperature_k),
    )
    sure = np.array([c.probability >= 0.95 for c in found.claims])
    assert np.sum(invented) > 200
    assert np.mean(sure[invented]) <= 0.03


def test_telluric_oxygen_is_called_so(session):
    """The O2 gamma band (6276-6320 A) of the Sun: deep features that no solar table lists."""
    air = vacuum_to_air(session.features.wave)
    deep = (air > 6277) & (air < 6300) & (session.features.depth > 0.15)
    origins = [c.origin for c, here in zip(session.claims, deep) if here]
    assert origins.count("telluric") >= 10
