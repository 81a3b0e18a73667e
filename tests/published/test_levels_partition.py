"""Partition functions against the published table and direct sums over NIST levels.

Sources: Barklem & Collet 2016, A&A 588, A96, table 8; direct sums over NIST ASD levels cut
0.1 eV below the limit, made independently of the builders.
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.lines.levels import partition_function

T = (4000.0, 5000.0, 6000.0, 8000.0, 10000.0)
PUBLISHED = {
    "Fe I": (24.613, 27.794, 31.741, 42.827, 59.663),
    "Fe II": (39.153, 43.418, 47.563, 56.478, 66.902),
    "Ca I": (1.0499, 1.1717, 1.4181, 2.6037, 5.6958),
    "Ca II": (2.0735, 2.1990, 2.3895, 2.9171, 3.5603),
    "Na I": (2.0149, 2.0645, 2.2161, 3.4098, 7.0896),
    "Mg I": (1.0034, 1.0168, 1.0492, 1.2128, 1.6443),
    "Mg II": (2.0000, 2.0002, 2.0011, 2.0098, 2.0357),
    "Ti I": (24.400, 29.439, 36.153, 55.323, 83.204),
    "Ti II": (49.789, 55.415, 61.054, 72.368, 83.725),
    "Ba II": (3.4754, 4.1696, 4.8189, 5.9657, 6.9720),
    "Sr II": (2.0512, 2.1503, 2.3112, 2.7870, 3.4019),
}
DIRECT = {  # 4000, 5000, 6000 K
    "Fe I": (24.612, 27.792, 31.736),
    "Fe II": (39.151, 43.415, 47.560),
    "Ca I": (1.050, 1.171, 1.407),
    "Ca II": (2.073, 2.199, 2.389),
    "Mg I": (1.003, 1.017, 1.049),
    "Ti I": (24.398, 29.434, 36.138),
    "Ti II": (49.786, 55.412, 61.050),
    "Ba II": (3.475, 4.169, 4.818),
}


@pytest.mark.parametrize("ion", PUBLISHED)
def test_published_values_at_their_nodes(ion):
    assert partition_function(ion, T) == pytest.approx(PUBLISHED[ion], rel=3e-4)


@pytest.mark.parametrize("ion", DIRECT)
def test_direct_sums_below_6000_kelvin(ion):
    assert partition_function(ion, T[:3]) == pytest.approx(DIRECT[ion], rel=0.01)


def test_between_nodes_the_table_is_smooth():
    grid = np.linspace(3000.0, 9900.0, 300)
    steps = np.diff(np.log(partition_function("Fe I", grid)))
    assert steps.min() > 0 and np.abs(np.diff(steps)).max() < 0.1 * steps.max()


def test_hot_continuation_meets_the_table_at_10000_kelvin():
    for ion in ("Fe II", "Ti II", "Si III", "C III"):
        below, above = partition_function(ion, [9990.0, 10010.0])
        assert above == pytest.approx(below, rel=5e-3)
        assert partition_function(ion, 30000.0) > above * 0.999


def test_ground_weights_where_nothing_else_is_populated():
    """2J+1 of the ground level: C IV and Si IV 2, He I and Mg III 1 at 5,000 K."""
    for ion, weight in (("C IV", 2), ("Si IV", 2), ("He I", 1), ("Mg III", 1)):
        assert partition_function(ion, 5000.0) == pytest.approx(weight, rel=1e-3)


@pytest.mark.parametrize("name", ["CH", "Fe XX"])
def test_unknown_ions_are_refused(name):
    with pytest.raises(InputRefused):
        partition_function(name, 5000.0)


def test_negative_temperature_is_refused():
    with pytest.raises(InputRefused):
        partition_function("Fe I", -5.0)
