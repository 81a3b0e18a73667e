"""Velocities at which features that nothing explains repeat the lines of thin gas.

Interstellar clouds, emission of a star or its surroundings, and absorption in its wind show
few lines, all known beforehand. A velocity is believed when at least two of them stand there
and chance would hardly put them there, or when one alone is far too strong and too well
placed for chance.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.catalogue import ORIGINS
from ..spectra.medium import C_KM_S
from .coincidence import poisson_binomial_tail
from .features_in import position_error
from .populations import EMITTED, INTERSTELLAR, NEBULAR, OUTFLOW, Component, emitted_rows
from .problem import inside

MOST = 3  # components of a kind
CHANCE = 0.003  # expected chance coincidences that two lines or more must beat
OWN_CHANCE = 0.01  # the same for a star's own gas, whose few lines are the first to be expected
LONE_CHANCE = 0.05  # and one alone; what is left of it is the claim's doubt
CLOUD_SPAN = 250.0  # km/s about the spectrum's zero
NEXT_CLOUD = 60.0  # km/s about a cloud within which a single line may show another
STAR_SPAN = 450.0  # km/s about the star, for its own gas
NARROW = 0.1  # Angstrom: lines with worse positions (diffuse bands) do not vote
SAME = 3.0  # km/s: a cloud this close to the star cannot be told from it
LIST_ERROR = 0.003  # Angstrom
CENTRING = 0.12  # of the width: lines of moving gas differ in shape
FORBIDDEN = 2  # confident forbidden lines that make a nebula
ROUGH = 0.2  # of the width: centroids of fits that did not settle
LIKE_DEPTH, LIKE_WIDTH = 0.7, 1.4  # features as deep and as narrow as the one in question
STRONGEST = ("Ca II", "Na I", "K I")  # species whose single line may show a cloud


@dataclass(frozen=True, eq=False)
class _Marks:
    """Features that may show gas and the lines they may show, as pairs: km/s, its error,
    feature row, catalogue row."""

    v: np.ndarray
    sigma: np.ndarray
    feature: np.ndarray
    row: np.ndarray


def _marks(setting, features, rows, middle: float, span: float, centring: float) -> _Marks:
    f, cat = setting.features, setting.catalogue
    feature, row = (a.ravel() for a in np.meshgrid(features, rows, indexing="ij"))
    v = C_KM_S * (f.wave[feature] / cat.wave[row] - 1.0)
    width = centring * np.nan_to_num(f.fwhm[feature])
    rough = np.array(["fallback" in f.flags[i] for i in features], dtype=bool)
    rough = np.repeat(rough, len(rows)) * ROUGH * np.nan_to_num(f.fwhm[feature])
    sigma = np.sqrt(position_error(f)[feature] ** 2 + LIST_ERROR**2 + width**2 + rough**2)
    sigma = C_KM_S * sigma / f.wave[feature]
    near = np.abs(v - middle) < span
    v, sigma, feature, row = v[near], np.maximum(sigma[near], 0.3), feature[near], row[near]
    return _Marks(v, sigma, feature, row)


def _clusters(marks: _Marks, least: int = 2):
    """(mean km/s, error, members) of velocities shared by several lines, most lines first."""
    free = np.ones(len(marks.v), dtype=bool)
    for _ in range(MOST + 3):
        close = np.abs(marks.v[:, None] - marks.v[None, :])
        close = close < 2.5 * np.hypot(marks.sigma[:, None], marks.sigma[None, :])
        lines = [len(set(marks.row[close[i] & free])) if free[i] else 0 for i in range(len(free))]
        if not lines or max(lines) < least:
            return
        best = int(np.argmax(lines))
        members = np.nonzero(close[best] & free)[0]
        free[members] = False
        weight = 1.0 / marks.sigma[members] ** 2
        mean = float(np.sum(weight * marks.v[members]) / np.sum(weight))
        scatter = float(np.sqrt(np.sum(weight * (marks.v[members] - mean) ** 2) / len(members)))
        error = max(1.0, scatter) / np.sqrt(weight.sum())
        yield mean, float(error), members


def _coincidence(setting, features, marks: _Marks, members, span: float) -> float:
    """Expected number of velocities at which so many lines would be hit by chance.

    Of the lines hit, the strongest two, three and so on are tried: the density of features as
    strong as their weakest, away from all lines of the list, gives each line's chance. (The
    exact tail of the Roll call, times the velocities searched and the numbers tried.)
    """
    f = setting.features
    others = np.abs(f.ew[np.setdiff1d(features, marks.feature)])
    length = float(np.sum(np.diff(setting.coverage, axis=1)))
    strength = np.abs(f.ew[marks.feature[members]])
    rows = np.unique(marks.row[members])
    best = np.sort([strength[marks.row[members] == r].max() for r in rows])[::-1]
    reach = 5.0 * float(np.median(marks.sigma[members]))
    places = setting.catalogue.wave[np.unique(marks.row)]
    chances = []
    for k in range(2, len(rows) + 1):
        dense = (np.sum(others >= LIKE_DEPTH * best[k - 1]) + 1.0) / max(length, 1.0)
        rates = np.clip(dense * places / C_KM_S * reach, 1e-9, 1.0)
        chances.append(poisson_binomial_tail(rates, k))
    return float(min(chances) * len(chances) * 2 * span / reach) if chances else 1.0


def find_clouds(setting, solution, stellar_velocity: float) -> list[Component]:
    """Interstellar clouds among the absorption features that the rest leaves unexplained.

    Two resonance lines at one velocity show a cloud; beside a known cloud the strongest lines
    show another alone, if hardly any other open feature is as deep and narrow. A cloud at the
    star's own velocity cannot be told from it and is left out.
    """
    cat, f = setting.catalogue, setting.features
    rows = np.nonzero((cat.origin == ORIGINS.index("interstellar")) & (cat.wave_err < NARROW))[0]
    unexplained = np.nonzero((solution.unlisted > 0.5) & (f.sign > 0))[0]
    if len(rows) == 0 or len(unexplained) == 0:
        return []
    marks = _marks(setting, unexplained, rows, 0.0, CLOUD_SPAN, 0.0)
    clouds, used = [], []
    for mean, error, members in _clusters(marks):
        members = _backed(setting, marks, members, (rows, mean))
        if len(members) == 0 or not _in_the_open(f, marks, members):
            continue
        chance = _coincidence(setting, unexplained, marks, members, CLOUD_SPAN)
        if chance < CHANCE and abs(mean - stellar_velocity) >= SAME and len(clouds) < MOST:
            clouds.append(Component(INTERSTELLAR, mean, error))
            used += marks.feature[members].tolist()
    if clouds and len(clouds) < MOST:
        clouds += _lone_cloud(setting, marks, used, (clouds, stellar_velocity))
    return clouds


def _backed(setting, marks: _Marks, members, where):
    """The members whose species' stronger lines, where these were searched, are members too: a
    cloud that shows Na I D1 shows D2. where: (interstellar rows, km/s)."""
    cat, (rows, mean) = setting.catalogue, where
    place = cat.wave[rows] * (1.0 + mean / C_KM_S)
    missing = rows[inside(place, setting.coverage) & ~np.isin(rows, marks.row[members])]
    strong = cat.loggf[marks.row[members]]
    stronger = cat.loggf[missing][None, :] > strong[:, None]
    alike = cat.species[missing][None, :] == cat.species[marks.row[members]][:, None]
    return members[~np.any(stronger & alike, axis=1)]


def _in_the_open(f, marks: _Marks, members) -> bool:
    """Whether two lines at least stand outside the wings of stronger ones, with fits that
    settled: inside wings the same bump of two strong lines of one species looks like a cloud."""
    words = [set(f.flags[marks.feature[m]].split()) for m in members]
    open_ = [m for m, w in zip(members, words) if not w & {"wing", "fallback"}]
    return len(np.unique(marks.row[open_])) >= 2


def _lone_cloud(setting, marks: _Marks, used, known) -> list[Component]:
    """Another cloud that a single strong line shows beside a known one, with its certainty.

    known: (clouds, the star's velocity).
    """
    clouds, star = known
    cat = setting.catalogue
    strong = [i for i, name in enumerate(cat.species_names) if name in STRONGEST]
    beside = np.min([np.abs(marks.v - c.velocity) for c in clouds], axis=0)
    own = np.min([np.abs(marks.v - c.velocity) for c in clouds], axis=0) > SAME
    open_ = np.isin(cat.species[marks.row], strong) & ~np.isin(marks.feature, used) & own
    open_ &= (beside < NEXT_CLOUD) & (np.abs(marks.v - star) >= SAME)
    best = None
    for i in np.nonzero(open_)[0]:
        chance = _lone_chance(setting, marks, i, used) * 2 * NEXT_CLOUD * len(clouds)
        if chance < LONE_CHANCE and (best is None or chance < best[0]):
            best = (chance, i)
    if best is None:
        return []
    i = best[1]
    return [Component(INTERSTELLAR, float(marks.v[i]), float(marks.sigma[i]),
                      certainty=float(1.0 - best[0]))]


def _lone_chance(setting, marks: _Marks, i: int, used) -> float:
    """Open features as deep and narrow as this one, per km/s, itself and the clouds' left out."""
    f = setting.features
    mine = marks.feature[i]
    others = np.setdiff1d(np.unique(marks.feature), [*used, mine])
    like = np.abs(f.depth[others]) > LIKE_DEPTH * abs(f.depth[mine])
    like &= f.fwhm[others] / f.wave[others] < LIKE_WIDTH * f.fwhm[mine] / f.wave[mine]
    length = float(np.sum(np.diff(setting.coverage, axis=1)))
    per_angstrom = (np.sum(like) + 1.0) / max(length, 1.0)
    return float(per_angstrom * f.wave[mine] / C_KM_S)


def find_emission(setting, solution, components, star: Component) -> list[Component]:
    """Components with the star's own emission, and absorption of its wind, where shown.

    The nebular component goes where hardly a forbidden line is claimed with confidence: what
    it explained then is the star's. Without a star nothing changes.
    """
    f = setting.features
    nebula = [i for i, c in enumerate(components) if c.population == NEBULAR]
    if not nebula or star.certainty <= 0.5 or _forbidden(setting, solution, nebula[0]):
        return components
    rows = emitted_rows(setting.catalogue)
    claimed = np.bincount(
        solution.feature,
        solution.probability * (solution.problem.entries.component[solution.entry] != nebula[0]),
        len(f),
    )
    bright = np.nonzero((claimed < 0.5) & (f.sign < 0))[0]
    shining = _own_gas(setting, bright, rows, star, EMITTED)
    if not shining:
        return components
    dark = np.nonzero((solution.unlisted > 0.5) & (f.sign > 0))[0]
    wind = [c for c in _own_gas(setting, dark, rows, star, OUTFLOW)
            if abs(c.velocity - star.velocity) > _width(setting)]
    return [c for c in components if c.population != NEBULAR] + shining + wind


def _width(setting) -> float:
    """Median FWHM of the features, km/s."""
    f = setting.features
    known = np.isfinite(f.fwhm) & (f.fwhm > 0)
    return float(C_KM_S * np.median(f.fwhm[known] / f.wave[known])) if np.any(known) else 0.0


def _forbidden(setting, solution, nebula: int) -> bool:
    """Whether the nebular component claims at least FORBIDDEN forbidden lines with confidence."""
    e, cat = solution.problem.entries, setting.catalogue
    sure = (solution.probability > 0.9) & (e.component[solution.entry] == nebula)
    names = cat.species[e.row[solution.entry[sure]]]
    return sum(cat.species_names[i].startswith("[") for i in names) >= FORBIDDEN


def _own_gas(setting, features, rows, star: Component, population: int) -> list[Component]:
    if len(features) == 0 or len(rows) == 0:
        return []
    f = setting.features
    marks = _marks(setting, features, rows, star.velocity, STAR_SPAN, CENTRING)
    found, used = [], []
    for mean, error, members in _clusters(marks):
        chance = _coincidence(setting, features, marks, members, STAR_SPAN)
        if chance < OWN_CHANCE and len(found) < MOST:
            spread = CENTRING * np.median(f.fwhm[marks.feature[members]] / f.wave[marks.feature[members]])
            found.append(Component(population, mean, max(error, float(spread) * C_KM_S)))
            used += marks.feature[members].tolist()
    if population == EMITTED and not found:
        return _lone_emission(setting, marks, star)
    return found


def _lone_emission(setting, marks: _Marks, star: Component) -> list[Component]:
    """A single emission line of the list, where few features shine that brightly."""
    f, best = setting.features, None
    for i in range(len(marks.v)):
        mine = marks.feature[i]
        like = (f.sign < 0) & (np.abs(f.ew) > LIKE_DEPTH * abs(f.ew[mine]))
        length = float(np.sum(np.diff(setting.coverage, axis=1)))
        rate = float(np.sum(like)) / max(length, 1.0) * f.wave[mine] / C_KM_S
        chance = rate * 2 * abs(marks.v[i] - star.velocity) * len(np.unique(marks.row))
        if chance < LONE_CHANCE and (best is None or chance < best[0]):
            best = (chance, i)
    if best is None:
        return []
    i = best[1]
    return [Component(EMITTED, float(marks.v[i]), float(marks.sigma[i]), certainty=1.0 - best[0])]
