"""Strong lines of several parts: double peaks, P Cygni profiles, filled and absorbed cores.

Peak by peak such a line falls apart: each broad part is measured as if it stood alone. Where
a broad strong line shows more than one extremum (``complex_lines.py``), forms of two parts and
more (``complex_forms.py``) are fitted together (``compound.py``) and the rows change where one
of them is clearly better than any simple profile.
"""

from __future__ import annotations

import numpy as np

from .complex_forms import SURE, G, best_form, whole
from .complex_lines import Line, lines_to_look_at
from .compound import Compound, View, behind, covariance, numbers
from .features import FeatureTable
from .gauss import FWHM_PER_SIGMA
from .groups import component_sum
from .shapes import EXTRA
from .strong import merged

KEPT = 0.5  # of the height of emission measured before
OTHER = 1.3  # line widths of other lines on it, at most
COMPOUND = "compound"


def with_compounds(table: FeatureTable, ready, tick=lambda: None) -> FeatureTable:
    """``table`` of one segment, lines of several parts as one group of features each.

    Rows of a group carry the flag 'compound', the parts by wavelength and the lines on them.
    """
    for line in lines_to_look_at(ready):
        tick()
        table = _replaced(table, ready, line)
    return table


def _replaced(table, ready, line: Line) -> FeatureTable:
    t = ready.trace
    used = np.arange(line.first, line.last)[t.good[line.first : line.last]]
    inside = (table.wave >= t.wave[line.first]) & (table.wave <= t.wave[line.last - 1])
    inside &= np.isfinite(table.fwhm) & np.isfinite(table.depth) & (table.fwhm > 0)
    mine = table.continuum / ready.nodes.continuum_at(table.wave)
    params = np.c_[table.depth * mine, table.wave, np.log(table.fwhm / FWHM_PER_SIGMA)]
    finite = np.isfinite(params).all(axis=1)
    beyond = component_sum(t.wave[used], params[~inside & finite])
    view = View(t.wave[used], t.y[used] - beyond, t.noise[used], t.correlation,
                float(np.median(t.width[used])), float(np.mean(t.level_err[used])))
    old = table.take(inside)
    seeds = params[inside][_other_lines(old, view)]
    best = best_form(view, t, line, seeds)
    if best is None and line.sign < 0 and not line.sunk and _broken(old):
        best = whole(view, line, seeds)
    if best is None or not _all_lit(old, params[inside, 0], best):
        return table
    return merged(table.take(~inside), _rows(best, view, ready, old))


def _other_lines(old: FeatureTable, view: View) -> np.ndarray:
    """True for narrow absorption that was measured well before."""
    held = np.array(["fallback" not in f.split() for f in old.flags], dtype=bool)
    thin = old.fwhm < OTHER * view.width
    return held & thin & (old.sign > 0) & (old.depth > SURE * old.depth_err)


def _all_lit(old: FeatureTable, height, fit: Compound) -> bool:
    """Whether every sure emission row is mostly in the fit: else it is another line's; height:
    of the old rows, relative to the continuum, (m,)."""
    held = np.array(["fallback" not in f.split() for f in old.flags], dtype=bool)
    sure = held & (old.sign < 0) & (np.abs(old.depth) > SURE * old.depth_err)
    return bool(np.all(fit.lit(old.wave[sure]) > KEPT * np.abs(height[sure])))


def _broken(old: FeatureTable) -> bool:
    """Whether emission was measured in pieces, some of which failed."""
    words = [f.split() for f, s in zip(old.flags, old.sign) if s < 0]
    return len(words) > 1 and any("fallback" in w for w in words)


def _rows(fit: Compound, view: View, ready, old: FeatureTable) -> FeatureTable:
    """Parts and the lines on them as rows; depths of absorption on emission, and of lines on
    any part, are relative to what they absorb."""
    c, k, rows = covariance(view, fit), 0, []
    for (shape, sign), p in zip(fit.form, fit.parts):
        n = 3 + EXTRA[shape]
        words = ["blend"] * (len(fit.parts) + len(fit.narrow) > 1) + [COMPOUND] * (len(fit.parts) > 1)
        words += [shape] * (shape != G)
        base = 1.0 + float(fit.lit(p[1:2])[0]) if sign > 0 and behind(fit.form) else 1.0
        rows.append((numbers(shape, p, c[k : k + n, k : k + n]), base, " ".join(words)))
        k += n
    for p in fit.narrow:
        base = max(1.0 - float(fit.broad(p[1:2])[0]), 0.02)
        row = np.array(numbers(G, p, c[k : k + 3, k : k + 3]))
        row[[0, 1, 6, 7]] /= base
        if abs(row[0]) > 3.0 * row[1]:
            rows.append((tuple(row), base, "blend wing"))
        k += 3
    return _table(sorted(rows, key=lambda r: r[0][2]), ready, view, old)


def _table(rows, ready, view: View, old: FeatureTable) -> FeatureTable:
    depth, depth_err, wave, wave_err, fwhm, fwhm_err, area, area_err = np.array([r[0] for r in rows]).T
    base, m = np.array([r[1] for r in rows]), len(rows)
    noise = np.interp(wave, view.x, view.noise)
    step = float(np.median(np.diff(view.x)))
    strength = np.abs(depth) * base / noise * np.sqrt(0.7527 * fwhm / step / view.length)
    flags = [f"{r[2]} saturated".strip() if d > 0.9 else r[2] for r, d in zip(rows, depth)]
    return FeatureTable(
        number=np.arange(1, m + 1), segment=np.full(m, old.segment[0] if len(old) else 0),
        component=np.arange(1, m + 1) if m > 1 else np.zeros(1, dtype=int), sign=np.where(depth > 0, 1, -1), wave=wave,
        wave_err=wave_err, significance=strength, depth=depth, depth_err=depth_err,
        fwhm=fwhm, fwhm_err=fwhm_err, ew=1e3 * area, ew_err=1e3 * area_err,
        continuum=ready.nodes.continuum_at(wave) * base, flags=tuple(flags),
    )
