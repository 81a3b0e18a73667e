"""Do probabilities come true? Reliability on published and simulated spectra. Slow: by hand.

    python tests/studies/calibration_study.py positions [SEEDS] [keep]
    python tests/studies/calibration_study.py strengths FOLDER_OF_arve-0.8.3 [SEEDS] [keep]
    python tests/studies/calibration_study.py simulated [STARS] [keep]

positions: the K giant's 1,380 published identifications (Hinkle et al. 2000) with 0.01 A noise,
10 % invented features, blind velocity. strengths: the same with depths, the predicted ones of a K5
dwarf (mask of arve 0.8.3, lines from VALD, test-only) with 0.15 dex scatter in log10 d/(1-d);
invented features have depths of real ones. simulated: whole spectra of stars of 3,800-30,000 K as
singles_study.py draws them, at R 15,000 or more and v sin i below 60 km/s, lines perturbed and 5 %
missing from the engine's list; features no line stands behind count as wrong.

A bin is within the goal where |agreement - mean P| <= 0.03 + 2 standard errors. Two standard
errors are given: the binomial one, as if all features were independent, and a jackknife over
blocks that err together: the same 33 A of the K giant at all seeds (they are the same lines under
new noise), or one simulated star. 'keep' stores the figures for calibration_figures.py.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
from kept import keep, wanted
from mdwarf_study import read_mask
from simulated import engine_list, named_right, rate, shares
from singles_study import drawn
from truths import KGIANT_COVERAGE, kgiant_table, seen_ranges

from linewright.job.options import SolveOptions
from linewright.job.solve import solve, solve_features
from linewright.spectra.medium import C_KM_S

EDGES = np.linspace(0.0, 1.0, 11)
SEEDS, STARS, SCATTER, MATCH, BLOCK = 30, 60, 0.15, 0.03, 33.0


def reliability(p, right, group) -> list[dict]:
    """Ten fixed bins: mean P, agreement, standard errors, number, within the goal by each."""
    rows = []
    which = np.minimum((p * 10).astype(int), 9)
    for b in range(10):
        here = which == b
        n = int(here.sum())
        if n == 0:
            continue
        mean, agreement = float(p[here].mean()), float(right[here].mean())
        alone, blocks = _binomial(mean, n), _jackknife(p[here] - right[here], group[here])
        off = abs(agreement - mean) - 0.03
        rows.append({
            "low": float(EDGES[b]), "n": n, "mean": mean, "agreement": agreement,
            "binomial": alone, "blocks": blocks, "within": bool(off <= 2 * alone),
            "within_blocks": bool(off <= 2 * max(alone, blocks)),
        })  # fmt: skip
    return rows


def _binomial(share: float, n: int) -> float:
    return float(np.sqrt(max(share * (1 - share), 1e-4) / n))


def _jackknife(excess, group) -> float:
    """Standard error of a mean, blocks left out one by one."""
    names = np.unique(group)
    if len(names) < 2 or len(excess) < 2:
        return 0.0
    left = np.array([excess[group != g].mean() for g in names if np.any(group != g)])
    return float(np.sqrt((len(left) - 1) / len(left) * np.sum((left - left.mean()) ** 2)))


def pooled(rows) -> float:
    """Calibration error: mean over features of |agreement - mean P| of their bin."""
    n = np.array([r["n"] for r in rows])
    return float(np.sum(n * [abs(r["agreement"] - r["mean"]) for r in rows]) / n.sum())


def show(rows) -> None:
    print("   | bin | mean P | agreement | 2 SE binomial, blocks | features | within, by each |")
    for r in rows:
        said = ", ".join("yes" if r[k] else "no" for k in ("within", "within_blocks"))
        print(f"   | {r['low']:.1f}-{r['low'] + 0.1:.1f} | {r['mean']:.3f} | {r['agreement']:.3f} | "
              f"{2 * r['binomial']:.3f}, {2 * r['blocks']:.3f} | {r['n']} | {said} |")
    print(f"   pooled calibration error {pooled(rows):.4f}", flush=True)


def summary(label, data, stored: bool) -> None:
    """Prints the row of the method's table and the reliability; data: columns strict,
    tolerant, probability, invented, block."""
    strict, tolerant, p, invented, group = (np.concatenate(c) for c in zip(*data))
    real, sure = ~invented, p >= 0.95
    right = tolerant & real
    print(f"{label}: {real.sum()} features, top-1 strict {strict[real].mean():.4f}, tolerant "
          f"{tolerant[real].mean():.4f}; confident {sure[real].mean():.4f}; agreement when "
          f"confident {rate(right[sure].sum(), sure.sum())}; invented or without a line made "
          f"confident {rate((sure & invented).sum(), invented.sum())}; at P >= 0.98: confident "
          f"{(p[real] >= 0.98).mean():.3f}, agreement {right[p >= 0.98].mean():.4f}, invented "
          f"{(p[invented] >= 0.98).mean():.4f}")
    rows = reliability(p, right, group)
    show(rows)
    print("   strict (the named species is the main contributor):")
    hard = reliability(p, strict & real, group)
    show(hard)
    if stored:
        keep(f"reliability {label}", {"tolerant": rows, "strict": hard})


def scored(claims, truth, block):
    strict = np.array([c.species == t for c, t in zip(claims, truth)])
    tolerant = strict | np.array([any(b[0] == t for b in c.blend) for c, t in zip(claims, truth)])
    p = np.array([c.probability for c in claims])
    return strict, tolerant, p, truth == "", block


def depths_of(mask, wave, truth, rng):
    """Predicted depths with scatter; NaN where the mask has no such line; invented features
    take those of real ones."""
    places, depth, names = mask
    out = np.full(len(wave), np.nan)
    for i, name in enumerate(truth):
        first, last = np.searchsorted(places, [wave[i] - MATCH, wave[i] + MATCH])
        mine = depth[first:last][names[first:last] == name]
        if name and len(mine):
            out[i] = mine.max()
    known = out[np.isfinite(out)]
    out = np.where(truth == "", rng.choice(known, len(out)), out)
    m = np.log10(out / (1 - out)) + rng.normal(0, SCATTER, len(out))
    return 1 / (1 + 10.0**-m)


def kgiant(seeds: int, mask=None):
    rng = np.random.default_rng(1)
    for seed in range(seeds):
        v = float(rng.uniform(-300, 300))
        features, truth = kgiant_table(np.random.default_rng(seed), velocity=v)
        rest = features.wave / (1 + v / C_KM_S)
        if mask is not None:
            depth = depths_of(mask, rest, truth, np.random.default_rng([seed, 4]))
            features = replace(features, depth=depth)
        options = SolveOptions(coverage=seen_ranges(KGIANT_COVERAGE, v))
        session = solve_features(features, options=options)
        yield scored(session.claims, truth, (rest / BLOCK).astype(int))


def simulated(stars: int):
    """Sharp-lined, well resolved stars of the study of single stars, in its order."""
    number = done = 0
    while done < stars:
        seen, what = drawn(number, only=lambda w: w["resolution"] > 15000 and w["vsini"] < 60)
        number += 1
        if seen is None:
            continue
        done += 1
        session = solve(seen.spectrum, engine_list(number - 1))
        f, strict, tolerant, nothing = session.features, [], [], []
        for i, claim in enumerate(session.claims):
            by = shares(seen, f.wave[i], f.fwhm[i])
            nothing.append(not by)
            strict.append(bool(by) and claim.species == max(by, key=by.get))
            tolerant.append(bool(by) and named_right(claim, by))
        p = np.array([c.probability for c in session.claims])
        yield (np.array(strict, bool), np.array(tolerant, bool), p, np.array(nothing, bool),
               np.full(len(p), number))


def main(words) -> None:
    stored, which = wanted(words), words[0]
    if which == "positions":
        summary("K giant, positions only", kgiant(int((words[1:] or [SEEDS])[0])), stored)
    elif which == "strengths":
        mask = read_mask(Path(words[1]), "K5")
        seeds = int((words[2:] or [SEEDS])[0])
        summary("K giant, with strengths", kgiant(seeds, mask), stored)
    else:
        summary("simulated stars", simulated(int((words[1:] or [STARS])[0])), stored)


if __name__ == "__main__":
    main(sys.argv[1:] or ["positions"])
