"""An M dwarf (Gl 581, M3V): what is abstained from, and every confident claim judged.

    python tests/studies/mdwarf_study.py FOLDER_OF_arve-0.8.3 [all]

The judge is the predicted mask of an M2 dwarf, and of an M5 one, in arve 0.8.3 (MIT; line data
extracted from VALD: test-only, never shipped), molecules among its lines. A claim is borne out
where a line of its species within 0.04 A of the claimed one is the deepest within 0.35 FWHM of
the feature in either mask, a main contributor where it has half that depth or more, minor below,
and unknown where neither mask has it. The same is done 60 km/s away, where the judge should say no:
what he then bears out is chance. Band heads are no lines: those claimed are listed apart. 'all'
prints the lines borne out as well, by species.
"""

from __future__ import annotations

import csv
import io
import sys
import zipfile
from collections import Counter
from pathlib import Path

import numpy as np
from simulated import rate
from truths import SPECTRA

from linewright.errors import InputRefused
from linewright.job.solve import solve
from linewright.lines.species import normal_name
from linewright.spectra.medium import C_KM_S, vacuum_to_air
from linewright.spectra.reading import read_spectrum

NEAR, REACH, HALF = 0.04, 0.35, 0.5
AWAY = 60.0  # km/s
WORDS = ("borne out", "main contributor", "minor", "unknown")


def read_mask(folder: Path, name: str):
    """(vacuum wavelengths, depths, species) of all lines of a mask, molecules as 'TiO'."""
    path = folder / "arve" / "aux_data" / "masks" / f"{name}.csv.zip"
    rows = []
    with zipfile.ZipFile(path) as archive:
        member = next(n for n in archive.namelist() if not n.startswith("__"))
        for row in csv.DictReader(io.StringIO(archive.read(member).decode())):
            rows.append((float(row["wave_vald"]), float(row["depth_vald"]), _name(row["species"])))
    rows.sort()
    wave, depth, species = zip(*rows)
    return np.array(wave), np.array(depth), np.array(species)


def _name(written: str) -> str:
    try:
        return normal_name(written)
    except InputRefused:
        return written.split()[0]


def verdict(mask, species: str, line: float, place: float, width: float):
    """(index into WORDS, deepest line's species there) by one mask; vacuum Angstrom."""
    wave, depth, names = mask
    first, last = np.searchsorted(wave, [line - 2, line + 2])
    wave, depth, names = wave[first:last], depth[first:last], names[first:last]
    mine = (names == species) & (np.abs(wave - line) < NEAR)
    within = np.abs(wave - place) < max(REACH * width, 0.03)
    top = int(np.argmax(np.where(within, depth, -1.0))) if within.any() else -1
    rival = str(names[top]) if top >= 0 else "nothing"
    if not mine.any():
        return 3, rival
    own, best = float(depth[mine].max()), float(depth[top]) if top >= 0 else 0.0
    return (0 if own >= best else 1 if own >= HALF * best else 2), rival


def judged(masks, session, away: float = 0.0):
    """[(row, verdict, deepest rival)] of the confident claims; the kindest of the masks."""
    f, out = session.features, []
    for i, claim in enumerate(session.claims):
        if claim.probability < 0.95 or claim.line is None or claim.origin == "molecular":
            continue
        factor = 1 + away / C_KM_S
        place = f.wave[i] / (1 + claim.line.velocity / C_KM_S) * factor
        answers = [
            verdict(m, claim.species, claim.line.wave * factor, place, f.fwhm[i]) for m in masks
        ]
        out.append((i, *min(answers)))
    return out


def report(session, results, every: bool) -> None:
    f = session.features
    tally, by_species = Counter(), {}
    for i, word, rival in results:
        claim = session.claims[i]
        tally[word] += 1
        by_species.setdefault(claim.species, Counter())[word] += 1
        if word > 0:
            print(f"   {vacuum_to_air(claim.line.wave):.3f} {claim.species} {claim.origin} "
                  f"E_low {claim.line.e_low:.2f} P {claim.probability:.3f} depth "
                  f"{f.depth[i]:.2f}: {WORDS[word]}, deepest there {rival}")
    for species, counts in sorted(by_species.items(), key=lambda x: -sum(x[1].values())):
        print(f"   {species}: " + ", ".join(f"{n} {WORDS[w]}" for w, n in sorted(counts.items())))
    if every:
        listed(session, results)
    n = len(results)
    for word in range(4):
        print(f"{WORDS[word]} {rate(tally[word], n)}")


def listed(session, results) -> None:
    """Air wavelengths of the lines borne out, by species."""
    places: dict[str, list[str]] = {}
    for i, word, _ in results:
        if word == 0:
            claim = session.claims[i]
            places.setdefault(claim.species, []).append(f"{vacuum_to_air(claim.line.wave):.2f}")
    for species, waves in places.items():
        print(f"- {species}: {', '.join(waves)}")


def bands(session) -> None:
    """Band heads claimed with confidence: molecule, head (air), P."""
    for claim in session.claims:
        if claim.origin == "molecular" and claim.probability >= 0.95:
            print(f"   band head {claim.species} {vacuum_to_air(claim.line.wave):.1f} "
                  f"P {claim.probability:.3f}")


def main(folder: str, every: bool = False) -> None:
    session = solve(read_spectrum(SPECTRA / "mdwarf_r115000_s1d.fits"))
    p = np.array([c.probability for c in session.claims])
    f = session.features
    v = session.velocity
    print(f"{len(p)} features, abstained (unclaimed) {np.mean(p < 0.5):.3f}, confident "
          f"{np.mean(p >= 0.95):.3f} ({np.sum(p >= 0.95)}); velocity {v.velocity:.2f} +- "
          f"{v.error:.2f}; components {session.components}; T {session.temperature_k:.0f} K")
    for low in range(3800, 6900, 500):
        here = (f.wave >= low) & (f.wave < low + 500)
        if here.any():
            print(f"   {low}-{low + 500} A: {here.sum()} features, confident {np.mean(p[here] >= 0.95):.3f}")
    bands(session)
    masks = [read_mask(Path(folder), name) for name in ("M2", "M5")]
    report(session, judged(masks, session), every)
    away = Counter(word for _, word, _ in judged(masks, session, AWAY))
    print(f"control {AWAY:.0f} km/s away: borne out {rate(away[0], sum(away.values()))}")


if __name__ == "__main__":
    main(sys.argv[1], "all" in sys.argv[2:])
