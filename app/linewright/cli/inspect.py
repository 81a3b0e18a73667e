"""Say what was understood of a spectrum: layout, range, medium, frame, gaps, warnings."""

from __future__ import annotations

import json

from .reading_options import add_reading_options, read


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM")
    parser.add_argument("--json", action="store_true", help="as JSON, for programs")
    add_reading_options(parser)


def run(options) -> int:
    from ..spectra.describe import describe, in_words

    spectrum = read(options)
    if options.json:
        print(json.dumps(describe(spectrum), indent=1, allow_nan=False))
    else:
        print(in_words(spectrum))
    return 0
