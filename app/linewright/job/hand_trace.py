"""The spectrum about a feature, ready to be fitted by hand again and again.

Noise and line width are measured in the surroundings as in a solve; the continuum is the
session's own, so that a fit by hand stands beside the machine's on one scale.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..errors import InputRefused
from ..measure.again import trace_of
from ..measure.features import FeatureTable
from ..measure.gauss import FWHM_PER_SIGMA
from ..measure.groups import Trace, component_sum
from ..measure.options import MeasureOptions, SegmentMeasure
from ..measure.prepare import prepare
from ..measure.shapes import profile
from ..session.model import HandFit, Session
from ..spectra.spectrum import Segment, Spectrum

LEAST_WIDTHS = 60.0  # line widths looked at on either side
LEAST_SAMPLES = 300
SHAPES = {"double-peaked": "gaussian", "p-cygni": "gaussian"}


@dataclass(frozen=True, eq=False)
class HandTrace:
    """One stretch of one segment. segment: its index in the spectrum; features: the session's
    in that stretch; fits: the fits by hand among them."""

    trace: Trace
    nodes: SegmentMeasure
    segment: int
    features: FeatureTable
    fits: tuple[HandFit, ...]

    def without_others(self, numbers, wing: bool) -> tuple[Trace, SegmentMeasure]:
        """The stretch with every feature but ``numbers`` taken off, and its nodes.

        wing: broad absorption or emission under them counts as continuum, as it does for
        features the machine flags so.
        """
        t, nodes = self.trace, self.nodes
        y = t.y - self._model(~np.isin(self.features.number, list(numbers)))
        if not wing:
            return replace(t, y=y), nodes
        base = 1.0 - np.minimum(t.veil, 0.98)
        lowered = replace(t, y=(y - t.veil) / base, noise=t.noise / base)
        return lowered, replace(nodes, node_wave=t.wave,
                                node_flux=nodes.continuum_at(t.wave) * base,
                                node_err=nodes.continuum_err_at(t.wave))

    def _model(self, others) -> np.ndarray:
        """What the features of this mask add to y, (n,)."""
        f, wave = self.features, self.trace.wave
        base = np.minimum(1.0, f.continuum / self.nodes.continuum_at(f.wave))
        total = np.zeros(len(wave))
        drawn = np.zeros(len(f), dtype=bool)
        for fit in self.fits:
            rows = np.isin(f.number, fit.features)
            if len(fit.params) == rows.sum() and np.all(others[rows]):
                shape = SHAPES.get(fit.profile, fit.profile)
                level = np.interp(wave, f.wave[rows], base[rows])
                total += level * sum(profile(shape, wave, np.array(p))[0] for p in fit.params)
                drawn |= rows
        broad = np.array(["integrated" in words.split() for words in f.flags], dtype=bool)
        plain = others & ~drawn & ~broad & np.isfinite(f.depth) & (np.nan_to_num(f.fwhm) > 0)
        plain &= np.array(["spike" not in words.split() for words in f.flags], dtype=bool)
        params = np.c_[f.depth[plain] * base[plain], f.wave[plain],
                       np.log(f.fwhm[plain] / FWHM_PER_SIGMA)]
        return total + component_sum(wave, params)


def hand_trace(spectrum: Spectrum, session: Session, segment: int, low: float, high: float):
    """The HandTrace from below ``low`` to above ``high``, vacuum Angstrom, of a segment.

    Raises InputRefused where the segment is not there or holds too few usable samples.
    """
    return ready_trace(*hand_stretch(spectrum, session, segment, low, high))


def hand_stretch(spectrum: Spectrum, session: Session, segment: int, low: float, high: float):
    """What ``ready_trace`` needs, small enough to be sent to another process: (samples,
    segment, features, fits, (continuum, continuum the features were measured under),
    resolving power)."""
    if not 0 <= segment < len(spectrum.segments):
        raise InputRefused(f"segment {segment}", "the spectrum has none of that number",
                           "bring the spectrum the session was made from")
    cut = _cut(spectrum.segments[segment], session, low, high)
    f = session.features
    near = (f.segment == segment) & (f.wave >= cut.wave[0]) & (f.wave <= cut.wave[-1])
    features = f.take(near)
    known = set(features.number.tolist())
    fits = tuple(fit for fit in session.fits if known & set(fit.features))
    level = session.continuum[segment] if segment < len(session.continuum) else None
    return cut, segment, features, fits, (level, level), session.options.get("resolution")


def ready_trace(cut: Segment, segment: int, features, fits, levels, resolution) -> HandTrace:
    """The HandTrace of what ``hand_stretch`` gives; the levels may be None."""
    found = prepare(cut, MeasureOptions(resolution=resolution), [])
    if found is None:
        raise InputRefused(f"{cut.wave[0]:.2f} to {cut.wave[-1]:.2f} A (vacuum)",
                           "holds too few usable samples", "choose a place without masks or gaps")
    nodes = found.nodes
    if levels[0] is not None and len(levels[0].wave) > 1:
        nodes = _under(nodes, levels[0])
    trace, _ = trace_of(cut, nodes)
    trace = replace(trace, good=found.trace.good, veil=_veil(trace, features, levels[1]))
    return HandTrace(trace, nodes, segment, features, fits)


def _veil(trace: Trace, features: FeatureTable, level) -> np.ndarray:
    """The veil of this stretch, made to agree with what the features were measured against.

    A continuum that a person raised must not be taken for broad absorption, nor a short
    stretch's own idea of it for the whole spectrum's.
    """
    words = [set(flags.split()) for flags in features.flags]
    tells = np.array([not w & {"integrated", "spike"} for w in words], dtype=bool)
    tells &= np.isfinite(features.continuum)
    if level is None or len(level.wave) < 2 or not tells.any():
        return trace.veil
    wave = features.wave[tells]
    base = 1.0 - features.continuum[tells] / np.interp(wave, level.wave, level.value)
    order = np.argsort(wave)
    error = base - np.interp(wave, trace.wave, trace.veil)
    return trace.veil + np.interp(trace.wave, wave[order], error[order])


def _under(nodes: SegmentMeasure, level) -> SegmentMeasure:
    """The nodes with the session's continuum; the noise in flux stays what it was."""
    inside = (level.wave > nodes.node_wave[0]) & (level.wave < nodes.node_wave[-1])
    wave = np.r_[nodes.node_wave[0], level.wave[inside], nodes.node_wave[-1]]
    flux = np.interp(wave, level.wave, level.value)
    ratio = nodes.continuum_at(nodes.noise_wave) / np.interp(nodes.noise_wave, wave, flux)
    return replace(nodes, node_wave=wave, node_flux=flux, node_err=nodes.continuum_err_at(wave),
                   noise=nodes.noise * ratio)


def _cut(segment: Segment, session: Session, low: float, high: float) -> Segment:
    widths = session.features.fwhm[np.isfinite(session.features.fwhm)]
    step = float(np.median(np.diff(segment.wave)))
    width = float(np.median(widths)) if len(widths) else 4.0 * step
    reach = max(LEAST_WIDTHS * width, LEAST_SAMPLES * step, high - low)
    part = slice(*np.searchsorted(segment.wave, [low - reach, high + reach]))
    sigma = segment.uncertainty
    cut = Segment(segment.wave[part], segment.flux[part],
                  None if sigma is None else sigma[part], segment.mask[part])
    if len(cut.wave) < 2:
        raise InputRefused(f"{low:.3f} to {high:.3f} A (vacuum)", "lies outside the spectrum",
                           "choose a place the spectrum covers")
    return cut
