"""Rotating stars at 50, 100 and 200 km/s: which strong lines are found, by hand.

    python tests/studies/measure_rotators.py [SEED]

Invented: the lines of the sample A star's truth table (stellar ones; velocity taken off),
broadened by rotation (limb darkening 0.6) at R 30,000, S/N 150. 'Named' lines are those
that would reach eight sigmas alone and stand for two thirds of the absorption within one
rotational FWHM (1.6 v sin i) on either side, the others being members of blends; found is
what has a feature within a fifth of that FWHM.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "tests"), str(ROOT / "app")]

from measure_simulation import spectrum_of  # noqa: E402

from linewright.measure import MeasureOptions, measure_spectrum  # noqa: E402
from linewright.measure.shapes import profile, width_and_area  # noqa: E402

C = 299792.458
SNR, RESOLUTION = 150.0, 30_000.0


def lines():
    from astropy.table import Table

    t = Table.read(ROOT / "sample_spectra" / "a_star_truth.ecsv", format="ascii.ecsv")
    keep = (t["origin"] == "stellar") & (t["species"] != "H I") & (t["wave"] > 4400)
    keep &= (t["wave"] < 5400) & (t["depth"] > 0.01)
    own = t["wave"][keep] * 1.0
    sigma = own * 8.0 / C  # their own profiles, about 8 km/s
    return np.array(own), np.array(t["depth"][keep]) * np.sqrt(2 * np.pi) * np.array(sigma)


def spectrum(vsini: float, seed: int):
    wave = np.exp(np.arange(np.log(4400), np.log(5400), 1 / RESOLUTION / 3.0))
    centre, area = lines()
    y = np.zeros(len(wave))
    heights = np.zeros(len(centre))
    for i, (c, w) in enumerate(zip(centre, area, strict=True)):
        s = c * np.hypot(1 / RESOLUTION / 2.3548, 8.0 / C)
        p = np.array([1.0, c, np.log(s), np.log(c * vsini / C)])
        if i % 200 == 0:
            unit = width_and_area("rotational", p)[1] / c
        reach = c * vsini / C + 5 * s
        a, b = np.searchsorted(wave, [c - reach, c + reach])
        heights[i] = w / (unit * c)
        y[a:b] += heights[i] * profile("rotational", wave[a:b], p)[0]
    rng = np.random.default_rng(seed)
    flux = np.exp(-y) + rng.standard_normal(len(wave)) / SNR
    return spectrum_of(wave, flux, np.full(len(wave), 1 / SNR)), centre, heights


def main(seed: int = 0):
    print("v sin i  features  width km/s  named lines  found  |offset| median km/s  continuum")
    for vsini in (50.0, 100.0, 200.0):
        data, centre, height = spectrum(vsini, seed)
        measured = measure_spectrum(data, MeasureOptions(resolution=RESOLUTION))
        f = measured.features
        reach = centre * vsini / C
        named = []
        for i in np.argsort(-height):
            near = np.abs(centre - centre[i]) < 1.6 * reach[i]
            pixels = 2 * reach[i] / (centre[i] / RESOLUTION / 3.0)
            strong = height[i] * SNR * np.sqrt(0.6 * pixels) >= 8
            if strong and height[i] > 0.667 * height[near].sum():
                named.append(i)
        offset = np.array([np.min(np.abs(f.wave[f.sign > 0] - centre[i])) for i in named])
        found = offset < 0.2 * 1.6 * reach[named]
        s = measured.segments[0]
        level = s.continuum_at(data.segments[0].wave)
        width = C * np.median(s.width / s.width_wave)
        print(f"{vsini:7.0f}  {len(f):8d}  {width:10.1f}  {len(named):11d}  {found.mean():.3f}  "
              f"{np.median(offset / centre[named]) * C:20.2f}  {np.median(level):.4f}")


if __name__ == "__main__":
    main(*(int(a) for a in sys.argv[1:2]))
