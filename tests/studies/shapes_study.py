"""Shapes of strong lines against simulated ones of another kind: `python tests/studies/shapes_study.py KIND`.

KIND: shapes [lines a cell] (double peaks of discs, P Cygni, absorbed emission, filled cores: found,
right, and their numbers against the truth), plain [lines] (nothing of the kind is invented), real
(the spectra beside the project). The simulator is tests/shapes_simulation.py: no profile in it is a
sum of Gaussians. A cell is one resolving power and signal-to-noise per sample in the continuum.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
from shapes_simulation import Scene, bell, disc, saturated, seen, turned, voigt  # noqa: E402

from linewright.measure.core import measure_spectrum  # noqa: E402
from linewright.measure.drawn import compound_groups, peaks_of  # noqa: E402
from linewright.spectra.medium import C_KM_S  # noqa: E402

CELLS = [(10000, 100), (30000, 30), (30000, 100), (30000, 300), (50000, 100)]
LINES = 5  # of a spectrum


def draw_disc(rng):
    """(function of v, truth) of a double-peaked line; in a third of them in an absorption."""
    height, outer = np.exp(rng.uniform(np.log(0.3), np.log(4))), rng.uniform(50, 200)
    inner, fall, skew = rng.uniform(0.05, 0.3), rng.uniform(1, 2), rng.uniform(-0.15, 0.15)
    dark = rng.uniform(0.1, 0.4) if rng.random() < 1 / 3 else 0.0

    def line(v):
        made = disc(v, height, outer, inner, fall) * (1 + skew * np.tanh(v / outer))
        return 1 + made - dark * voigt(v, 200.0, 300.0)

    return line


def draw_wind(rng):
    height, width = np.exp(rng.uniform(np.log(0.4), np.log(4))), rng.uniform(80, 350)
    tau, thin = rng.uniform(0.5, 2.5), rng.uniform(40, 120)
    place, side = rng.uniform(0.6, 1.2) * width, 1 if rng.random() < 0.2 else -1

    def line(v):
        return (1 + height * bell(v, -side * 0.1 * width, width)) * np.exp(
            -tau * bell(v, side * place, thin))

    line.place, line.side = side * place, side
    return line


def draw_absorbed(rng):
    height, width = np.exp(rng.uniform(np.log(0.5), np.log(5))), rng.uniform(120, 300)
    tau, thin, place = rng.uniform(0.5, 2.5), rng.uniform(25, 60), rng.uniform(-20, 20)

    def line(v):
        return (1 + height * bell(v, 0, width)) * np.exp(-tau * bell(v, place, thin))

    line.place = place
    return line


def draw_core(rng):
    depth, g, w = rng.uniform(0.5, 0.9), rng.uniform(30, 80), rng.uniform(60, 200)
    height, thin, place = rng.uniform(0.12, 0.5), rng.uniform(20, 50), rng.uniform(-4, 4)

    def line(v):
        return 1 - depth * voigt(v, g, w) + height * bell(v, place, thin)

    line.place, line.height, line.thin = place, height, thin
    return line


DRAW = {"double peak": draw_disc, "P Cygni": draw_wind, "absorbed emission": draw_absorbed,
        "filled core": draw_core}


def shape_of(features, rows) -> str:
    """What a group of parts is, by their signs and places alone."""
    sign = features.sign[rows]
    bright, dark = rows[sign < 0], rows[sign > 0]
    if len(bright) > 1:
        return "double peak"
    apart = features.wave[bright[0]] - features.wave[dark[0]]
    wide = max(features.fwhm[bright[0]], features.fwhm[dark[0]])
    if abs(apart) > 0.5 * wide:
        return "P Cygni"
    return "filled core" if features.fwhm[dark[0]] > features.fwhm[bright[0]] else "absorbed emission"


def measured(lines, resolution, snr, seed, vsini=8.0):
    """(FeatureTable, groups of each line as row arrays, places) of one simulated spectrum."""
    scene = Scene(tuple(lines), resolution, snr, vsini, 0.12, seed=seed)
    f = measure_spectrum(scene.build()).features
    groups = compound_groups(f)
    near = [[g for g in groups if np.min(np.abs(f.wave[g] / c - 1)) * C_KM_S < 600] for c in scene.places]
    return f, near, scene.places


def strongest(f, place):
    """The two strongest features at a line that was not measured as one, if they may be a shape."""
    near = np.flatnonzero((np.abs(kms(f.wave, place)) < 500) & np.isfinite(f.ew))
    rows = np.sort(near[np.argsort(-np.abs(f.ew[near]))][:2])
    return [rows] if len(rows) == 2 and (f.sign[rows] < 0).any() else []


def kms(wave, place):
    return C_KM_S * (wave / place - 1)


def true_peaks(line, resolution):
    """(blue, red in km/s, V/R) of the noise-free profile seen by the instrument; None where it
    has not two peaks."""
    v = np.arange(-1000.0, 1001.0)
    y = seen(line(v), C_KM_S / resolution) - 1
    tops = np.flatnonzero((y[1:-1] > y[:-2]) & (y[1:-1] >= y[2:])) + 1
    tops = np.sort(tops[np.argsort(-y[tops])][:2])
    if len(tops) < 2 or y[tops].min() <= 0:
        return None
    valley = y[tops[0] : tops[1]].min()
    return (v[tops[0]], v[tops[1]], y[tops[0]] / y[tops[1]], 1 - valley / y[tops].min())


def said(values) -> str:
    """Median and robust half-width of values."""
    v = np.array(values)
    if len(v) < 3:
        return "-"
    low, mid, high = np.quantile(v, [0.1587, 0.5, 0.8413])
    return f"{mid:+.3f} ± {0.5 * (high - low):.3f}"


def shapes(count: int) -> None:
    for name, draw in DRAW.items():
        print(f"\n{name}\n| R | S/N | lines | as one group | right | offsets; pulls |\n| --- | --- | --- | --- | --- | --- |")
        for cell, (resolution, snr) in enumerate(CELLS):
            cell_row(name, draw, (resolution, snr), count, cell)


def cell_row(name, draw, power, count, cell) -> None:
    found = right = total = 0
    notes: dict[str, list] = {}
    for seed in range(count // LINES):
        rng = np.random.default_rng([seed, cell, list(DRAW).index(name)])
        lines = [draw(rng) for _ in range(LINES)]
        f, near, places = measured(lines, *power, seed)
        for line, groups, place in zip(lines, near, places):
            truth = true_peaks(line, power[0]) if name == "double peak" else None
            if name == "double peak" and (truth is None or truth[3] < 0.1):
                continue  # the instrument leaves hardly a dip between the peaks
            total += 1
            found += bool(groups)
            groups = groups or strongest(f, place)
            hit = next((g for g in groups if shape_of(f, g) == name), None)
            if hit is None:
                continue
            right += 1
            compare(f, hit, (line, place, truth), notes, power[0])
    words = "; ".join(f"{k} {said(v)}" for k, v in notes.items())
    print(f"| {power[0]} | {power[1]} | {total} | {found / total:.3f} | {right / total:.3f} | {words} |", flush=True)


def compare(f, rows, about, notes, resolution) -> None:
    """Offsets (measured less true) and pulls of a line's numbers added to ``notes``."""
    line, place, truth = about

    def note(key, value):
        notes.setdefault(key, []).append(value)

    if truth is not None:
        peaks = peaks_of(f, rows)
        if peaks is None or len(rows) < 2:
            return
        apart = C_KM_S * peaks.apart / place
        note("separation ratio - 1", apart / (truth[1] - truth[0]) - 1)
        note("V/R ratio - 1", peaks.ratio / truth[2] - 1)
        note("pull separation", (apart - truth[1] + truth[0]) / (C_KM_S * peaks.apart_err / place))
        note("pull V/R", (peaks.ratio - truth[2]) / peaks.ratio_err)
        return
    core = hasattr(line, "height")
    row = rows[f.sign[rows] < 0][0] if core else rows[f.sign[rows] > 0][0]
    off = kms(f.wave[row], place) - line.place
    note("emission, km/s" if core else "absorption, km/s", off)
    note("pull", off / (C_KM_S * f.wave_err[row] / place))
    if core:
        height = line.height * line.thin / np.hypot(line.thin, C_KM_S / resolution)
        note("height ratio - 1", -f.depth[row] / height - 1)
        note("pull height", (-f.depth[row] - height) / f.depth_err[row])


def draw_plain(rng, kind: str):
    """A line of one part, or of two that are no shape."""
    depth, g, w = rng.uniform(0.2, 0.9), rng.uniform(5, 60), rng.uniform(5, 250)
    height, wide = np.exp(rng.uniform(np.log(0.1), np.log(6))), rng.uniform(20, 400)
    apart, share = rng.uniform(0.5, 3.0), rng.uniform(0.3, 1.0)
    vsini, tau = rng.uniform(20, 250), np.exp(rng.uniform(0, np.log(60)))
    return {
        "damped": lambda v: 1 - depth * voigt(v, g, w),
        "saturated": lambda v: 1 - saturated(v, tau, g, 0.3 * g),
        "rotating": lambda v: 1 - turned(depth * voigt(v, 12.0, 0.2 * w), vsini),
        "two absorptions": lambda v: (1 - depth * voigt(v, g, 0.3 * g))
        * (1 - share * depth * voigt(v - apart * g, g, 0.3 * g)),
        "emission": lambda v: 1 + height * bell(v, 0, wide),
        "emission, winged": lambda v: 1 + height * voigt(v, 0.5 * wide, 0.5 * wide),
        "emission, skew": lambda v: 1 + height * np.where(v < 0, bell(v, 0, wide), bell(v, 0, 1.5 * wide)),
    }[kind]


PLAIN = ("damped", "saturated", "rotating", "two absorptions", "emission", "emission, winged",
         "emission, skew")


def plain(count: int) -> None:
    print("| line | R | S/N | lines | of several parts |\n| --- | --- | --- | --- | --- |")
    for kind in PLAIN:
        for cell, (resolution, snr) in ((0, CELLS[0]), (2, CELLS[2]), (3, CELLS[3])):
            wrong = []
            for seed in range(max(count // LINES, 1)):
                rng = np.random.default_rng([seed, cell, PLAIN.index(kind), 7])
                lines = [draw_plain(rng, kind) for _ in range(LINES)]
                f, near, places = measured(lines, resolution, snr, seed)
                wrong += [shape_of(f, g) for groups in near for g in groups]
            print(f"| {kind} | {resolution} | {snr} | {max(count // LINES, 1) * LINES} | {len(wrong)} "
                  f"{', '.join(sorted(set(wrong)))} |", flush=True)


REAL = (("sun_r47000.txt", {"medium": "air"}), ("ttauri_r40000_blue.fits", {}),
        ("mdwarf_r115000_s1d.fits", {}), ("f5star_r1800.fits.gz", {}),
        ("fstar_hband_r22500.fits", {}), ("gdwarf_r2000_18hdu.fits", {}),
        *(("nebula/full-spectrum-by-area.tab", {"medium": "air", "columns": {"wave": 11, "flux": k}})
          for k in range(1, 11)))


def real(_count: int) -> None:
    """Lines of several parts in the spectra beside the project."""
    from linewright.spectra.reading import read_spectrum
    from truths import SPECTRA

    for name, how in REAL:
        f = measure_spectrum(read_spectrum(SPECTRA / name, **how)).features
        found = [(round(float(f.wave[g[0]]), 2), shape_of(f, g)) for g in compound_groups(f)]
        print(f"{name} {how.get('columns', {}).get('flux', '')}: {len(f)} features, {found}", flush=True)


if __name__ == "__main__":
    kind = sys.argv[1] if len(sys.argv) > 1 else "shapes"
    number = int(sys.argv[2]) if len(sys.argv) > 2 else 40
    {"shapes": shapes, "plain": plain, "real": real}[kind](number)
