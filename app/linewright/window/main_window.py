"""The main window: menus, notices, welcome page and the work page."""

from __future__ import annotations

from importlib import import_module

from PySide6.QtCore import QTimer
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication, QMainWindow, QStackedWidget, QVBoxLayout, QWidget

from . import layout_memory as memory
from .ask_bar import AskBar
from .asking import Questions
from .commands import command_table, opening
from .menus import Menus
from .notices import Notice, NoticeBar
from .showing import Showing
from .status import StatusLine
from .style import style_of
from .tasks import Request, Tasks
from .theme import theme_named
from .troubles import log_trouble
from .welcome import WelcomePage
from .workbench import Workbench


class MainWindow(Questions, Showing, QMainWindow):
    """Owns the workbench. The work page is built when the first spectrum comes."""

    def __init__(self):
        super().__init__()
        self.tasks = Tasks(self)
        self.bench = Workbench(self.tasks)
        self.bench.window, self.bench.commands = self, command_table()
        self.space = self.refresher = self.residuals = None
        self.theme_choice, self.uncertainty_shown = "system", False
        self._leaving = False
        self._build()
        self.bench.notify, self.bench.withdraw = self.notices.show_notice, self.notices.withdraw
        self.bench.listen(self._session_changed)
        self.bench.view.listen(self._view_changed)
        self.tasks.started.connect(self.status.watch)
        self.choose_theme(str(memory.recall("theme", "system")))
        self._restore()
        self._describe()

    def _build(self) -> None:
        self.setWindowTitle("Linewright")
        self.setAcceptDrops(True)
        self.notices, self.ask_bar, self.pages = NoticeBar(), AskBar(), QStackedWidget()
        self.welcome = WelcomePage()
        self.welcome.asked.connect(self.ask_open)
        self.welcome.opened.connect(lambda path: opening.open_files(self.bench, [path]))
        self.pages.addWidget(self.welcome)
        middle = QWidget()
        box = QVBoxLayout(middle)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        for widget in (self.notices, self.ask_bar, self.pages):
            box.addWidget(widget)
        box.setStretch(2, 1)
        self.setCentralWidget(middle)
        self.status = StatusLine(self.bench, self)
        self.setStatusBar(self.status)
        self.menus = Menus(self.bench, self)
        self.notices.changed.connect(self.menus.refresh)
        self.ask_bar.asked.connect(self.menus.refresh)

    def _restore(self) -> None:
        self.resize(1440, 860)
        geometry = memory.recall_bytes("geometry")
        if geometry is not None:
            self.restoreGeometry(geometry)

    def work_page(self):
        """Builds the work page once; its drawing library loads here, not before."""
        if self.space is None:
            from .refreshing import Refresher
            from .workspace import Workspace

            self.space = Workspace(self.bench)
            self.refresher = Refresher(self.bench, self.space)
            self.pages.addWidget(self.space)
            self.space.recall()
            self.space.desks.currentChanged.connect(self._desk_chosen)
            self.space.tables.currentChanged.connect(lambda _k: self.menus.refresh())
            self.refresher.theme_changed()
            self.refresher.rake.load_catalogue()
            self._warm_engine()
        return self.space

    def _warm_engine(self) -> None:
        """The first solve should not wait for imports and catalogue, nor the first pick."""
        def work(_progress):
            import_module("..job.view_pick", __package__)
            return self.bench.engine.call("window.engine_child:warm")

        self.tasks.start(Request(
            key="warm", title="", shown=False, work=work,
            done=lambda _ready: None, failed=lambda _error: None))

    @property
    def ledger(self):
        return self.space.ledger

    @property
    def spectrum_view(self):
        return self.space.spectrum_view

    @property
    def rake(self):
        return self.refresher.rake

    def _session_changed(self, old, new) -> None:
        if new is not None:
            self.work_page()
        if self.refresher is not None:
            self.refresher.session_changed(old, new)
            self._show_desks()
        self.pages.setCurrentWidget(self.welcome if new is None else self.space)
        self._describe()

    def _view_changed(self, old, new) -> None:
        if self.refresher is not None:
            self.refresher.view_changed(old, new)
        if old.pointed_at() != new.pointed_at():
            self.menus.refresh()

    def catalogue_changed(self) -> None:
        self.refresher.catalogue_changed()

    def _describe(self) -> None:
        self.status.refresh()
        self.menus.refresh()
        desk = self.bench.desk
        star = "" if desk is None or desk.saved else "*"
        self.setWindowTitle(f"{desk.name}{star} · Linewright" if desk else "Linewright")

    def _show_desks(self) -> None:
        bar, desks = self.space.desks, self.bench.desks
        bar.blockSignals(True)
        while bar.count() > len(desks):
            bar.removeTab(bar.count() - 1)
        for k, desk in enumerate(desks):
            text = desk.name + ("" if desk.saved else " *")
            if k == bar.count():
                bar.addTab(text)
            if bar.tabText(k) != text:
                bar.setTabText(k, text)
        if self.bench.desk in desks:
            bar.setCurrentIndex(desks.index(self.bench.desk))
        bar.setVisible(len(desks) > 1)
        bar.blockSignals(False)

    def _desk_chosen(self, index: int) -> None:
        if 0 <= index < len(self.bench.desks):
            self.bench.show_desk(self.bench.desks[index])

    def turn_desk(self, step: int) -> None:
        desks = self.bench.desks
        at = (desks.index(self.bench.desk) + step) % len(desks)
        self.bench.show_desk(desks[at])

    def choose_theme(self, name: str) -> None:
        """'system', 'light' or 'dark'."""
        self.theme_choice = name if name in ("light", "dark") else "system"
        memory.keep("theme", self.theme_choice)
        ground = QGuiApplication.palette().window().color()  # the desktop's, not our sheet's
        system = "dark" if ground.lightness() < 128 else "light"
        chosen = system if self.theme_choice == "system" else self.theme_choice
        theme = self.bench.theme = theme_named(chosen)
        sheet, app = theme.style_sheet() + style_of(theme), QApplication.instance()
        if app.styleSheet() != sheet:  # setting it styles every widget again
            app.setStyleSheet(sheet)
        if self.refresher is not None:
            self.refresher.theme_changed()
        if self.residuals is not None:
            self.residuals.refresh()
        self.menus.refresh()

    def report_unexpected(self, error: BaseException) -> None:
        """A fault of the program: said quietly, with the log that tells the story."""
        log = log_trouble(error)
        self.bench.notify(Notice(
            f"Something went wrong inside Linewright ({type(error).__name__}). Nothing was "
            f"changed; the story is in {log}", "refused", topic="unexpected"))

    def dragEnterEvent(self, event) -> None:
        if any(url.isLocalFile() for url in event.mimeData().urls()):
            event.acceptProposedAction()

    def dropEvent(self, event) -> None:
        names = [u.toLocalFile() for u in event.mimeData().urls() if u.isLocalFile()]
        opening.open_files(self.bench, names)
        event.acceptProposedAction()

    def closeEvent(self, event) -> None:
        unsaved = [d for d in self.bench.desks if not d.saved]
        if unsaved and not self._leaving:
            event.ignore()
            self._ask_leave(unsaved)
            return
        memory.keep_bytes("geometry", self.saveGeometry())
        if self.space is not None:
            self.space.remember()
        self.tasks.close()
        for engine in self.bench.engines:
            engine.close()
        if self.residuals is not None:
            self.residuals.close()
        event.accept()

    def _ask_leave(self, unsaved) -> None:
        names = ", ".join(d.name for d in unsaved)
        self.bench.show_desk(unsaved[0])
        self.bench.notify(Notice(
            f"Not saved yet: {names}.", "warning",
            (("Save and go on closing", lambda: self.save_then(self._close_soon)),
             ("Close without saving", self._leave)), topic="close"))

    def _close_soon(self) -> None:
        QTimer.singleShot(0, self.close)

    def _leave(self) -> None:
        self._leaving = True
        self.close()
