"""The status line: what is shown, and what is being done with a way to stop it."""

from __future__ import annotations

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QLabel, QProgressBar, QPushButton, QStatusBar

from .typeset import typeset


def description(bench) -> str:
    """file · medium · frame · samples · temperature · saved"""
    session = bench.session
    if session is None:
        return "No spectrum is open"
    from ..job.view_depths import conditions
    from ..job.view_temperature import short_text

    s = session.spectrum
    medium = s.medium if s.medium != "unknown" else "air or vacuum?"
    frame = f"{s.frame} frame" if s.frame != "unknown" else "frame not stated"
    known = "in emission" if conditions(session).emission else (
        short_text(session) if len(session.features) and short_text(session)
        else f"T {conditions(session).temperature:,.0f} K assumed")
    saved = "saved" if bench.desk.path and bench.desk.document.saved else "not saved"
    what = "a table of features" if s.from_features else f"{s.samples:,} samples"
    return " · ".join([bench.desk.name, medium, frame, what, known, saved])


def provenance(bench) -> str:
    """How the things in the status line are known, one a line."""
    if bench.session is None:
        return ""
    from ..job.view_temperature import long_text

    s = bench.session.spectrum
    lines = [f"layout: {s.layout}", f"medium: {s.medium} ({s.medium_from})",
             f"frame: {s.frame} ({s.frame_from})",
             long_text(bench.session), *bench.session.warnings]
    return "\n".join(filter(None, (s.path, *map(typeset, lines))))


class StatusLine(QStatusBar):
    """Polls the tasks ten times a second only while one is running."""

    def __init__(self, bench, parent=None):
        super().__init__(parent)
        self._bench = bench
        self.setSizeGripEnabled(False)
        self.setContentsMargins(8, 0, 8, 0)
        self.text, self.stage = QLabel(), QLabel()
        self.bar, self.stop = QProgressBar(), QPushButton("Stop")
        self.bar.setRange(0, 1000)
        self.bar.setMaximumWidth(180)
        self.bar.setMaximumHeight(14)
        self.bar.setTextVisible(False)
        self.bar.setAccessibleName("Progress")
        self.stop.setToolTip("Stop; nothing is changed (Ctrl+.)")
        self.stop.clicked.connect(self._stop)
        self.addWidget(self.text, 1)
        for widget in (self.stage, self.bar, self.stop):
            self.addPermanentWidget(widget)
            widget.hide()
        self._keys: list[str] = []
        self._timer = QTimer(self)
        self._timer.setInterval(100)
        self._timer.timeout.connect(self.poll)

    def refresh(self) -> None:
        self.text.setText(description(self._bench))
        self.text.setToolTip(provenance(self._bench))

    def watch(self) -> None:
        """Called when a task begins."""
        self.poll()
        self._timer.start()

    def poll(self) -> None:
        running = self._bench.tasks.running()
        self._keys = [key for key, *_rest in running]
        for widget in (self.stage, self.bar, self.stop):
            widget.setVisible(bool(running))
        if not running:
            self._timer.stop()
            return
        _key, title, stage, fraction = running[-1]
        self.stage.setText(f"{title}: {stage}" if stage else title)
        self.bar.setRange(0, 1000 if fraction > 0 else 0)
        self.bar.setValue(int(1000 * fraction))

    def _stop(self) -> None:
        for key in self._keys:
            self._bench.tasks.cancel(key)
        self.poll()
