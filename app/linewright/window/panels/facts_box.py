"""What would change the verdict: told a moment after the selection comes to rest."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtWidgets import QLabel, QVBoxLayout, QWidget

from ...job.view_reasons import what_would_change

REST_MS = 40
TIP = ("The claim weighed again with one thing otherwise and the rest as it is: where the "
       "feature stands, how strong the species is, or a rival out of the way")


class FactsBox(QWidget):
    """A heading and one sentence a fact; hidden where there is nothing to say."""

    told = Signal()

    def __init__(self, workbench, parent=None):
        super().__init__(parent)
        self._workbench, self._known = workbench, (None, None, "")
        self.heading, self.text = QLabel("What would change this"), QLabel()
        self.heading.setObjectName("heading")
        self.heading.setToolTip(TIP)
        self.text.setWordWrap(True)
        self.text.setTextFormat(Qt.TextFormat.PlainText)
        self.text.setToolTip(TIP)
        box = QVBoxLayout(self)
        box.setContentsMargins(6, 4, 6, 2)
        box.setSpacing(0)
        box.addWidget(self.heading)
        box.addWidget(self.text)
        self._soon = QTimer(self)
        self._soon.setSingleShot(True)
        self._soon.setInterval(REST_MS)
        self._soon.timeout.connect(self.tell)
        self.hide()

    def show_claim(self, claim, species: str) -> None:
        """For the claim of the selected feature and the species under consideration."""
        if (claim, species) == self._known[1:] and self._known[0] is self._workbench.session:
            return
        self._known = (self._workbench.session, claim, species)
        self.hide()
        self._soon.start()

    def clear(self) -> None:
        self._known = (None, None, "")
        self._soon.stop()
        self.hide()

    def tell(self) -> None:
        row = self._workbench.selected_row()
        session, _claim, species = self._known
        if row is None or session is not self._workbench.session:
            return
        words = what_would_change(session, row, species).words
        self.text.setText("\n".join(f"{w[:1].upper()}{w[1:]}" for w in words))
        self.setVisible(bool(words))
        self.told.emit()
