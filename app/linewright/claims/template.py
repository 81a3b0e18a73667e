"""Velocity by cross-correlation with a template of the predicted lines.

Where features blend (R below about 7,000) single features no longer stand at the places of
single lines; the whole spectrum does. The log-likelihood of a shift is -N/2 ln(1 - C^2)
(Zucker 2003, MNRAS 342, 1291). Its curvature knows the noise alone; what the template gets
wrong differs from stretch to stretch, so the error is the jackknife's over stretches (Efron
1982, The Jackknife, the Bootstrap and Other Resampling Plans), with a share of the width for
what all stretches have in common.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..spectra.medium import C_KM_S
from .populations import broad_species
from .problem import inside
from .velocity import TELLURIC_RANGES
from .voting import Vote, refined_peak, summarise

SAMPLES = 6.0  # grid samples per FWHM
SMOOTH = 40.0  # FWHM: slower structure is continuum, not lines
SATURATED_LINES = 0.25  # lines per Angstrom that are about saturated: sets tau = 1
EVIDENCE = 0.5  # independent samples are counted so: the template's misfit is shared
MASKED_SHARE = 0.5
STRETCHES = 10  # about as many pieces of equal length, in ln(wavelength), make the error
SHARED_MISFIT = 0.01  # of the width: what all stretches share; pulls in the template study
H_WINGS = 1500.0  # km/s left out about hydrogen lines
PASCHEN, FAINT_H = 12.2, -1.8  # eV and log gf: Balmer and Paschen lines that show wings


def template_vote(pieces, catalogue, strength, fwhm: float, velocity_range) -> Vote:
    """Log-likelihood over velocity of all pieces of a spectrum together.

    pieces: (wave, depth) arrays of continuum-normalised absorption (1 - flux/continuum,
    NaN where masked) in vacuum Angstrom; strength: per catalogue row, NaN elsewhere;
    fwhm: width of the template's lines, km/s; velocity_range: km/s.
    """
    step = fwhm / SAMPLES / C_KM_S
    low, high = velocity_range
    lags = np.arange(int(np.floor(low / C_KM_S / step)), int(np.ceil(high / C_KM_S / step)) + 1)
    grid = C_KM_S * (np.expm1(lags * step))
    made = [_piece(*piece, catalogue, strength, (step, lags, fwhm)) for piece in _stretches(pieces)]
    made = [piece for piece in made if piece is not None]
    number = sum(piece[3] for piece in made)
    if number < 30 or min(sum(p[1] for p in made), sum(p[2] for p in made)) <= 0:
        return Vote(float("nan"), float("nan"), 0.0, (), grid, np.zeros(len(grid)))
    score = -0.5 * EVIDENCE * (number / SAMPLES) * np.log1p(-(_correlation(made) ** 2))
    vote = summarise(grid, score, fwhm / 2.0)
    return replace(vote, error=_error(made, vote, fwhm))


def _stretches(pieces):
    """The pieces cut so that about ``STRETCHES`` of equal length in ln(wavelength) result."""
    lengths = np.array([np.log(wave[-1] / wave[0]) for wave, _ in pieces])
    for (wave, depth), length in zip(pieces, lengths, strict=True):
        count = max(1, round(STRETCHES * length / float(np.sum(lengths))))
        edges = np.searchsorted(wave, wave[0] * np.exp(length * np.arange(1, count) / count))
        yield from zip(np.split(wave, edges), np.split(depth, edges), strict=True)


def _correlation(made):
    """Correlation coefficient at the lags, of several pieces together; never below 0."""
    cross, own, model = (sum(piece[k] for piece in made) for k in range(3))
    return np.clip(cross / np.sqrt(own * model), 0.0, 0.999)


def _error(made, vote: Vote, fwhm: float) -> float:
    """Jackknife error over the pieces and the shared misfit, km/s; the curvature's where
    there are too few pieces."""
    shared = SHARED_MISFIT * fwhm
    if len(made) < 4:
        return float(np.hypot(vote.error, shared))
    places = []
    near = np.abs(vote.grid - vote.velocity) < fwhm
    for k in range(len(made)):
        score = np.where(near, _correlation(made[:k] + made[k + 1 :]), 0.0)
        places.append(refined_peak(vote.grid, score, int(np.argmax(score)))[0])
    count = len(places)
    return float(np.hypot(np.sqrt((count - 1) * np.var(places)), shared))


def _piece(wave, depth, catalogue, strength, setting):
    """(cross-correlation at the lags, power of data, of template, samples) of one piece."""
    step, lags, fwhm = setting
    good = np.isfinite(depth)
    if np.sum(good) < 20:
        return None
    x = np.arange(np.log(wave[0]), np.log(wave[-1]), step)
    data = np.interp(x, np.log(wave[good]), depth[good])
    weight = np.interp(x, np.log(wave), good.astype(float)) > 1 - MASKED_SHARE
    weight &= ~inside(np.exp(x), TELLURIC_RANGES) & ~_near_hydrogen(x, catalogue)
    if np.sum(weight) < 20:
        return None
    margin = int(max(abs(lags[0]), abs(lags[-1])))
    wide = np.concatenate((x[0] + step * np.arange(-margin, 0), x,
                           x[-1] + step * np.arange(1, margin + 1)))  # fmt: skip
    model = _template(wide, catalogue, strength, fwhm / C_KM_S)
    size = int(SMOOTH * SAMPLES)
    data = _high_pass(data, weight, size) * weight
    model = _high_pass(model, np.ones(len(model), bool), size)
    cross = np.array([model[margin - k : margin - k + len(x)] @ data for k in lags])
    middle = model[margin : margin + len(x)]
    return cross, float(data @ data), float((middle * weight) @ middle), int(np.sum(weight))


def _near_hydrogen(x, catalogue):
    """True near Balmer and Paschen lines, whose wings no narrow template fits."""
    name = catalogue.species_names.index("H I") if "H I" in catalogue.species_names else -1
    rows = (catalogue.species == name) & (catalogue.e_low < PASCHEN) & (catalogue.loggf > FAINT_H)
    near = np.zeros(len(x), dtype=bool)
    for place in np.log(catalogue.wave[rows]):
        near |= np.abs(x - place) < H_WINGS / C_KM_S
    return near


def _template(x, catalogue, strength, fwhm):
    """Summed absorption on the ln(wavelength) grid ``x``: saturating lines, Gaussian width."""
    usable = np.isfinite(strength) & ~np.isin(catalogue.species, broad_species(catalogue))
    place, power = np.log(catalogue.wave[usable]), strength[usable]
    near = (place > x[0]) & (place < x[-1])
    place, power = place[near], power[near]
    if len(place) == 0:
        return np.zeros(len(x))
    count = int(SATURATED_LINES * (np.exp(x[-1]) - np.exp(x[0])))
    ranked = np.sort(power)[::-1]
    tau = 10.0 ** np.clip(power - ranked[min(count, len(ranked) - 1)], -4, 4)
    width = tau / (1.0 + tau) ** 0.75  # linear, then slow growth
    step = x[1] - x[0]
    comb = np.bincount(np.clip(((place - x[0]) / step + 0.5).astype(int), 0, len(x) - 1),
                       width, len(x))  # fmt: skip
    sigma = fwhm / 2.3548 / step
    reach = np.arange(-int(4 * sigma) - 1, int(4 * sigma) + 2)
    kernel = np.exp(-0.5 * (reach / sigma) ** 2)
    return np.convolve(comb, kernel / kernel.sum(), mode="same")[: len(x)]


def _high_pass(values, weight, size: int):
    """Values less their weighted running mean over ``size`` samples."""
    kernel = np.ones(min(size, max(len(values) // 2, 1)))
    total = np.convolve(values * weight, kernel, mode="same")
    mass = np.convolve(weight.astype(float), kernel, mode="same")
    return values - total[: len(values)] / np.maximum(mass[: len(values)], 1.0)
