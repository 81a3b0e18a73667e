"""The instrument's width at every feature of a session, and what the lines themselves have."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from ..claims.added_rows import flagged_as
from ..measure.intrinsic import intrinsic_width, lorentzian_width
from ..measure.options import Measurement
from ..session.model import Session

GIVEN, HEADER = "resolving power given", "resolving power in the header"
TELLURIC = "telluric lines (their own width included)"
NARROWEST = "narrowest lines (an upper limit: the star's own width included)"
NONE = "not known"
NODES = 17  # of a segment's width: straight lines between are right to 0.1 per cent
FEWEST = 8  # telluric features that tell a width
GOOD = 0.1  # relative error of the width of such a feature at most
SHARP = 0.25  # quantile of their widths: blends and strong lines are broader
UNFIT = ("spike", "fallback", "edge", "blend", "saturated", "integrated")  # to tell it
SHAPED = ("voigt", "rotational", "core-wings", "integrated")  # widths that no Gaussian gave
NO_WIDTH = ("spike", "fallback")


@dataclass(frozen=True, eq=False)
class Widths:
    """Angstrom, of every feature, (m,), NaN where not known.

    source: where the instrument's width comes from, in words; instrument: its FWHM;
    intrinsic, intrinsic_err: FWHM of the line with the instrument's taken out.
    """

    source: str
    instrument: np.ndarray
    intrinsic: np.ndarray
    intrinsic_err: np.ndarray


@lru_cache(maxsize=1)  # a session is frozen; the last one shown
def widths_of(session: Session) -> Widths:
    """Instrument's and intrinsic widths, by ``measure.intrinsic``.

    The instrument's is the resolving power given, else the header's, else that of telluric
    lines, else that of the narrowest lines. Lines of another shape than a Gaussian carry the
    difference to a Lorentzian's width in their error.
    """
    f = session.features
    source, instrument, error = _instrument(session)
    width, width_err = intrinsic_width(f.fwhm, f.fwhm_err, instrument, error)
    shaped = flagged_as(f, SHAPED)
    apart = np.where(shaped, width - lorentzian_width(f.fwhm, instrument), 0.0)
    void = flagged_as(f, NO_WIDTH) | ~np.isfinite(width_err)
    return Widths(source, instrument, np.where(void, np.nan, width),
                  np.where(void, np.nan, np.hypot(width_err, apart)))


def kept_widths(measurement: Measurement, header_resolution) -> dict:
    """What a session keeps of the width of the narrowest lines: a few nodes a segment, and
    the resolving power that the header states."""
    stated = {"header_resolution": float(header_resolution)} if header_resolution else {}
    return stated | {"widths": [_nodes(s) for s in measurement.segments]}


def _nodes(segment) -> dict | None:
    if segment is None or not segment.width_law:
        return None
    at = np.unique(np.linspace(0, len(segment.width) - 1, NODES).astype(int))
    err = float(segment.width_err)
    return {"law": segment.width_law, "err": err if np.isfinite(err) else None,
            "wave": segment.width_wave[at].tolist(), "fwhm": segment.width[at].tolist()}


def _instrument(session: Session):
    """(source, FWHM, error), Angstrom, (m,)."""
    wave = session.features.wave
    known = ((GIVEN, session.options.get("resolution")),
             (HEADER, session.measurement.get("header_resolution")))
    for source, power in known:
        if isinstance(power, (int, float)) and power > 0:
            return source, wave / power, np.zeros(len(wave))
    lines, lines_err = _narrowest(session)
    air, air_err = _telluric(session)
    if np.isfinite(air) and not np.any(air * wave > lines):
        return TELLURIC, air * wave, air_err * wave
    return NARROWEST if np.any(np.isfinite(lines)) else NONE, lines, lines_err


def _narrowest(session: Session):
    """(FWHM, error) of the narrowest lines as measured, (m,); NaN where they were not."""
    f = session.features
    out = np.full((2, len(f)), np.nan)
    for i, nodes in enumerate(session.measurement.get("widths", ())):
        if not nodes or nodes.get("err") is None:
            continue
        here, n = f.segment == i, min(len(nodes["wave"]), len(nodes["fwhm"]))
        out[0, here] = np.interp(f.wave[here], nodes["wave"][:n], nodes["fwhm"][:n])
        out[1, here] = out[0, here] * nodes["err"]
    return out


def _telluric(session: Session) -> tuple[float, float]:
    """(FWHM/wavelength, error) of sharp unblended telluric lines; NaN where few."""
    f = session.features
    origin = np.array([c.origin == "telluric" and c.standing in ("firm", "likely")
                       for c in session.claims], dtype=bool)
    ratio = (f.fwhm / f.wave)[origin & ~flagged_as(f, UNFIT) & (f.fwhm_err < GOOD * f.fwhm)]
    if len(ratio) < FEWEST:
        return float("nan"), float("nan")
    scatter = 1.4826 * np.median(np.abs(ratio - np.median(ratio)))
    # error of a normal sample's lower quartile
    return float(np.quantile(ratio, SHARP)), float(1.36 * scatter / np.sqrt(len(ratio)))
