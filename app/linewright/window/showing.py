"""The window's panels, help and palette: shown, hidden and focused by commands."""

from __future__ import annotations



class Showing:
    """Part of the main window: nothing here changes a session."""

    def can_dismiss(self) -> bool:
        return not self.ask_bar.isHidden() or not self.notices.isHidden()

    def dismiss(self) -> None:
        """The question first, then the notices one by one."""
        if not self.ask_bar.isHidden():
            self.ask_bar.hide()
        else:
            self.notices.dismiss()

    def toggle_panel(self, name: str) -> None:
        panel = self.space.panels()[name]
        panel.setVisible(panel.isHidden())
        self.menus.refresh()

    def panel_shown(self, name: str) -> bool:
        return self.space is not None and not self.space.panels()[name].isHidden()

    def toggle_uncertainty(self) -> None:
        self.uncertainty_shown = not self.uncertainty_shown
        self.spectrum_view.set_uncertainty_shown(self.uncertainty_shown)
        self.menus.refresh()

    def focus_filter(self) -> None:
        """The filter field of the table in front."""
        from PySide6.QtCore import Qt

        self.space.tables.show()
        panel = self.space.tables.currentWidget()
        field = panel.text
        field.setFocus(Qt.FocusReason.ShortcutFocusReason)
        field.selectAll()

    def clear_filters(self) -> None:
        ledger = self.space.ledger
        ledger.text.clear()
        ledger.standing.setCurrentIndex(0)
        ledger.species.setCurrentIndex(0)
        ledger.filter_now()

    def focus_velocity(self) -> None:
        from PySide6.QtCore import Qt
        from PySide6.QtWidgets import QLineEdit

        self.space.track.show()
        field = self.space.track.findChild(QLineEdit)
        (field or self.space.track).setFocus(Qt.FocusReason.ShortcutFocusReason)
        if field is not None:
            field.selectAll()

    def focus_species(self) -> None:
        self.space.evidence.show()
        self.space.evidence.focus_species()

    def show_choices(self) -> None:
        from .choices import ChoicesPanel

        if getattr(self, "_choices", None) is None:
            self._choices = ChoicesPanel(self.bench, self)
        self._choices.open()

    def show_residuals(self) -> None:
        from .residuals import ResidualsWindow

        if self.residuals is None:
            self.residuals = ResidualsWindow(self.bench, self)
        self.residuals.open()

    def show_palette(self) -> None:
        from .palette import Palette

        if getattr(self, "_palette", None) is None:
            self._palette = Palette(self.bench, self)
        self._palette.open_over(self)

    def show_help(self) -> None:
        from .help_page import HelpPage

        if getattr(self, "_help", None) is None:
            self._help = HelpPage(self.bench.commands, self)
        self._help.show()
        self._help.raise_()
        self._help.activateWindow()
