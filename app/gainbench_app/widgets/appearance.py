"""The theme in force, for everything that paints itself."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from gainbench_app.theme import LIGHT, Theme


class Appearance(QObject):
    """Holds the theme and tells when it changes."""

    changed = Signal()

    def __init__(self, theme: Theme = LIGHT, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._theme = theme

    @property
    def theme(self) -> Theme:
        """The theme in force."""
        return self._theme

    def show(self, theme: Theme) -> None:
        """Put another theme in force."""
        if theme is not self._theme:
            self._theme = theme
            self.changed.emit()
