"""Split, merge, other limits, another profile: features of a session fitted by hand.

Each function measures and answers with plain data, a ``Made``; ``session.fit_edits`` puts it
into the session. Starting values come from the session and the samples alone, never from an
earlier try, so that the same act gives the same numbers. Neighbours that are not fitted along
are held at their present fits: errors do not hold theirs. Wavelengths are vacuum Angstrom.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import combinations

import numpy as np

from ..errors import InputRefused
from ..measure.region import RegionFit, fit_trace
from ..measure.veil import running_mean
from ..session.edits import row_of
from ..session.fit_edits import PROFILES, checked_limits
from ..session.model import Session
from ..session.plain import row_to_plain
from .hand_trace import SHAPES, HandTrace

REACH = 1.3  # FWHM on either side of the outer components, as in the machine's fits
APART = (0.5, 0.9, 1.4)  # starting distances of two parts, in FWHM
PAIRED = ("double-peaked", "p-cygni")
NARROWEST = 1.2  # samples of FWHM: no instrument makes less
VOID = 1e-4  # depth of a component that is none
WIDE = 4.0  # FWHM within which the other half of a P Cygni profile is looked for


@dataclass(frozen=True, eq=False)
class Wanted:
    """features: permanent numbers; limits: (low, high) or None for those last used, else
    REACH; profile: one of PROFILES or None for the last used; parts: components, None for
    one a feature, or as the profile asks."""

    features: tuple[int, ...]
    limits: tuple[float, float] | None = None
    profile: str | None = None
    parts: int | None = None


@dataclass(frozen=True, eq=False)
class Made:
    """features: numbers the fit replaces; fit: as ``session.fit_edits`` takes it; wave, flux:
    the fitted curve with the neighbours, for drawing; bic: the fit's criterion."""

    features: tuple[int, ...]
    fit: dict
    wave: np.ndarray
    flux: np.ndarray
    bic: float


def limits_of(session: Session, features) -> tuple[float, float]:
    """The limits last used for these features, else REACH FWHM about them.

    Raises InputRefused for unknown or unmeasured features.
    """
    rows = [row_of(session, number) for number in features]
    fit = session.fit_of(features[0])
    if fit is not None and set(fit.features) == set(features):
        return fit.limits
    f = session.features
    wave, half = f.wave[rows], REACH * f.fwhm[rows]
    if not np.all(half > 0):
        raise InputRefused(f"feature {features[0]}", "has no measured width", "give the limits")
    return float((wave - half).min()), float((wave + half).max())


def profile_of_fit(session: Session, number: int) -> str:
    """The profile a feature was last fitted with."""
    fit = session.fit_of(number)
    return "gaussian" if fit is None else fit.profile


def together(session: Session, number: int) -> tuple[int, ...]:
    """The feature with those it was fitted with by hand."""
    fit = session.fit_of(number)
    return (number,) if fit is None else fit.features


def enclosed(session: Session, number: int, limits) -> tuple[int, ...]:
    """Features of the same segment inside the limits, the one itself included."""
    f, low, high = session.features, *checked_limits(limits)
    inside = (f.segment == f.segment[row_of(session, number)]) & (f.wave >= low) & (f.wave <= high)
    return tuple(sorted({number, *f.number[inside].tolist()}))


def fitted(session: Session, about: HandTrace, wanted: Wanted) -> Made:
    """What is wanted, fitted. Raises InputRefused with the cause where it cannot be."""
    profile = wanted.profile or profile_of_fit(session, wanted.features[0])
    if profile not in PROFILES:
        raise InputRefused(f"profile '{profile}'", "is not known", f"choose {', '.join(PROFILES)}")
    limits = checked_limits(wanted.limits or limits_of(session, wanted.features))
    rows = check_rows(session, wanted, limits)
    wing = all("wing" in session.features.flags[r].split() for r in rows)
    numbers = wanted.features
    if profile in PAIRED and len(numbers) != 2:
        limits, numbers, choices = _paired(session, about, wanted, profile, limits)
    else:
        choices = _starts(session.features, rows, wanted, limits)
    trace, nodes = about.without_others(numbers, wing)
    signs = _signs(session, wanted, profile, len(choices[0]))
    best = _best((trace, nodes, limits, signs), choices, SHAPES.get(profile, profile))
    return _made(about, (numbers, wing, trace), limits, profile, best)


def check_rows(session: Session, wanted: Wanted, limits) -> list[int]:
    """Rows of the features; InputRefused where one lies outside the limits or is no line."""
    f, rows = session.features, [row_of(session, number) for number in wanted.features]
    for number, row in zip(wanted.features, rows):
        if not limits[0] < f.wave[row] < limits[1]:
            raise InputRefused(
                f"feature {number}",
                f"lies outside the limits {limits[0]:.3f} to {limits[1]:.3f} A",
                "widen the limits")
        if "spike" in f.flags[row].split():
            raise InputRefused(f"feature {number}", "is a hit of a sample or two: there is no "
                               "profile to fit", "set it aside")
    return rows


def _starts(features, rows, wanted: Wanted, limits) -> list[np.ndarray]:
    """Centres to start from, several tries."""
    wave, fwhm = features.wave[rows], features.fwhm[rows]
    parts = len(rows) if wanted.parts is None else wanted.parts
    if parts < 1 or parts > 9:
        raise InputRefused("split", f"{parts} parts", "choose two to nine")
    if parts == len(rows):
        return [wave]
    weight = np.abs(np.nan_to_num(features.ew[rows])) + 1e-12
    middle = float(np.sum(wave * weight) / weight.sum())
    if parts == 1:
        return [np.array([middle]), wave[[int(np.argmax(weight))]]]
    width = float(np.nanmax(fwhm)) if len(rows) == 1 else float(np.ptp(wave) + np.nanmean(fwhm))
    rank = np.arange(parts) - 0.5 * (parts - 1)
    tries = [middle + shift * width + rank * gap * width / (parts - 1)
             for gap in APART for shift in (-0.3, 0.0, 0.3)]
    edge = 0.02 * (limits[1] - limits[0])
    return [np.clip(t, limits[0] + edge, limits[1] - edge) for t in tries]


def _paired(session, about, wanted: Wanted, profile: str, limits):
    """(limits, numbers, starts) of a profile of two components.

    double-peaked: the two strongest extrema of the feature's sign; p-cygni: an emission with
    the absorption on its blue side. Features that stand there already are taken along.
    """
    if len(wanted.features) != 1 or wanted.parts not in (None, 2):
        raise InputRefused(f"profile '{profile}'", "has two components",
                           "choose it for one feature or for two")
    f, number = session.features, wanted.features[0]
    row = row_of(session, number)
    if profile == "double-peaked":
        return limits, wanted.features, _starts(f, [row], replace(wanted, parts=2), limits)
    sign, wave, fwhm = int(f.sign[row]), float(f.wave[row]), float(f.fwhm[row])
    if wanted.limits is None:
        limits = ((wave - WIDE * fwhm, limits[1]) if sign < 0 else (limits[0], wave + WIDE * fwhm))
    side = (limits[0], wave - 0.3 * fwhm) if sign < 0 else (wave + 0.3 * fwhm, limits[1])
    other = _extremum(about.trace, side, -sign)
    near = (f.segment == f.segment[row]) & (f.sign == -sign) & (np.abs(f.wave - other) < 0.7 * fwhm)
    taken = f.number[near].tolist()[:1]
    return limits, tuple(sorted([number, *taken])), [np.array([wave, other])]


def _extremum(trace, side, sign: int) -> float:
    inside = np.flatnonzero((trace.wave > side[0]) & (trace.wave < side[1]) & trace.good)
    y = sign * running_mean(trace.y, 3)[inside] if len(inside) else np.zeros(0)
    best = int(np.argmax(y)) if len(y) else 0
    if not len(y) or y[best] < 2.0 * trace.noise[inside[best]]:
        what = "absorption on its blue side" if sign > 0 else "emission on its red side"
        raise InputRefused("profile 'p-cygni'", f"there is no {what}", "choose another profile")
    return float(trace.wave[inside[best]])


def _signs(session, wanted: Wanted, profile: str, count: int) -> np.ndarray:
    """Absorption or emission, for each start: parts are what the whole was."""
    sign = session.features.sign[[row_of(session, n) for n in wanted.features]]
    if len(sign) == count:
        return sign
    return sign[0] * np.array([1, -1] if profile == "p-cygni" else [1] * count)


def _best(where, choices, shape: str) -> RegionFit:
    """The fit of least chi-square from several starts; refused where all are.

    Starts are tried with Gaussians; the best of those starts the profile asked for.
    """
    trace, nodes, limits, signs = where
    fits = [(fit_trace(trace, nodes, limits, c, shape if len(choices) == 1 else "gaussian", signs))
            for c in choices]
    apart = [fit for fit in fits if _distinct(fit, trace)]
    if not apart:
        raise InputRefused("fit", "a component vanishes, or falls onto another or on one sample",
                           "take fewer components, or other limits")
    best = min(apart, key=lambda fit: fit.chi2)
    if best.profile == shape:
        return best
    best = fit_trace(trace, nodes, limits, best.features.wave, shape, best.features.sign)
    if not _distinct(best, trace):
        raise InputRefused(f"profile '{shape}'", "leaves one of the components void",
                           "take fewer components, or another profile")
    return best


def _distinct(fit: RegionFit, trace) -> bool:
    """Whether no component is void or a hit of one sample, nor two the same."""
    f = fit.features
    step = np.interp(f.wave, trace.wave, np.gradient(trace.wave))
    real = (np.abs(f.depth) > VOID) & (np.abs(f.depth) > f.depth_err)
    if not np.all(real & (f.fwhm > NARROWEST * step)):
        return False
    return all(
        f.sign[i] != f.sign[j]
        or abs(f.wave[i] - f.wave[j]) > 0.15 * max(f.fwhm[i], f.fwhm[j])
        or max(f.fwhm[i], f.fwhm[j]) > 1.8 * min(f.fwhm[i], f.fwhm[j])
        for i, j in combinations(range(len(f)), 2))


def _made(about: HandTrace, whose, limits, profile: str, fit: RegionFit) -> Made:
    numbers, wing, cleared = whose
    order = np.argsort(fit.params[:, 1])
    rows = [{**row_to_plain(fit.features.take([k])), "segment": about.segment,
             "flags": _flags(fit.features.flags[k], profile, wing)}
            for k in range(len(fit.features))]
    for row, number in zip(rows, _numbers(about, numbers, fit.features)):
        row["number"] = number
    plain_fit = {"limits": [float(x) for x in limits], "profile": profile,
                 "params": [[float(x) for x in p] for p in fit.params[order]], "rows": rows}
    t = about.trace
    veil = np.minimum(t.veil, 0.98) if wing else np.zeros(len(t.wave))
    others = t.y - (cleared.y * (1.0 - veil) + (t.veil if wing else 0.0))
    flux = fit.flux - about.nodes.continuum_at(fit.wave) * np.interp(fit.wave, t.wave, others)
    return Made(tuple(numbers), plain_fit, fit.wave, flux, fit.bic)


def _flags(flags: str, profile: str, wing: bool) -> str:
    words = [w for w in flags.split() if w != "hand"]
    words += [profile] if profile in PAIRED else []
    return " ".join([*(["wing"] if wing else []), *words, "hand"])


def _numbers(about: HandTrace, numbers, fresh) -> list[int]:
    """For each row the number of the old feature nearest to it, 0 for a new one.

    A single row of several features takes the number of the most significant.
    """
    f = about.features
    old = [int(np.flatnonzero(f.number == n)[0]) for n in numbers]
    out = [0] * len(fresh)
    if len(fresh) == 1:
        out[0] = int(f.number[max(old, key=lambda r: np.nan_to_num(f.significance[r]))])
        return out
    pairs = sorted((abs(f.wave[r] - fresh.wave[k]) + 1e3 * (f.sign[r] != fresh.sign[k]), r, k)
                   for r in old for k in range(len(fresh)))
    for distance, r, k in pairs:
        number = int(f.number[r])
        if distance < 1e3 and out[k] == 0 and number not in out:
            out[k] = number
    return out
