"""The velocities at which a spectrum's lines stand: star, nebula, air, interstellar gas."""

from __future__ import annotations

import numpy as np

from ..lines.catalogue import ORIGINS
from ..spectra.medium import C_KM_S
from .entries import group
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
# A table that is no selection by strength: which of a thousand lines it holds is told by
# their strengths only, so its few features vote with all that is known. Tuned on the K giant's
# list with seeds that are not those scored.
SCATTERED_OUTLIERS = 0.05  # such features are listed, or measured one by one
DOUBTED = 0.2  # the same in telluric bands
SCATTERED_TAIL, SCATTERED_ERROR = 0.1, 0.003  # share of tail; list error beside it, Angstrom
LINES_BEHIND = 2.0  # times the features that must at least stand behind it
NO_WEIGHT = 0.01  # of the largest: such lines do not matter
MERGING, MERGED = 0.08, 0.5  # Angstrom; power of a line's share of what lies so near
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


def vote_sigma(features, rows, list_error: float = 0.005):
    """Errors for voting: centroid, a share of the width, and a list error (Angstrom)."""
    width = np.nan_to_num(features.fwhm[rows])
    return np.sqrt(position_error(features)[rows] ** 2 + (0.03 * width) ** 2 + list_error**2)


def stellar_vote(features, catalogue, strength, velocity_range) -> Vote:
    """Vote of the strongest absorption features outside telluric bands.

    strength: (n,) absorption strength per catalogue row (NaN elsewhere).
    """
    outside = ~inside(features.wave, TELLURIC_RANGES)
    rows = strongest(features, 1, where=outside)
    if len(rows) < 3:
        rows = strongest(features, 1)
    return _vote(features, rows, catalogue, strength, velocity_range)


def scattered_vote(features, catalogue, strengths, velocity_range, behind: int) -> Vote:
    """Vote of the features of a table that is no selection by strength.

    strengths: of ``stellar_vote``, one or more, equally likely (a dwarf's pressure, a
    giant's); behind: lines that at least stand behind the table.
    """
    rows = strongest(features, 1)
    lines = _lines(features, rows, catalogue, strengths[0], velocity_range)
    if len(rows) == 0 or len(lines) == 0:
        return _no_vote(velocity_range)
    wave, power = catalogue.wave[lines], [strength[lines] for strength in strengths]
    weight = np.mean([_scattered_weights(wave, s, LINES_BEHIND * behind) for s in power], axis=0)
    keep = weight > NO_WEIGHT * np.max(weight)
    place = features.wave[rows]
    return vote(
        (place, vote_sigma(features, rows, SCATTERED_ERROR)),
        (wave[keep], weight[keep]),
        velocity_range,
        np.where(inside(place, TELLURIC_RANGES), DOUBTED, SCATTERED_OUTLIERS),
        SCATTERED_TAIL,
    )


def _scattered_weights(wave, strength, expected: float):
    """Prior that a line is in the table: it shows, and leads what lies near it."""
    out = np.zeros(len(wave))
    weight = line_weights(np.where(np.isfinite(strength), strength, -np.inf), expected)
    some = np.nonzero((weight > NO_WEIGHT * np.max(weight)) & np.isfinite(strength))[0]
    if len(some):
        kind, half = np.zeros(len(some), dtype=int), np.full(len(some), MERGING)
        near = group(wave[some], strength[some], kind, half)
        out[some] = weight[some] * near.share**MERGED
    return out


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


def _vote(features, rows, catalogue, strength, velocity_range, outliers=OUTLIER_SHARE) -> Vote:
    lines = _lines(features, rows, catalogue, strength, velocity_range)
    if len(rows) == 0 or len(lines) == 0:
        return _no_vote(velocity_range)
    weight = line_weights(strength[lines], 1.5 * len(rows))
    keep = weight > 0.01
    return vote(
        (features.wave[rows], vote_sigma(features, rows)),
        (catalogue.wave[lines][keep], weight[keep]),
        velocity_range,
        outliers,
    )


def _no_vote(velocity_range) -> Vote:
    nothing = np.array([velocity_range[0], velocity_range[1]], dtype=float)
    return Vote(float("nan"), float("nan"), 0.0, (), nothing, np.zeros(2))


def _lines(features, rows, catalogue, strength, velocity_range):
    """Catalogue rows of known strength that the features of ``rows`` could be."""
    usable = np.nonzero(np.isfinite(strength))[0]
    if len(rows) == 0:
        return usable[:0]
    low = features.wave[rows].min() / (1 + velocity_range[1] / C_KM_S) - 1.0
    high = features.wave[rows].max() / (1 + velocity_range[0] / C_KM_S) + 1.0
    return usable[(catalogue.wave[usable] >= low) & (catalogue.wave[usable] <= high)]


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
