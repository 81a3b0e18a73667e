"""Where a candidate's siblings are looked for: the star's lines move with the rake, the lines of
the air and of the clouds between the stars do not."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest

from linewright.job.view_siblings import sibling_strips, sibling_velocity
from linewright.lines.loading import load_catalogue
from linewright.resources import samples_dir
from linewright.spectra.reading import read_spectrum


def session_at(velocity, coverage=()):
    found, searched = SimpleNamespace(velocity=velocity), SimpleNamespace(coverage=coverage)
    return SimpleNamespace(
        velocity=found, features=_Empty(), continuum=(), claims=(), spectrum=searched)  # fmt: skip


@pytest.mark.parametrize(("origin", "expected"), [
    ("stellar", 46.3), ("interstellar", 41.3), ("telluric", 41.3),
])  # fmt: skip
def test_only_stellar_siblings_follow_the_rake(origin, expected):
    candidate = SimpleNamespace(origin=origin, velocity=41.3)
    assert sibling_velocity(session_at(40.0), candidate, 45.0) == pytest.approx(expected)


def test_without_a_velocity_the_rake_decides():
    candidate = SimpleNamespace(origin="stellar", velocity=0.0)
    assert sibling_velocity(session_at(float("nan")), candidate, 12.0) == 12.0


def sodium_siblings(session):
    """Strips of interstellar Na I with D1 on trial."""
    star = read_spectrum(samples_dir() / "a_star.txt.gz")
    catalogue = load_catalogue()
    candidate = SimpleNamespace(
        species="Na I", origin="interstellar", wave=5897.558, velocity=9.6,
        depth_predicted=float("nan"))  # fmt: skip
    depth = np.full(len(catalogue), 0.5)
    return sibling_strips(star, session, (catalogue, depth), candidate, 9.6)


def test_siblings_of_an_interstellar_line_rise_from_the_ground_state():
    """Na I lines of 2.1 eV, such as 5682 A, never arise in interstellar gas: both D lines only."""
    strips = sodium_siblings(session_at(41.3))
    assert [round(s.wave, 1) for s in strips] == [5890.0]  # air, NIST ASD 5889.951


@pytest.mark.parametrize(("coverage", "searched"), [
    ((), True), (((5880.0, 5900.0),), True), (((5895.0, 5900.0),), False),
])  # fmt: skip
def test_a_line_outside_the_ranges_asked_for_was_not_searched(coverage, searched):
    """Na D2 (NIST ASD 5889.951 A in air, 5891.583 in vacuum) beside a search about D1."""
    (strip,) = sodium_siblings(session_at(41.3, coverage))
    assert strip.searched == searched


class _Empty:
    """Features of known width, none of them in the strips."""

    fwhm = np.full(5, 0.3)

    def __len__(self):
        return 0
