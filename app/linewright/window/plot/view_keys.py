"""Keys of the spectrum view.

Left/Right a tenth of the view, Page Up/Down almost a whole one, Up/Down or +/- zoom, with
Shift the flux, Home the whole spectrum, End the automatic flux, Shift+Left/Right the
neighbouring feature, Ctrl+Left/Right the neighbouring peak or trough, Return selects the
feature or picks there.
"""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent

_ZOOM = 1.5
_SIDES = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}
_UPWARD = {Qt.Key.Key_Up: 1, Qt.Key.Key_Down: -1}
_ZOOMS = {**_UPWARD, Qt.Key.Key_Plus: 1, Qt.Key.Key_Equal: 1, Qt.Key.Key_Minus: -1}


def key_act(view, event: QKeyEvent) -> Callable[[], None] | None:
    """What a key does to a SpectrumView; None when it means nothing here."""
    key = Qt.Key(event.key())
    shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
    control = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
    if key in _SIDES:
        return _sideways(view, _SIDES[key], shift, control)
    if shift and key in _UPWARD:
        return lambda: _zoom_flux(view, _ZOOM ** _UPWARD[key])
    if key in _ZOOMS:
        return lambda: view.zoom(_ZOOM ** _ZOOMS[key])
    return {
        Qt.Key.Key_PageUp: lambda: view.step(-0.9),
        Qt.Key.Key_PageDown: lambda: view.step(0.9),
        Qt.Key.Key_Home: view.zoom_all,
        Qt.Key.Key_End: view.auto_flux,
        Qt.Key.Key_Return: view.plot.act_at_caret,
        Qt.Key.Key_Enter: view.plot.act_at_caret,
    }.get(key)


def _sideways(view, side: int, shift: bool, control: bool) -> Callable[[], None]:
    if control:
        return lambda: view.plot.move_caret(side)
    if shift:
        return lambda: view.step_feature(side)
    return lambda: view.step(0.1 * side)


def _zoom_flux(view, factor: float) -> None:
    middle = 0.5 * (view.plot.labels.height + view.plot.height())
    view.plot.zoom_flux(factor, middle)
