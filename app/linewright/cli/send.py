"""Offer a spectrum (or a .vot table) to other programs on this machine through a SAMP hub."""

from __future__ import annotations

from .reading_options import add_reading_options, read


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM|TABLE.vot")
    parser.add_argument("--to", metavar="NAME", help="only to this program; else to all that take it")
    add_reading_options(parser)


def run(options) -> int:
    from pathlib import Path

    from ..publish.exchange import Exchange

    if Path(options.spectrum).suffix.lower() == ".vot":
        with Exchange(receive=False) as exchange:
            told = exchange.send_table(options.spectrum, options.to)
    else:
        told = _send_spectrum(options)
    print(f"{options.spectrum}: offered to {told} program{'s' if told != 1 else ''}")
    return 0


def _send_spectrum(options) -> int:
    """The spectrum as standard FITS in a temporary folder, kept for the others to read."""
    import tempfile
    from pathlib import Path

    from ..publish.exchange import Exchange
    from ..publish.spectrum_out import write_spectrum

    spectrum = read(options)
    with Exchange(receive=False) as exchange:
        folder = Path(tempfile.mkdtemp(prefix="linewright-"))
        path = folder / f"{Path(options.spectrum).name.split('.')[0]}.fits"
        write_spectrum(spectrum, path)
        return exchange.send_spectrum(path, spectrum, options.to)
