"""Temperature readings: each against numbers made another way."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.claims.clean_lines import main_share
from linewright.claims.entries import Entries
from linewright.claims.growth import CleanLines, fit_growth
from linewright.claims.ionisation import ionisation_balance
from linewright.claims.readings import (
    ADOPTED,
    GIVEN,
    GROWTH,
    PROFILE,
    _doubt,
    _weighed,
    with_error,
)
from linewright.claims.temperature import COOLEST, HOTTEST, Profile, peak_of, profile
from linewright.job.temperatures import flux_density


def hill(true, sharpness=2000.0):
    return lambda t: -0.5 * sharpness * np.log(t / true) ** 2


@pytest.mark.parametrize("true", [3400.0, 4000.0, 5770.0, 9600.0, 21_000.0, 40_000.0])
@pytest.mark.parametrize("wrong", [-3000.0, 0.0, 3000.0])
def test_a_profile_finds_its_peak_from_a_start_wrong_by_3000_k(true, wrong):
    found = profile(hill(true), true + wrong)
    assert found.temperature == pytest.approx(true, rel=0.01)
    assert 0.0 < found.error < 0.1 * true


@pytest.mark.parametrize(("true", "end"), [(1500.0, COOLEST), (90_000.0, HOTTEST)])
def test_a_profile_without_a_peak_stops_at_the_end_and_says_so(true, end):
    found = profile(hill(true), 10_000.0)
    assert found.temperature == end
    assert np.isnan(found.error)
    assert len(found.tried) < 50


def test_few_features_give_a_profile_a_larger_error():
    tried = 5000.0 * np.array([0.8, 0.88, 0.94, 1.0, 1.06, 1.13, 1.22])
    sharp, flat = hill(5000.0, 4000.0), hill(5000.0, 60.0)
    assert peak_of(tried, sharp(tried))[1] == pytest.approx(
        5000.0 * np.hypot(1 / np.sqrt(4000.0), 0.05), rel=0.01
    )
    assert peak_of(tried, flat(tried))[1] > 0.12 * 5000.0


def lines(theta, rng, count=400, noise=(0.1, 0.05), offsets=(0.0, 0.8, -0.5)):
    """Lines on a saturating curve of growth: log gf with error noise[0], m with noise[1]."""
    species = rng.integers(0, len(offsets), count)
    chi = rng.uniform(0, 5, count)
    opacity = rng.uniform(-1.2, 1.5, count)  # log10, at line centre
    true = opacity + theta * chi + np.array(offsets)[species]
    m = np.where(opacity < 0, 0.8, 0.5) * opacity
    return CleanLines(
        species,
        true + rng.normal(0, noise[0], count),
        np.full(count, max(noise[0], 1e-3)),
        chi,
        rng.uniform(5000, 6000, count),
        m + rng.normal(0, noise[1], count),
        np.zeros(count),
    )


@pytest.mark.parametrize("temperature", [4000.0, 5800.0, 10_000.0])
def test_curve_of_growth_returns_the_theta_it_was_made_with(temperature):
    """Errors come true over 20 draws: pulls of unit width, no bias beyond their own error."""
    theta = 5039.778 / temperature
    pulls = []
    for seed in range(20):
        fit = fit_growth(lines(theta, np.random.default_rng(seed)))
        pulls.append((fit.theta - theta) / fit.theta_err)
    assert abs(np.mean(pulls)) < 3 / np.sqrt(20)
    assert 0.6 < np.std(pulls) < 1.5


def test_curve_of_growth_lets_wrong_names_go():
    made = lines(1.0, np.random.default_rng(1))
    clean = fit_growth(made)
    loggf = made.loggf.copy()
    loggf[:30] += 2.5
    spoilt = fit_growth(replace(made, loggf=loggf))
    assert abs(spoilt.theta - clean.theta) < 2 * clean.theta_err
    assert spoilt.lines < clean.lines


def test_curve_of_growth_refuses_what_has_no_lever():
    made = lines(1.0, np.random.default_rng(2))
    assert fit_growth(made.take(np.arange(10))) is None
    assert fit_growth(replace(made, e_low=np.full(len(made), 2.0))) is None
    assert fit_growth(made.take(np.zeros(0, dtype=int))) is None


def test_share_of_a_line_in_its_feature():
    """Two lines half a width apart: the other adds 10^0.5 at its centre times 2^-1."""

    entries = Entries(
        wave=np.array([5000.0, 5000.05, 5001.0]), error=np.zeros(3), strength=np.zeros(3),
        population=np.zeros(3, dtype=int), sign=np.ones(3), species=np.zeros(3, dtype=int),
        component=np.zeros(3, dtype=int), row=np.arange(3), segment=np.zeros(3, dtype=int),
    )  # fmt: skip
    strength = np.array([1.0, 0.5, 0.0])
    share = main_share(entries, strength, np.array([0, 2]), np.array([0.1, 0.1]))
    assert share == pytest.approx([1 / (1 + 10**-0.5 / 2), 1.0], rel=1e-6)


def fit_at(temperature):
    return fit_growth(lines(5039.778 / temperature, np.random.default_rng(3)))


def profile_at(temperature, error):
    return Profile(temperature, error, np.array([temperature]), np.array([0.0]))


def test_curve_of_growth_counts_only_where_it_agrees():
    fit = with_error(fit_at(5500.0), 5300.0)
    near, far = profile_at(5300.0, 260.0), profile_at(7500.0, 370.0)
    value, error, read = _weighed(near, fit)
    assert 5300.0 < value < fit.temperature + 1e-6 and error < 130.0
    assert [r.label for r in read] == [ADOPTED, PROFILE, GROWTH]
    assert all(r.used for r in read)
    value, error, read = _weighed(far, fit)
    assert (value, error) == (7500.0, 370.0)
    assert not read[2].used and "disagrees" in read[2].note
    assert _doubt(replace(near, error=float("nan")), fit) != ""
    assert _doubt(near, None) != ""


def test_without_clean_lines_the_profile_stands_alone():
    value, error, read = _weighed(profile_at(6000.0, 300.0), None)
    assert (value, error) == (6000.0, 300.0)
    assert [r.label for r in read] == [ADOPTED, PROFILE]
    assert GIVEN not in {r.label for r in read}


def test_claims_made_far_off_make_a_curve_of_growth_less_sure():
    fit = fit_at(5500.0)
    near, far = with_error(fit, fit.temperature), with_error(fit, fit.temperature - 3000.0)
    assert near.temperature == far.temperature == fit.temperature
    assert far.error == pytest.approx(np.hypot(near.error, 0.08 * 3000.0))
    assert near.error > fit.error


def test_balance_needs_two_stages_of_one_element():
    fit = fit_at(5500.0)
    assert ionisation_balance(fit, ("Fe I", "Ti I", "Cr II"), 5500.0, 100.0) is None
    hint = ionisation_balance(fit, ("Fe I", "Fe II", "Cr II"), 5500.0, 100.0)
    assert hint.pairs == ("Fe I/II",)
    assert hint.error >= 0.15  # never better than the element's own scatter
    worse = ionisation_balance(fit, ("Fe I", "Fe II", "Cr II"), 5500.0, 300.0)
    assert worse.error > hint.error


@pytest.mark.parametrize(
    ("unit", "kind"),
    [
        ("FLAM", "wavelength"),
        ("1E-17 erg/cm^2/s/Ang", "wavelength"),
        ("10^-17 erg/s/cm^2/Ang", "wavelength"),
        ("erg / (Angstrom s cm2)", "wavelength"),
        ("W m-2 um-1", "wavelength"),
        ("Jy", "frequency"),
        ("erg s-1 cm-2 Hz-1", "frequency"),
        ("ADU", ""),
        ("electron", ""),
        ("Relative Flux", ""),
        ("", ""),
    ],
)
def test_which_units_are_flux_densities(unit, kind):
    assert flux_density(unit) == kind
