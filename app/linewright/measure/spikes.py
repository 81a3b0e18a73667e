"""Cosmic rays and bad pixels: structure narrower than the instrument can make.

The samples are filtered with H(w) = 1 / (1 + K exp(-(w s)^2)), the Wiener filter for a
lone hit in the presence of lines of the instrument's sigma s (samples) and K times the
noise power: of a line almost nothing passes, of a hit most.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .gauss import FWHM_PER_SIGMA
from .matched import noise_gain
from .veil import running_min

GRID = 64
LINES = 1e5  # power of lines over noise, at least
LEAST = 6.5  # sigmas of a spike
NARROW = 0.45  # share of the excess that the filter must confirm
FEWEST = 2.6  # samples per FWHM below which a line may be one sample wide
MOST = 0.005  # share of hit samples beyond which they are no hits
PAIRS = 3.2  # samples per FWHM from which two equal samples cannot be a line
ABOVE = 5.0  # sigmas over the continuum of a hit in a spectrum of absorption lines
EXCHANGES = {
    2: ((0, 1), (3, 4), (0, 3), (1, 4), (1, 2), (2, 3), (1, 2)),
    4: ((1, 2), (4, 5), (7, 8), (0, 1), (3, 4), (6, 7), (1, 2), (4, 5), (7, 8), (0, 3), (5, 8),
        (4, 7), (3, 6), (1, 4), (2, 5), (4, 7), (4, 2), (6, 4), (4, 2)),
}
UNSURE = 3.0  # samples per FWHM assumed at most where the instrument is not known


@dataclass(frozen=True, eq=False)
class Spikes:
    """index: sample of each hit; excess: y there less its surroundings; significance;
    hit: samples it spoils, True at each, (n,)."""

    index: np.ndarray
    excess: np.ndarray
    significance: np.ndarray
    hit: np.ndarray


def none_found(n: int) -> Spikes:
    """No hit among n samples."""
    return Spikes(np.zeros(0, dtype=int), np.zeros(0), np.zeros(0), np.zeros(n, dtype=bool))


def spike_filter(fwhm: float, lines: float = LINES) -> np.ndarray:
    """Filter's answer to a unit sample, symmetric, odd length.

    fwhm: of the instrument, samples; lines: power of the lines over the noise."""
    w = np.arange(GRID // 2 + 1) * 2 * np.pi / GRID
    h = 1.0 / (1.0 + lines * np.exp(-((w * 0.9 * fwhm / FWHM_PER_SIGMA) ** 2)))
    return np.fft.fftshift(np.fft.irfft(h, GRID))[1:]


def find_spikes(y, noise, good, runs, fwhm: float, correlation) -> Spikes:
    """Hits of one segment, one or two samples wide.

    y: (continuum - flux)/continuum, (n,); noise: one sigma of y, (n,); good: usable;
    runs: slices without gaps; fwhm: of the instrument, samples; correlation: of the noise.
    """
    if fwhm < FEWEST:
        return none_found(len(y))
    white = spike_filter(fwhm, LINES + 10.0 * float(np.max(np.abs(y / noise))) ** 2)
    # a hit raises its own error: the noise is that of the samples around
    noise = running_median(noise, 4)
    sizes = (1, 2) if fwhm >= PAIRS else (1,)
    answers = [_answer(y, runs, white, size) for size in sizes]
    gains = [_gain(np.convolve(white, np.ones(size)), correlation) for size in sizes]
    strengths = np.array([np.abs(a) / (noise * g) for (a, _), g in zip(answers, gains)])
    strengths[_against(y, answers)] = 0.0
    size = np.argmax(strengths, axis=0)
    strength = np.take_along_axis(strengths, size[None], axis=0)[0]
    index, excess, hit = [], [], np.zeros(len(y), dtype=bool)
    for i in np.flatnonzero((strength > LEAST) & good):
        if strength[i] < strength[max(0, i - 4) : i + 5].max():
            continue
        response, unit = answers[size[i]]
        around = _surroundings(y, i, int(size[i]))
        worst = i + int(np.argmax(np.abs(y[i : i + 1 + size[i]] - around)))
        above = y[worst] - around
        real = abs(above) > LEAST * noise[worst]
        if real and response[i] / unit * np.sign(above) >= NARROW * abs(above):
            index.append(worst)
            excess.append(above)
            hit[_spoilt(y, noise, worst, around)] = True
    return Spikes(np.array(index, dtype=int), np.array(excess), strength[index], hit)


def running_median(values, half: int) -> np.ndarray:
    """Median of 5 or 9 samples (``half`` 2 or 4) about each one, ends held, shape (n,).

    Exchanges of whole arrays that bring the middle one to its place (N. Devillard 1998,
    after Paeth 1990): many times faster than a sort at every sample, and exact.
    """
    padded = np.pad(values, half, "edge")
    p = [padded[i : i + len(values)] for i in range(2 * half + 1)]
    for a, b in EXCHANGES[half]:
        p[a], p[b] = np.minimum(p[a], p[b]), np.maximum(p[a], p[b])
    return p[half]


def _gain(kernel, correlation) -> float:
    """Scatter of filtered noise; an estimated correlation may leave too little at high
    frequencies to be believed."""
    return max(noise_gain(kernel, correlation), 0.3 * float(np.sqrt(np.sum(kernel**2))))


def few(spikes: Spikes) -> Spikes:
    """The hits, or none where they are so many that they must be something else."""
    n = len(spikes.hit)
    return spikes if len(spikes.index) <= max(3, MOST * n) else none_found(n)


def bridged(y, hit) -> np.ndarray:
    """y with straight lines over the hit samples."""
    index = np.arange(len(y))
    return np.interp(index, index[~hit], y[~hit]) if hit.any() else y


def upward(spikes: Spikes, y, noise) -> Spikes:
    """The hits that stand above the continuum."""
    keep = y[spikes.index] < -ABOVE * noise[spikes.index]
    hit = spikes.hit & (y < -ABOVE * noise)
    return Spikes(spikes.index[keep], spikes.excess[keep], spikes.significance[keep], hit)


def joined(one: Spikes, other: Spikes) -> Spikes:
    """Hits of both, those of ``other`` only where ``one`` has none within two samples."""
    away = np.array([np.all(np.abs(one.index - i) > 2) for i in other.index], dtype=bool)
    columns = [
        np.r_[getattr(one, n), getattr(other, n)[away]] for n in ("index", "excess", "significance")
    ]
    order = np.argsort(columns[0])
    return Spikes(*(c[order] for c in columns), one.hit | other.hit)


def in_absorption(y, noise, good) -> bool:
    """Whether troughs outnumber peaks so much that a narrow peak is no line."""
    down, up = (np.mean(s * y[good] > ABOVE * noise[good]) for s in (1, -1))
    return bool(down > 5.0 * up)


def _against(y, answers) -> np.ndarray:
    """True where the filter answers the wrong way or beside a taller sample: its side
    lobes, (sizes, n)."""
    local = y - running_median(y, 2)
    tallest = -running_min(-np.abs(local), 5)
    pair = local + np.r_[local[1:], 0.0]
    beside = np.abs(local) < 0.5 * tallest
    return np.array([(a * e <= 0) | beside for (a, _), e in zip(answers, (local, pair))])


def _answer(y, runs, white, size: int) -> tuple[np.ndarray, float]:
    """(filter against ``size`` equal samples from each one on, its answer to a unit hit)."""
    kernel = np.convolve(white, np.ones(size))
    unit = float(np.sum(np.convolve(white, np.ones(size), "same")[len(white) // 2 :][:size]))
    out = np.zeros(len(y))
    for run in runs:
        if run.stop - run.start > GRID:
            half = len(white) // 2
            padded = np.pad(y[run], (half, half + size - 1), "reflect", reflect_type="odd")
            out[run] = np.convolve(padded, kernel, "valid")
    return out, unit


def _surroundings(y, i: int, more: int) -> float:
    """Level under a hit of 1 + ``more`` samples: median of those two and three away."""
    left, right = y[max(0, i - 3) : max(1, i - 1)], y[i + more + 2 : i + more + 4]
    return float(np.median(np.r_[left, right]))


def _spoilt(y, noise, i: int, around: float) -> slice:
    """The hit sample and those next to it that stand out the same way."""
    first, last = i, i + 1
    excess = y[i] - around
    sign = np.sign(excess)
    out = [
        k for k in (i - 1, i + 1)
        if 0 <= k < len(y) and sign * (y[k] - around) > max(3.0 * noise[k], 0.05 * abs(excess))
    ]
    return slice(min([first, *out]), max([last, *(k + 1 for k in out)]))
