"""Style of the window's own parts, added to the theme's style sheet."""

from __future__ import annotations

from .theme import Theme


def style_of(theme: Theme) -> str:
    """Rules by object name; sizes in points so that they follow the display's scale."""
    t = theme
    return f"""
#noticeBar {{ background: {t.raised}; border: 0; border-bottom: 1px solid {t.edge};
    border-left: 4px solid {t.accent}; }}
#noticeBar[kind="warning"] {{ border-left-color: {t.caution}; }}
#noticeBar[kind="refused"] {{ border-left-color: {t.bad}; }}
#noticeBar QLabel {{ background: transparent; }}
#noticeGlyph {{ font-weight: bold; padding: 0 4px; color: {t.accent}; }}
#noticeBar[kind="warning"] #noticeGlyph {{ color: {t.caution}; }}
#noticeBar[kind="refused"] #noticeGlyph {{ color: {t.bad}; }}
#askBar {{ background: {t.raised}; border: 0; border-bottom: 1px solid {t.edge}; }}
#palette {{ background: {t.raised}; border: 1px solid {t.edge}; }}
#title {{ font-size: 24pt; font-weight: 300; color: {t.ink}; }}
#heading {{ font-weight: 600; color: {t.ink}; }}
#quiet, #emptyState {{ color: {t.muted}; }}
#standsOut {{ color: {t.caution}; }}
#emptyState {{ padding: 12px; background: {t.base}; }}
#trouble {{ color: {t.bad}; }}
#candidates {{ background: transparent; }}
#candidateRow {{ border: 1px solid transparent; border-radius: 4px; }}
#candidateRow[chosen="true"] {{ border-color: {t.edge}; background: {t.base}; }}
#candidateRow:focus {{ border-color: {t.accent}; }}
#candidateRow QLabel {{ background: transparent; }}
#reasons {{ color: {t.ink}; }}
QPushButton#primary {{ background: {t.accent}; color: {t.accent_ink}; border-color: {t.accent};
    padding: 6px 16px; }}
QPushButton#act {{ padding: 4px 1px; }}
QPushButton#sample {{ text-align: left; padding: 5px 12px; }}
QTableView::item {{ padding: 0 7px; }}
QTableView {{ alternate-background-color: {t.window}; }}
"""
