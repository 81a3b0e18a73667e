"""Cells that are nothing but text: one call to the model each, for tables that are long."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QPalette
from PySide6.QtWidgets import QStyle, QStyledItemDelegate

from .column_model import LEFT, RIGHT

PAD = 7  # logical pixels, as the style sheet has it for other tables


class PlainCells(QStyledItemDelegate):
    """The row's ground is drawn by the table; here the text, with the font and colour that
    the model's ``decoration`` names where ``decorated``."""

    def __init__(self, parent=None, decorated: bool = False):
        super().__init__(parent)
        self._decorated = decorated

    def paint(self, painter, option, index) -> None:
        model = index.model()
        column, row = model.columns[index.column()], model.source_row(index)
        text = column.text(row)
        if not text:
            return
        room, metrics = option.rect.adjusted(PAD, 0, -PAD, 0), option.fontMetrics
        painter.save()
        painter.setPen(self._colour(model, row, column, option))
        font = model.decoration(row, column, Qt.ItemDataRole.FontRole) if self._decorated else None
        if font is not None:
            painter.setFont(font.resolve(option.font))
            metrics = painter.fontMetrics()
        if column.numeric:  # figures keep their widths: no eliding, cut at the left edge
            painter.setClipRect(option.rect)
        else:
            text = metrics.elidedText(text, Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, int(RIGHT if column.numeric else LEFT), text)
        painter.restore()

    def _colour(self, model, row: int, column, option):
        if option.state & QStyle.StateFlag.State_Selected:
            return option.palette.color(QPalette.ColorRole.HighlightedText)
        own = model.decoration(row, column, Qt.ItemDataRole.ForegroundRole) if (
            self._decorated) else None
        return option.palette.color(QPalette.ColorRole.Text) if own is None else own.color()
