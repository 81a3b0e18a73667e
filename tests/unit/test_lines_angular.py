"""Angular and radial algebra of the table builders against closed forms.

Sources: Edmonds 1957, Angular Momentum in Quantum Mechanics (6-j symbols); Bethe & Salpeter
1957 (hydrogen radial integrals); Cowan 1981 (J1K coupling).
"""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

BUILDERS = Path(__file__).resolve().parents[2] / "linedata" / "builders"


@pytest.fixture(scope="module", autouse=True)
def builders_on_the_path():
    sys.path.insert(0, str(BUILDERS))
    yield
    sys.path.remove(str(BUILDERS))


@pytest.mark.parametrize(
    ("args", "value"),
    [((1, 1, 1, 1, 1, 1), 1 / 6), ((0, 1, 1, 1, 1, 1), -1 / 3), ((2, 2, 2, 2, 2, 2), -3 / 70),
     ((0.5, 0.5, 1, 0.5, 0.5, 1), 1 / 6), ((1, 1, 3, 1, 1, 1), 0.0)],
)
def test_six_j_values(args, value):
    from angular import six_j

    assert six_j(*args) == pytest.approx(value, abs=1e-12)


@pytest.mark.parametrize("spin", [0.5, 1.0, 1.5])
def test_shares_of_a_multiplet_add_up(spin):
    from angular import multiplet_fraction

    total = 0.0
    for step1 in range(int(2 * min(1, spin)) + 1):
        for step2 in range(int(2 * min(2, spin)) + 1):
            total += multiplet_fraction(spin, 1, abs(1 - spin) + step1, 2, abs(2 - spin) + step2)
    assert total == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("states", "value"),
    [((1, 0, 2, 1), 2**15 / 3**9), ((2, 0, 3, 1), 9.393), ((2, 1, 3, 2), 22.543),
     ((2, 1, 3, 0), 0.8806)],
)
def test_hydrogen_radial_integrals(states, value):
    from coulomb import coulomb_radial, hydrogen_radial_squared

    assert hydrogen_radial_squared(*states) == pytest.approx(value, rel=2e-3)
    n1, l1, n2, l2 = states
    approximate = coulomb_radial(float(n1), l1, float(n2), l2, 1.0) ** 2
    assert approximate == pytest.approx(hydrogen_radial_squared(*states), rel=1e-6)


def _state(**changes):
    from level_pairs import State

    values = {"row": 0, "core": "2s2.2p.(2P*)", "n": 3, "ell": 2, "scheme": "LS", "big_l": 3.0,
              "spin": 1.0, "parent": 1.0, "j": 4.0, "energy": 0.0, "error": 0.0, "n_eff": 3.0}
    return State(**(values | changes))


@pytest.mark.parametrize("j_up", [3.0, 4.0, 5.0])
def test_recoupling_keeps_the_total_strength(j_up):
    """All J1K levels of one J together take what all LS levels of that J take."""
    from level_pairs import line_strength, mixed_strength

    low, up = _state(), {"n": 4, "ell": 3, "n_eff": 4.0, "j": j_up}
    plain = sum(
        line_strength(low, _state(**up, big_l=float(total)), 2.0)
        for total in (2, 3, 4) if abs(total - 1) <= j_up <= total + 1
    )
    mixed = 0.0
    for parent in (0.5, 1.5):
        for k in range(int(2 * parent) + 1):
            big_k = 3 - parent + k
            if abs(j_up - big_k) == 0.5:
                state = _state(**up, scheme="JK", core="2s2.2p.(2P*<1/2>)", parent=parent,
                               big_l=big_k, spin=0.5)
                mixed += mixed_strength(low, state, 2.0)
    assert mixed == pytest.approx(plain, rel=1e-9)


@pytest.mark.parametrize(
    ("k_low", "j_low", "k_up", "j_up"),
    [(2.5, 3, 3.5, 4), (2.5, 2, 3.5, 3), (2.5, 3, 2.5, 3), (3.5, 3, 4.5, 4)],
)
def test_relative_phases_of_the_expansion(k_low, j_low, k_up, j_up):
    """A J1K line computed through LS states of both levels equals the direct J1K formula."""
    from angular import six_j

    def part(parent, ell, big_k, total, j, spin):
        weight = (2 * parent + 1) * (2 * total + 1) * (2 * big_k + 1) * (2 * spin + 1)
        first = six_j(0.5, 1, parent, ell, big_k, total)
        return weight**0.5 * first * six_j(total, 0.5, big_k, 0.5, j, spin)

    amplitude = 0.0
    for spin in (0, 1):
        for low in (1, 2, 3):
            for up in (2, 3, 4):
                term = part(1.5, 2, k_low, low, j_low, spin) * part(1.5, 3, k_up, up, j_up, spin)
                term *= ((2 * low + 1) * (2 * up + 1)) ** 0.5
                term *= six_j(low, j_low, spin, j_up, up, 1) * six_j(2, low, 1, up, 3, 1)
                amplitude += (-1) ** spin * term
    weights = (2 * j_low + 1) * (2 * j_up + 1)
    direct = (2 * k_low + 1) * (2 * k_up + 1) * six_j(k_low, j_low, 0.5, j_up, k_up, 1) ** 2
    direct *= six_j(2, k_low, 1.5, k_up, 3, 1) ** 2
    assert weights * amplitude**2 == pytest.approx(weights * direct, rel=1e-9)
