"""The Earth's motion along the line of sight, without any network.

Number applied: the barycentric correction v_b of Wright & Eastman (2014, PASP 126, 838),
lambda_barycentric = lambda_observed (1 + v_b/c); both wavelengths in vacuum. astropy's
built-in ephemeris agrees with JPL DE421 to below 1 mm/s. For future dates the Earth's
rotation is predicted: up to 3 cm/s uncertain.
"""

from __future__ import annotations

import contextlib
import math
import warnings
from dataclasses import dataclass, replace

from ..errors import InputRefused
from .medium import C_KM_S
from .observation import Observation
from .spectrum import Spectrum
from .velocity import shift

LARGEST = 35.0  # km/s: no barycentric correction from the ground exceeds this
KINDS = ("barycentric", "heliocentric")


@dataclass(frozen=True)
class EarthMotion:
    """velocity: km/s to apply, lambda (1 + velocity/c); kind: the frame it leads to."""

    velocity: float
    kind: str
    words: str


@contextlib.contextmanager
def offline():
    """Earth rotation from what astropy carries: no download, no complaint about its age."""
    from astropy.utils import iers

    with contextlib.ExitStack() as stack:
        stack.enter_context(iers.conf.set_temp("auto_download", False))
        stack.enter_context(iers.conf.set_temp("auto_max_age", None))
        stack.enter_context(iers.conf.set_temp("iers_degraded_accuracy", "warn"))
        stack.enter_context(warnings.catch_warnings())
        warnings.simplefilter("ignore")
        yield


def _target(seen: Observation):
    """The star as astropy wants it; without parallax the motion is one across the sky."""
    from astropy import units as u
    from astropy.coordinates import SkyCoord
    from astropy.time import Time

    epoch = Time(seen.epoch, format="jyear", scale="tdb")
    if math.isfinite(seen.parallax) and seen.parallax > 0:
        return SkyCoord(
            seen.ra * u.deg, seen.dec * u.deg, distance=(1e3 / seen.parallax) * u.pc,
            pm_ra_cosdec=seen.pm_ra * u.mas / u.yr, pm_dec=seen.pm_dec * u.mas / u.yr,
            radial_velocity=seen.velocity * u.km / u.s, obstime=epoch, frame="icrs")
    if seen.pm_ra == 0 and seen.pm_dec == 0:
        return SkyCoord(seen.ra * u.deg, seen.dec * u.deg, frame="icrs")
    moving = SkyCoord(seen.ra * u.deg, seen.dec * u.deg, distance=1e6 * u.pc,
                      pm_ra_cosdec=seen.pm_ra * u.mas / u.yr, pm_dec=seen.pm_dec * u.mas / u.yr,
                      radial_velocity=0 * u.km / u.s, obstime=epoch, frame="icrs")
    now = moving.apply_space_motion(new_obstime=_time(seen))
    return SkyCoord(now.ra, now.dec, frame="icrs")


def _time(seen: Observation):
    from astropy.time import Time

    return Time(seen.time[0], seen.time[1], format="jd", scale=seen.scale)


def correction(seen: Observation, kind: str = "barycentric") -> EarthMotion:
    """The correction for ``seen``.

    Raises InputRefused, naming what is missing, when place, target or time are not known.
    """
    if seen.missing():
        raise InputRefused(f"{kind} correction", f"lacks {' and '.join(seen.missing())}",
                           "give them as options, or the number itself with --velocity")
    from astropy import units as u
    from astropy.coordinates import EarthLocation

    site = seen.site
    with offline():
        place = EarthLocation.from_geodetic(site.longitude * u.deg, site.latitude * u.deg,
                                            site.height * u.m)
        value = _target(seen).radial_velocity_correction(
            kind, obstime=_time(seen), location=place).to_value(u.km / u.s)
    full = math.isfinite(seen.parallax) and seen.parallax > 0
    words = f"{kind} correction {value:+.4f} km/s from {site.in_words()}" + (
        " with the star's full motion" if full else
        " with the proper motion" if seen.pm_ra or seen.pm_dec else "")
    return EarthMotion(float(value), kind, words)


def refuse_twice(spectrum: Spectrum, kind: str) -> None:
    """Raises InputRefused unless the wavelengths are as observed."""
    if spectrum.frame in ("topocentric", "geocentric"):
        return
    what = spectrum.path or spectrum.name or "spectrum"
    if spectrum.frame == "unknown":
        raise InputRefused(what, "does not say whether it was corrected for the Earth's motion",
                           "say --frame topocentric if it was not")
    done = spectrum.corrections[0] if spectrum.corrections else spectrum.frame_from
    raise InputRefused(what, f"is {spectrum.frame} already ({done}): a {kind} correction is not "
                       "applied again", "if that is wrong, say --frame topocentric")


def corrected(spectrum: Spectrum, velocity: float, kind: str = "barycentric") -> Spectrum:
    """The spectrum moved to ``kind``'s frame by lambda (1 + velocity/c), velocity in km/s.

    Telluric and sky lines keep the observer's frame: they stand at ``velocity`` afterwards,
    which ``observer_velocity`` tells. Raises InputRefused when a correction was applied
    before, or for a velocity no correction reaches.
    """
    refuse_twice(spectrum, kind)
    if not abs(velocity) <= LARGEST:
        raise InputRefused(f"{kind} correction", f"{velocity:+.4g} km/s is more than the Earth "
                           f"moves ({LARGEST:.0f} km/s)", "check the number and its unit (km/s)")
    done = f"{kind} correction {velocity:+.4f} km/s applied here: lambda (1 + v/c)"
    moved = shift(spectrum, velocity)
    said = tuple(w for w in spectrum.warnings if not w.startswith("the header gives a correction"))
    return replace(moved, warnings=said, frame=kind, frame_from="corrected by the user",
                   corrections=(*spectrum.corrections, done), observer_velocity=float(velocity),
                   read_options={**spectrum.read_options, kind: float(velocity)})


def zero_point_removed(spectrum: Spectrum, velocity: float, error: float) -> Spectrum:
    """Wavelengths divided by (1 + velocity/c): a zero point seen in telluric or sky lines.

    velocity, error: km/s, of lines that should stand at zero in the observer's frame.
    """
    if not abs(velocity) <= 100.0 or not error >= 0:
        raise InputRefused("--zero-point", f"{velocity:+.4g} +- {error:.4g} km/s is no zero point",
                           "give km/s as VALUE or VALUE:ERROR")
    inverse = C_KM_S * (1.0 / (1.0 + velocity / C_KM_S) - 1.0)
    words = (f"wavelength zero point {velocity:+.4f} +- {error:.4f} km/s removed here: "
             "lambda / (1 + v/c)")
    return replace(shift(spectrum, inverse), corrections=(*spectrum.corrections, words),
                   read_options={**spectrum.read_options, "zero_point": (velocity, error)})
