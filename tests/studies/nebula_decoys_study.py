"""Invented emission features in the nebula's areas, and species that are not in its list.

    python tests/studies/nebula_decoys_study.py [SEEDS]

Five areas of an H II region (M 42). Decoys have the widths, fluxes and errors of measured emission
features, stand at least one FWHM from any and inside the coverage, and come to a tenth of the real
ones. A decoy counts as above the local detection limit where its flux over the local noise (the
median flux over significance of the five nearest measured features) passes the cut of the solve.
Then every confident claim in emission whose species the data authors' list (classes 1-7, without
'XXX' and diffuse bands) does not name is printed with its line and its rivals, and with the flux
there in all ten areas (two of them nearly empty of nebula): the night sky shines alike in all,
while the nebula's H beta varies by a factor of fifty.
"""

from __future__ import annotations

import sys
from collections import defaultdict
from dataclasses import fields, replace

import numpy as np
from claims_study import AREAS, nebula_list
from simulated import rate
from truths import SPECTRA

from linewright.claims.identify import identify
from linewright.claims.options import ClaimOptions
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.measure.features import FeatureTable
from linewright.spectra.medium import C_KM_S, vacuum_to_air
from linewright.spectra.reading import read_spectrum

SEEDS, SHARE, NEIGHBOURS = 30, 0.1, 5


def solved(column: int):
    path = SPECTRA / "nebula" / "full-spectrum-by-area.tab"
    return solve(read_spectrum(path, medium="air", columns=f"wave=11,flux={column}"))


def local_noise(features, place: float) -> float:
    """Flux of a feature of significance one at ``place``."""
    near = np.argsort(np.abs(features.wave - place))[:NEIGHBOURS]
    peak = np.abs(features.depth) * features.continuum
    return float(np.median(peak[near] / features.significance[near]))


def with_decoys(session, rng):
    """(FeatureTable, is a decoy, is a decoy above the local detection limit)."""
    f, cut = session.features, session.measurement["threshold"]
    donors = np.nonzero((f.sign < 0) & np.isfinite(f.fwhm) & np.isfinite(f.significance))[0]
    ranges = np.array(session.spectrum.coverage)
    lengths = ranges[:, 1] - ranges[:, 0]
    taken, places, source, above = list(f.wave), [], [], []
    while len(places) < round(SHARE * len(donors)):
        donor = donors[rng.integers(len(donors))]
        low, high = ranges[rng.choice(len(ranges), p=lengths / lengths.sum())]
        x = rng.uniform(low, high)
        if np.min(np.abs(np.array(taken) - x)) <= f.fwhm[donor]:
            continue
        taken.append(x)
        places.append(x)
        source.append(donor)
        peak = abs(f.depth[donor]) * f.continuum[donor]
        above.append(peak / local_noise(f, x) >= cut)
    extra = replace(f.take(np.array(source)), wave=np.array(places))
    return joined(f, extra, np.array(above))


def joined(f, extra, above):
    columns = {}
    for field in fields(FeatureTable):
        one, two = getattr(f, field.name), getattr(extra, field.name)
        columns[field.name] = one + two if field.name == "flags" else np.concatenate([one, two])
    order = np.argsort(columns["wave"], kind="stable")
    table = FeatureTable(**columns).take(order)
    decoy = (np.arange(len(order)) >= len(f))[order]
    high = np.concatenate([np.zeros(len(f), dtype=bool), above])[order]
    return replace(table, number=np.arange(1, len(table) + 1)), decoy, high


def decoys(session, seeds: int) -> np.ndarray:
    """Counts: decoys, confident; above the limit, confident among them."""
    catalogue, n = load_catalogue(), np.zeros(4, int)
    options = ClaimOptions(frame="topocentric")
    for seed in range(seeds):
        table, decoy, high = with_decoys(session, np.random.default_rng(seed))
        found = identify(table, session.spectrum.coverage, catalogue, options)
        sure = np.array([c.probability >= 0.95 for c in found.claims])
        n += (decoy.sum(), np.sum(decoy & sure), high.sum(), np.sum(high & sure))
    return n


def strangers(name: str, session, table) -> None:
    """Adds confident emission claims of species the list lacks to ``table``."""
    listed = {ion for ion, _ in nebula_list(7)}
    f = session.features
    for i, claim in enumerate(session.claims):
        if f.sign[i] < 0 and claim.probability >= 0.95 and claim.species not in listed:
            rest = vacuum_to_air(f.wave[i] / (1 + claim.line.velocity / C_KM_S))
            line = vacuum_to_air(claim.line.wave)
            table[claim.species, claim.origin, round(float(line), 2)].append(
                (name, round(float(rest - line), 2), round(float(f.significance[i]), 1),
                 round(claim.probability, 3), claim.runner_up, claim.blend[:3])
            )  # fmt: skip


def fluxes(place: float, half: float = 6.0):
    """Flux over the local continuum within ``half`` Angstrom (air), in every area."""
    text = (SPECTRA / "nebula" / "full-spectrum-by-area.tab").read_text().splitlines()[1:]
    values = np.array([[float(x) for x in row.split("\t")] for row in text])
    wave, areas = values[:, 10], values[:, :10]
    line = np.abs(wave - place) < half
    side = ~line & (np.abs(wave - place) < half + 10.0)
    return np.sum(areas[line] - np.median(areas[side], axis=0), axis=0) * np.median(np.diff(wave))


def main(seeds: int = SEEDS) -> None:
    total, table = np.zeros(4, int), defaultdict(list)
    for name, column in AREAS.items():
        session = solved(column)
        strangers(name, session, table)
        n = decoys(session, seeds)
        print(f"{name}: decoys confident {rate(n[1], n[0])}; above the local limit {rate(n[3], n[2])}",
              flush=True)
        total += n
    print(f"all: {rate(total[1], total[0])}; above the local limit {rate(total[3], total[2])}")
    print("confident species that the list does not name (line; area, offset A, significance, P, "
          "runner-up, blend)")
    for (species, origin, line), rows in sorted(table.items()):
        print(f"   {species} {line} ({origin}):", *rows)
        print("      flux by area:", *(f"{x:.2g}" for x in fluxes(line)))
    print("H beta by area:", *(f"{x:.2g}" for x in fluxes(4861.3)))


if __name__ == "__main__":
    main(*(int(word) for word in sys.argv[1:]))
