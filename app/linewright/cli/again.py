"""Measure the features of a session again, on another spectrum of the star.

Every feature is measured where it must stand; the table has both measurements, their
differences and the differences' errors.
"""

from __future__ import annotations

from .parsing import number, or_auto, positive, say
from .reading_options import add_reading_options, read


def configure(parser) -> None:
    parser.add_argument("session", metavar="SESSION")
    parser.add_argument("spectrum", metavar="SPECTRUM")
    parser.add_argument(
        "-o", "--output", required=True, metavar="FILE",
        help="the suffix says the format: .ecsv .csv .tex .vot .mrt",
    )  # fmt: skip
    parser.add_argument(
        "--velocity", type=or_auto(number), metavar="auto|KM_S",
        help="of this spectrum relative to the session's",
    )  # fmt: skip
    parser.add_argument("--resolution", type=positive, metavar="R", help="resolving power")
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")
    add_reading_options(parser)


def run(options) -> int:
    from ..job.again import again
    from ..publish.again import again_table
    from ..publish.writers import check_suffix, write_table
    from ..session.atomic import check_writable
    from ..session.file import load_session
    from .bar import progress_bar

    check_suffix(options.output)
    check_writable(options.output, options.force)
    session = load_session(options.session)
    spectrum = read(options)
    with progress_bar() as progress:
        result = again(session, spectrum, options.velocity, options.resolution, progress)
    table = again_table(session, result)
    if result.frame != session.spectrum.frame:
        say(f"warning: frames differ: {session.spectrum.frame} and {result.frame}; "
            "the velocity between them holds the difference")
    write_table(table, options.output, options.force)
    seen = sum(1 for x in table["depth_again"].mask if not x)
    error = "" if result.velocity_err != result.velocity_err else f" +- {result.velocity_err:.3f}"
    print(f"{seen} of {len(table)} features measured again, at {result.velocity:+.3f}{error} km/s")
    return 0
