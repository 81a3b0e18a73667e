"""Which claims a curve of growth may rest on."""

from __future__ import annotations

import numpy as np

from .growth import CleanLines
from .populations import STELLAR

SURE = 0.8  # probability of the line
MAIN = 0.5  # least share of the opacity within the feature
DEEPEST = 0.9  # saturated lines tell of damping, not of excitation
SHALLOW_ERROR = 0.25  # relative error of the depth beyond which a line tells nothing
REACH = 1.5  # FWHM on either side in which other lines add to the depth
OTHERS_ERROR = 0.3  # dex: error of a feature's other lines
NO_LOGGF_ERR = 0.3  # dex, where none is stated
SPOILT = ("wing", "edge", "fallback", "spike")


def clean_lines(solution, catalogue, features, strength=None) -> CleanLines:
    """Confident stellar lines that dominate their features.

    solution: of the mixture; catalogue: whose rows its entries name; features: FeatureTable;
    strength: of its entries where they are better known than to the mixture.
    log gf is raised by what the feature's other lines add at its centre, as predicted: a
    Gaussian of the feature's width weighs their strengths.
    """
    rows, entry, probability = _best(solution)
    strength = solution.strength if strength is None else strength
    share = main_share(solution.problem.entries, strength, entry, features.fwhm[rows])
    row = solution.problem.entries.row[entry]
    depth, depth_err = features.depth[rows], features.depth_err[rows]
    spoilt = np.array([any(w in flag.split() for w in SPOILT) for flag in features.flags], bool)
    good = (probability >= SURE) & (share >= MAIN) & ~spoilt[rows]
    good &= solution.problem.entries.population[entry] == STELLAR
    good &= (depth > 0) & (depth < DEEPEST) & ~(depth_err > SHALLOW_ERROR * depth)
    good &= np.isfinite(catalogue.loggf[row]) & np.isfinite(catalogue.e_low[row])
    row, share, depth = row[good], share[good], depth[good]
    stated = catalogue.loggf_err[row].astype(float)
    error = np.where(np.isfinite(stated) & (stated > 0), stated, NO_LOGGF_ERR)
    return CleanLines(
        catalogue.species[row],
        catalogue.loggf[row] - np.log10(share),
        np.hypot(error, OTHERS_ERROR * (1.0 - share)),
        catalogue.e_low[row].astype(float),
        catalogue.wave[row],
        np.log10(depth / (1.0 - depth)),
        np.nan_to_num(depth_err[good]) / (np.log(10.0) * depth * (1.0 - depth)),
    )


def _best(solution):
    """(feature rows that have pairs, entry of each one's best pair, its probability)."""
    best = np.full(len(solution.problem.features), -1)
    order = np.argsort(solution.probability, kind="stable")
    best[solution.feature[order]] = order
    rows = np.nonzero(best >= 0)[0]
    pair = best[rows]
    return rows, solution.entry[pair], solution.probability[pair]


def tilted_strength(solution, catalogue, lines: CleanLines, theta: float):
    """Strengths of all entries when 5039.8 K/T rises by ``theta`` dex per eV.

    Species with clean ``lines`` turn about those lines' mean excitation, since their level was
    learned from what is seen; the others stay.
    """
    row = solution.problem.entries.row
    names = len(catalogue.species_names)
    count = np.bincount(lines.species, minlength=names)
    mean = np.bincount(lines.species, lines.e_low, names) / np.maximum(count, 1)
    species, chi = catalogue.species[row], catalogue.e_low[row]
    known = (count[species] > 0) & np.isfinite(chi)
    return np.where(known, solution.strength - theta * (chi - mean[species]), solution.strength)


def main_share(entries, strength, entry, fwhm):
    """Share of each entry in the predicted opacity at its own place, (n,), 0 to 1.

    entries, strength: all of them; entry: (n,) indices; fwhm: (n,) Angstrom of the features
    they make (NaN: alone).
    """
    e = entries
    same = np.nonzero(e.population == STELLAR)[0]
    if len(same) == 0 or len(entry) == 0:
        return np.zeros(len(entry))
    wave, power = e.wave[same], 10.0 ** np.clip(strength[same], -10, 10)
    centre = e.wave[entry]
    width = np.where(fwhm > 0, fwhm, 1e-3)
    first = np.searchsorted(wave, centre - REACH * width)
    count = np.searchsorted(wave, centre + REACH * width) - first
    owner = np.repeat(np.arange(len(entry)), count)
    start = np.repeat(first - np.concatenate(([0], np.cumsum(count)[:-1])), count)
    other = start + np.arange(len(owner))
    near = np.exp(-4 * np.log(2.0) * ((wave[other] - centre[owner]) / width[owner]) ** 2)
    total = np.bincount(owner, near * power[other], len(entry))
    own = 10.0 ** np.clip(strength[entry], -10, 10)
    return np.clip(own / np.maximum(total, own), 0.0, 1.0)
