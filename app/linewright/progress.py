"""Progress and cancel, shared by the command line, the window and the library."""

from __future__ import annotations

from collections.abc import Callable

from .errors import Cancelled


class Progress:
    """Receives (stage, fraction 0-1) reports; ``cancel()`` makes the next report raise.

    ``on_report`` is called in the thread that runs the job.
    """

    def __init__(self, on_report: Callable[[str, float], None] | None = None):
        self._on_report = on_report
        self._cancelled = False

    def cancel(self) -> None:
        self._cancelled = True

    @property
    def cancelled(self) -> bool:
        return self._cancelled

    def report(self, stage: str, fraction: float) -> None:
        """Raises Cancelled when ``cancel`` was called before."""
        if self._cancelled:
            raise Cancelled(stage)
        if self._on_report is not None:
            self._on_report(stage, min(max(float(fraction), 0.0), 1.0))

    def part(self, start: float, stop: float) -> Progress:
        """A reporter whose 0-1 maps onto start-stop of this one."""
        return _Part(self, start, stop)


class _Part(Progress):
    def __init__(self, whole: Progress, start: float, stop: float):
        super().__init__()
        self._whole, self._start, self._width = whole, start, stop - start

    def cancel(self) -> None:
        self._whole.cancel()

    @property
    def cancelled(self) -> bool:
        return self._whole.cancelled

    def report(self, stage: str, fraction: float) -> None:
        fraction = min(max(float(fraction), 0.0), 1.0)
        self._whole.report(stage, self._start + self._width * fraction)
