"""Temperature readings: each against numbers made another way."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.claims.clean_lines import main_share
from linewright.claims.entries import Entries
from linewright.claims.growth import CleanLines, fit_growth
from linewright.claims.ionisation import Gas, fit_balance
from linewright.claims.readings import (
    ADOPTED,
    GIVEN,
    GROWTH,
    PROFILE,
    STAGES,
    _doubt,
    _weighed,
    with_error,
)
from linewright.claims.stretches import STRETCHES, by_stretch
from linewright.claims.temperature import COOLEST, HOTTEST, Profile, peak_of, profile
from linewright.job.temperatures import flux_density
from linewright.lines.levels import ion_fractions, partition_function, solar_abundance
from linewright.lines.strengths import abundance_vector


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


def test_stretches_add_up_and_hold_what_lies_in_them():
    wave = np.linspace(5000.0, 5100.0, 120)
    seen = np.random.default_rng(0).normal(size=120)
    parts = by_stretch(wave, np.array([4990.0, 5099.0]), seen, np.array([0.5, 0.25]))
    assert parts.shape == (STRETCHES,)
    assert parts.sum() == pytest.approx(seen.sum() - 0.75)
    assert parts[0] == pytest.approx(seen[:10].sum() - 0.5)
    assert by_stretch(wave[:0], wave[:0], seen[:0], seen[:0]).sum() == 0.0


def test_a_profile_whose_stretches_disagree_is_less_sure():
    """Half of twelve stretches peak at 5,200, half at 6,500 K: drawn again, the share of each
    kind scatters by 0.5/sqrt(12), and the peak by that share of ln(6500/5200)."""
    low, high = hill(5200.0, 5000.0), hill(6500.0, 5000.0)
    alike = profile(lambda t: np.full(12, hill(5800.0, 5000.0)(t) / 12), 5800.0)
    apart = profile(lambda t: np.array([low(t), high(t)] * 6) / 12, 5800.0)
    assert alike.temperature == pytest.approx(5800.0, rel=0.01)
    assert alike.error == pytest.approx(5800.0 * np.hypot(1 / np.sqrt(5000.0), 0.05), rel=0.03)
    moved = np.log(6500.0 / 5200.0) * 0.5 / np.sqrt(12)
    assert apart.error == pytest.approx(apart.temperature * np.hypot(moved, 0.05), rel=0.15)
    assert apart.error > 1.1 * alike.error
    assert abs(np.log(apart.temperature**2 / (5200.0 * 6500.0))) < 0.02


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


def test_clean_lines_count_only_where_they_agree():
    fit = with_error(fit_at(5500.0), 5300.0)
    near, far = profile_at(5300.0, 260.0), profile_at(7500.0, 370.0)
    found = _weighed(near, fit)
    assert 5300.0 < found.temperature < fit.temperature + 1e-6 and found.error < 130.0
    assert [r.label for r in found.readings] == [ADOPTED, PROFILE, GROWTH]
    assert all(r.used for r in found.readings)
    found = _weighed(far, fit)
    assert (found.temperature, found.error) == (7500.0, 370.0)
    assert not found.readings[2].used and "disagrees" in found.readings[2].note
    assert _doubt(replace(near, error=float("nan")), fit) != ""
    assert _doubt(near, None) != ""


def test_excitation_and_ionisation_take_the_place_of_the_curve_of_growth():
    growth, balance = with_error(fit_at(5500.0), 5300.0), balance_of(*LAYERS[0], 4)
    found = _weighed(profile_at(5800.0, 290.0), growth, balance)
    read = {r.label: r for r in found.readings}
    assert read[STAGES].used and not read[GROWTH].used
    assert found.error < min(balance.error, 290.0)
    found = _weighed(profile_at(5500.0, 275.0), growth, replace(balance, temperature=9000.0))
    read = {r.label: r for r in found.readings}
    assert read[GROWTH].used and not read[STAGES].used and "disagrees" in read[STAGES].note


def test_without_clean_lines_the_profile_stands_alone():
    found = _weighed(profile_at(6000.0, 300.0), None)
    assert (found.temperature, found.error) == (6000.0, 300.0)
    assert [r.label for r in found.readings] == [ADOPTED, PROFILE]
    assert GIVEN not in {r.label for r in found.readings}


def test_claims_made_far_off_make_a_curve_of_growth_less_sure():
    fit = fit_at(5500.0)
    near, far = with_error(fit, fit.temperature), with_error(fit, fit.temperature - 3000.0)
    assert near.temperature == far.temperature == fit.temperature
    assert far.error == pytest.approx(np.hypot(near.error, 0.08 * 3000.0))
    assert near.error > fit.error


LAYERS = ((5800.0, 1.2), (5800.0, -0.5), (10_000.0, 2.4), (15_000.0, 3.3))  # K, log Pe
NAMES = ("Mg I", "Mg II", "Si II", "Si III", "Ti I", "Ti II", "Fe I", "Fe II", "Fe III", "S II")
LOW = (2.7, 9.0, 9.0, 19.0, 0.8, 1.2, 2.2, 2.9, 8.2, 13.5)  # eV, of the lowest lines taken


def layer_lines(temperature, log_pe, rng, count=25):
    """Lines of ten species of one layer, levels by the tables' own fractions, elements 0.1 dex
    off, log gf 0.1 dex, m 0.04 dex; only what is strong enough to be seen."""
    theta, every = 5039.778 / temperature, []
    odd = {element: rng.normal(0, 0.1) for element in ("Mg", "Si", "Ti", "Fe", "S")}
    for k, (name, low) in enumerate(zip(NAMES, LOW)):
        element, stage = name.split()
        share = ion_fractions(element, temperature, log_pe)[{"I": 0, "II": 1, "III": 2}[stage]]
        level = np.log10(share / partition_function(name, temperature))
        chi = low + rng.uniform(0, 3, count)
        loggf = rng.uniform(-4, 0, count)
        opacity = loggf - theta * chi + level + solar_abundance(element) + odd[element]
        every.append(np.column_stack([np.full(count, k), loggf, chi, opacity]))
    species, loggf, chi, opacity = np.concatenate(every).T
    opacity = opacity - np.sort(opacity)[-120]
    seen = (opacity > -1.0) & (opacity < 2.0)
    species, loggf, chi, opacity = (x[seen] for x in (species, loggf, chi, opacity))
    n = len(chi)
    return CleanLines(
        species.astype(int), loggf + rng.normal(0, 0.1, n), np.full(n, 0.1), chi,
        rng.uniform(4500, 6500, n),
        np.where(opacity < 0, 0.8, 0.5) * opacity + rng.normal(0, 0.04, n), np.zeros(n),
    )  # fmt: skip


def balance_of(temperature, log_pe, seed, start=1.0):
    made = layer_lines(temperature, log_pe, np.random.default_rng(seed))
    return fit_balance(made, NAMES, Gas(start * temperature, None, abundance_vector()))


@pytest.mark.parametrize(("temperature", "log_pe"), LAYERS)
def test_temperature_and_pressure_of_a_layer_come_back_with_true_errors(temperature, log_pe):
    """Five draws: within 3 % rms, pulls of both no wider than they should be."""
    found = [balance_of(temperature, log_pe, seed) for seed in range(5)]
    off = np.array([b.temperature - temperature for b in found])
    pulls = np.array([[o / b.error, (b.log_pe - log_pe) / b.log_pe_err]
                      for o, b in zip(off, found)])  # fmt: skip
    assert np.sqrt(np.mean(off**2)) < 0.03 * temperature
    assert np.all(np.sqrt(np.mean(pulls**2, axis=0)) < 1.6)
    assert all("Fe I/II" in b.pairs or "Si II/III" in b.pairs for b in found)


@pytest.mark.parametrize("start", [0.75, 1.35])
def test_a_layer_is_found_from_far_off(start):
    """The start moves a result by less than a fifth of its error."""
    for layer in LAYERS[1:]:
        near, far = balance_of(*layer, 3), balance_of(*layer, 3, start)
        assert abs(near.temperature - far.temperature) < 0.2 * near.error


def test_a_pressure_that_is_known_stays_and_sharpens_the_temperature():
    made = layer_lines(10_000.0, 2.4, np.random.default_rng(5))
    free = fit_balance(made, NAMES, Gas(10_000.0, None, abundance_vector()))
    held = fit_balance(made, NAMES, Gas(10_000.0, 2.4, abundance_vector(), True))
    assert held.log_pe == pytest.approx(2.4, abs=0.05)
    assert held.error < free.error
    value, error = free.pressure_at(free.temperature + free.error, 0.0)
    assert value == pytest.approx(free.log_pe + free.slope * free.error / 10_000.0, abs=0.02)
    assert 0 < error < free.log_pe_err


def test_too_few_lines_make_no_balance():
    made = layer_lines(5800.0, 1.2, np.random.default_rng(6)).take(np.arange(20))
    assert fit_balance(made, NAMES, Gas(5800.0, None, abundance_vector())) is None


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
