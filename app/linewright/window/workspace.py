"""The work page: plots on the left, Evidence on the right, tables below."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QSplitter, QTabBar, QTabWidget, QVBoxLayout, QWidget

from . import layout_memory as memory
from .panels.catalogue import CataloguePanel
from .panels.changes import ChangesPanel
from .panels.evidence import EvidencePanel
from .panels.ledger import LedgerPanel
from .panels.orphans import OrphansPanel
from .panels.roll_call import RollCallPanel
from .plot import SpectrumView, VelocityTrack

class Workspace(QWidget):
    """Holds the widgets and their arrangement; knows nothing of what they show."""

    def __init__(self, bench, parent=None):
        super().__init__(parent)
        self.spectrum_view, self.track = SpectrumView(), VelocityTrack()
        self.evidence = EvidencePanel(bench, bench.commands)
        self.ledger, self.roll_call = LedgerPanel(bench), RollCallPanel(bench)
        self.catalogue, self.orphans = CataloguePanel(bench), OrphansPanel(bench)
        self.changes = ChangesPanel(bench)
        self.spectrum_view.setAccessibleName("Spectrum and Rake")
        self.track.setAccessibleName("Velocity track")
        self.desks = QTabBar(self)
        self.desks.setDrawBase(False)
        self.desks.setExpanding(False)
        self.desks.setAccessibleName("Open spectra")
        self.desks.setDocumentMode(True)
        self.tables = QTabWidget()
        self.tables.setAccessibleName("Tables")
        self.tables.tabBar().setDrawBase(False)
        for panel in (self.ledger, self.roll_call, self.catalogue, self.orphans, self.changes):
            self.tables.addTab(panel, panel.accessibleName())
        self.tables.setTabVisible(self.tables.indexOf(self.changes), False)
        self._arrange()

    def _arrange(self) -> None:
        plots = QWidget()
        column = QVBoxLayout(plots)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(2)
        column.addWidget(self.spectrum_view, 1)
        column.addWidget(self.track)
        self.across = _splitter(Qt.Orientation.Horizontal, plots, self.evidence, (76, 24))
        self.down = _splitter(Qt.Orientation.Vertical, self.across, self.tables, (70, 30))
        box = QVBoxLayout(self)
        box.setContentsMargins(6, 2, 6, 2)
        box.setSpacing(2)
        box.addWidget(self.desks)
        box.addWidget(self.down, 1)
        self.evidence.setMinimumWidth(280)
        self.tables.setMinimumHeight(110)
        self.setTabOrder(self.spectrum_view, self.track)
        self.setTabOrder(self.track, self.evidence)
        self.setTabOrder(self.evidence, self.tables)

    def panels(self) -> dict[str, QWidget]:
        """What the View menu can hide."""
        return {"evidence": self.evidence, "tables": self.tables, "track": self.track}

    def show_counts(self, features: int, species: int, lines: int, orphans: int) -> None:
        names = ("Ledger", "Roll call", "Catalogue", "Orphans")
        for k, (name, count) in enumerate(zip(
                names, (features, species, lines, orphans), strict=True)):
            text = f"{name}  {count:,}" if count else name
            if self.tables.tabText(k) != text:  # setting it lays the tabs out again
                self.tables.setTabText(k, text)

    def show_changes(self, desk) -> None:
        """The tab of what re-weighing changes, while there is something in it."""
        weighed = desk.weighed if desk is not None else None
        self.changes.show_weighed(weighed)
        at = self.tables.indexOf(self.changes)
        if self.tables.isTabVisible(at) != (weighed is not None):
            self.tables.setTabVisible(at, weighed is not None)
        if weighed is not None:
            self.tables.setTabText(at, f"Changes  {len(weighed.changes):,}")

    def remember(self) -> None:
        memory.keep_bytes("across", self.across.saveState())
        memory.keep_bytes("down", self.down.saveState())
        for name, panel in self.panels().items():
            memory.keep(f"shown/{name}", not panel.isHidden())

    def recall(self) -> None:
        for name, splitter in (("across", self.across), ("down", self.down)):
            state = memory.recall_bytes(name)
            if state is not None:
                splitter.restoreState(state)
        for name, panel in self.panels().items():
            panel.setVisible(memory.recall_flag(f"shown/{name}", True))


def _splitter(direction, first: QWidget, second: QWidget, shares) -> QSplitter:
    splitter = QSplitter(direction)
    splitter.addWidget(first)
    splitter.addWidget(second)
    splitter.setChildrenCollapsible(False)
    splitter.setHandleWidth(5)
    splitter.setStretchFactor(0, shares[0])
    splitter.setStretchFactor(1, shares[1])
    splitter.setSizes([shares[0] * 14, shares[1] * 14])
    return splitter
