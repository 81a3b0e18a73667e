"""The annotated figure for print: a spectrum with its lines named, no label over another."""

from __future__ import annotations

import io
import threading
from dataclasses import dataclass
from pathlib import Path

from ..errors import InputRefused
from ..session.atomic import check_writable, write_atomically
from ..session.model import Session
from ..spectra.spectrum import Spectrum
from .figure_style import FigureStyle

SUFFIXES = (".pdf", ".svg", ".png")
# fonts as TrueType (Type 42); shapes for letters in SVG, which so need no font
_SETTINGS = {"pdf.fonttype": 42, "svg.fonttype": "path", "svg.hashsalt": "linewright"}
_METADATA = {
    ".pdf": {"Creator": "Linewright", "Producer": None, "CreationDate": None},
    ".svg": {"Creator": "Linewright", "Date": None},
    ".png": {"Software": "Linewright"},
}
_lock = threading.Lock()


@dataclass(frozen=True)
class FigureReport:
    """How many labels found room and how many did not."""

    shown: int
    left_out: int


def check_figure_path(path, force: bool = False) -> None:
    """InputRefused for another suffix, or an existing file without force."""
    if Path(path).suffix.lower() not in SUFFIXES:
        raise InputRefused(
            path, f"no figure format '{Path(path).suffix}'", f"use {', '.join(SUFFIXES)}"
        )
    check_writable(path, force)


def write_figure(
    session: Session, spectrum: Spectrum | None, path, *, force: bool = False, **style
) -> FigureReport:
    """Draw and write .pdf, .svg or .png by the suffix; the same input gives the same bytes.

    style: the fields of FigureStyle (range, rows, width, dpi). Without a spectrum (a session
    from a feature table) the features are drawn as sticks. Raises InputRefused.
    """
    check_figure_path(path, force)
    chosen = FigureStyle(**style)
    figure, report = draw_figure(session, spectrum, chosen)
    write_atomically(path, figure_bytes(figure, Path(path).suffix.lower(), chosen.dpi), force)
    return report


def draw_figure(session: Session, spectrum: Spectrum | None, style: FigureStyle):
    """(matplotlib Figure, FigureReport), drawn but not written."""
    from .figure_drawing import draw

    return draw(session, spectrum, style)


def figure_bytes(figure, suffix: str, dpi: int = 300) -> bytes:
    """The file's bytes in the format of ``suffix``."""
    import matplotlib

    data = io.BytesIO()
    # settings of a save are global in matplotlib: set and put back one at a time
    with _lock, matplotlib.rc_context(_SETTINGS):
        figure.savefig(data, format=suffix[1:], dpi=dpi, metadata=_METADATA[suffix])
    return data.getvalue()
