"""Strong lines that a sum of Gaussians takes apart: one profile and what stands on it.

Ca II K of a rotating star behind interstellar clouds is one broad saturated line with
narrow ones on it. Where the Gaussian fits of such a line failed, broad
components are fitted, narrow Gaussians are added at the largest residual, and shape and
number are those of least BIC = chi2 + k ln n (Schwarz 1978); the rows change only where
that also beats the sum of Gaussians.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .features import FeatureTable
from .gauss import FWHM_PER_SIGMA, GAUSSIAN_AREA
from .groups import component_sum
from .shapes import EXTRA, profile, width_and_area
from .veil import running_mean

DEEP = 0.6  # depth that makes a line strong
WIDE = 2.0  # line widths at half depth, at least
SPAN = 1.6  # widths at half depth fitted on either side
MOST_NARROW = 8
MOST_LINES = 12  # strong lines of a segment
CLEAR = 10.0  # by which the criterion must prefer the new model
CRUSHING = 0.1  # of the old criterion: then the old rows were parts of a fit gone wrong
SURE = 5.0  # errors of depth beyond which an old row must not be lost
WHOLE = 0.9  # share of the deepest sample that the strong component makes


@dataclass(frozen=True, eq=False)
class _Line:
    """shape; flat parameters (broad first, then 3 a narrow one); bic; covariance."""

    shape: str
    flat: np.ndarray
    bic: float
    covariance: np.ndarray

    @property
    def broad(self):
        return self.flat[: 3 + EXTRA[self.shape]]

    @property
    def narrow(self):
        return self.flat[3 + EXTRA[self.shape] :].reshape(-1, 3)


def with_strong_lines(table: FeatureTable, ready, tick=lambda: None) -> FeatureTable:
    """``table`` of one segment with strong lines that fell apart as one feature each."""
    t = ready.trace
    words = [set(f.split()) for f in table.flags]
    failed = np.array(["fallback" in w and "integrated" not in w for w in words], dtype=bool)
    smooth = running_mean(t.y, 2 * int(0.2 * np.median(ready.fwhm_pixels)) + 1)
    done: list[tuple[float, float]] = []
    anchors = np.flatnonzero(failed & (table.sign > 0))
    at = np.clip(np.searchsorted(t.wave, table.wave[anchors]), 0, len(t.wave) - 1)
    anchors, at = anchors[smooth[at] > 0.5 * DEEP], at[smooth[at] > 0.5 * DEEP]
    for i in at[np.argsort(-smooth[at], kind="stable")]:
        span = _span(t, smooth, int(i))
        if span is None or len(done) >= MOST_LINES or any(a <= t.wave[i] <= b for a, b in done):
            continue
        tick()
        done.append((t.wave[span[0]], t.wave[span[1] - 1]))
        table = _replaced(table, ready, smooth, span)
    return table


def _span(t, smooth, i: int):
    """(first, last+1 sample, width in Angstrom) about a strong broad line, None where none."""
    reach = int(6 * t.width[i] / (t.wave[1] - t.wave[0]))
    a, b = max(0, i - reach), min(len(smooth), i + reach + 1)
    top = float(smooth[a:b][np.abs(t.wave[a:b] - t.wave[i]) < t.width[i]].max())
    if top < DEEP:
        return None
    left = i - int(np.argmax(np.r_[smooth[a : i + 1][::-1] < 0.5 * top, True]))
    right = i + int(np.argmax(np.r_[smooth[i:b] < 0.5 * top, True]))
    wide = t.wave[min(right, len(smooth) - 1)] - t.wave[max(left, 0)]
    if not WIDE * t.width[i] < wide < 8 * t.width[i]:
        return None
    middle = 0.5 * (t.wave[min(right, len(smooth) - 1)] + t.wave[max(left, 0)])
    first, last = np.searchsorted(t.wave, [middle - SPAN * wide, middle + SPAN * wide])
    return int(first), int(last), float(wide)


def _replaced(table, ready, smooth, span) -> FeatureTable:
    t, (first, last, wide) = ready.trace, span
    used = np.arange(first, last)[t.good[first:last]]
    inside = (table.wave >= t.wave[first]) & (table.wave <= t.wave[last - 1])
    inside &= np.isfinite(table.fwhm) & np.isfinite(table.depth) & (table.fwhm > 0)
    mine = table.continuum / ready.nodes.continuum_at(table.wave)
    params = np.c_[table.depth * mine, table.wave, np.log(table.fwhm / FWHM_PER_SIGMA)]
    outside = component_sum(t.wave[used], params[~inside & np.isfinite(params).all(axis=1)])
    length = ready.nodes.correlation_length
    view = _View(t.wave[used], t.y[used] - outside, t.noise[used], length,
                 float(np.median(t.width[used])))
    old = component_sum(view.x, params[inside]) + np.where(t.veil[used] > 0, t.veil[used], 0)
    old_bic = view.chi2(old) / length + 3 * inside.sum() * np.log(len(used) / length)
    best = view.line(wide, old_bic - CLEAR)
    whole = best.broad[0] > WHOLE * smooth[first:last].max()
    whole &= abs(best.broad[1] - 0.5 * (view.x[0] + view.x[-1])) < 0.5 * wide
    if not whole or best.bic > old_bic - CLEAR:
        return table
    rows = _rows(best, view, ready, table, inside)
    if rows is None:
        return table
    broad = rows.fwhm[np.argmax(rows.ew)] > WIDE * view.width
    beyond_doubt = best.bic < CRUSHING * old_bic
    if not broad or not (beyond_doubt or _all_there(table.take(inside), rows, view.width)):
        return table
    return merged(table.take(~inside), rows)


def _all_there(old: FeatureTable, new: FeatureTable, width: float) -> bool:
    """Whether every old row whose fit held has a new one within half a line width."""
    held = np.array(["fallback" not in f.split() for f in old.flags], dtype=bool)
    held &= np.abs(old.depth) > SURE * old.depth_err
    apart = np.abs(old.wave[held][:, None] - new.wave[None])
    return bool(np.all(apart.min(axis=1, initial=np.inf) < 0.5 * width))


@dataclass(frozen=True, eq=False)
class _View:
    """Samples x, y = 1 - flux/continuum, noise, each (n,), of one strong line."""

    x: np.ndarray
    y: np.ndarray
    noise: np.ndarray
    length: float
    width: float

    def chi2(self, model) -> float:
        return float(np.sum(((self.y - model) / self.noise) ** 2))

    def line(self, wide: float, least: float) -> _Line:
        """A Voigt profile with as many narrow lines on it as the criterion asks for, then the
        other shapes with those; wide: its width to start from; least: BIC to be reached."""
        best = self.fit("voigt", self.start("voigt", wide))
        for _ in range(MOST_NARROW):
            if best.broad[0] < 0.5 * self.y.max():
                break
            rest = running_mean(self.y - self.model(best.shape, best.flat)[0], 3) / self.noise
            k = int(np.argmax(np.abs(rest)))
            more = np.r_[best.flat, max(rest[k] * self.noise[k], 0.01), self.x[k],
                         np.log(0.6 * self.width / FWHM_PER_SIGMA)]
            new = self.fit(best.shape, more)
            if new.bic > best.bic:
                break
            best = new
        if best.bic > least:
            return best
        others = (self.fit(s, np.r_[self.start(s, wide), best.narrow.ravel()]) for s in EXTRA)
        return min((best, *others), key=lambda one: one.bic)

    def start(self, shape: str, wide: float):
        middle = 0.5 * (self.x[0] + self.x[-1])
        return np.r_[self.y.max(), middle, np.log(wide / FWHM_PER_SIGMA / 1.5),
                     [np.log(0.4 * wide)] * EXTRA[shape]]

    def model(self, shape, flat):
        k = 3 + EXTRA[shape]
        parts = [profile(shape, self.x, flat[:k])]
        parts += [profile("gaussian", self.x, p) for p in flat[k:].reshape(-1, 3)]
        return sum(v for v, _ in parts), np.hstack([d for _, d in parts])

    def fit(self, shape: str, start) -> _Line:
        from scipy.optimize import least_squares

        k, w = 3 + EXTRA[shape], self.width / FWHM_PER_SIGMA
        span = self.x[-1] - self.x[0]
        low = np.r_[0.0, self.x[0], np.log(0.2 * w), [np.log(0.02 * w)] * (k - 3)]
        high = np.r_[1.5, self.x[-1], np.log(span), [np.log(span)] * (k - 3)]
        for _ in range((len(start) - k) // 3):
            low = np.r_[low, 0.0, self.x[0], np.log(0.2 * w)]
            high = np.r_[high, 1.0, self.x[-1], np.log(1.6 * w)]
        done = least_squares(
            lambda p: (self.model(shape, p)[0] - self.y) / self.noise,
            np.clip(start, low + 1e-9, high - 1e-9),
            jac=lambda p: self.model(shape, p)[1] / self.noise[:, None],
            bounds=(low, high), x_scale="jac", max_nfev=60, ftol=1e-4, xtol=1e-5,
        )
        free = max(len(self.x) - len(start), 1)
        scale = self.length * max(1.0, 2 * done.cost / free)
        bic = 2 * done.cost / self.length + len(start) * np.log(len(self.x) / self.length)
        return _Line(shape, done.x, float(bic), np.linalg.pinv(done.jac.T @ done.jac) * scale)


def _rows(line: _Line, view: _View, ready, table, inside) -> FeatureTable | None:
    """The strong line and the narrow ones on it as rows, significances of the nearest old;
    None where no depth is sure."""
    k, t = len(line.broad), ready.trace
    error = np.sqrt(np.maximum(np.diag(line.covariance), 0.0))
    fwhm, area = width_and_area(line.shape, line.broad)
    bend = np.array([_slope(line.shape, line.broad, j) for j in range(2, k)])
    block = line.covariance[2:k, 2:k]
    cross = line.covariance[0, 2:k]
    depth = line.broad[0]
    grow = depth * bend[:, 1]
    ew_var = (area * error[0]) ** 2 + grow @ block @ grow + 2 * area * (grow @ cross)
    level = float(np.interp(line.broad[1], t.wave, t.level_err)) * (1 - depth)
    rows = [(line.broad[1], error[1], depth, np.hypot(error[0], level), fwhm,
             np.sqrt(max(bend[:, 0] @ block @ bend[:, 0], 0.0)), 1e3 * depth * area,
             1e3 * np.hypot(np.sqrt(max(ew_var, 0.0)), level * view.width), 1.0,
             f"blend {line.shape}" if len(line.narrow) else line.shape)]
    for i, p in enumerate(line.narrow):
        j = k + 3 * i
        base = 1.0 - float(profile(line.shape, p[1:2], line.broad)[0][0])
        base, wide = max(base, 0.02), FWHM_PER_SIGMA * np.exp(p[2])
        c = line.covariance[j : j + 3, j : j + 3]
        g = np.array([1.0, p[0]]) * GAUSSIAN_AREA * wide
        area_err = np.sqrt(max(g @ c[np.ix_([0, 2], [0, 2])] @ g, 0.0))
        rows.append((p[1], error[j + 1], p[0] / base, error[j] / base, wide,
                     wide * error[j + 2], 1e3 * GAUSSIAN_AREA * p[0] * wide / base,
                     1e3 * area_err / base, base, "blend wing"))
    rows = [r for r in rows if r[2] > 3 * r[3]]
    return _table(sorted(rows), ready, table.take(inside)) if rows else None


def _slope(shape: str, params, j: int) -> tuple[float, float]:
    """Derivatives of FWHM and unit area along parameter j."""
    up, down = params.copy(), params.copy()
    up[j] += 1e-4
    down[j] -= 1e-4
    (w1, a1), (w0, a0) = width_and_area(shape, up), width_and_area(shape, down)
    return (w1 - w0) / 2e-4, (a1 - a0) / 2e-4


def _table(rows, ready, old: FeatureTable) -> FeatureTable:
    numbers = np.array([r[:9] for r in rows])
    wave, wave_err, depth, depth_err, fwhm, fwhm_err, ew, ew_err, base = numbers.T
    near = np.argmin(np.abs(old.wave[None] - wave[:, None]), axis=1)
    m = len(rows)
    flags = [f"{r[9]} saturated" if r[2] > 0.9 else r[9] for r in rows]
    return FeatureTable(
        number=np.arange(1, m + 1), segment=np.full(m, old.segment[0]),
        component=np.zeros(m, dtype=int) if m == 1 else np.arange(1, m + 1),
        sign=np.ones(m, dtype=old.sign.dtype), wave=wave, wave_err=wave_err,
        significance=old.significance[near], depth=depth, depth_err=depth_err, fwhm=fwhm,
        fwhm_err=fwhm_err, ew=ew, ew_err=ew_err,
        continuum=ready.nodes.continuum_at(wave) * base, flags=tuple(flags),
    )


def merged(one: FeatureTable, other: FeatureTable) -> FeatureTable:
    """Rows of both by wavelength, numbered from 1."""
    names = [n for n in FeatureTable.__dataclass_fields__ if n != "flags"]
    both = FeatureTable(
        **{n: np.concatenate([getattr(one, n), getattr(other, n)]) for n in names},
        flags=one.flags + other.flags,
    )
    both = both.take(np.argsort(both.wave, kind="stable"))
    return replace(both, number=np.arange(1, len(both) + 1))
