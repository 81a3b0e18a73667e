"""Line profiles of unit height with analytic derivatives.

Parameters of a component are (a, c, ln s, extra): height, centre, logarithm of the
Gaussian's sigma, and for
    gaussian    nothing;
    voigt       ln g, g the Lorentzian's half width at half maximum: Re w(z) / Re w(i g / (s sqrt 2)),
                z = (x - c + i g) / (s sqrt 2), w the Faddeeva function, w' = 2i/sqrt(pi) - 2 z w;
    rotational  ln v, v the half width of the rotation profile with linear limb darkening 0.6
                (Gray, Observation and Analysis of Stellar Photospheres, eq. 18.14), as a sum
                of Gaussians over its quadrature nodes;
    core-wings  ln g, a Lorentzian of half width g under the Gaussian, half the height each.
"""

from __future__ import annotations

import numpy as np

LIMB = 0.6
EXTRA = {"gaussian": 0, "voigt": 1, "rotational": 1, "core-wings": 1}


def profile(kind: str, x, params):
    """(values (p,), derivatives (p, k)) of one component at x (p,); params (k,), k 3 or 4."""
    return _SHAPES[kind](np.asarray(x, dtype=float), params)


def _gaussian(x, params):
    a, c, s = params[0], params[1], np.exp(params[2])
    u = (x - c) / s
    shape = np.exp(-0.5 * u * u)
    return a * shape, np.stack([shape, a * shape * u / s, a * shape * u * u], axis=1)


def _voigt(x, params):
    from scipy.special import wofz

    a, c, s, g = params[0], params[1], np.exp(params[2]), np.exp(params[3])
    root = s * np.sqrt(2.0)
    z, z0 = (x - c + 1j * g) / root, 1j * g / root
    w, w0 = wofz(z), wofz(z0)
    slope, slope0 = (2j / np.sqrt(np.pi) - 2.0 * v * f for v, f in ((z, w), (z0, w0)))
    top = w0.real
    shape = w.real / top

    def moved(dz, dz0):
        return a * ((slope * dz).real - shape * (slope0 * dz0).real) / top

    return a * shape, np.stack([
        shape, moved(-1.0 / root, 0.0), moved(-z, -z0), moved(1j * g / root, 1j * g / root),
    ], axis=1)


def _rotational(x, params):
    a, c, s, v = params[0], params[1], np.exp(params[2]), np.exp(params[3])
    count = 24 * 2 ** int(np.clip(np.ceil(np.log2(max(4 * v / s, 1.0) / 24)), 0, 5))
    angle = (np.arange(count) + 0.5) * np.pi / count  # Chebyshev nodes: the profile ends steeply
    t, width = np.cos(angle), np.sin(angle)
    weight = (2 * (1 - LIMB) * width + 0.5 * np.pi * LIMB * width**2) * width
    u = (x[:, None] - c - v * t) / s
    part = weight * np.exp(-0.5 * u * u)
    centre = weight * np.exp(-0.5 * (v * t / s) ** 2)
    top = centre.sum()
    shape = part.sum(axis=1) / top
    rows = (part * u).sum(axis=1) / (s * top), (part * u * u).sum(axis=1) / top
    wide = (part * u * v * t).sum(axis=1) / (s * top)
    q = (v * t / s) ** 2
    return a * shape, np.stack([
        shape, a * rows[0], a * (rows[1] - shape * (centre * q).sum() / top),
        a * (wide + shape * (centre * q).sum() / top),
    ], axis=1)


def _core_wings(x, params):
    a, c, g = params[0], params[1], np.exp(params[3])
    core, core_slopes = _gaussian(x, params[:3])
    u = (x - c) / g
    wing = 1.0 / (1.0 + u * u)
    pull = 2.0 * u * wing**2
    slopes = np.c_[0.5 * core_slopes, 0.5 * a * pull * u]
    slopes[:, 0] += 0.5 * wing
    slopes[:, 1] += 0.5 * a * pull / g
    return 0.5 * core + 0.5 * a * wing, slopes


_SHAPES = {
    "gaussian": _gaussian, "voigt": _voigt, "rotational": _rotational, "core-wings": _core_wings,
}


def width_and_area(kind: str, params) -> tuple[float, float]:
    """(FWHM, area per unit height) of one component, Angstrom, read off the profile."""
    s = float(np.exp(params[2]))
    if kind == "gaussian":
        return 2.3548200450309493 * s, float(np.sqrt(2.0 * np.pi)) * s
    half = 3.0 * s + (0.0 if EXTRA[kind] == 0 else 3.0 * np.exp(params[3]))
    reach = half * (1.0 if kind in ("gaussian", "rotational") else 60.0)
    x = np.r_[0.0, np.geomspace(1e-3 * s, 3.0 * reach, 4000)]
    y = profile(kind, x, np.r_[1.0, 0.0, params[2:]])[0]
    fwhm = 2.0 * float(np.interp(-0.5, -y, x))
    area = 2.0 * float(np.sum(0.5 * (y[1:] + y[:-1]) * np.diff(x)))
    if kind in ("voigt", "core-wings"):
        area += 2.0 * float(y[-1] * x[-1])  # the Lorentzian's tail: y falls as 1/x^2
    return fwhm, area
