"""The velocities at which a spectrum's lines stand: star, nebula, air, interstellar gas."""

from __future__ import annotations

import numpy as np

from ..lines.catalogue import ORIGINS
from ..spectra.medium import C_KM_S
from .features_in import position_error
from .problem import inside
from .voting import OUTLIER_SHARE, Vote, line_weights, summarise, vote

VOTERS = 240  # strongest features that vote
TELLURIC_RANGES = np.array(  # vacuum Angstrom; O2 and H2O bands (method: required lists)
    [
        [5874.0, 6002.0],
        [6276.0, 6323.0],
        [6465.0, 6605.0],
        [6865.0, 6965.0],
        [7100.0, 7420.0],
        [7590.0, 7715.0],
        [8080.0, 8420.0],
        [8850.0, 9950.0],
        [10700.0, 11100.0],
    ]
)
ORDINARY_SHIFT = 33.0  # km/s: the largest barycentric correction, with the Earth's rotation
MOSTLY_STELLAR = 0.8  # share of the features in telluric bands that are the star's
CLEAR = 0.9  # share of its blend from which a line stands alone
UNUSUAL = 40.0  # log-likelihood an extraordinary shift must make up for
FRAME_SHIFT = {"topocentric": 1.5, "geocentric": 1.5, "heliocentric": 33.0,
               "barycentric": 33.0}


def typical_width(features) -> float:
    """Median FWHM of the features in km/s; 0 where none is measured."""
    known = np.isfinite(features.fwhm) & (features.fwhm > 0)
    if not np.any(known):
        return 0.0
    return float(C_KM_S * np.median(features.fwhm[known] / features.wave[known]))


def strongest(features, sign: int, count: int = VOTERS, where=None):
    """Row indices of the ``count`` most significant features of one sign: by equivalent
    width, else by depth; spread evenly over the table where neither is measured."""
    rows = np.nonzero((features.sign == sign) if where is None else (features.sign == sign) & where)[0]
    if len(rows) <= count:
        return rows
    weight = np.abs(np.nan_to_num(features.ew[rows]))
    if not np.any(weight):
        weight = np.abs(np.nan_to_num(features.depth[rows]))
    weight = weight + 1e-3 * np.nan_to_num(features.significance[rows])
    if not np.any(weight):
        return rows[(np.arange(count) * len(rows)) // count]
    return np.sort(rows[np.argsort(-weight, kind="stable")[:count]])


def vote_sigma(features, rows):
    """Errors for voting: centroid, a share of the width, and a list error of 5 mA."""
    width = np.nan_to_num(features.fwhm[rows])
    return np.sqrt(position_error(features)[rows] ** 2 + (0.03 * width) ** 2 + 0.005**2)


def stellar_vote(features, catalogue, strength, velocity_range, behind: int = 0) -> Vote:
    """Vote of the strongest absorption features outside telluric bands.

    strength: (n,) absorption strength per catalogue row (NaN elsewhere); behind: lines that
    stand behind the table, where the features are no selection by strength.
    """
    outside = ~inside(features.wave, TELLURIC_RANGES)
    rows = strongest(features, 1, where=outside)
    if len(rows) < 3:
        rows = strongest(features, 1)
    return _vote(features, rows, catalogue, strength, velocity_range, behind=behind)


def emission_vote(features, catalogue, velocity_range) -> Vote:
    """Vote of the strongest emission features against the nebular list."""
    rows = strongest(features, -1, 40)
    strength = np.where(catalogue.origin == ORIGINS.index("nebular"), catalogue.emission, np.nan)
    return _vote(features, rows, catalogue, strength, velocity_range)


def telluric_vote(features, catalogue, frame: str, velocity_range) -> Vote:
    """Vote of features in telluric bands against the telluric list."""
    limit = FRAME_SHIFT.get(frame)
    span = velocity_range if limit is None else (-limit, limit)
    rows = strongest(features, 1, 400, where=inside(features.wave, TELLURIC_RANGES))
    strength = np.where(
        catalogue.origin == ORIGINS.index("telluric"), np.log10(catalogue.depth_ref), np.nan
    )
    result = _vote(features, rows, catalogue, strength, span, outliers=MOSTLY_STELLAR)
    return _near_observer(result, limit)


def _near_observer(result: Vote, limit: float | None) -> Vote:
    """Where the frame is not known, shifts no barycentric correction gives must earn it."""
    if limit is not None or not np.isfinite(result.velocity):
        return result
    beyond = np.maximum(np.abs(result.grid) - ORDINARY_SHIFT, 0.0) / ORDINARY_SHIFT
    penalty = np.minimum(20.0 * beyond, UNUSUAL)
    return summarise(result.grid, result.score - penalty, result.width)


def _vote(features, rows, catalogue, strength, velocity_range, **how) -> Vote:
    usable = np.nonzero(np.isfinite(strength))[0]
    if len(rows) == 0 or len(usable) == 0:
        nothing = np.array([velocity_range[0], velocity_range[1]], dtype=float)
        return Vote(float("nan"), float("nan"), 0.0, (), nothing, np.zeros(2))
    low = features.wave[rows].min() / (1 + velocity_range[1] / C_KM_S) - 1.0
    high = features.wave[rows].max() / (1 + velocity_range[0] / C_KM_S) + 1.0
    usable = usable[(catalogue.wave[usable] >= low) & (catalogue.wave[usable] <= high)]
    weight = line_weights(strength[usable], max(1.5 * len(rows), how.get("behind", 0)))
    keep = weight > 0.01
    return vote(
        features.wave[rows],
        vote_sigma(features, rows),
        catalogue.wave[usable][keep],
        weight[keep],
        velocity_range,
        how.get("outliers", OUTLIER_SHARE),
    )


def refine(solution, component: int) -> tuple[float, float]:
    """(shift, error) in km/s of a component from its confident pairs; (0, nan) if too few.

    All of them make the mean, but its error is that of the lines standing clear alone: the
    places of blends hang on the list's strengths and on which of its lines are taken for
    them, which the same list gets wrong together.
    """
    entry_component = solution.problem.entries.component[solution.entry]
    sure = (entry_component == component) & (solution.probability > 0.8)
    sure &= np.abs(solution.offset_sigma) < 3.0
    if np.sum(sure) < 3:
        return 0.0, float("nan")
    wave = solution.problem.features.wave[solution.feature[sure]]
    sigma = C_KM_S * solution.sigma[sure] / wave
    shift = solution.offset_sigma[sure] * sigma
    weight = 1.0 / sigma**2
    mean = float(np.sum(weight * shift) / np.sum(weight))
    scatter = 1.4826 * float(np.median(np.abs(shift - mean) / sigma))
    clear = _clear(solution, sure)
    witnesses = max(float(np.sum(weight[clear])), float(np.max(weight)))
    return mean, float(max(scatter, 1.0) / np.sqrt(witnesses))


def _clear(solution, pairs):
    """Which of the pairs (p,) have a line all but alone in a feature that no other disturbs."""
    share = solution.groups.share[solution.entry[pairs]]
    return (share > CLEAR) & ~solution.problem.features.crowded[solution.feature[pairs]]
