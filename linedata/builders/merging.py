"""Joins rows that are one line: same species and origin, same E_low, same wavelength."""

from __future__ import annotations

import numpy as np

SAME_WAVE = 0.004  # Angstrom at 5000 A: unresolved fine structure, repeated entries
SAME_ENERGY = 0.0015  # eV
SUMMED = ("loggf", "emission")


def group_labels(lines: dict[str, np.ndarray]) -> np.ndarray:
    """Label per row; rows of one line share it."""
    wave, species, origin = lines["wave"], lines["species"], lines["origin"]
    e_low = np.nan_to_num(np.asarray(lines.get("e_low", np.zeros(len(wave))), float), nan=-1.0)
    order = np.lexsort((wave, species, origin))
    label = np.arange(len(wave))
    for place, k in enumerate(order):
        reach = wave[k] + SAME_WAVE * wave[k] / 5000.0
        for m in order[place + 1 : place + 12]:
            if species[m] != species[k] or origin[m] != origin[k] or wave[m] > reach:
                break
            if abs(e_low[m] - e_low[k]) < SAME_ENERGY and label[m] == m:
                label[m] = label[k]
    return label


def merge(lines: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """One row per group: linear strengths summed, wavelength weighted, the rest of the strongest."""
    labels, index = np.unique(group_labels(lines), return_inverse=True)
    if len(labels) == len(index):
        return lines
    present = [key for key in SUMMED if key in lines and np.isfinite(lines[key]).any()]
    weight = np.zeros(len(index))
    for key in present:
        weight = np.maximum(weight, np.nan_to_num(10.0 ** np.asarray(lines[key], float)))
    weight = np.maximum(weight, 1e-30)
    order = np.lexsort((-weight, index))
    strongest = order[np.searchsorted(index[order], np.arange(len(labels)))]
    merged = {key: np.asarray(values)[strongest] for key, values in lines.items()}
    count = np.bincount(index)
    total = np.bincount(index, weight)
    mean = np.bincount(index, weight * lines["wave"]) / total
    several = count > 1
    merged["wave"] = np.where(several, mean, merged["wave"])
    for key in present:
        linear = np.nan_to_num(10.0 ** np.asarray(lines[key], float))
        with np.errstate(divide="ignore"):
            summed = np.log10(np.bincount(index, linear))
        known = several & np.isfinite(summed)
        merged[key] = np.where(known, summed, merged[key])
    return merged
