"""Forms of several parts for one strong line, and the choice against simple profiles.

A form is taken where BIC prefers it clearly to every simple profile, and where its own curve has
the extrema it is named for: an asymmetry or a shoulder makes no second part.
"""

from __future__ import annotations

import numpy as np

from .complex_lines import CENTRAL, DIP, SIGMAS, WIDE, Line
from .compound import Compound, View, behind, covariance, fit_compound, with_narrow
from .detect import distinct
from .gauss import FWHM_PER_SIGMA
from .shapes import EXTRA, width_and_area

APART = 0.1  # of the lower peak: two peaks of one line have more between them
CLEAR = 12.0  # by which the criterion must prefer a form
TRIED = 3  # forms that are tried with other lines on them
SHARE, THICK = 0.12, 1.5  # least absorption before emission, its least width in line widths
LEAST = 0.7  # line widths of a part
SURE, HELD = 5.0, 1.5  # errors of its height that a part must have; where it leans on absorption
BAD = 0.08  # largest misfit (rms) as a share of the line's whole swing
SIMPLE = ("gaussian", "voigt", "rotational", "core-wings")
G, WINGED = "gaussian", "core-wings"


def best_form(view: View, t, line: Line, seeds) -> Compound | None:
    """The form that beats all simple ones, None where none does. seeds: (m, 3) other lines."""
    n = len(view.x) / view.length
    tries = [fit_compound(view, *f, np.zeros((0, 3))) for f in _forms(t, line)]
    if line.sign > 0 and not _promising(view, line, tries):
        return None
    tries = sorted(tries, key=lambda f: f.chi2 / view.length + f.count * np.log(n))[:TRIED]
    named = [f for f in (with_narrow(view, one, seeds) for one in tries) if _shows(view, f)]
    if not named:
        return None
    best = min(named, key=lambda f: f.criterion(view, 1.0))
    misfit = max(1.0, best.chi2 / max(len(view.x) - best.count, 1))
    if not _fits(view, best):
        return None
    plain = min(_simple(view, line, best), key=lambda f: f.criterion(view, misfit))
    clear = best.criterion(view, misfit) < plain.criterion(view, misfit) - CLEAR
    return best if clear else None


def whole(view: View, line: Line, seeds) -> Compound | None:
    """One profile for emission that fell apart, None where none fits it."""
    start = [(-float((-view.y).max()), line.middle, line.wide)]
    tries = [with_narrow(view, fit_compound(view, ((s, -1),), start, np.zeros((0, 3))), seeds)
             for s in SIMPLE if s != "rotational"]
    best = min(tries, key=lambda f: f.criterion(view, 1.0))
    sure = abs(best.parts[0][0]) > SURE * np.sqrt(max(covariance(view, best)[0, 0], 0.0))
    broad = _wide(best, 0) > WIDE * view.width
    return best if sure and broad and _fits(view, best) else None


def _fits(view: View, fit: Compound) -> bool:
    """Whether what the fit leaves is small beside the line."""
    left = np.sqrt(fit.chi2 / len(view.x)) * float(np.median(view.noise))
    return bool(left < BAD * float(np.ptp(fit.broad(view.x))))


def _promising(view: View, line: Line, tries) -> bool:
    """Whether a form is ahead of the simple ones while other lines are left alone; of blended
    absorption hardly any is."""
    if not tries:
        return False
    best = min(tries, key=lambda f: f.chi2)
    misfit = max(1.0, best.chi2 / max(len(view.x) - best.count, 1))
    most = best.criterion(view, misfit) + CLEAR
    return all(f.criterion(view, misfit) > most for f in _simple(view, line, best))


def _forms(t, line: Line):
    """(form, starts) worth a try: a start is (a, c, FWHM) of each part."""
    s, wide, middle = line.sign, line.wide, line.middle
    order = line.same[np.argsort(-s * t.y[line.same], kind="stable")]
    if len(order) > 1 and s < 0:
        yield from _pairs(t, line, np.sort(order[:2]))
    if not len(order) or not len(line.other):
        return
    top = float(t.y[order[0]])
    if line.sunk:
        yield from _raised(t, line, order)
        return
    for k in _distinctest(t, line, order) if s < 0 else [_central(t, line)]:
        inside = order.min() < k < order.max()
        share = (t.y[k] - 1.3 * top) / (1.0 - 1.3 * top) if inside else t.y[k]
        more = float(np.clip(share, 0.05, 0.9)) if s < 0 else float(t.y[k]) - top
        start = [((1.3 if inside else 1.0) * top, middle, wide),
                 (more, float(t.wave[k]), (0.3 if inside else 0.6) * wide)]
        for shape in (G, "voigt"):
            yield ((shape, s), (G, -s)), start


def _raised(t, line: Line, order):
    """Forms of one peak that stands in absorption, alone or with another trough at it."""
    wide, middle, top = line.wide, line.middle, float(t.y[order[0]])
    dark = (0.3, middle, 3 * wide)
    yield ((G, 1), (G, -1)), [dark, (top - 0.3, middle, wide)]
    for k in _distinctest(t, line, order):
        drop = float(np.clip(t.y[k] - 0.3 * top, 0.1, 0.8))
        yield ((G, 1), (G, -1), (G, 1)), [dark, (1.2 * top, middle, wide),
                                          (drop, float(t.wave[k]), 0.4 * wide)]


def _pairs(t, line: Line, at):
    """Forms of two peaks at the samples ``at`` (2,), alone, on a broad base or in absorption."""
    s, wide = line.sign, line.wide
    apart = float(t.wave[at[1]] - t.wave[at[0]])
    y = [float(t.y[k]) for k in at]

    def pair(share, width):
        return [(share * v, float(t.wave[k]), width * apart) for v, k in zip(y, at)]

    if line.sunk:
        dark = (0.3, line.middle, 3 * wide)
        base = (0.5 * min(y), line.middle, 1.2 * wide)
        for shape in (G, "voigt"):
            yield ((shape, 1), (G, -1), (G, -1)), [dark, *pair(1.0, 0.6)]
        yield ((G, 1), (G, -1), (G, -1), (G, -1)), [dark, *pair(0.7, 0.4), base]
        return
    yield ((G, s), (G, s)), pair(1.0, 0.6)
    yield ((WINGED, s), (WINGED, s)), pair(1.0, 0.4)
    base = (0.6 * min(y), line.middle, 1.2 * wide)
    yield ((G, s), (G, s), (G, s)), [*pair(0.5, 0.35), base]


def _central(t, line: Line) -> int:
    """The extremum of the other sign nearest to the middle."""
    return int(line.other[np.argmin(np.abs(t.wave[line.other] - line.middle))])


def _distinctest(t, line: Line, peaks):
    """The deepest extremum of the other sign between the peaks, the deepest beside them, and
    the one nearest to the middle."""
    inside = (line.other > peaks[:2].min()) & (line.other < peaks[:2].max())
    found = [int(part[np.argmin(line.sign * t.y[part])])
             for part in (line.other[inside], line.other[~inside]) if len(part)]
    if len(line.other):
        found.append(_central(t, line))
    return list(dict.fromkeys(found))


def _simple(view: View, line: Line, best: Compound):
    """Fits of two absorptions and of one profile with the other lines that the form has."""
    top = line.sign * float((line.sign * view.y).max())
    if line.sign > 0:
        x = (line.middle - 0.25 * line.wide, line.middle + 0.25 * line.wide)
        for shape in (G, "voigt"):
            yield fit_compound(view, ((shape, 1), (shape, 1)),
                               [(top, c, 0.5 * line.wide) for c in x], best.narrow)
    start, lines = [(top, line.middle, line.wide)], best.narrow
    for shape in SIMPLE:
        yield fit_compound(view, ((shape, line.sign),), start, lines)
    if line.sign < 0 and len(line.same) > 1:  # a dip that another line made
        lines = np.concatenate([lines, [_dip(view, line)]])
        for shape in SIMPLE:
            yield fit_compound(view, ((shape, line.sign),), start, lines)


def _dip(view: View, line: Line) -> tuple[float, float, float]:
    """Start of a narrow absorption where the line is lowest between its two highest peaks."""
    at = [min(int(np.searchsorted(view.x, c)), len(view.x) - 1) for c in line.highest]
    k = int(at[0] + np.argmax(view.y[at[0] : at[1] + 1]))
    low = float(np.max(view.y[at]))
    return (max(float(view.y[k]) - low, 0.05), float(view.x[k]),
            float(np.log(0.8 * view.width / FWHM_PER_SIGMA)))


def _shows(view: View, fit: Compound) -> bool:
    """Whether the parts are sure, broad enough and seen as extrema of the form's own curve."""
    signs = [sign for _, sign in fit.form]
    if not _sure(view, fit, signs):
        return False
    curve = fit.broad(view.x)
    size = max(1.0, 0.6 * view.width / float(np.median(np.diff(view.x))))
    drop = max(SIGMAS * float(np.median(view.noise)) * np.sqrt(view.length / max(size, view.length)),
               DIP * float(np.abs(curve).max()))
    up, down = (len(distinct(sign * curve - (sign * curve).min(), drop, drop)) for sign in (-1, 1))
    if signs.count(-1) > 1:
        return up >= 2 and (curve.max() > drop if signs[0] > 0 else _joined(view, curve, fit))
    if signs == [1, -1, 1]:
        return down >= 2
    broad, other = fit.parts
    if behind(fit.form) and (other[0] < SHARE or _wide(fit, 1) < THICK * view.width):
        return False  # as narrow as other lines are: it may be one of them
    if signs[0] < 0 and abs(other[1] - broad[1]) > 0.5 * _wide(fit, 0):
        return curve.max() > drop  # P Cygni: below the continuum
    if signs[0] > 0:
        return down >= 2 and abs(other[1] - broad[1]) < CENTRAL * _wide(fit, 0)
    return up >= 2


def _sure(view: View, fit: Compound, signs) -> bool:
    """Whether the parts stand inside, are broad and sure enough. Of peaks in absorption their
    common base and the absorption lean on one another: only the two peaks are asked."""
    error = np.sqrt(np.maximum(np.diag(covariance(view, fit)), 0.0))
    sunk, k = signs[0] > 0 and len(signs) > 2, 0
    for i, ((shape, _), p) in enumerate(zip(fit.form, fit.parts)):
        asked = not sunk or i in (1, 2)
        sure = abs(p[0]) > (SURE if signs[0] < 0 else HELD) * error[k]
        if asked and not sure or not view.x[0] < p[1] < view.x[-1]:
            return False
        if width_and_area(shape, p)[0] < LEAST * view.width:
            return False
        k += 3 + EXTRA[shape]
    return True


def _wide(fit: Compound, i: int) -> float:
    """FWHM of a part, Angstrom."""
    return width_and_area(fit.form[i][0], fit.parts[i])[0]


def _joined(view: View, curve, fit: Compound) -> bool:
    """Whether two peaks have emission between them, as one line has and two lines seldom."""
    one, two = sorted(float(p[1]) for p in fit.parts[:2])
    between = (view.x > one) & (view.x < two)
    low = min(-np.interp([one, two], view.x, curve))
    return bool(between.any() and -curve[between].max() > APART * low)
