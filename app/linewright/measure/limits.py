"""How strong an unseen line may be, and where the error of an equivalent width comes from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .by_hand import local_trace, segment_at
from .gauss import FWHM_PER_SIGMA, GAUSSIAN_AREA, Fit, Windows, profiles, spread_noise
from .groups import component_sum

C_KM_S = 299792.458
AROUND = 1.5  # widths on either side of a line that is integrated


def upper_limit(measurement, wave, width=None, sigmas: float = 3.0):
    """Equivalent width in milliangstrom that a line at ``wave`` would at least need.

    measurement: Measurement; wave: vacuum Angstrom, number or array; width: FWHM expected,
    Angstrom (None: the narrowest lines'); sigmas: confidence. A Gaussian of known centre
    and width has sigma_W = 1.2269 sqrt(FWHM dx) / (S/N) (Fisher matrix; compare Cayrel
    1988, IAU Symp. 132, 345), times the square root of the noise's correlation length;
    the continuum's error is added in quadrature. NaN outside the coverage.
    """
    wave = np.asarray(wave, dtype=float)
    out = np.full(wave.shape, np.nan)
    for s in measurement.segments:
        if s is None:
            continue
        inside = (wave >= s.node_wave[0]) & (wave <= s.node_wave[-1])
        fwhm = s.width_at(wave) if width is None else np.broadcast_to(width, wave.shape)
        pixels = np.interp(wave, s.width_wave, s.width_pixels)
        step = s.width_at(wave) / pixels
        # sum k = 1.0645 FWHM/dx, sum k^2 = 0.7527 FWHM/dx of a Gaussian k of unit height
        height = s.noise_at(wave) / np.sqrt(0.7527 * fwhm / step)
        height = height * np.sqrt(s.correlation_length)
        fake = s.continuum_err_at(wave) * np.sqrt(2.0)
        limit = 1e3 * sigmas * GAUSSIAN_AREA * fwhm * np.hypot(height, fake)
        out = np.where(inside, np.fmin(out, limit), out)
    covered = np.zeros(wave.shape, dtype=bool)
    for low, high in measurement.coverage:
        covered |= (wave >= low) & (wave <= high)
    return np.where(covered, out, np.nan)


def upper_limits(measurement, wavelengths_rest, velocity: float = 0.0, width=None,
                 sigmas: float = 3.0) -> np.ndarray:
    """Rest-frame equivalent widths in milliangstrom below which lines would stay unseen, (n,).

    measurement: Measurement; wavelengths_rest: vacuum Angstrom in the source's frame, (n,);
    velocity: of the source in the spectrum's frame, km/s; width: FWHM expected there, km/s,
    number or (n,), no less than the narrowest lines' (None: theirs); sigmas: confidence.
    NaN outside the coverage. Formula and errors: ``upper_limit``.
    """
    wave = np.atleast_1d(np.asarray(wavelengths_rest, dtype=float)) * (1.0 + velocity / C_KM_S)
    if width is not None:
        width = np.fmax(wave * np.asarray(width, dtype=float) / C_KM_S, _narrowest(measurement, wave))
    return rest_width(upper_limit(measurement, wave, width, sigmas), velocity)


def _narrowest(measurement, wave) -> np.ndarray:
    """FWHM in Angstrom of the narrowest lines, (n,); NaN outside the segments."""
    out = np.full(wave.shape, np.nan)
    for s in measurement.segments:
        if s is not None:
            inside = (wave >= s.node_wave[0]) & (wave <= s.node_wave[-1])
            out = np.where(inside, np.fmin(out, s.width_at(wave)), out)
    return out


def rest_width(ew, velocity: float):
    """Equivalent width in the source's rest frame: W / (1 + v/c); velocity in km/s."""
    return np.asarray(ew) / (1.0 + velocity / C_KM_S)


@dataclass(frozen=True)
class EquivalentWidth:
    """Milliangstrom, negative in emission; the three errors are one sigma each.

    fitted: area of the profile; integrated: sum of the samples, neighbours taken off;
    photon: of the line alone; continuum: of its level; blend: what the neighbours add.
    """

    fitted: float
    integrated: float
    photon: float
    integrated_photon: float
    continuum: float
    blend: float


def equivalent_width(spectrum, measurement, row: int) -> EquivalentWidth:
    """Equivalent width of one feature both ways, with its errors apart."""
    f = measurement.features
    number, centre, fwhm = int(f.segment[row]), float(f.wave[row]), float(f.fwhm[row])
    segment_at(spectrum, measurement, centre)  # refuses what lies outside
    nodes = measurement.segments[number]
    t = local_trace(spectrum.segments[number], nodes, centre, 6.0 * fwhm)
    base = 1.0 - max(0.0, 1.0 - float(f.continuum[row]) / float(nodes.continuum_at(centre)))
    near = np.flatnonzero((f.segment == number) & (np.abs(f.wave - centre) < 6.0 * fwhm)
                          & np.isfinite(f.depth) & np.isfinite(f.fwhm) & (f.fwhm > 0))
    params = np.c_[f.depth[near] * base, f.wave[near], np.log(f.fwhm[near] / FWHM_PER_SIGMA)]
    mine = near == row
    close = np.abs(f.wave[near] - centre) < 1.8 * 0.5 * (f.fwhm[near] + fwhm)
    order = np.r_[np.flatnonzero(mine), np.flatnonzero(close & ~mine)]
    inside = t.good & (np.abs(t.wave - centre) < AROUND * fwhm)
    photon, continuum = _area_errors(t, inside, params[order[:1]])
    together = t.good & np.any([np.abs(t.wave - c) < AROUND * fwhm for c in params[order, 1]], 0)
    whole, _ = _area_errors(t, together, params[order])
    dx = np.gradient(t.wave)[inside]
    rest = t.y - component_sum(t.wave, params[~mine]) - (1.0 - base)
    scatter = np.sqrt(nodes.correlation_length * np.sum((t.noise[inside] * dx) ** 2))
    return EquivalentWidth(
        float(f.ew[row]), 1e3 * float(np.sum(rest[inside] * dx)) / base, 1e3 * photon / base,
        1e3 * float(scatter) / base, 1e3 * continuum / base,
        1e3 * float(np.sqrt(max(whole**2 - photon**2, 0.0))) / base,
    )


def _area_errors(t, inside, params):
    """(noise error, continuum error) in Angstrom of the first component's area."""
    x, y, weight = t.wave[inside][None], t.y[inside][None], 1.0 / t.noise[inside][None]
    _, slopes = profiles(x, params[None])
    z = slopes.reshape(1, x.shape[1], -1) * weight[:, :, None]
    fit = Fit(params[None], np.linalg.pinv(z.transpose(0, 2, 1) @ z), np.zeros(1), np.ones(1))
    windows = Windows(x, y, weight)
    noise = spread_noise(windows, fit, t.correlation)[0]
    level = spread_noise(windows, fit, t.correlation, t.level_err[inside].mean()[None])[0] - noise
    a, s = params[0, 0], np.exp(params[0, 2])
    slope = np.zeros(len(noise))
    slope[0], slope[2] = np.sqrt(2 * np.pi) * s, np.sqrt(2 * np.pi) * s * a
    return tuple(float(np.sqrt(max(slope @ c @ slope, 0.0))) for c in (noise, level))
