"""Writing of tables and figures as single calls for the engine's process; no Qt here."""

from __future__ import annotations


def write_table_file(session, what: str, path) -> None:
    """The Ledger, Roll call or Orphans; the suffix decides the format."""
    from ..publish.ledger import session_table
    from ..publish.writers import check_suffix, write_table

    check_suffix(path)
    write_table(session_table(session, what), path, force=True)


def write_figure_file(session, spectrum, path, span):
    """The annotated figure of a range; returns how many labels found room."""
    from ..publish.figure import write_figure

    return write_figure(session, spectrum, path, force=True, range=span)


def send_spectrum(spectrum, name: str) -> int:
    """How many programs took the spectrum, offered as standard FITS in a temporary folder."""
    import tempfile
    from pathlib import Path

    from ..publish.exchange import Exchange
    from ..publish.spectrum_out import write_spectrum

    with Exchange(receive=False) as exchange:
        path = Path(tempfile.mkdtemp(prefix="linewright-")) / f"{name.split('.')[0]}.fits"
        write_spectrum(spectrum, path)
        return exchange.send_spectrum(path, spectrum)


def write_again_file(session, spectrum_path, path, progress=None) -> str:
    """Measures the session's features in another file and writes the table of both; returns
    what to say of it. A file that states no medium is read in the session's."""
    from ..job.again import again
    from ..publish.again import again_table
    from ..publish.writers import check_suffix, write_table
    from ..spectra.reading import read_spectrum

    check_suffix(path)
    spectrum, assumed = read_spectrum(spectrum_path), ""
    if spectrum.medium == "unknown":
        spectrum = spectrum.with_medium(session.spectrum.medium, "as the session's")
        assumed = f" Its wavelengths were taken for {spectrum.medium}, as the session's are."
    result = again(session, spectrum, progress=progress)
    table = again_table(session, result)
    write_table(table, path, force=True)
    seen = int((~table["depth_again"].mask).sum())
    velocity = f"{result.velocity:+.2f}".replace("-", "−")
    return (f"{seen:,} of {len(table):,} features measured again, at {velocity} ± "
            f"{result.velocity_err:.2f} km/s.{assumed}")
