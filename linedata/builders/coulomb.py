"""Radial integrals of one electron: exact for hydrogen, Coulomb approximation elsewhere."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache
from math import comb, factorial, lgamma

import numpy as np


@lru_cache(maxsize=None)
def _polynomial(n: int, ell: int) -> tuple[Fraction, ...]:
    """Coefficients of r^(l+1+k) in the unnormalised r R_nl(r) exp(r/n), Z = 1."""
    top = n - ell - 1
    return tuple(
        Fraction((-1) ** k * comb(n + ell, top - k), factorial(k)) * Fraction(2, n) ** (k + ell)
        for k in range(top + 1)
    )


def _norm_squared(n: int, ell: int) -> Fraction:
    return Fraction(2, n) ** 3 * Fraction(factorial(n - ell - 1), 2 * n * factorial(n + ell))


@lru_cache(maxsize=None)
def hydrogen_radial_squared(n1: int, l1: int, n2: int, l2: int) -> float:
    """|<n1 l1| r |n2 l2>|^2 in Bohr radii squared for Z = 1, in exact arithmetic."""
    decay = Fraction(n1 + n2, n1 * n2)
    total = Fraction(0)
    for i, a in enumerate(_polynomial(n1, l1)):
        for k, b in enumerate(_polynomial(n2, l2)):
            power = l1 + l2 + 3 + i + k
            total += a * b * factorial(power) / decay ** (power + 1)
    return float(total * total * _norm_squared(n1, l1) * _norm_squared(n2, l2))


def _series(n_eff: float, ell: int, charge: float) -> np.ndarray:
    """Bates & Damgaard (1949) coefficients a_k of r^(n* - k) exp(-Z r / n*)."""
    size = int(n_eff + 1.5)
    terms = np.ones(size, dtype=np.longdouble)
    for k in range(1, size):
        step = ell * (ell + 1) - (n_eff - k) * (n_eff - k + 1)
        terms[k] = terms[k - 1] * n_eff / (2 * k * charge) * step
    return terms


def _log_norm(n_eff: float, ell: int, charge: float) -> float:
    return n_eff * np.log(2 * charge / n_eff) + 0.5 * (
        np.log(charge) - 2 * np.log(n_eff) - lgamma(n_eff + ell + 1) - lgamma(n_eff - ell)
    )


@lru_cache(maxsize=200000)
def coulomb_radial(n1: float, l1: int, n2: float, l2: int, charge: float) -> float:
    """<n1* l1| r |n2* l2> in Bohr radii by the Coulomb approximation.

    Bates D.R., Damgaard A. 1949, Phil. Trans. A 242, 101: asymptotic series, terms with
    a non-integrable origin dropped. n* are effective quantum numbers, charge the net
    charge seen by the electron. NaN where n* <= l (no such orbital).
    """
    if n1 <= l1 + 0.05 or n2 <= l2 + 0.05:
        return float("nan")
    decay = charge / n1 + charge / n2
    total = np.longdouble(0)
    reference = lgamma(n1 + n2 + 2) - (n1 + n2 + 2) * np.log(decay)
    for i, a in enumerate(_series(n1, l1, charge)):
        for k, b in enumerate(_series(n2, l2, charge)):
            power = n1 + n2 + 1 - i - k
            if power > 0.0:
                log_part = lgamma(power + 1) - (power + 1) * np.log(decay) - reference
                total += a * b * np.exp(np.longdouble(log_part))
    return float(
        total * np.exp(reference + _log_norm(n1, l1, charge) + _log_norm(n2, l2, charge))
    )
