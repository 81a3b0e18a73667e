"""Clouds, emission, double peaks and P Cygni profiles, in or put into samples whose truth is known."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest

from linewright.claims.profiles import DOUBLE_PEAK, P_CYGNI
from linewright.job.options import SolveOptions
from linewright.job.solve import solve, solve_features
from linewright.measure.features import FeatureTable
from linewright.resources import samples_dir
from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air
from linewright.spectra.reading import read_spectrum

STAR = 41.3  # km/s, of the A star
BLUE = SolveOptions(ranges=((3900.0, 4110.0), (4220.0, 4240.0), (5880.0, 5900.0)))
BALMER = (6562.8, 4861.33)
AROUND = SolveOptions(ranges=((4840.0, 4980.0), (6480.0, 6650.0)))


@pytest.fixture(scope="module")
def a_star():
    return read_spectrum(samples_dir() / "a_star.txt.gz", medium="air", frame="heliocentric")


@pytest.fixture(scope="module")
def plain(a_star):
    return solve(a_star, options=AROUND)


def with_lines(session, parts):
    """The session's features with those about H alpha and H beta replaced by the photosphere's
    line and parts of (velocity km/s, FWHM km/s, depth, negative in emission)."""
    air = vacuum_to_air(session.features.wave)
    kept = np.all([np.abs(air - line) > 20.0 for line in BALMER], axis=0)
    columns = {f.name: getattr(session.features.take(kept), f.name) for f in fields(FeatureTable)}
    rows = [(line, *part) for line in BALMER for part in [(STAR, 700.0, 0.5), *parts]]
    for line, velocity, fwhm, depth in rows:
        wave = float(air_to_vacuum(line)) * (1 + velocity / C_KM_S)
        width = wave * fwhm / C_KM_S
        made = {
            "sign": 1 if depth > 0 else -1, "wave": wave, "wave_err": 0.01, "significance": 300.0,
            "depth": depth, "depth_err": 0.01, "fwhm": width, "fwhm_err": 0.02,
            "ew": 1064.0 * depth * width, "ew_err": 5.0, "continuum": 1.0,
        }
        for name in columns:
            new = ("",) if name == "flags" else np.array([made.get(name, 0)])
            columns[name] = columns[name] + new if name == "flags" else np.append(columns[name], new)
    table = FeatureTable(**columns)
    order = np.argsort(table.wave, kind="stable")
    return replace(table.take(order), number=np.arange(1, len(table) + 1))


def weighed(session, parts):
    return solve_features(
        with_lines(session, parts),
        options=SolveOptions(coverage=AROUND.ranges, velocity=STAR, temperature=session.temperature_k),
    )


def own_lines(session, sign):
    """(km/s, flags) of claims on hydrogen of one sign, with probability over one half."""
    found = []
    for i, c in enumerate(session.claims):
        if c.species == "H I" and c.probability > 0.5 and session.features.sign[i] == sign:
            found.append((C_KM_S * (session.features.wave[i] / c.line.wave - 1.0), c.flags))
    return found


def test_two_clouds_of_the_a_star(a_star):
    """Truth: -27.9 and +9.6 km/s (the sample's scene)."""
    session = solve(a_star, options=BLUE)
    clouds = sorted((v, e) for origin, v, e in session.components if origin == "interstellar")
    assert len(clouds) == 2
    for (velocity, error), truth in zip(clouds, (-27.9, 9.6)):
        assert abs(velocity - truth) < 3.0 * error
    named = [c for c in session.claims if c.origin == "interstellar" and c.probability > 0.8]
    assert {c.species for c in named} >= {"Ca II", "Na I"}


@pytest.mark.parametrize(
    ("sample", "ranges"), [("hot_star.fits", ()), ("cool_giant.fits", ((5700.0, 5919.0),))]
)
def test_no_cloud_where_there_is_none(sample, ranges):
    """The wings of the giant's Na D are alike in both lines."""
    session = solve(read_spectrum(samples_dir() / sample), options=SolveOptions(ranges=ranges))
    assert not [c for c in session.components if c[0] in ("interstellar", "nebular")]


def test_double_peaked_emission_is_two_components(plain):
    session = weighed(plain, [(STAR - 150.0, 110.0, -2.2), (STAR + 150.0, 110.0, -2.0)])
    peaks = own_lines(session, -1)
    velocities = np.array([v for v, _ in peaks])
    assert np.sum(np.abs(velocities - (STAR - 150.0)) < 15.0) == 2
    assert np.sum(np.abs(velocities - (STAR + 150.0)) < 15.0) == 2
    assert len(peaks) == 4 and all(DOUBLE_PEAK in flags for _, flags in peaks)
    assert any("double peak in H I" in w for w in session.warnings)
    assert not [c for c in session.claims if c.origin == "nebular" and c.probability > 0.5]


def test_p_cygni_is_emission_with_absorption_on_its_blue_side(plain):
    session = weighed(plain, [(STAR + 30.0, 150.0, -3.0), (STAR - 230.0, 90.0, 0.45)])
    bright, dark = own_lines(session, -1), own_lines(session, 1)
    assert len([v for v, _ in bright if abs(v - STAR - 30.0) < 20.0]) == 2
    absorbed = [flags for v, flags in dark if abs(v - STAR + 230.0) < 25.0]
    assert len(absorbed) == 2 and all(P_CYGNI in flags for flags in absorbed)
