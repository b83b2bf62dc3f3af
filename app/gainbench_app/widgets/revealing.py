"""Bringing a widget to the eye and the keyboard, wherever it has been scrolled to."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QLineEdit, QScrollArea, QWidget

_ROOM_PX = 40


def reveal(widget: QWidget) -> None:
    """Scroll a widget into sight and give it the focus; what stands in a box is selected."""
    parent = widget.parentWidget()
    while parent is not None:
        if isinstance(parent, QScrollArea):
            # What was just unfolded has its place only once it is laid out.
            QApplication.sendPostedEvents()
            parent.ensureWidgetVisible(widget, 0, _ROOM_PX)
        parent = parent.parentWidget()
    widget.setFocus(Qt.FocusReason.OtherFocusReason)
    if isinstance(widget, QLineEdit):
        widget.selectAll()
