"""Say what was understood of a spectrum: layout, range, medium, frame, gaps, warnings."""

from __future__ import annotations

import json

from .reading_options import add_reading_options, read

SHOWN = 12  # choices listed in words


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM")
    parser.add_argument("--json", action="store_true", help="as JSON, for programs")
    add_reading_options(parser)


def run(options) -> int:
    from ..spectra.contents import as_data, contents
    from ..spectra.describe import describe, in_words

    spectrum = read(options)
    offers = contents(options.spectrum)
    if options.json:
        facts = {**describe(spectrum), "contents": as_data(offers)}
        print(json.dumps(facts, indent=1, allow_nan=False))
    else:
        print("\n".join([in_words(spectrum), *_choices(offers)]))
    return 0


def _choices(offers) -> list[str]:
    """One line for each other spectrum in the file, where there is a choice."""
    if len(offers) < 2 and all(offer.rows == 1 for offer in offers):
        return []
    lines = [f"choice:      {o.words}, {o.samples} samples"
             + (f", rows 1 to {o.rows} (--row)" if o.rows > 1 else "")
             + ("" if o.hdu is None else f" (--hdu {o.hdu})") for o in offers[:SHOWN]]
    more = len(offers) - SHOWN
    return lines + ([f"choice:      and {more} more (--json lists all)"] if more > 0 else [])
