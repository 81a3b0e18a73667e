"""Show the barycentric correction and a wavelength zero point; with -o, apply and write.

Without -o nothing is changed: the number, its sign and where it comes from are shown.
"""

from __future__ import annotations

from .parsing import number, say
from .reading_options import add_reading_options, read


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM")
    parser.add_argument("-o", "--output", metavar="OUT.fits|.ecsv", help="apply and write")
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")
    group = parser.add_argument_group("what the header lacks")
    group.add_argument("--site", metavar="NAME|LAT,LON,HEIGHT", help="degrees N, degrees E, m")
    group.add_argument("--coordinates", metavar="RA,DEC", help="ICRS, degrees or 01:44:04,-15:56:15")
    group.add_argument("--proper-motion", metavar="RA,DEC", help="mas/yr, RA with cos(dec)")
    group.add_argument("--parallax", type=number, metavar="MAS")
    group.add_argument("--star-velocity", type=number, metavar="KM_S")
    group.add_argument("--epoch", type=number, metavar="YEAR", help="of the coordinates")
    group.add_argument("--time", metavar="UTC|JD|MJD", help="of mid-exposure")
    group = parser.add_argument_group("what to apply")
    group.add_argument("--heliocentric", action="store_true", help="instead of barycentric")
    group.add_argument("--velocity", type=number, metavar="KM_S", help="this number instead")
    group.add_argument("--measure-zero-point", action="store_true",
                       help="from telluric or sky lines; taken out first")
    group.add_argument("--save-zero-point", metavar="FILE.json", help="keep it for other spectra")
    add_reading_options(parser)


def run(options) -> int:
    from ..publish.spectrum_out import check_spectrum_suffix, write_spectrum
    from ..session.atomic import check_writable

    for name in (options.output, options.save_zero_point):
        if name is not None:
            check_writable(name, options.force)
    if options.output is not None:
        check_spectrum_suffix(options.output)
    spectrum = read(options)
    spectrum = _zero_point(spectrum, options)
    motion = _motion(spectrum, options)
    if options.output is None:
        if motion is not None:
            print("nothing applied: give -o OUT to apply and write")
        return 0
    if motion is not None:
        from ..spectra.earth_motion import corrected

        spectrum = corrected(spectrum, motion.velocity, motion.kind)
    write_spectrum(spectrum, options.output, options.force)
    print(f"{options.output}: {'; '.join(spectrum.corrections) or 'nothing to correct'}")
    return 0


def _zero_point(spectrum, options):
    """The spectrum without its measured zero point (when asked for), shown and kept."""
    if not (options.measure_zero_point or options.save_zero_point):
        return spectrum
    from ..job.observer_frame import measured_zero_point
    from ..lines.loading import load_catalogue
    from ..measure.core import measure_spectrum
    from ..spectra.earth_motion import zero_point_removed

    found = measured_zero_point(spectrum, measure_spectrum(spectrum).features, load_catalogue())
    print(f"zero point  {found.in_words()}")
    if options.save_zero_point is not None:
        _save(found, spectrum, options)
    return zero_point_removed(spectrum, found.velocity, found.error)


def _save(found, spectrum, options) -> None:
    import json

    from ..session.atomic import write_atomically

    held = {"zero_point_kms": found.velocity, "error_kms": found.error, "lines": found.lines,
            "kind": found.kind, "spectrum_sha256": spectrum.sha256}
    data = (json.dumps(held, indent=1) + "\n").encode()
    write_atomically(options.save_zero_point, data, options.force)


def _motion(spectrum, options):
    """The correction to apply, shown; None where one was applied before."""
    from ..errors import InputRefused
    from ..spectra.earth_motion import EarthMotion, correction, refuse_twice

    kind = "heliocentric" if options.heliocentric else "barycentric"
    try:
        refuse_twice(spectrum, kind)
    except InputRefused as refusal:
        if options.output is not None and not (options.measure_zero_point or options.zero_point):
            raise
        say(str(refusal))
        return None
    if options.velocity is not None:
        found = EarthMotion(options.velocity, kind, f"{kind} correction {options.velocity:+.4f} "
                            "km/s as given")
    else:
        found = correction(_observation(spectrum, options), kind)
    print(f"correction  {found.words}\n"
          f"applied as  lambda x (1 {'+' if found.velocity >= 0 else '-'} "
          f"{abs(found.velocity):.4f}/299792.458), in vacuum; telluric and sky lines will stand "
          f"at {found.velocity:+.2f} km/s")
    for source in spectrum.observation.sources if options.velocity is None else ():
        print(f"            {source}")
    _compare(spectrum, found)
    return found


def _compare(spectrum, found) -> None:
    for warning in spectrum.warnings:
        if warning.startswith("the header gives a correction"):
            print(f"compare     {warning}")


def _pair(text: str, name: str) -> tuple[float, float]:
    from ..errors import InputRefused

    try:
        first, second = (float(part) for part in text.split(","))
    except ValueError:
        raise InputRefused(name, f"'{text}' is not two numbers", "write RA,DEC") from None
    return first, second


def _observation(spectrum, options):
    """What the header says, with what was typed in its place."""
    from dataclasses import replace

    from ..errors import InputRefused
    from ..spectra.observation import parse_time, typed_coordinates
    from ..spectra.sites import required_site

    typed = {"parallax": options.parallax, "velocity": options.star_velocity,
             "epoch": options.epoch}
    if options.site is not None:
        typed["site"] = required_site(options.site)
    if options.coordinates is not None:
        typed["ra"], typed["dec"] = typed_coordinates(options.coordinates)
        typed["pm_ra"] = typed["pm_dec"] = 0.0  # the header's may be another star's
    if options.proper_motion is not None:
        typed["pm_ra"], typed["pm_dec"] = _pair(options.proper_motion, "--proper-motion")
    if options.time is not None:
        typed["time"] = parse_time(options.time)
        if typed["time"] is None:
            raise InputRefused("--time", f"'{options.time}' is no time",
                               "write 2011-08-11T23:55:22, a JD or an MJD, in UTC")
        typed["scale"] = "utc"
    return replace(spectrum.observation, **{k: v for k, v in typed.items() if v is not None})
