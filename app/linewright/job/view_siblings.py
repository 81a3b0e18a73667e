"""The strongest other lines of a species, cut out of a spectrum in velocity space."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..lines.catalogue import ORIGINS, LineCatalogue
from ..session.model import Candidate, Session
from ..spectra.medium import C_KM_S, from_medium, to_medium
from ..spectra.spectrum import Spectrum
from .view_searched import searched

COUNT = 6
OWN_LINES = ("telluric", "interstellar")  # origins whose lines are not the star's
WIDEST = 3000.0  # km/s: the wings of hydrogen in a hot star
LEAST_SIGMA = 3.0
MAD_TO_SIGMA = 1.4826  # of a normal distribution


@dataclass(frozen=True, eq=False)
class SiblingStrip:
    """wave: rest wavelength in the spectrum's own medium, Angstrom
    velocity: km/s about the expected place, shape (n,); flux over continuum, shape (n,)
    feature: number of the feature there, or None; said: the species it is claimed for
    predicted: depth 0-1; searched: whether features were looked for there
    """

    wave: float
    velocity: np.ndarray
    flux: np.ndarray
    feature: int | None
    said: str
    predicted: float
    searched: bool = True


def sibling_velocity(session: Session, candidate: Candidate, rake: float) -> float:
    """km/s at which a candidate's siblings stand: its own component's, moved as far as the
    rake was moved from the spectrum's velocity; the air and the clouds do not move with it."""
    if candidate.origin in OWN_LINES:
        return candidate.velocity
    found = session.velocity.velocity
    moved = rake - found if np.isfinite(found) else np.nan
    return float(candidate.velocity + moved) if np.isfinite(moved) else rake


def sibling_strips(
    spectrum: Spectrum,
    session: Session,
    predicted: tuple[LineCatalogue, np.ndarray],
    candidate: Candidate,
    velocity: float,
    fwhm: float = float("nan"),
) -> list[SiblingStrip]:
    """Up to COUNT strips, strongest predicted lines first chosen, shown by wavelength.

    predicted: catalogue and the predicted depth of each of its lines, shape (n,)
    candidate: the line on trial, which is no sibling of itself
    fwhm: of the feature on trial, Angstrom, where it is wider than most
    Lines outside the samples, where most samples are masked, or too faint for the noise
    there, are passed over.
    """
    (catalogue, depth), species = predicted, candidate.species
    if species not in catalogue.species_names:
        return []
    mine = catalogue.species == catalogue.species_names.index(species)
    if candidate.origin in OWN_LINES:
        mine &= catalogue.origin == ORIGINS.index(candidate.origin)
    rows = _within(spectrum, catalogue, np.nonzero(mine)[0], velocity)
    strength = np.nan_to_num(np.asarray(depth)[rows], nan=0.0)
    half = half_width(session, float(np.median(catalogue.wave[rows])) if len(rows) else 5000.0)
    if fwhm > 0:
        half = min(max(half, 1.5 * fwhm / candidate.wave * C_KM_S), WIDEST)
    strips: list[tuple] = []
    taken = [candidate.wave]
    for row in rows[np.argsort(-strength, kind="stable")]:
        wave = float(catalogue.wave[row])
        if any(abs(wave - other) / wave * C_KM_S < half / 2 for other in taken):
            continue
        cut = _cut(spectrum, session, wave, velocity, half)
        if cut is not None and (_emits(candidate) or _would_show(cut[1], float(depth[row]))):
            strips.append((wave, *cut, float(depth[row])))
            taken.append(wave)
        if len(strips) == COUNT:
            break
    return [_finished(spectrum, session, s, velocity, species) for s in sorted(strips, key=_first)]


def _within(spectrum: Spectrum, catalogue: LineCatalogue, rows, velocity: float):
    """Rows whose lines fall inside the spectrum's whole range."""
    low = min(s.wave[0] for s in spectrum.segments)
    high = max(s.wave[-1] for s in spectrum.segments)
    expected = catalogue.wave[rows] * (1.0 + velocity / C_KM_S)
    return rows[(expected > low) & (expected < high)]


def _first(strip) -> float:
    return strip[0]


def half_width(session: Session, wave: float) -> float:
    """km/s shown on either side: five line widths, 60 to 600."""
    fwhm = session.features.fwhm
    known = fwhm[np.isfinite(fwhm)] if len(fwhm) else fwhm
    if not len(known):
        return 80.0
    return float(np.clip(5.0 * np.median(known) / wave * C_KM_S, 60.0, 600.0))


def _cut(spectrum, session, wave, velocity, half):
    centre = wave * (1.0 + velocity / C_KM_S)
    reach = centre * half / C_KM_S
    for k, segment in enumerate(spectrum.segments):
        first, last = np.searchsorted(segment.wave, [centre - reach, centre + reach])
        if last - first < 5 or segment.wave[0] > centre or segment.wave[-1] < centre:
            continue
        good = ~segment.mask[first:last] & np.isfinite(segment.flux[first:last])
        if good.mean() < 0.7:
            continue
        x = segment.wave[first:last]
        flux = np.where(good, segment.flux[first:last], np.nan) / _level(session, k, x, segment)
        return C_KM_S * (x / centre - 1.0), flux
    return None


def _emits(candidate: Candidate) -> bool:
    """Emission has no predicted depth to weigh against the noise."""
    return not candidate.depth_predicted > 0


def _would_show(flux: np.ndarray, depth: float) -> bool:
    """False where a line of this depth would drown in the scatter of neighbouring samples."""
    steps = np.abs(np.diff(flux[np.isfinite(flux)]))
    if not len(steps) or not np.isfinite(depth):
        return True
    sigma = float(np.median(steps)) * MAD_TO_SIGMA / np.sqrt(2.0)
    return abs(depth) > LEAST_SIGMA * sigma


def _level(session: Session, k: int, x: np.ndarray, segment) -> np.ndarray:
    if k < len(session.continuum) and len(session.continuum[k].wave):
        nodes = session.continuum[k]
        return np.interp(x, nodes.wave, nodes.value)
    first, last = np.searchsorted(segment.wave, [x[0], x[-1]])
    level = np.nanpercentile(segment.flux[first : last + 1], 95)
    return np.full(len(x), level if level > 0 else 1.0)


def _finished(spectrum, session, strip, velocity, species) -> SiblingStrip:
    wave, v, flux, predicted = strip
    own = float(to_medium(wave, spectrum.medium))
    expected = wave * (1.0 + velocity / C_KM_S)
    number, said = _feature_there(session, expected, species)
    return SiblingStrip(own, v, flux, number, said, predicted, searched(session, expected))


def said_now(
    strips: list[SiblingStrip], session: Session, velocity: float, species: str
) -> list[SiblingStrip]:
    """The same strips with what the session now says of the features in them."""
    medium = session.spectrum.medium
    expected = [float(from_medium(s.wave, medium)) * (1.0 + velocity / C_KM_S) for s in strips]
    there = [_feature_there(session, wave, species) for wave in expected]
    return [replace(s, feature=n, said=said) for s, (n, said) in zip(strips, there)]


def _feature_there(session: Session, expected: float, species: str) -> tuple[int | None, str]:
    f = session.features
    if not len(f):
        return None, ""
    reach = np.fmax(np.nan_to_num(0.5 * f.fwhm), 0.03)
    near = np.nonzero(np.abs(f.wave - expected) <= reach)[0]
    claimed = [i for i in near if session.claims[i].species == species]
    chosen = claimed or list(near)
    if not chosen:
        return None, ""
    return int(f.number[chosen[0]]), session.claims[chosen[0]].species
