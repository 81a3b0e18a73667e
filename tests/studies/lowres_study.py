"""The Sun degraded in resolution or broadened by rotation, against its own full claims.

    python tests/studies/lowres_study.py [R ...] [vsini=KM_S ...] [keep]

Truth: the likely and firm claims of the full-resolution solve; a degraded feature's truth is
the strongest of them (equivalent width) within half a resolution element. 'Always Fe I'
names most features already, so the other species are scored apart.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "tests")]

from kept import keep, wanted  # noqa: E402
from truths import SPECTRA, SUN_GAPS, within  # noqa: E402

from linewright.job.options import SolveOptions  # noqa: E402
from linewright.job.solve import solve  # noqa: E402
from linewright.spectra.medium import C_KM_S, vacuum_to_air  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402
from linewright.spectra.spectrum import Segment  # noqa: E402

FULL_R, SN = 47000.0, 200.0


def gaussian(sigma):
    x = np.arange(-int(5 * sigma) - 1, int(5 * sigma) + 2)
    kernel = np.exp(-0.5 * (x / sigma) ** 2)
    return kernel / kernel.sum()


def rotation(vsini, step, limb=0.6):
    """Rotation profile (Gray 2005, The Observation and Analysis of Stellar Photospheres)."""
    x = np.arange(-int(vsini / step), int(vsini / step) + 1) * step / vsini
    y = np.maximum(1 - x**2, 0.0)
    kernel = 2 * (1 - limb) * np.sqrt(y) + 0.5 * np.pi * limb * y
    return kernel / kernel.sum()


def degraded(spectrum, resolution=None, vsini=None, seed=0):
    """The spectrum at ``resolution`` (4 samples per element) or rotating, at S/N 200."""
    segment = spectrum.segments[0]
    element = 1.0 / resolution if resolution else 1.0 / FULL_R
    step = element / 16
    log = np.arange(np.log(segment.wave[0]), np.log(segment.wave[-1]), step)
    flux = np.interp(log, np.log(segment.wave), segment.flux)
    if resolution:
        kernel = gaussian(np.sqrt(resolution**-2 - FULL_R**-2) / 2.3548 / step)
    else:
        kernel = rotation(vsini, C_KM_S * step)
    flux = np.convolve(flux, kernel, mode="same")[::4]
    wave = np.exp(log[::4])
    flux = flux + np.random.default_rng(seed).normal(0, 1 / SN, len(flux))
    mask = within(vacuum_to_air(wave), SUN_GAPS)
    return replace(
        spectrum, segments=(Segment(wave, flux, np.full(len(wave), 1 / SN), mask),)
    )


def compare(full, session, half_width):
    """Arrays truth, right, probability over the features that have a truth."""
    g, truth, right, p = full.features, [], [], []
    sure = np.array([c.probability >= 0.8 for c in full.claims]) & (g.sign > 0)
    for wave, sign, claim in zip(session.features.wave, session.features.sign, session.claims):
        near = np.nonzero(np.abs(g.wave - wave) < half_width * wave)[0]
        if sign < 0 or len(near) == 0:
            continue
        best = near[np.argmax(g.ew[near])]
        if not sure[best]:
            continue
        name = full.claims[best].species
        truth.append(name)
        right.append(claim.species == name or any(b[0] == name for b in claim.blend))
        p.append(claim.probability)
    return np.array(truth), np.array(right), np.array(p)


def report(label, full, session, half_width):
    truth, right, p = compare(full, session, half_width)
    sure, iron = p >= 0.95, truth == "Fe I"
    print(
        f"{label}: {len(session.features)} features, velocity {session.velocity.velocity:+.2f} "
        f"({'declared' if session.velocity.declared else 'not declared'}), top-1 "
        f"{right.mean():.3f}, not iron {right[~iron].mean():.3f}, confident {sure.mean():.3f}, "
        f"agreement {right[sure].mean() if sure.any() else float('nan'):.4f} of {sure.sum()}, "
        f"stars {sum(c[0] == 'stellar' for c in session.components)}",
        flush=True,
    )
    return {
        "top-1": float(right.mean()), "not iron": float(right[~iron].mean()),
        "confident": float(sure.mean()), "agreement": float(right[sure].mean()),
        "features": len(right),
    }  # fmt: skip


if __name__ == "__main__":
    sun = read_spectrum(SPECTRA / "sun_r47000.txt", medium="air")
    full = solve(sun)
    words, cases = sys.argv[1:], {}
    stored = wanted(words)
    for word in words or ["10000", "5000", "2000", "vsini=50", "vsini=100"]:
        name, _, value = word.rpartition("=")
        number = float(value)
        if name == "vsini":
            made = degraded(sun, vsini=number)
            session = solve(made, options=SolveOptions(vsini=number))
            cases[word] = report(word, full, session, number / C_KM_S)
        else:
            made = degraded(sun, resolution=number)
            session = solve(made, options=SolveOptions(resolution=number))
            cases[word] = report(f"R {number:.0f}", full, session, 0.5 / number)
    if stored:
        keep("resolution Sun", cases)
