"""Write a spectrum (or the one a session speaks of) as standard FITS or ECSV."""

from __future__ import annotations

from .parsing import number
from .reading_options import add_reading_options, read


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM|SESSION")
    parser.add_argument("-o", "--output", required=True, metavar="OUT.fits|.ecsv")
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")
    parser.add_argument("--normalise", action="store_true",
                        help="divide by the pseudo-continuum (the session's, else measured)")
    parser.add_argument("--rest", action="store_true",
                        help="divide wavelengths by 1 + v/c (the session's velocity)")
    parser.add_argument("--velocity", type=number, metavar="KM_S", help="of --rest, instead")
    parser.add_argument("--merge", action="store_true", help="join the segments into one")
    parser.add_argument("--to-medium", choices=("air", "vacuum"), help="of the file written")
    add_reading_options(parser)


def run(options) -> int:
    from ..publish.spectrum_out import check_spectrum_suffix, write_spectrum
    from ..session.atomic import check_writable

    check_spectrum_suffix(options.output)
    check_writable(options.output, options.force)
    spectrum, session = _opened(options)
    spectrum = _worked(spectrum, session, options)
    write_spectrum(spectrum, options.output, options.force)
    print(f"{options.output}: {spectrum.samples} samples, {len(spectrum.segments)} segments, "
          f"medium {spectrum.medium}, frame {spectrum.frame}")
    return 0


def _opened(options):
    from ..session.file import is_session, load_session

    if not is_session(options.spectrum):
        return read(options), None
    from pathlib import Path

    from ..session.reopen import reopen_spectrum

    session = load_session(options.spectrum)
    return reopen_spectrum(session, [Path(options.spectrum).parent]), session


def _nodes(spectrum, session):
    """(wave, flux) of the pseudo-continuum, one pair a segment."""
    import numpy as np

    if session is not None and len(session.continuum) == len(spectrum.segments):
        return [(c.wave, c.value) for c in session.continuum]
    from ..measure.core import measure_spectrum

    nothing = (np.zeros(0), np.zeros(0))
    return [nothing if s is None else (s.node_wave, s.node_flux)
            for s in measure_spectrum(spectrum).segments]


def _worked(spectrum, session, options):
    from ..publish.spectrum_working import at_rest, merged, normalised

    if options.normalise:
        spectrum = normalised(spectrum, _nodes(spectrum, session))
    if options.rest:
        spectrum = at_rest(spectrum, _velocity(session, options))
    if options.merge:
        spectrum = merged(spectrum)
    return spectrum if options.to_medium is None else _in_medium(spectrum, options.to_medium)


def _in_medium(spectrum, medium: str):
    from dataclasses import replace

    from ..errors import InputRefused

    if spectrum.medium == "unknown":
        raise InputRefused(spectrum.path, "does not say whether its wavelengths are air or vacuum",
                           "decide with --medium air or --medium vacuum")
    return replace(spectrum, medium=medium, medium_from=f"written in {medium}")


def _velocity(session, options) -> float:
    from ..errors import InputRefused

    if options.velocity is not None:
        return options.velocity
    if session is None or not session.velocity.velocity == session.velocity.velocity:
        raise InputRefused("--rest", "no velocity is known",
                           "give --velocity KM_S or the session of a solve")
    return session.velocity.velocity
