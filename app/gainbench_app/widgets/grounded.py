"""For widgets that change with every frame and paint their own ground: all that is below them need not be painted."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QShowEvent


class Grounded:
    """Comes before the class of Qt among the bases; the widget fills its rectangle before all else it paints."""

    def showEvent(self: Any, event: QShowEvent) -> None:  # noqa: N802
        """Shown for the first time."""
        super().showEvent(event)
        self._hide_what_is_below()

    def changeEvent(self: Any, event: QEvent) -> None:  # noqa: N802
        """Another style."""
        super().changeEvent(event)
        if event.type() == QEvent.Type.StyleChange:
            self._hide_what_is_below()

    def _hide_what_is_below(self: Any) -> None:
        """The style sheet takes this mark away."""
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
