"""The same Ledger measured on another spectrum of the star."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..errors import InputRefused
from ..measure.again import Differences, differences, measure_again
from ..measure.features import FeatureTable
from ..measure.options import MeasureOptions
from ..session.model import ContinuumNodes, HandFit, Session
from ..session.plain import row_from
from ..spectra.medium import C_KM_S
from ..spectra.spectrum import Spectrum
from .hand_fit import Wanted, fitted
from .hand_trace import hand_trace
from .view_session import unsolved_session

SEARCH = 500.0  # km/s either way
STRONGEST = 400  # features of each spectrum that decide the velocity
SURE = 5.0  # sigmas by which the best velocity must stand out of chance


@dataclass(frozen=True, eq=False)
class Again:
    """differences: as ``measure.again`` has them, a row a feature of the session; velocity,
    velocity_err: of the second relative to the first, km/s (error NaN where it was given);
    name, sha256, medium, frame: of the second spectrum."""

    differences: Differences
    velocity: float
    velocity_err: float
    name: str
    sha256: str
    medium: str
    frame: str

    @property
    def factor(self) -> float:
        """The second's wavelengths over the first's."""
        return 1.0 + self.velocity / C_KM_S


def again(session: Session, spectrum: Spectrum, velocity: float | None = None,
          resolution: float | None = None, progress=None) -> Again:
    """Every feature of the session measured where it must stand in ``spectrum``.

    Nothing is searched for; features fitted by hand are fitted with their own profile and
    limits. velocity: of the second relative to the first, km/s; None finds it from the
    features both show. Raises InputRefused where the medium is unknown, no velocity stands
    out, or the spectra share no feature.
    """
    from ..measure.core import measure_spectrum

    _check(session, spectrum)
    error, options = float("nan"), MeasureOptions(resolution=resolution)
    if velocity is None:
        found = measure_spectrum(spectrum, options, progress).features
        velocity, error = relative_velocity(session.features, found)
    known = session.features
    result, measured = measure_again(known, spectrum, velocity, options)
    if not np.any(np.isfinite(result.features.depth)):
        raise InputRefused(spectrum.name or spectrum.path, "shows none of the session's features",
                           "choose a spectrum of the same range")
    if session.fits:
        factor = 1.0 + velocity / C_KM_S
        table = _by_hand(session, spectrum, measured, result.features, factor)
        result = differences(known, table, factor)
    return Again(result, float(velocity), float(error), spectrum.name, spectrum.sha256,
                 spectrum.medium, spectrum.frame)


def relative_velocity(first: FeatureTable, second: FeatureTable) -> tuple[float, float]:
    """(velocity of the second relative to the first, its error), km/s.

    Every pair of strong features votes for the velocity between them; the true one is shared
    by many pairs. Raises InputRefused where no velocity stands out of chance.
    """
    a, b = _strong(first), _strong(second)
    wave, other = first.wave[a], second.wave[b]
    pairs = C_KM_S * (other[None, :] / wave[:, None] - 1.0)
    pairs = pairs[(np.abs(pairs) < SEARCH) & (first.sign[a][:, None] == second.sign[b][None, :])]
    width = C_KM_S * float(np.nanmedian(first.fwhm[a] / wave)) if len(a) else 1.0
    edges = np.arange(-SEARCH, SEARCH + width, max(0.5 * width, 0.1))
    votes = np.histogram(pairs, edges)[0]
    pairs_here = votes[:-1] + votes[1:]
    best = int(np.argmax(pairs_here)) if len(pairs_here) else 0
    chance = float(np.median(pairs_here)) if len(pairs_here) else 0.0
    if not len(pairs) or pairs_here[best] < chance + SURE * np.sqrt(chance + 1.0):
        raise InputRefused("velocity", "no velocity between the two spectra stands out",
                           "give it with --velocity")
    near = pairs[np.abs(pairs - edges[best + 1]) < width]
    for _ in range(5):
        middle = float(np.median(near))
        scatter = 1.4826 * float(np.median(np.abs(near - middle))) + 1e-6
        near = pairs[np.abs(pairs - middle) < max(3.0 * scatter, 0.02 * width)]
    return middle, 1.2533 * scatter / np.sqrt(len(near))


def _strong(features: FeatureTable) -> np.ndarray:
    strength = np.nan_to_num(features.significance)
    return np.sort(np.argsort(-strength, kind="stable")[:STRONGEST])


def _by_hand(session: Session, spectrum, measured, table: FeatureTable, factor: float):
    """``table`` with the fits by hand made again in the second spectrum; NaN where they fail."""
    nodes = tuple(
        ContinuumNodes(np.zeros(0), np.zeros(0)) if s is None
        else ContinuumNodes(s.node_wave, s.node_flux) for s in measured.segments)
    fits = tuple(HandFit(fit.features, tuple(factor * x for x in fit.limits), fit.profile, ())
                 for fit in session.fits)
    there = replace(unsolved_session(spectrum), features=table, continuum=nodes, fits=fits)
    for fit in fits:
        rows = [session.index_of(n) for n in fit.features]
        table = _put(table, rows, _fresh(spectrum, there, fit, rows))
    return table


def _fresh(spectrum, there: Session, fit: HandFit, rows) -> list[FeatureTable] | None:
    if not np.all(np.isfinite(there.features.depth[rows])):
        return None
    try:
        segment = int(there.features.segment[rows[0]])
        about = hand_trace(spectrum, there, segment, *fit.limits)
        wanted = Wanted(fit.features, fit.limits, fit.profile)
        made = {row["number"]: row_from(row) for row in fitted(there, about, wanted).fit["rows"]}
        return [made[n] for n in fit.features]
    except (InputRefused, KeyError):
        return None


def _put(table: FeatureTable, rows, fresh) -> FeatureTable:
    columns, flags = {}, list(table.flags)
    for name in ("wave", "wave_err", "significance", "depth", "depth_err", "fwhm", "fwhm_err",
                 "ew", "ew_err", "continuum"):
        columns[name] = getattr(table, name).copy()
        for k, row in enumerate(rows):
            if fresh is not None:
                columns[name][row] = getattr(fresh[k], name)[0]
            elif name != "wave":
                columns[name][row] = np.nan
    for k, row in enumerate(rows):
        flags[row] = "hand" if fresh is None else fresh[k].flags[0]
    return replace(table, **columns, flags=tuple(flags))


def _check(session: Session, spectrum: Spectrum) -> None:
    if not len(session.features):
        raise InputRefused("session", "holds no features to measure again", "solve it first")
    media = {session.spectrum.medium, spectrum.medium}
    if not media <= {"air", "vacuum"}:
        raise InputRefused(spectrum.name or spectrum.path, "its medium is not known",
                           "decide with --medium air or --medium vacuum")
