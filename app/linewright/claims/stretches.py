"""The log-likelihood of a mixture by stretches of the spectrum: what they disagree on is uncertain."""

from __future__ import annotations

import numpy as np

STRETCHES = 12  # of equally many features


def by_stretch(feature_wave, entry_wave, seen, expected):
    """Parts (STRETCHES,) of the log-likelihood, by wavelength.

    feature_wave, seen: (f,) Angstrom and ln density of each feature; entry_wave, expected:
    (n,) Angstrom and number of features that each entry was expected to make.
    """
    if len(feature_wave) == 0:
        return np.zeros(STRETCHES)
    edges = np.quantile(feature_wave, np.arange(1, STRETCHES) / STRETCHES)
    mine = np.bincount(np.searchsorted(edges, feature_wave), seen, STRETCHES)
    return mine - np.bincount(np.searchsorted(edges, entry_wave), expected, STRETCHES)
