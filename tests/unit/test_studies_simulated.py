"""The simulator of the studies: the same seed gives the same star, and the truth is the star's."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

STUDIES = Path(__file__).resolve().parents[1] / "studies"


@pytest.fixture(scope="module")
def simulated():
    sys.path.insert(0, str(STUDIES))
    import simulated

    yield simulated
    sys.path.remove(str(STUDIES))


def one_star(simulated, velocity: float = 30.0, seed: int = 4):
    star = simulated.star(5600.0, velocity, 4.0)
    return simulated.observed(
        simulated.scene("test", seed, [star], [(5160.0, 5230.0)], 40000.0, 200.0)
    )


def test_the_same_seed_gives_the_same_star(simulated):
    one, two = one_star(simulated), one_star(simulated)
    assert np.array_equal(one.spectrum.segments[0].flux, two.spectrum.segments[0].flux)
    other = one_star(simulated, seed=5)
    assert not np.array_equal(one.spectrum.segments[0].flux, other.spectrum.segments[0].flux)


def test_the_truth_stands_where_the_light_is_missing(simulated):
    """Mg b at 5172.68 and 5183.60 A (air; NIST) dips at +30 km/s and is Mg I in the truth."""
    seen = one_star(simulated)
    segment = seen.spectrum.segments[0]
    for air in (5172.684, 5183.604):
        place = float(simulated.air_to_vacuum(air)) * (1 + 30.0 / 299792.458)
        assert np.interp(place, segment.wave, segment.flux) < 0.4
        shares = simulated.shares(seen, place, 0.3)
        assert max(shares, key=shares.get) == "Mg I"
        assert sum(shares.values()) == pytest.approx(1.0)
        assert set(simulated.shares(seen, place, 0.3, by="origin")) == {"stellar"}


def test_the_engines_list_lacks_a_twentieth_but_no_hydrogen(simulated):
    whole, less = simulated.load_catalogue(), simulated.engine_list(1)
    assert 1 - len(less) / len(whole) == pytest.approx(0.05, abs=0.003)
    code = whole.species_names.index("H I")
    assert np.sum(less.species == code) == np.sum(whole.species == code)
    assert less.identity != whole.identity


def test_bounds_are_clopper_and_pearsons(simulated):
    """No hit in 60: 1 - 0.05^(1/60) = 0.0487, from the binomial itself."""
    assert simulated.upper_bound(0, 60) == pytest.approx(1 - 0.05 ** (1 / 60))
    assert simulated.lower_bound(60, 60) == pytest.approx(0.05 ** (1 / 60))
    assert simulated.lower_bound(0, 60) == 0.0
