"""The Roll call as a test of species: power, false alarms, limits, offsets. Slow: run by hand.

    python tests/studies/roll_call_study.py published [SEEDS]
    python tests/studies/roll_call_study.py simulated [SEEDS] [FIRST]

published: the Sun at R 47,000 (lines of Moore, Minnaert & Houtgast 1966 and of Melendez et al.
2014) and the K giant's list (Hinkle et al. 2000) with 0.01 A noise; their published species are
present. Absent are elements whose strongest line at solar abundance is predicted at least 1.2
dex below the weakest detected line (PREDICTED says how far): the engine is told an abundance
that lifts their tenth strongest line to half a dex above it, so that they are expected, at the
true wavelengths first, then with the whole list displaced by 1 to 12 A (the nonsense lists of
Hartoog, Cowley & Cowley 1973), five elements at a time.

simulated: stars of tests/star_simulation.py, 4,000-8,000 K, in which a third of the species is
missing, a third is off by -1 to +0.5 dex and the rest as predicted. Present: the main
contributor of a measured feature, by simulated depth; absent: taken out. Seeds 100 and 101
score verdicts and offsets; the spread of single lines was put into the limits after they had been
seen there, so 102 on score those.
"""

from __future__ import annotations

import sys
from collections import Counter, defaultdict
from dataclasses import replace

import numpy as np
from simulated import rate
from star_simulation import Star, observe
from truths import KGIANT_COVERAGE, SPECTRA, kgiant_lines, kgiant_table, solar_lines

from linewright.claims.identify import identify
from linewright.claims.options import ClaimOptions
from linewright.claims.temperature import electron_pressure
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.lines.strengths import absorption_strength
from linewright.spectra.medium import C_KM_S, air_to_vacuum
from linewright.spectra.reading import read_spectrum

ABSENT = (
    "As I", "Rb I", "Rh I", "Pd I", "Ag I", "Cs I", "Tb II", "Ho I", "Tm I", "Tm II", "Yb I",
    "Lu I", "Hf I", "Ta I", "W II", "Os I", "Ir I", "Pt I", "Au I", "Hg I", "Th I", "Th II",
    "U I", "U II",
)  # fmt: skip
TOGETHER, LIFTED = 5, 0.5
SIM_TEMPERATURES = (4000, 5000, 5800, 6500, 8000)
OFFSETS = (-1.0, -0.6, -0.3, 0.5)
CLASSES = ((1, 1), (2, 2), (3, 5), (6, 10), (11, 10**6))


# ---- published stars ------------------------------------------------------------------------


def margin(catalogue, coverage, features: int, temperature: float) -> dict[str, tuple[float, float]]:
    """(strongest, tenth strongest) line of each absent species in coverage, dex over the weakest
    detected line, at solar abundance."""
    inside = np.any([(catalogue.wave > a) & (catalogue.wave < b) for a, b in coverage], axis=0)
    near = catalogue.take(inside)
    strength = absorption_strength(near, temperature, electron_pressure(temperature))
    known = np.sort(strength[np.isfinite(strength)])[::-1]
    zero = known[min(features, len(known) - 1)]
    found = {}
    for name in ABSENT:
        mine = near.species == near.species_names.index(name)
        own = np.sort(strength[mine & np.isfinite(strength)])[::-1] - zero
        if len(own):
            found[name] = (float(own[0]), float(own[min(9, len(own) - 1)]))
    return found


def displaced(catalogue, names, rng):
    """The catalogue with all lines of each named species moved by one shift of 1 to 12 A."""
    wave = catalogue.wave.copy()
    for name in names:
        shift = rng.uniform(1.0, 12.0) * rng.choice([-1, 1])
        wave[catalogue.species == catalogue.species_names.index(name)] += shift
    moved = replace(catalogue, wave=wave)
    return moved.take(np.argsort(wave, kind="stable"))


def lifted(margins: dict, names) -> tuple[tuple[str, float], ...]:
    """[X/Fe] that bring each element's tenth strongest line to LIFTED over the limit."""
    excess: dict[str, float] = {}
    for name in names:
        symbol = name.split()[0]
        excess[symbol] = max(excess.get(symbol, 0.0), LIFTED - margins[name][1])
    return tuple(excess.items())


def groups(names):
    """Species in groups of TOGETHER, no element twice in a group."""
    count = -(-len(names) // TOGETHER)
    ordered = sorted(names, key=lambda n: n.split()[1])
    return [tuple(ordered[k::count]) for k in range(count)]


def published_star(which: str, catalogue):
    """(function of a seed giving the features, coverage, temperature, {species: lines})."""
    if which == "Sun":
        session = solve(read_spectrum(SPECTRA / "sun_r47000.txt", medium="air"))
        lines = Counter(name for _, _, names in solar_lines() if len(names) == 1 for name in names)
        return lambda seed: session.features, session.spectrum.coverage, 5086.0, lines
    coverage = tuple(tuple(air_to_vacuum(np.array(r)).tolist()) for r in KGIANT_COVERAGE)
    lines = Counter(kgiant_lines()[1].tolist())
    return (
        lambda seed: kgiant_table(np.random.default_rng(900 + seed), invented=0.1)[0],
        coverage, 4300.0, lines,
    )


def published_cases(which: str, seeds: int, catalogue):
    """(Identification, {species: published lines, 0 where absent}) one after the other; the
    first names no absent species: nothing is told there."""
    table, coverage, temperature, lines = published_star(which, catalogue)
    options = ClaimOptions(temperature=temperature)
    for seed in range(seeds if which != "Sun" else 1):
        yield identify(table(seed), coverage, catalogue, options), dict(lines)
    margins = margin(catalogue, coverage, len(table(0)), temperature)
    names = [n for n in ABSENT if n in margins]
    for seed in range(seeds):
        rng = np.random.default_rng([31, seed])
        for some in groups(names):
            moved = displaced(catalogue, some, rng) if seed else catalogue
            told = replace(options, abundances=lifted(margins, some))
            yield identify(table(seed), coverage, moved, told), dict.fromkeys(some, 0)


# ---- simulated stars ------------------------------------------------------------------------


def altered(catalogue, rng):
    """(catalogue of the star, {species: dex}): -inf where taken out."""
    dex = {}
    for name in catalogue.species_names:
        kind = rng.random()
        dex[name] = -np.inf if kind < 1 / 3 else float(rng.choice(OFFSETS)) if kind < 2 / 3 else 0.0
    dex |= {"Fe I": 0.0, "H I": 0.0}
    shift = np.array([dex[n] for n in catalogue.species_names])[catalogue.species]
    there = np.isfinite(shift)
    made = replace(catalogue, loggf=catalogue.loggf + np.where(there, shift, 0.0))
    return made.take(there), dex


def main_species(session, truth, velocity: float, resolution: float) -> Counter:
    """How many measured features each simulated species is the main contributor of."""
    wave, depth, species, _ = truth
    order = np.argsort(wave)
    wave, depth, species = wave[order], depth[order], species[order]
    found: Counter = Counter()
    f = session.features
    for x, w, sign in zip(f.wave / (1 + velocity / C_KM_S), f.fwhm, f.sign):
        width = max(float(np.nan_to_num(w)), x / resolution)
        a, b = np.searchsorted(wave, [x - width, x + width])
        if sign < 0 or a == b:
            continue
        part = depth[a:b] * np.exp(-0.5 * ((wave[a:b] - x) / (0.45 * width)) ** 2)
        total: dict[str, float] = defaultdict(float)
        for name, p in zip(species[a:b], part):
            total[str(name)] += float(p)
        best = max(total, key=total.get)
        if total[best] > 0.01:
            found[best] += 1
    return found


def simulated_cases(seeds, catalogue):
    """(Identification, {species: features it makes; 0 where taken out}, {species: true dex})."""
    for seed in seeds:
        for temperature in SIM_TEMPERATURES:
            rng = np.random.default_rng([41, seed, temperature])
            star = Star(float(temperature), seed=seed, low=4900.0 if temperature < 6000 else 4380.0)
            made, dex = altered(catalogue, rng)
            spectrum, _, truth = observe(star, made)
            kept = catalogue.take(rng.random(len(catalogue)) > 0.05)
            session = solve(spectrum, kept)
            lines = main_species(session, truth, star.velocity, star.resolution)
            taken_out = [n for n, d in dex.items() if not np.isfinite(d)]
            offsets = {n: d + truth[3].get(n.split()[0], 0.0) for n, d in dex.items()}
            yield session, dict(lines) | dict.fromkeys(taken_out, 0), offsets


# ---- the account ----------------------------------------------------------------------------


class Account:
    """Verdicts by how many lines a species shows; none: absent."""

    def __init__(self):
        self.verdicts: dict[tuple, Counter] = defaultdict(Counter)
        self.missed: Counter = Counter()
        self.false: Counter = Counter()

    def add(self, roll, lines: dict[str, int]) -> None:
        rows = {row.species: row for row in roll}
        for name, count in lines.items():
            verdict = rows[name].verdict if name in rows else "not called"
            self.verdicts[_class(count)][verdict] += 1
            if count and verdict != "present":
                self.missed[f"{name} ({count})"] += 1
            if not count and verdict == "present":
                self.false[name] += 1

    def told(self) -> None:
        print("| lines shown | species | present | possible | absent | not testable or not called |")
        print("| --- | --- | --- | --- | --- | --- |")
        for key in [*CLASSES, (0, 0)]:
            v = self.verdicts[key]
            n = sum(v.values())
            label = "none: absent" if key == (0, 0) else f"{key[0]}-{key[1]}" if key[1] < 999 else f"{key[0]} or more"
            none = v["not testable"] + v["not called"]
            print(f"| {label} | {n} | {v['present']} | {v['possible']} | {v['absent']} | {none} |")
        for least in (1, 2, 3, 6):
            rows = [self.verdicts[c] for c in CLASSES if c[0] >= least]
            hit, n = sum(v["present"] for v in rows), sum(sum(v.values()) for v in rows)
            print(f"power, {least} or more lines: {rate(hit, n)}")
        v = self.verdicts[(0, 0)]
        tested = sum(v.values()) - v["not testable"] - v["not called"]
        print(f"false alarms of those tested: {rate(v['present'], tested)}; possible "
              f"{v['possible']}; called absent {v['absent']}")
        print("missed:", dict(self.missed.most_common(40)))
        print("false:", dict(self.false))


def _class(count: int) -> tuple[int, int]:
    return next((c for c in CLASSES if c[0] <= count <= c[1]), (0, 0))


class Strengths:
    """Offsets and limits against the truth of simulated stars."""

    def __init__(self):
        self.pulls: list[tuple[str, int, float, float]] = []
        self.limits: list[tuple[str, float, float]] = []

    def add(self, roll, true: dict[str, float]) -> None:
        rows = [r for r in roll if r.seen >= 3 and r.offset_err < 0.35 and np.isfinite(true.get(r.species, np.nan))]
        gap = np.array([r.offset_dex - true[r.species] for r in rows])
        weight = np.sqrt([r.seen for r in rows])
        zero = _median(gap, weight)
        self.pulls += [(r.species, r.seen, float(g - zero), r.offset_err) for r, g in zip(rows, gap)]
        for r in roll:
            if np.isfinite(r.limit_dex) and r.species in true:
                self.limits.append((r.species, true[r.species] + zero, r.limit_dex))

    def told(self) -> None:
        for low, high in ((3, 5), (6, 15), (16, 10**6)):
            here = [(g, e) for _, n, g, e in self.pulls if low <= n <= high]
            if here:
                gap, error = np.array(here).T
                pull = gap / error
                print(f"offsets, {low}-{high} lines: {len(gap)} species, off by {np.mean(gap):+.3f} "
                      f"+- {np.std(gap):.3f} dex, pulls {np.mean(pull):+.2f} +- {np.std(pull):.2f}, "
                      f"beyond 2: {np.mean(abs(pull) > 2):.3f}, beyond 3: {np.mean(abs(pull) > 3):.3f}")
        finite = [(t, limit) for _, t, limit in self.limits if np.isfinite(t)]
        kept = sum(t < limit for t, limit in finite)
        print(f"limits true, species there: {rate(kept, len(finite))}; of absent ones (true of "
              f"itself) {len(self.limits) - len(finite)}")
        near = [(t, limit) for t, limit in finite if t > limit - 0.5]
        print(f"  of those within 0.5 dex below or above the truth: {rate(sum(t < q for t, q in near), len(near))}")
        print("  broken:", [(s, round(t, 2), round(q, 2)) for s, t, q in self.limits if t >= q][:20])


def _median(values, weights) -> float:
    order = np.argsort(values)
    heap = np.cumsum(weights[order])
    return float(values[order][np.searchsorted(heap, 0.5 * heap[-1])]) if len(values) else 0.0


def published(seeds: int) -> None:
    catalogue = load_catalogue()
    for which in ("Sun", "K giant"):
        account = Account()
        for found, lines in published_cases(which, seeds, catalogue):
            account.add(found.roll_call, lines)
        print(f"**{which}**", flush=True)
        account.told()


def simulate(seeds) -> None:
    account, strengths = Account(), Strengths()
    for session, lines, true in simulated_cases(seeds, load_catalogue()):
        account.add(session.roll_call, lines)
        strengths.add(session.roll_call, true)
    account.told()
    strengths.told()


if __name__ == "__main__":
    words = sys.argv[1:] or ["published"]
    if words[0] == "published":
        published(int(words[1]) if len(words) > 1 else 3)
    else:
        first = int(words[2]) if len(words) > 2 else 100
        simulate(range(first, first + (int(words[1]) if len(words) > 1 else 3)))
