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
