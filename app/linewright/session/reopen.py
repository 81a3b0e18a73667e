"""The spectrum a session speaks of, read again as it was read before."""

from __future__ import annotations

from ..errors import InputRefused
from ..spectra.spectrum import Spectrum
from .file import locate_spectrum
from .model import Session

READ_CHOICES = ("medium", "frame", "hdu", "row", "columns", "unit", "zero_point", "barycentric",
                "heliocentric")


def reopen_spectrum(session: Session, folders=()) -> Spectrum:
    """Read the session's spectrum, looked for at its path, then by name in ``folders``.

    Raises InputRefused where the file moved or changed, or there never was a spectrum.
    """
    from ..spectra.reading import read_spectrum

    reference = session.spectrum
    if reference.from_features:
        raise InputRefused(
            reference.path or reference.name,
            "the session was made from a table of features, without a spectrum",
            "solve the spectrum itself",
        )
    path = locate_spectrum(session, folders)
    choices = {k: v for k, v in reference.read_options.items() if k in READ_CHOICES}
    spectrum = read_spectrum(path, **choices)
    if spectrum.medium != reference.medium:
        spectrum = spectrum.with_medium(reference.medium, reference.medium_from)
    return spectrum
