"""Which species the rake shows, their predicted lines as sorted columns, and what moves apart.

The rake stands at the session's velocity. Lines of the air and sky, of clouds, of a second star
or of a star's own emission stand elsewhere; claims say where.
"""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from dataclasses import dataclass

import numpy as np

from ..claims.band_claims import named_bands
from ..lines.catalogue import LineCatalogue
from ..session.model import Session
from ..spectra.medium import to_medium

FOREGROUND = ("telluric", "sky")
CLAIMED = ("firm", "likely", "tentative")
SAME = 0.05  # km/s: velocities nearer than this are one


@dataclass(frozen=True)
class Elsewhere:
    """What does not stand at the session's velocity, and the bands.

    species: (name, km/s) of those whose claims are mostly of another component
    lines: (name, rest vacuum Angstrom, km/s) of lines claimed for a further component
    bands: (molecule, head, low, high, step) of those seen, rest vacuum Angstrom
    origins: (name, origin) of species that most claims put elsewhere than into the star
    """

    species: tuple[tuple[str, float], ...] = ()
    lines: tuple[tuple[str, float, float], ...] = ()
    bands: tuple[tuple[str, float, float, float, float], ...] = ()
    origins: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, eq=False)
class Teeth:
    """Lines of the rake, ascending in rest vacuum wavelength; columns of shape (n,).

    row: index into the species; own: km/s of a line that does not move with the rake, else NaN
    bands: (row, low, high), rest vacuum Angstrom
    """

    wave: np.ndarray
    depth: np.ndarray
    row: np.ndarray
    own: np.ndarray
    bands: tuple[tuple[int, float, float], ...]


def most_claimed(session: Session, low: float, high: float, count: int = 5) -> tuple[str, ...]:
    """Species most often claimed for features between low and high, own-medium Angstrom.

    Only standings from tentative up count. Species of the air and sky come after those of
    the object; ties go by name.
    """
    wave = to_medium(session.features.wave, session.spectrum.medium)
    inside = np.nonzero((wave >= low) & (wave <= high))[0]
    tally = Counter(
        (session.claims[i].origin in FOREGROUND, session.claims[i].species)
        for i in inside
        if session.claims[i].species and session.claims[i].standing in CLAIMED
    )
    ranked = sorted(tally.items(), key=lambda item: (item[0][0], -item[1], item[0][1]))
    return tuple(dict.fromkeys(name for (_air, name), _n in ranked))[:count]


def elsewhere(session: Session) -> Elsewhere:
    """Of claims from tentative up; a species' own velocity is the one most of them have."""
    told: dict[str, dict[float, list[float]]] = defaultdict(lambda: defaultdict(list))
    origins: dict[str, Counter] = defaultdict(Counter)
    for claim in session.claims:
        if claim.standing in CLAIMED:
            line = claim.line
            if line is not None and math.isfinite(line.velocity):
                told[claim.species][line.velocity].append(line.wave)
                origins[claim.species][claim.origin] += 1
    first = {name: counts.most_common(1)[0][0] for name, counts in sorted(origins.items())}
    bands = tuple(named_bands(session.features, session.claims)) if len(session.features) else ()
    return Elsewhere(*_moving_apart(told, session.velocity.velocity), bands,
                     tuple((n, o) for n, o in first.items() if o != "stellar"))


def heads_claimed(session: Session, molecule: str) -> list[float]:
    """Heads of a molecule claimed from tentative up, ascending, own-medium Angstrom at rest."""
    heads = sorted(c.line.wave for c in session.claims
                   if c.origin == "molecular" and c.species == molecule
                   and c.standing in CLAIMED and c.line is not None)
    return to_medium(np.array(heads, dtype=float), session.spectrum.medium).tolist()


def _moving_apart(told: dict, rake: float):
    """(species, lines) of ``Elsewhere``; told: rest wavelengths by species and velocity."""
    species, lines = [], []
    for name, found in sorted(told.items()):
        own = max(found, key=lambda v: (len(found[v]), -abs(v - rake)))
        if abs(own - rake) > SAME:
            species.append((name, own))
        for v, waves in found.items():
            if abs(v - own) > SAME:
                lines += [(name, w, v) for w in dict.fromkeys(waves)]
    return tuple(species), tuple(lines)


def rake_columns(
    catalogue: LineCatalogue,
    depth: np.ndarray,
    species: tuple[str, ...],
    low: float,
    high: float,
    least: float = 0.01,
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """(wave, depth, row) of the lines of ``species`` between low and high, vacuum Angstrom.

    depth: predicted depth of every catalogue line; lines below ``least`` are left out;
    row: index into ``species``
    """
    first, last = np.searchsorted(catalogue.wave, [low, high])
    row_of = np.full(len(catalogue.species_names) + 1, -1)
    for k, name in enumerate(species):
        if name in catalogue.species_names:
            row_of[catalogue.species_names.index(name)] = k
    row = row_of[catalogue.species[first:last]]
    strength = np.nan_to_num(np.abs(depth[first:last]), nan=0.0)
    keep = (row >= 0) & (strength >= least)
    return catalogue.wave[first:last][keep], np.clip(strength[keep], 0, 1), row[keep]


def rake_teeth(columns, species: tuple[str, ...], apart: Elsewhere) -> Teeth:
    """Teeth of ``rake_columns`` with those of other components where they stand, and the heads
    of bands (as deep as the step seen)."""
    wave, depth, row = columns
    own = np.full(len(wave), np.nan)
    place = {name: k for k, name in enumerate(species)}
    for name, velocity in apart.species:
        if name in place:
            own[row == place[name]] = velocity
    more = [(w, _depth_there(columns, place[name], w), place[name], v)
            for name, w, v in apart.lines if name in place]
    bands = [(place[name], *rest) for name, *rest in apart.bands if name in place]
    more += [(head, step, k, np.nan) for k, head, _low, _high, step in bands]
    extra = np.array(more, dtype=float).reshape(-1, 4).T
    wave, depth = np.append(wave, extra[0]), np.append(depth, extra[1])
    order = np.argsort(wave, kind="stable")
    row, own = np.append(row, extra[2].astype(int)), np.append(own, extra[3])
    return Teeth(wave[order], depth[order], row[order], own[order],
                 tuple((k, low, high) for k, _head, low, high, _step in bands))


def _depth_there(columns, row: int, rest: float) -> float:
    """Predicted depth of a line of a row; a short tooth where none is predicted."""
    wave, depth, rows = columns
    here = (rows == row) & (np.abs(wave - rest) < 1e-4)
    return float(depth[here].max()) if here.any() else 0.0
