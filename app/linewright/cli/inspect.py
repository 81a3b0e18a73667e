"""Say what was understood of a spectrum: layout, range, medium, frame, gaps, warnings."""

from __future__ import annotations

import json

from .reading_options import add_reading_options, read

SHOWN = 12  # choices listed in words


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM")
    parser.add_argument("--json", action="store_true", help="as JSON, for programs")
    parser.add_argument("--lines", action="store_true",
                        help="also ask the lines: odds of air and vacuum, where telluric lines stand")
    add_reading_options(parser)


def run(options) -> int:
    from ..spectra.contents import as_data, contents
    from ..spectra.describe import describe, in_words

    spectrum = read(options)
    offers = contents(options.spectrum)
    asked = _asked_lines(spectrum) if options.lines else {}
    if options.json:
        facts = {**describe(spectrum), "contents": as_data(offers), **asked}
        print(json.dumps(facts, indent=1, allow_nan=False))
    else:
        words = [f"{'lines:':<13}{line}" for line in asked.get("lines_say", ())]
        print("\n".join([in_words(spectrum), *_choices(offers), *words]))
    return 0


def _asked_lines(spectrum) -> dict:
    """What the lines themselves say: {'lines_say': words, 'medium_odds': numbers or None}."""
    from dataclasses import asdict

    from ..job.medium_odds import medium_odds
    from ..job.observer_frame import frame_doubts, observer_lines
    from ..job.options import SolveOptions
    from ..lines.loading import load_catalogue
    from ..measure.core import measure_spectrum

    features, catalogue = measure_spectrum(spectrum).features, load_catalogue()
    if spectrum.medium == "unknown":
        odds = medium_odds(features, catalogue, SolveOptions(), spectrum.frame)
        return {"lines_say": [odds.in_words()], "medium_odds": asdict(odds)}
    words = list(frame_doubts(spectrum, features, catalogue))
    found = observer_lines(features, catalogue)
    words.append(f"Earth's air at {found.in_words()}" if found else "no clear telluric or sky lines")
    return {"lines_say": words, "medium_odds": None}


def _choices(offers) -> list[str]:
    """One line for each other spectrum in the file, where there is a choice."""
    if len(offers) < 2 and all(offer.rows == 1 for offer in offers):
        return []
    lines = [f"choice:      {o.words}, {o.samples} samples"
             + (f", rows 1 to {o.rows} (--row)" if o.rows > 1 else "")
             + ("" if o.hdu is None else f" (--hdu {o.hdu})") for o in offers[:SHOWN]]
    more = len(offers) - SHOWN
    return lines + ([f"choice:      and {more} more (--json lists all)"] if more > 0 else [])
