"""Whether an uncertainty array tells the truth about the scatter of the samples.

An array is believed unless the samples speak against it: their highest frequencies, which
no line reaches, or second differences of a spectrum most of which is free of lines.
Crowded lines scatter samples, so they prove nothing; correlated samples scatter less at
short distances, so that proves nothing either.
"""

from __future__ import annotations

import numpy as np

TOO_SMALL = 1.25  # scatter over array beyond which the array is raised
TOO_LARGE = 0.7  # and below which it is lowered
RESOLVED = 2.6  # samples per FWHM below which lines reach the highest frequencies


def scale_of(given, noise, floor, pixels: float, sure: bool, good) -> tuple[float, str]:
    """(factor for the array, evidence in words); factor 1 where it stands.

    given: the array, (n,); noise: Noise from the samples; floor: Floor or None; pixels:
    samples per FWHM; sure: most samples are free of lines; good: usable samples.
    """
    whole = float(np.median(noise.sigma[good] / given[good]))
    if floor is None:
        return _outside(whole, whole, "scatter of the samples") if sure else (1.0, "")
    top = float(np.median(floor.sigma[good] / given[good]))
    if floor.flat or floor.white and top > 1.0 and pixels >= RESOLVED:
        return _outside(top, top, "highest frequencies of the samples")
    if sure and not floor.white:
        # correlated samples: the whole scatter counts, and only upwards
        return _outside(whole, max(whole, 1.0), "scatter of the samples between lines")
    return 1.0, ""


def _outside(value: float, factor: float, words: str) -> tuple[float, str]:
    return (1.0, "") if TOO_LARGE < value < TOO_SMALL or factor == 1.0 else (factor, words)
