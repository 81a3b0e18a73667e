"""How far claims can be trusted, measured on published truths. Slow: run by hand.

    python tests/studies/claims_study.py kgiant|scattered|decoys|shifts|nebula|telluric
    (kgiant=6 runs 6 seeds instead of 30)

Truths and their sources: see tests/truths.py. The last recorded results stand in
tests/studies/RESULTS.md.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "tests")]

from truths import (  # noqa: E402
    KGIANT_COVERAGE,
    SPECTRA,
    TELLURIC_WINDOWS,
    kgiant_table,
    seen_ranges,
    solar_lines,
    upper_bound,
    with_invented,
    within,
)

from linewright.claims.identify import identify  # noqa: E402
from linewright.claims.options import ClaimOptions  # noqa: E402
from linewright.job.options import SolveOptions  # noqa: E402
from linewright.job.solve import solve, solve_features  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.spectra.medium import C_KM_S, vacuum_to_air  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402
from linewright.spectra.velocity import difference, shift  # noqa: E402

SEEDS = 30


def rate(hits, trials):
    return f"{hits}/{trials} = {hits / max(trials, 1):.4f} (95 % upper {upper_bound(hits, trials):.4f})"


def score(session, truth):
    """Columns strict, tolerant, confident, invented, probability as arrays."""
    claims = session.claims
    strict = np.array([c.species == t for c, t in zip(claims, truth)])
    blend = np.array([any(b[0] == t for b in c.blend) for c, t in zip(claims, truth)])
    p = np.array([c.probability for c in claims])
    return strict, strict | blend, p >= 0.95, truth == "", p


def kgiant(seeds=SEEDS):
    """Blind velocity, complete window, sigma 0.01 A, 10 % invented features."""
    rng, table, velocities = np.random.default_rng(1), [], []
    for seed in range(seeds):
        v = float(rng.uniform(-300, 300))
        features, truth = kgiant_table(np.random.default_rng(seed), velocity=v)
        options = SolveOptions(coverage=seen_ranges(KGIANT_COVERAGE, v))
        session = solve_features(features, options=options)
        velocities.append(session.velocity.velocity - v)
        table.append(score(session, truth))
    strict, tolerant, sure, invented, p = (np.concatenate(c) for c in zip(*table))
    real = ~invented
    print(f"top-1 strict {strict[real].mean():.4f} tolerant {tolerant[real].mean():.4f}")
    print(f"confident {sure[real].mean():.4f}; agreement, invented wrong {tolerant[sure].mean():.4f}")
    print("invented made confident", rate(int(np.sum(sure & invented)), int(invented.sum())))
    print(f"velocity error rms {np.std(velocities):.3f} mean {np.mean(velocities):+.3f} km/s")
    reliability(p, tolerant & real)


def reliability(p, right):
    print("bin      mean P   agreement  n")
    for low in np.arange(0.0, 1.0, 0.1):
        here = (p >= low) & ((p < low + 0.1) | ((low > 0.85) & (p <= 1)))
        if here.any():
            print(f"{low:.1f}-{low + 0.1:.1f}  {p[here].mean():.3f}    {right[here].mean():.3f}      {here.sum()}")


def scattered(seeds=SEEDS):
    """20, 50, 200 random features, 10 % invented, no coverage, blind and given velocity."""
    for kept in (20, 50, 200):
        for given in (True, False):
            table = []
            for seed in range(seeds if kept < 200 else max(seeds // 3, 1)):
                features, truth = kgiant_table(np.random.default_rng(seed), keep=kept)
                options = SolveOptions(velocity=0.0 if given else None)
                table.append(score(solve_features(features, options=options), truth))
            strict, tolerant, sure, invented, _ = (np.concatenate(c) for c in zip(*table))
            how = "given" if given else "blind"
            print(
                f"{kept} features, velocity {how}: top-1 {tolerant[~invented].mean():.3f}, confident "
                f"{sure[~invented].mean():.3f}, agreement {tolerant[sure].mean():.4f}, invented",
                rate(int(np.sum(sure & invented)), int(invented.sum())),
            )


def sun():
    return read_spectrum(SPECTRA / "sun_r47000.txt", medium="air")


def decoys(seeds=SEEDS):
    """Invented features among the Sun's: depths and widths of real ones."""
    session, total, sure = solve(sun()), 0, 0
    catalogue = load_catalogue()
    for seed in range(seeds):
        features, invented = with_invented(
            session.features, session.spectrum.coverage, np.random.default_rng(seed)
        )
        found = identify(
            features, session.spectrum.coverage, catalogue,
            ClaimOptions(temperature=session.temperature_k),
        )  # fmt: skip
        p = np.array([c.probability for c in found.claims])
        total, sure = total + int(invented.sum()), sure + int(np.sum(p[invented] >= 0.95))
    print("Sun: invented made confident", rate(sure, total))


def shifts():
    """The Sun at three velocities: recovered velocity and unchanged names."""
    spectrum = sun()
    start = time.perf_counter()
    rest = solve(spectrum)
    print(f"wall time of one solve {time.perf_counter() - start:.1f} s")
    air = vacuum_to_air(rest.features.wave / (1 + rest.velocity.velocity / C_KM_S))
    sure = np.array([c.probability >= 0.95 for c in rest.claims])
    outside = ~within(air, TELLURIC_WINDOWS)
    print(f"{len(sure)} features, confident {sure.mean():.4f}, outside telluric {sure[outside].mean():.4f}")
    published(rest, air)
    for v in (137.3, -412.8, 260.0):
        moved = solve(shift(spectrum, v))
        error = difference(moved.velocity.velocity, rest.velocity.velocity) - v
        places = moved.features.wave / (1 + v / C_KM_S)
        nearest = np.argmin(np.abs(places[None, :] - rest.features.wave[:, None]), axis=1)
        same = np.array([moved.claims[j].species == c.species for j, c in zip(nearest, rest.claims)])
        print(f"{v:+.1f} km/s: error {error:+.4f} km/s, names unchanged {same.mean():.4f}")


def published(session, air):
    """Every confident claim on a published solar line that disagrees is printed."""
    found = right = sure = wrong = lines = 0
    absorbing = session.features.sign > 0
    for wave, ew, species in solar_lines():
        if within([wave], TELLURIC_WINDOWS)[0]:
            continue
        lines += 1
        distance = np.where(absorbing, np.abs(air - wave), np.inf)
        i = int(np.argmin(distance))
        if distance[i] > 0.06:
            print(f"  not found: {wave} {species} {ew} mA, nearest {air[i]:.3f}")
            continue
        claim = session.claims[i]
        found, right = found + 1, right + (claim.species in species)
        sure += claim.probability >= 0.95
        if claim.species not in species:
            wrong += claim.probability >= 0.95
            print(f"  differs: {wave} {sorted(species)} called {claim.species} P {claim.probability:.3f}")
    print(
        f"published lines {lines}: found {found / lines:.4f}, named right {right / found:.4f}, "
        f"confident {sure / found:.4f}, confident and wrong {wrong}"
    )


def telluric():
    """What the features at 6276-6320 A of the Sun were called."""
    session = solve(sun())
    print("components", session.components)
    air = vacuum_to_air(session.features.wave)
    for i in np.nonzero((air > 6276) & (air < 6320))[0]:
        c, f = session.claims[i], session.features
        print(f"{air[i]:.3f} depth {f.depth[i]:.3f} {c.species:6s} {c.origin:9s} P {c.probability:.3f}")


AREAS = {"lv6": 2, "lv1": 3, "hh-203": 4, "big-arc": 6, "orion-s": 7}


def nebula_list(strongest_class):
    """(ion, air wavelength) of the data authors' identifications in emission, without
    unidentified rows and diffuse bands."""
    lines = []
    for line in (SPECTRA / "nebula" / "basic-line-list.tab").read_text().splitlines()[1:]:
        cells = line.split("\t")
        named = "XXX" not in cells[0] and "DIB" not in cells[0].upper()
        if named and 0 < float(cells[3]) <= strongest_class:
            lines.append((cells[0].strip(), float(cells[2])))
    return lines


def nebula():
    """Detected listed features of five areas of an H II region, by class of strength."""
    path = SPECTRA / "nebula" / "full-spectrum-by-area.tab"
    tally = {k: np.zeros(5, int) for k in (3, 4, 5)}
    for column in AREAS.values():
        session = solve(read_spectrum(path, medium="air", columns=f"wave=11,flux={column}"))
        rest = vacuum_to_air(session.features.wave / (1 + session.velocity.velocity / C_KM_S))
        for k in tally:
            tally[k] += nebula_score(session, rest, nebula_list(k))
    for k, (listed, found, right, sure, both) in tally.items():
        print(
            f"classes 1-{k}: listed {listed}, found {found}, named right {right / found:.3f}, "
            f"confident {sure / found:.3f}, agreement {both / sure:.4f}"
        )


def nebula_score(session, rest, lines):
    """Counts listed, found, right, confident, confident and right."""
    places, emission = np.array([w for _, w in lines]), session.features.sign < 0
    out = np.zeros(5, int)
    for ion, wave in lines:
        out[0] += 1
        distance = np.where(emission, np.abs(rest - wave), np.inf)
        i = int(np.argmin(distance))
        if distance[i] > 1.0 or places[np.argmin(np.abs(places - rest[i]))] != wave:
            continue
        claim = session.claims[i]
        right = claim.species == ion or any(b[0] == ion for b in claim.blend)
        sure = claim.probability >= 0.95
        out[1:] += (1, right, sure, right and sure)
    return out


if __name__ == "__main__":
    for name in sys.argv[1:] or ["kgiant"]:
        function, _, seeds = name.partition("=")
        print(f"## {name}", flush=True)
        globals()[function](*([int(seeds)] if seeds else []))
