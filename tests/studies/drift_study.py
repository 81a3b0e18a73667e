"""Is a bad wavelength solution seen, and is a good one left alone? Slow: run by hand.

    python tests/studies/drift_study.py simulated [STARS]
    python tests/studies/drift_study.py real

simulated: solar-type stars (tests/star_simulation.py, R 45,000, S/N 150, 4,600-5,800 K) over
windows of 100 to 1,000 A; after measuring, the features are moved by a tilt about the middle (km/s
per 1,000 A) or by a step in one eighth of the window, and identified again with the velocity
blind. real: warnings on the spectra as they are, two of them also with 1 km/s per 1,000 A and
with 0.5 km/s in an eighth of the coverage put into the samples themselves.
"""

from __future__ import annotations

import sys
from dataclasses import replace

import numpy as np
from simulated import rate
from star_simulation import Star, observe
from truths import SPECTRA

from linewright.claims.drift import drift, drift_warning, offsets_of
from linewright.claims.identify import identify
from linewright.claims.options import ClaimOptions
from linewright.errors import LinewrightError
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.spectra.medium import C_KM_S
from linewright.spectra.reading import read_spectrum

WINDOWS = (100.0, 250.0, 500.0, 1000.0)
TILTS = (0.5, 1.0, 2.0)
STEPS = (0.2, 0.3, 0.5)
REAL = (
    ("sun_r47000.txt", {"medium": "air"}), ("mdwarf_r115000_s1d.fits", {}),
    ("ttauri_r40000_blue.fits", {}), ("fstar_hband_r22500.fits", {}), ("f5star_r1800.fits.gz", {}),
    ("gdwarf_r2000_18hdu.fits", {}),
)  # fmt: skip
SPOILT = ("sun_r47000.txt", "ttauri_r40000_blue.fits")
FAULTS = (("as it is", {}), ("tilt 1", {"tilt": 1.0}), ("step 0.5", {"step": 0.5}))


def bent(wave, low: float, high: float, tilt: float = 0.0, step: float = 0.0):
    """Wavelengths with a tilt about the middle of a range, or a step in its fourth eighth."""
    middle, eighth = 0.5 * (low + high), (high - low) / 8
    velocity = tilt * (wave - middle) / 1000.0
    velocity = velocity + step * ((wave > middle - eighth) & (wave < middle))
    return wave * (1.0 + velocity / C_KM_S)


def star_of(k: int, window: float) -> Star:
    temperature = (4600.0, 5000.0, 5400.0, 5800.0)[k % 4]
    low = 4950.0 + 50.0 * (k % 5)
    return Star(temperature, low=low, high=low + window, seed=700 + k)


def simulated(stars: int) -> None:
    catalogue = load_catalogue()
    print("| window (A), pairs | error of the slope | warned of none | "
          + " | ".join(f"tilt {t}" for t in TILTS) + " | " + " | ".join(f"step {s}" for s in STEPS) + " |")
    print("| --- | --- | --- |" + " --- |" * (len(TILTS) + len(STEPS)))
    false = trials = 0
    for window in WINDOWS:
        seen: dict[tuple[str, float], int] = {}
        pairs, errors, pulls = [], [], []
        for k in range(stars):
            star = star_of(k, window)
            spectrum, kept, _ = observe(star, catalogue)
            session = solve(spectrum, kept)
            coverage = session.spectrum.coverage
            low, high = coverage[0][0], coverage[-1][1]
            told = ClaimOptions(temperature=session.temperature_k, frame="rest")
            for kind, size in [("none", 0.0), *(("tilt", t) for t in TILTS), *(("step", s) for s in STEPS)]:
                how = {} if kind == "none" else {kind: size}
                moved = replace(session.features, wave=bent(session.features.wave, low, high, **how))
                found = identify(moved, coverage, kept, told)
                warned = bool(drift_warning(found.solution, found.components))
                seen[kind, size] = seen.get((kind, size), 0) + warned
                if kind == "none":
                    own = offsets_of(found.solution, 0)
                    slope, error = drift(own)
                    pairs.append(len(own))
                    errors.append(error)
                    pulls.append(slope / error)
        false, trials = false + seen["none", 0.0], trials + stars
        row = [f"{seen['tilt', t]}/{stars}" for t in TILTS] + [f"{seen['step', s]}/{stars}" for s in STEPS]
        print(f"| {window:.0f}, {np.median(pairs):.0f} | {np.nanmedian(errors):.2f}, pulls "
              f"{np.nanstd(pulls):.2f} | {seen['none', 0.0]}/{stars} | " + " | ".join(row) + " |", flush=True)
    print("false warnings", rate(false, trials))


def real() -> None:
    for name, options in REAL:
        spectrum = read_spectrum(SPECTRA / name, **options)
        low, high = spectrum.segments[0].wave[0], spectrum.segments[-1].wave[-1]
        low, high = min(low, high), max(low, high)
        for kind, how in FAULTS if name in SPOILT else FAULTS[:1]:
            segments = tuple(replace(s, wave=bent(s.wave, low, high, **how)) for s in spectrum.segments)
            try:
                session = solve(replace(spectrum, segments=segments))
            except LinewrightError as refused:
                print(name, kind, refused)
                continue
            words = [w for w in session.warnings if "drifts" in w]
            firm = sum(c.standing == "firm" for c in session.claims)
            print(f"{name}, {kind}: {firm} firm; {words or 'no warning'}", flush=True)
    nebula()


def nebula() -> None:
    names = (SPECTRA / "nebula" / "full-spectrum-by-area.tab").read_text().splitlines()[0].split()
    for column, name in list(enumerate(names, 1))[1:10]:
        try:
            session = solve(read_spectrum(SPECTRA / "nebula" / "full-spectrum-by-area.tab",
                                          columns={"wave": 11, "flux": column}, medium="air",
                                          frame="topocentric"))
        except LinewrightError as refused:
            print(name, refused)
            continue
        words = [w for w in session.warnings if "drifts" in w]
        print(f"nebula {name}: {words or 'no warning'}", flush=True)


if __name__ == "__main__":
    words = sys.argv[1:] or ["simulated"]
    simulated(int(words[1]) if len(words) > 1 else 8) if words[0] == "simulated" else real()
