"""From raw arrays to frozen segments: order, repeats, bad samples; all of it reported.

Rules, stated once:
- samples without a finite positive wavelength are dropped;
- descending axes are turned round; a wavelength that falls back starts a new segment when
  every stretch is long (orders one after another), else the samples are sorted;
- samples at one wavelength become their mean, weighted by 1/sigma^2 where errors exist;
- non-finite flux, invalid errors and runs of five or more exact zeros are masked.
"""

from __future__ import annotations

import itertools

import numpy as np

from ..errors import InputRefused
from .medium import from_medium
from .raw import RawSegment
from .spectrum import Segment
from .spotless import spotless
from .uncertainty import bad_uncertainty

ZERO_RUN = 5
MIN_SAMPLES = 8
LONG_STRETCH = 50
WAVE_LIMITS = (1.0, 1e9)  # Angstrom: hard X-rays to 10 cm


def runs_of(flags: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(starts, stops) of runs of True, stops exclusive."""
    edges = np.flatnonzero(np.diff(np.concatenate(([0], flags.astype(np.int8), [0]))))
    return edges[::2], edges[1::2]


def zero_filled(flux: np.ndarray) -> np.ndarray:
    """True in runs of at least ZERO_RUN exact zeros, shape (n,)."""
    zeros = flux == 0
    out = np.zeros(len(flux), dtype=bool)
    if np.count_nonzero(zeros) < ZERO_RUN:
        return out
    for start, stop in zip(*runs_of(zeros)):
        if stop - start >= ZERO_RUN:
            out[start:stop] = True
    return out


def split_stretches(wave: np.ndarray) -> list[slice] | None:
    """Stretches of one direction when the wavelength falls back; None when it must be sorted."""
    if (wave[1:] >= wave[:-1]).all() or (wave[1:] <= wave[:-1]).all():
        return [slice(0, len(wave))]
    steps = np.diff(wave)
    sign = 1.0 if np.median(steps) >= 0 else -1.0
    cuts = np.flatnonzero(steps * sign < 0) + 1
    bounds = np.concatenate(([0], cuts, [len(wave)]))
    if np.diff(bounds).min() < LONG_STRETCH:
        return None
    return [slice(int(a), int(b)) for a, b in itertools.pairwise(bounds)]


def merge_repeats(wave, flux, sigma, mask):
    """Means over samples at one wavelength (inputs ascending); masked samples only if all are.

    Equal weights without errors, 1/sigma^2 with them (then sigma = 1/sqrt(sum)).
    """
    first = np.ones(len(wave), dtype=bool)
    np.greater(wave[1:], wave[:-1], out=first[1:])
    if first.all():
        return wave, flux, sigma, mask, 0
    index = np.cumsum(first) - 1
    count = int(index[-1]) + 1
    all_bad = np.bincount(index, mask, count) == np.bincount(index, minlength=count)
    use = (~mask) | all_bad[index]
    weight = use.astype(float) if sigma is None else np.where(use, 1.0, 0.0) / np.where(
        mask, 1.0, sigma) ** 2
    total = np.bincount(index, weight, count)
    flux_sum = np.bincount(index, np.where(use, weight * np.where(use, flux, 0.0), 0.0), count)
    alone = np.bincount(index, minlength=count) == 1
    mean = np.where(alone, flux[first], flux_sum / total)
    if sigma is not None:
        sigma = np.where(alone, sigma[first], 1.0 / np.sqrt(total))
    return wave[first], mean, sigma, all_bad, len(wave) - count


def _report(notes: list[str], count: int, words: str) -> None:
    if count:
        notes.append(f"{count} {words}")


def _arrays(raw: RawSegment):
    flux = np.asarray(raw.flux, dtype=float)
    sigma = None if raw.uncertainty is None else np.asarray(raw.uncertainty, dtype=float)
    mask = np.zeros(len(flux), bool) if raw.mask is None else np.array(raw.mask, dtype=bool)
    return flux, sigma, mask


def _masked(flux, sigma, mask, notes):
    """(sigma, mask) with bad samples added; sigma None when none of it is valid."""
    not_finite = ~np.isfinite(flux)
    zeros = zero_filled(flux)
    _report(notes, int(not_finite.sum()), "samples with no finite flux masked")
    _report(notes, int(zeros.sum()), "zero-filled samples (runs of 5 or more zeros) masked")
    if sigma is not None:
        bad = bad_uncertainty(sigma, flux)
        if bad.all():
            notes.append("the error column holds no valid error: ignored")
            sigma = None
        else:
            _report(notes, int((bad & ~zeros & ~not_finite).sum()),
                    "samples without a valid error masked")
            mask = mask | bad
    return sigma, mask | not_finite | zeros


def _ordered(wave, columns, notes):
    """Ascending wave and columns."""
    if (wave[1:] >= wave[:-1]).all():
        return wave, columns
    if (wave[1:] <= wave[:-1]).all():
        notes.append("descending wavelengths turned round")
        order = slice(None, None, -1)
    else:
        notes.append("wavelengths out of order were sorted")
        order = np.argsort(wave, kind="stable")
    return wave[order], [None if c is None else c[order] for c in columns]


def _one(wave, columns, medium: str, notes: list[str]) -> Segment:
    wave, (flux, sigma, mask) = _ordered(wave, columns, notes)
    sigma, mask = _masked(flux, sigma, mask, notes)
    wave, flux, sigma, mask, repeats = merge_repeats(wave, flux, sigma, mask)
    _report(notes, repeats, "repeated wavelengths averaged "
            + ("with weights 1/sigma^2" if sigma is not None else "with equal weights"))
    return Segment(np.ascontiguousarray(from_medium(wave, medium)), np.ascontiguousarray(flux),
                   None if sigma is None else np.ascontiguousarray(sigma), mask)


def _as_it_is(wave, raw: RawSegment, medium: str) -> Segment:
    def whole(array):
        return None if array is None else np.ascontiguousarray(array, dtype=float)

    return Segment(np.ascontiguousarray(from_medium(wave, medium)), whole(raw.flux),
                   whole(raw.uncertainty), np.zeros(len(wave), dtype=bool))


def _usable(segment: Segment) -> bool:
    """Whether any sample can be used; the first ones nearly always tell."""
    for part in (slice(0, 1000), slice(1000, None)):
        if (np.isfinite(segment.flux[part]) & ~segment.mask[part]).any():
            return True
    return False


def _check_range(wave: np.ndarray, what) -> None:
    low, high = WAVE_LIMITS
    if len(wave) < MIN_SAMPLES:
        raise InputRefused(what, f"only {len(wave)} samples with a wavelength: too few for a "
                           "spectrum", "check the file or choose columns with --columns")
    if wave.min() < low or wave.max() > high or np.ptp(wave) <= 0:
        raise InputRefused(
            what, f"wavelengths from {wave.min():.4g} to {wave.max():.4g} Angstrom make no sense",
            "state the unit with --unit or the column with --columns",
        )


def clean_segments(raws, unit, medium: str, what) -> tuple[tuple[Segment, ...], list[str]]:
    """(segments in vacuum Angstrom, notes). Raises InputRefused when nothing is usable."""
    segments, notes = [], []
    for raw in raws:
        wave = np.asarray(unit.to_angstrom(raw.wave), dtype=float)
        if spotless(wave, raw.flux, raw.uncertainty, raw.mask):
            _check_range(wave, what)
            segments.append(_as_it_is(wave, raw, medium))
            continue
        flux, sigma, mask = _arrays(raw)
        good = np.isfinite(wave) & (wave > 0)
        if not good.all():
            _report(notes, int((~good).sum()), "samples without a valid wavelength dropped")
            wave, flux, mask = wave[good], flux[good], mask[good]
            sigma = None if sigma is None else sigma[good]
        _check_range(wave, what)
        for part in split_stretches(wave) or [slice(None)]:
            columns = [None if c is None else c[part] for c in (flux, sigma, mask)]
            segments.append(_one(wave[part], columns, medium, notes))
    if not any(_usable(s) for s in segments):
        raise InputRefused(what, "no sample has a usable flux", "choose other columns or HDU")
    segments.sort(key=lambda s: float(s.wave[0]))
    return tuple(segments), list(dict.fromkeys(_summed(notes)))


def _summed(notes: list[str]) -> list[str]:
    """Counts of the same remark over segments added up, order kept."""
    totals: dict[str, int] = {}
    for note in notes:
        head, _, rest = note.partition(" ")
        key, count = (rest, int(head)) if head.isdigit() else (note, 0)
        totals[key] = totals.get(key, 0) + count
    return [f"{count} {words}" if count else words for words, count in totals.items()]
