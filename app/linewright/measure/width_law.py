"""How the width of the narrowest lines runs with wavelength inside one segment.

ln FWHM of the blocks is followed by the plainest law that serves: constant resolving power,
constant FWHM, or a line or parabola in ln(wavelength). The criterion is BIC = chi2 + k ln n
(Schwarz 1978) of Huber's loss (1964, Ann. Math. Statist. 35, 73), with the robust scatter
about the parabola as error; n counts blocks less their likeness to their neighbours, for
blends widen whole stretches together.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

RESOLVING, FLAT, LINEAR, QUADRATIC = (
    "constant resolving power", "constant FWHM", "linear in ln wavelength",
    "quadratic in ln wavelength",
)
HUBER = 1.345  # sigmas
CLEAR = 10.0  # by which the criterion must prefer a law that bends ("very strong" in the
# words of Kass & Raftery 1995, J. Am. Stat. Assoc. 90, 773, from memory)
FIRM = 0.1  # departure in ln FWHM from a constant that blends in blocks do not make
FEWEST = {LINEAR: 12, QUADRATIC: 24}  # blocks
COVER, PARTS = 0.6, 10  # share of equal parts of the range, in ln wavelength, with blocks in them


@dataclass(frozen=True)
class WidthLaw:
    """ln FWHM(Angstrom) = c0 + c1 x + c2 x^2, x = ln(wave/pivot), between ``low`` and
    ``high`` vacuum Angstrom; constant resolving power beyond, where no block speaks.
    error: one sigma of ln FWHM; blocks: number followed."""

    kind: str
    coefficients: tuple[float, ...]
    pivot: float
    low: float
    high: float
    error: float
    blocks: int

    def at(self, wave) -> np.ndarray:
        """FWHM in Angstrom at ``wave`` (vacuum Angstrom), same shape."""
        wave = np.asarray(wave, dtype=float)
        inside = np.clip(wave, self.low, self.high)
        x = np.log(inside / self.pivot)
        return np.exp(np.polynomial.polynomial.polyval(x, self.coefficients)) * (wave / inside)


def _covered(wave, span) -> float:
    """Share of the range's equal parts in which blocks lie: a few far ones make no run."""
    place = np.log(wave / span[0]) / np.log(span[1] / span[0])
    return len(np.unique(np.clip((place * PARTS).astype(int), 0, PARTS - 1))) / PARTS


def constant_law(wave, fwhm, span, even_log: bool) -> WidthLaw:
    """Constant resolving power, or constant FWHM where the blocks scatter clearly less so.

    wave, fwhm: of the blocks, Angstrom, (b,), b >= 1; span: (first, last) wavelength
    searched; even_log: samples even in ln(wavelength), which tells of an instrument of
    constant resolving power.
    """
    flat, slope = float(np.median(fwhm)), float(np.median(fwhm / wave))
    about_flat, about_slope = np.log(fwhm / flat), np.log(fwhm / wave / slope)
    favoured = 0.4 if even_log else 0.8
    is_flat = np.median(np.abs(about_flat)) < favoured * np.median(np.abs(about_slope))
    rest = about_flat if is_flat else about_slope
    value = (np.log(flat), 0.0) if is_flat else (np.log(slope * span[0]), 1.0)
    return WidthLaw(FLAT if is_flat else RESOLVING, tuple(map(float, value)), *span[:1], *span,
                    _error(rest[np.argsort(wave)], 1), len(wave))


def bent_law(base: WidthLaw, wave, fwhm, span) -> WidthLaw:
    """``base``, or the line or parabola in ln(wavelength) that the blocks clearly prefer.

    wave, fwhm: of the blocks, Angstrom, (b,), ascending; span: searched, Angstrom.
    """
    kinds = [k for k in (LINEAR, QUADRATIC) if len(wave) >= FEWEST[k]]
    if not kinds or _covered(wave, span) < COVER:
        return base
    pivot = float(np.exp(np.mean(np.log(wave))))
    x, y = np.log(wave / pivot), np.log(fwhm)
    fits = [_huber(x, y, 1 + i) for i, _ in enumerate(kinds)]
    rest = y - _run(x, fits[-1])
    sigma, length = max(_scatter(rest), 1e-3), _likeness(rest)
    about_base = y - np.log(base.at(wave))
    about_base = about_base - np.median(about_base)  # its run is on trial, not its height
    best, least = base, _criterion(about_base, sigma, length, 1) - CLEAR
    for kind, fit in zip(kinds, fits, strict=True):
        rest = y - _run(x, fit)
        bic = _criterion(rest, sigma, length, len(fit))
        if bic < least and np.max(np.abs(about_base - rest)) > FIRM:
            best = WidthLaw(kind, tuple(map(float, fit)), pivot, float(wave[0]),
                            float(wave[-1]), _error(rest, len(fit)), len(x))
            least = bic - CLEAR
    return best


def law_error(wave, fwhm) -> float:
    """One sigma of the resolving power of blocks taken as constant, relative."""
    power = np.log(fwhm / wave)
    return _error(power - np.median(power), 1) if len(wave) else float("nan")


def _error(rest, free: int) -> float:
    """One sigma of ln FWHM along a law of ``free`` parameters; NaN from a single value."""
    if len(rest) < 2:
        return float("nan")
    return float(1.2533 * _scatter(rest) * np.sqrt(_likeness(rest) * free / len(rest)))


def _run(x, coefficients):
    return np.polynomial.polynomial.polyval(x, coefficients)


def _scatter(rest) -> float:
    return 1.4826 * float(np.median(np.abs(rest)))


def _huber(x, y, degree: int, rounds: int = 30) -> np.ndarray:
    """Polynomial of least Huber loss by iterated weights, (degree + 1,)."""
    slopes = x[:, None] ** np.arange(degree + 1)
    weight = np.ones(len(x))
    for _ in range(rounds):
        root = np.sqrt(weight)
        found = np.linalg.lstsq(slopes * root[:, None], y * root, rcond=None)[0]
        rest = np.abs(y - slopes @ found)
        weight = np.minimum(1.0, HUBER * max(_scatter(rest), 1e-9) / np.maximum(rest, 1e-12))
    return found


def _criterion(rest, sigma: float, length: float, free: int) -> float:
    u = np.abs(rest) / sigma
    loss = np.where(u < HUBER, u * u, 2.0 * HUBER * u - HUBER**2)
    return float(loss.sum() / length + free * np.log(len(rest) / length))


def _likeness(rest) -> float:
    """Blocks that count as one: (1 + r)/(1 - r) of neighbours' correlation r, at least 1."""
    if len(rest) < 8:
        return 1.0
    held = np.clip(rest - np.median(rest), -3 * _scatter(rest), 3 * _scatter(rest))
    r = float(np.sum(held[1:] * held[:-1]) / max(np.sum(held * held), 1e-300))
    return (1.0 + min(max(r, 0.0), 0.9)) / (1.0 - min(max(r, 0.0), 0.9))
