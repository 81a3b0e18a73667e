"""Draw a session's spectrum with its lines named, for print (.pdf .svg .png)."""

from __future__ import annotations

import argparse

from .parsing import count_from_one, positive, span


def _width(text: str):
    return text if text in ("one-column", "two-column") else _millimetres(text)


def _millimetres(text: str) -> float:
    try:
        value = positive(text)
    except argparse.ArgumentTypeError:
        value = 0.0
    if not 40 <= value <= 1000:
        raise argparse.ArgumentTypeError(
            f"'{text}' is neither one-column, two-column nor 40 to 1000 mm"
        )
    return value


def configure(parser) -> None:
    parser.add_argument("session", metavar="SESSION")
    parser.add_argument("-o", "--output", required=True, metavar="FILE")
    parser.add_argument("--range", type=span, metavar="LO:HI", help="own medium, Angstrom")
    parser.add_argument("--rows", type=count_from_one, default=1, metavar="N")
    parser.add_argument(
        "--width", type=_width, default="two-column", help="one-column, two-column or mm"
    )
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")


def run(options) -> int:
    from pathlib import Path

    from ..publish.figure import check_figure_path, write_figure
    from ..session.file import load_session
    from ..session.reopen import reopen_spectrum

    check_figure_path(options.output, options.force)
    session = load_session(options.session)
    spectrum = None
    if not session.spectrum.from_features:
        spectrum = reopen_spectrum(session, [Path(options.session).parent])
    report = write_figure(
        session,
        spectrum,
        options.output,
        range=options.range,
        rows=options.rows,
        width=options.width,
        force=options.force,
    )
    if report.left_out:
        print(f"{report.shown} labels shown, {report.left_out} not shown for want of room")
    return 0
