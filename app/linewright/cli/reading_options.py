"""The options that say how to read a spectrum, and the reading."""

from __future__ import annotations

from .parsing import count, count_from_one, number, zero_point


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
    group.add_argument(
        "--barycentric", type=number, metavar="KM_S",
        help="apply this correction, lambda (1 + v/c); 'linewright correct' shows the number",
    )  # fmt: skip
    group.add_argument(
        "--zero-point", type=zero_point, metavar="KM_S:ERROR|FILE",
        help="take this wavelength zero point out (a number, or a file of 'linewright correct')",
    )  # fmt: skip
    group.add_argument(
        "--as-before", action="store_true",
        help="use the choices made for the last file of this shape",
    )  # fmt: skip


CHOICES = ("medium", "frame", "hdu", "row", "columns", "unit", "barycentric", "zero_point")


def read(options):
    """The spectrum named by ``options.spectrum``; raises InputRefused.

    Choices are remembered for files of the same shape, and offered for the next one.
    """
    from ..errors import InputRefused
    from ..spectra.reading import read_spectrum
    from ..spectra.remembered import offer, remember, shape_of

    given = {name: getattr(options, name) for name in CHOICES}
    given = {name: value for name, value in given.items() if value is not None}
    shape = shape_of(options.spectrum)
    before = {k: v for k, v in offer(shape).items() if k not in given}
    if options.as_before:
        given, before = {**before, **given}, {}
    try:
        spectrum = read_spectrum(options.spectrum, **given)
    except InputRefused as refusal:
        if not before:
            raise
        raise InputRefused(refusal.what, refusal.cause, f"{refusal.cure}; {_hint(before)}"
                           ) from None
    remember(shape, given)
    return _offered(spectrum, before)


def _offered(spectrum, before: dict):
    """The spectrum with a remark on earlier choices that would change it."""
    from dataclasses import replace

    before = {k: v for k, v in before.items() if getattr(spectrum, k, None) != v}
    return replace(spectrum, warnings=(*spectrum.warnings, _hint(before))) if before else spectrum


def _hint(before: dict) -> str:
    return f"for a file of this shape you chose {_words(before)}: --as-before does so again"


def _words(choices: dict) -> str:
    parts = []
    for name, value in choices.items():
        if isinstance(value, dict):
            value = ",".join(f"{k}={v}" for k, v in value.items())
        parts.append(f"--{name} {value}")
    return " ".join(parts)
