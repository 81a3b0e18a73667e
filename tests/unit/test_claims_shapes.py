"""Shapes put into the flux of a sample are claimed by name, with the distance of the peaks."""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
from shapes_simulation import bell, disc, seen  # noqa: E402

from linewright.claims.profiles import DOUBLE_PEAK, P_CYGNI, peaks_seen, separation  # noqa: E402
from linewright.job.options import SolveOptions  # noqa: E402
from linewright.job.solve import solve  # noqa: E402
from linewright.publish.ledger import ledger_table  # noqa: E402
from linewright.resources import samples_dir  # noqa: E402
from linewright.spectra.medium import C_KM_S, air_to_vacuum  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402

STAR, HALPHA, POWER = 41.3, 6562.8, 40000.0
PART = SolveOptions(ranges=((6100.0, 7000.0),), velocity=STAR, temperature=9200.0)


def shining(light, veil):
    """The A star with emission of ``light`` (of v, km/s) in H alpha, seen through ``veil``."""
    spectrum = read_spectrum(samples_dir() / "a_star.txt.gz", medium="air", frame="heliocentric")
    segments = []
    for s in spectrum.segments:
        v = C_KM_S * (s.wave / (float(air_to_vacuum(HALPHA)) * (1 + STAR / C_KM_S)) - 1)
        near, u = np.abs(v) < 1500, np.arange(-1600.0, 1601.0)
        flux = s.flux.copy()
        if near.any():
            level = np.quantile(flux[np.abs(v) < 6000], 0.95)
            more = level * np.interp(v[near], u, seen(light(u), C_KM_S / POWER))
            flux[near] = (flux[near] + more) * np.interp(v[near], u, seen(veil(u), C_KM_S / POWER))
        segments.append(replace(s, flux=flux))
    return solve(replace(spectrum, segments=tuple(segments)), options=PART)


def named(session, word):
    return [i for i, c in enumerate(session.claims) if word in c.flags.split()]


def test_a_disc_is_a_double_peak_with_its_separation():
    session = shining(lambda v: disc(v, 2.5, 150.0), lambda v: np.ones(len(v)))
    rows = named(session, DOUBLE_PEAK)
    assert len(rows) >= 2 and {session.claims[i].species for i in rows} == {"H I"}
    apart, error = separation(peaks_seen(session.features, session.claims)[rows[0]])
    assert apart == pytest.approx(310.0, rel=0.05) and 0 < error < 20
    table = ledger_table(session)
    assert float(table["peak_separation"][rows[0]]) == pytest.approx(apart)
    assert float(table["peak_ratio"][rows[0]]) == pytest.approx(1.0, abs=0.1)
    assert np.ma.count(table["peak_ratio"]) == len(peaks_seen(session.features, session.claims))


def test_a_wind_is_a_p_cygni_profile():
    session = shining(lambda v: 3 * bell(v, 30, 220), lambda v: np.exp(-1.2 * bell(v, -230, 90)))
    rows = named(session, P_CYGNI)
    assert sorted(session.features.sign[rows]) == [-1, 1]
    assert all(session.claims[i].species == "H I" for i in rows)
    dark = next(i for i in rows if session.features.sign[i] > 0)
    velocity = C_KM_S * (session.features.wave[dark] / session.claims[dark].line.wave - 1.0)
    assert velocity == pytest.approx(STAR - 230.0, abs=15.0)
