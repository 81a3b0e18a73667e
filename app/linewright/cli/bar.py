"""A progress bar for terminals; silent everywhere else."""

from __future__ import annotations

import contextlib
import sys
import time

from ..progress import Progress

WIDTH = 24
STEP_SECONDS = 0.1


class Bar:
    """Draws (stage, fraction) reports in place on ``stream``, at most ten times a second."""

    def __init__(self, stream):
        self._stream, self._last, self._drawn = stream, 0.0, False

    def report(self, stage: str, fraction: float) -> None:
        now = time.monotonic()
        if now - self._last < STEP_SECONDS and fraction < 1.0:
            return
        self._last, self._drawn = now, True
        filled = round(WIDTH * fraction)
        bar = "#" * filled + "." * (WIDTH - filled)
        self._write(f"\r\x1b[K[{bar}] {100 * fraction:3.0f}% {stage[:40]}")

    def clear(self) -> None:
        if self._drawn:
            self._write("\r\x1b[K")

    def _write(self, text: str) -> None:
        with contextlib.suppress(OSError):
            self._stream.write(text)
            self._stream.flush()


@contextlib.contextmanager
def progress_bar(stream=None):
    """A Progress that draws on standard error where that is a terminal."""
    stream = sys.stderr if stream is None else stream
    if not (hasattr(stream, "isatty") and stream.isatty()):
        yield Progress()
        return
    bar = Bar(stream)
    try:
        yield Progress(bar.report)
    finally:
        bar.clear()
