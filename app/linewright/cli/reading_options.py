"""The options that say how to read a spectrum, and the reading."""

from __future__ import annotations

from .parsing import count, count_from_one


def add_reading_options(parser) -> None:
    """Options for what a file does not say, or says wrongly."""
    group = parser.add_argument_group("reading")
    group.add_argument("--medium", choices=("air", "vacuum"), help="of the wavelengths")
    group.add_argument("--frame", metavar="NAME", help="topocentric, heliocentric, ... or rest")
    group.add_argument("--hdu", type=count, metavar="N", help="FITS extension, from 0")
    group.add_argument("--row", type=count_from_one, metavar="N", help="row or object, from 1")
    group.add_argument(
        "--columns", metavar="wave=1,flux=2,err=3", help="column numbers (from 1) or names"
    )
    group.add_argument("--unit", metavar="NAME", help="of the wavelengths: nm, um, Angstrom")


def read(options):
    """The spectrum named by ``options.spectrum``; raises InputRefused."""
    from ..spectra.reading import read_spectrum

    return read_spectrum(
        options.spectrum,
        medium=options.medium,
        frame=options.frame,
        hdu=options.hdu,
        row=options.row,
        columns=options.columns,
        unit=options.unit,
    )
