"""Cells that are nothing but text: one call to the model each, for tables that are long."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QPalette
from PySide6.QtWidgets import QStyle, QStyledItemDelegate

from .column_model import LEFT, RIGHT

PAD = 7  # logical pixels, as the style sheet has it for other tables


class PlainCells(QStyledItemDelegate):
    """The row's ground is drawn by the table; the text here, without asking for decorations."""

    def paint(self, painter, option, index) -> None:
        model = index.model()
        column = model.columns[index.column()]
        text = column.text(model.source_row(index))
        if not text:
            return
        room = option.rect.adjusted(PAD, 0, -PAD, 0)
        if column.numeric:  # figures keep their widths: no eliding, cut at the left edge
            painter.setClipRect(option.rect)
        else:
            text = option.fontMetrics.elidedText(text, Qt.TextElideMode.ElideRight, room.width())
        chosen = option.state & QStyle.StateFlag.State_Selected
        role = QPalette.ColorRole.HighlightedText if chosen else QPalette.ColorRole.Text
        painter.setPen(option.palette.color(role))
        painter.drawText(room, int(RIGHT if column.numeric else LEFT), text)
        if column.numeric:
            painter.setClipping(False)
