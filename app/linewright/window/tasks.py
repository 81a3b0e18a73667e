"""Work beside the window: frozen requests in a thread pool, newest request wins."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtCore import QObject, QThreadPool, Signal, Slot

from ..errors import Cancelled
from ..progress import Progress


@dataclass(frozen=True)
class Request:
    """A job: ``work(progress)`` runs beside the window, the rest in its thread.

    key: requests of one key replace one another; title: shown with the progress
    stop: ends work that goes on elsewhere, called when the request is cancelled
    """

    key: str
    title: str
    work: Callable[[Progress], object]
    done: Callable[[object], None]
    failed: Callable[[Exception], None]
    shown: bool = True
    stop: Callable[[], None] | None = None


class _Run:
    """No QRunnable: the binding never lets go of one, nor of the spectra its request holds."""

    def __init__(self, tasks: Tasks, serial: int, request: Request):
        self.request, self.serial, self._tasks = request, serial, tasks
        self.progress = Progress(self._report)
        self.stage, self.fraction = "", 0.0

    def _report(self, stage: str, fraction: float) -> None:
        self.stage, self.fraction = stage, fraction

    def run(self) -> None:
        try:
            outcome = self.request.work(self.progress)
        except Exception as error:  # handed to the window, which says it
            outcome = error
        self._tasks.finished.emit(self, outcome)


class Tasks(QObject):
    """Runs requests; results of cancelled or replaced requests are dropped.

    Progress is read by the window when it wishes (``running``), so a job that reports
    ten thousand times costs the window nothing.
    """

    finished = Signal(object, object)
    started = Signal()

    def __init__(self, parent: QObject | None = None):
        super().__init__(parent)
        self._pool = QThreadPool(self)
        self._pool.setMaxThreadCount(3)
        self._current: dict[str, _Run] = {}
        self._alive: set[_Run] = set()
        self._serial, self._closed = 0, False
        self.finished.connect(self._receive)  # queued: it is emitted in the pool's threads

    def start(self, request: Request) -> None:
        """Begins a request; nothing begins any more once the window closes."""
        if self._closed:
            return
        self.cancel(request.key)
        self._serial += 1
        run = _Run(self, self._serial, request)
        self._current[request.key] = run
        self._alive.add(run)
        self._pool.start(run.run)
        if request.shown:
            self.started.emit()

    def cancel(self, key: str) -> bool:
        run = self._current.pop(key, None)
        if run is not None:
            run.progress.cancel()
            if run.request.stop is not None:
                run.request.stop()
        return run is not None

    def cancel_all(self) -> None:
        for key in tuple(self._current):
            self.cancel(key)

    def running(self, key: str | None = None) -> list[tuple[str, str, str, float]]:
        """(key, title, stage, fraction) of the requests under way."""
        return [
            (k, run.request.title, run.stage, run.fraction)
            for k, run in self._current.items()
            if key in (None, k) and run.request.shown
        ]

    def busy(self, key: str) -> bool:
        return key in self._current

    def close(self, milliseconds: int = 5000) -> bool:
        """Cancels everything for good and waits; False when a job would not stop in time."""
        self._closed = True
        self.cancel_all()
        return self._pool.waitForDone(milliseconds)

    @Slot(object, object)
    def _receive(self, run: _Run, outcome: object) -> None:
        self._alive.discard(run)
        if self._current.get(run.request.key) is not run:
            return
        del self._current[run.request.key]
        if isinstance(outcome, Cancelled):
            return
        if isinstance(outcome, Exception):
            run.request.failed(outcome)
        else:
            run.request.done(outcome)
