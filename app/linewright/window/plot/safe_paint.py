"""Painters that always end: one left open when its device goes crashes the process."""

from __future__ import annotations

import sys
import traceback
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from PySide6.QtGui import QPainter


@contextmanager
def painting(device) -> Iterator[QPainter]:
    """A painter on a picture or widget, ended whatever happens inside."""
    painter = QPainter(device)
    try:
        yield painter
    finally:
        painter.end()


def paint_safely(widget, draw: Callable[[QPainter], None]) -> None:
    """Run ``draw`` on the widget; a failure is told once on stderr and kept in ``failed``.

    An exception must not leave a paint event: the widget stays as far as it was drawn.
    """
    with painting(widget) as painter:
        try:
            draw(painter)
        except Exception:
            text = traceback.format_exc()
            if text != getattr(widget, "failed", ""):
                widget.failed = text
                sys.stderr.write(text)
