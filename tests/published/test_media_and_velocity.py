"""Air and vacuum wavelengths and the velocity definition against published values."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air
from linewright.spectra.spectrum import Segment, Spectrum
from linewright.spectra.velocity import combine, difference, shift, velocity_of

# Ciddor P.E. 1996, Appl. Opt. 35, 1566; lambda_air of lambda_vac, Angstrom, as PyAstronomy
# 0.25 computes them with that formula, to 1e-5 A.
CIDDOR = (
    (2000, 1999.35262), (2500, 2499.24653), (3000, 2999.12555), (3500, 3498.99887),
    (4000, 3998.86927), (4500, 4498.73795), (5000, 4998.60552), (5500, 5498.47232),
    (6000, 5998.33856), (6500, 6498.20439), (7000, 6998.06990), (8000, 7997.80022),
    (9000, 8997.52988), (10000, 9997.25909), (11000, 10996.98797),
)
# Hg I, air: Sansonetti, Salit & Reader 1996, Appl. Opt. 35, 74; vacuum: NIST ASD. Air values
# are given to 0.001 A.
MERCURY = (
    (2536.521, 2537.2831), (2893.601, 2894.4492), (2967.283, 2968.1495), (3021.504, 3022.3840),
    (3125.674, 3126.5801), (3131.555, 3132.4626), (3131.844, 3132.7517), (3341.484, 3342.4448),
    (3650.158, 3651.1980), (3654.842, 3655.8833), (3662.887, 3663.9303), (3663.284, 3664.3274),
    (4046.565, 4047.7081), (4077.837, 4078.9883), (4358.335, 4359.5600), (5460.750, 5462.2675),
    (5769.610, 5771.2101), (5790.670, 5792.2757),
)
# Ne I: Sansonetti, Blackwell & Saloman 2004, J. Res. NIST 109, 371; their vacuum column uses
# Peck & Reeder (1972), which differs from Ciddor by 1.1e-4 A at 8000 A.
NEON = (
    (8417.1597, 8419.4727), (8418.4269, 8420.7402), (8463.3565, 8465.6820),
    (8484.4432, 8486.7744), (8495.3595, 8497.6937), (8544.6953, 8547.0428),
    (8571.3528, 8573.7075), (8582.9031, 8585.2609), (8591.2585, 8593.6186),
    (8634.6471, 8637.0189), (8654.3828, 8656.7600), (8679.4936, 8681.8776),
    (8704.1122, 8706.5028),
)


@pytest.mark.parametrize(("vacuum", "air"), CIDDOR)
def test_ciddor_air_of_vacuum(vacuum, air):
    assert float(vacuum_to_air(vacuum)) == pytest.approx(air, abs=6e-6)


def test_vacuum_of_air_5000():
    """Ciddor inverse of 5000 A in air is 5001.39485068 A (Ciddor 1996, PyAstronomy 0.25)."""
    assert float(air_to_vacuum(5000.0)) == pytest.approx(5001.39485068, abs=2e-8)


def test_vacuum_of_the_krypton_line():
    """Kr 6056.125 A in air is 6057.80193 A in vacuum (VACTOAIR documentation, Ciddor 1996)."""
    assert float(air_to_vacuum(6056.125)) == pytest.approx(6057.80193, abs=6e-6)


@pytest.mark.parametrize(("air", "vacuum"), MERCURY)
def test_mercury_pairs(air, vacuum):
    assert float(vacuum_to_air(vacuum)) == pytest.approx(air, abs=6e-4)
    assert float(air_to_vacuum(air)) == pytest.approx(vacuum, abs=6e-4)


@pytest.mark.parametrize(("air", "vacuum"), NEON)
def test_neon_pairs(air, vacuum):
    assert float(vacuum_to_air(vacuum)) == pytest.approx(air, abs=2.5e-4)
    assert float(air_to_vacuum(air)) == pytest.approx(vacuum, abs=2.5e-4)


def test_below_2000_angstrom_is_vacuum():
    wave = np.array([1215.67, 1548.2, 1999.3])
    assert np.array_equal(vacuum_to_air(wave), wave)
    assert np.array_equal(air_to_vacuum(wave), wave)


@pytest.mark.parametrize(
    ("wave", "apart"), [(4000.0, 84.8), (5000.0, 83.6), (6563.0, 82.8), (8500.0, 82.4)])
def test_mistaking_the_medium_looks_like_a_velocity(wave, apart):
    """c (n - 1): 84.8, 83.6, 82.8, 82.4 km/s, computed from Ciddor (1996)."""
    assert float(velocity_of(air_to_vacuum(wave), wave)) == pytest.approx(apart, abs=0.06)


# Optical definition c (lambda/lambda0 - 1) for lambda0 = 6562.819 A: FITS Paper III, Greisen
# et al. 2006, A&A 446, 747 (VOPT), as astropy.units.doppler_optical gives it.
OPTICAL = ((6552.819, -456.8044), (6563.819, 45.6804), (6572.819, 456.8044), (6600, 1698.4444),
           (7000, 19970.6203), (13125.638, 299792.4580))


@pytest.mark.parametrize(("wave", "velocity"), OPTICAL)
def test_velocity_is_the_optical_definition(wave, velocity):
    assert float(velocity_of(wave, 6562.819)) == pytest.approx(velocity, abs=6e-5)


def test_velocities_combine_multiplicatively():
    """100 and 30 km/s give 130.01001 km/s: (1+z1)(1+z2) - 1, not the sum."""
    assert combine(100.0, 30.0) == pytest.approx(130.01001, abs=5e-6)
    assert difference(combine(100.0, 30.0), 30.0) == pytest.approx(100.0, abs=1e-9)


def test_a_shift_acts_on_vacuum_wavelengths():
    """Shifting the air wavelength instead errs by lambda times the change of n over the shift.

    At 5000 A and 300 km/s that is 6.6e-5 A (4 m/s), from the slope of n - 1 between 4500 and
    5500 A in the table of Ciddor's formula above.
    """
    vacuum = air_to_vacuum(np.array([4990.0, 5000.0, 5010.0]))
    ones = np.ones(3)
    spectrum = Spectrum((Segment(vacuum, ones, None, ones == 0),), medium="air")
    moved = shift(spectrum, 300.0).segments[0].wave
    assert np.allclose(moved, vacuum * (1 + 300.0 / C_KM_S), rtol=1e-15)
    table = dict(CIDDOR)
    slope = (4500 / table[4500] - 5500 / table[5500]) / 1000.0
    step = 5000.0 * 300.0 / C_KM_S
    naive = 5000.0 + step
    error = float(vacuum_to_air(moved[1])) - naive
    assert error == pytest.approx(5000.0 * slope * step, rel=0.05)
