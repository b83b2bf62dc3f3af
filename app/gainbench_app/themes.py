"""The theme in force: the system's, or one of the two."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication

from gainbench_app.menu import WindowMenu
from gainbench_app.theme import DARK, LIGHT, Scheme, Theme, palette, style_sheet
from gainbench_app.widgets.appearance import Appearance


class Themes:
    """Puts a theme in force: the system's, or one of the two."""

    def __init__(self, application: QApplication, appearance: Appearance, *, scheme: Scheme) -> None:
        self._application = application
        self._appearance = appearance
        self._scheme = scheme
        hints = QGuiApplication.styleHints()
        hints.colorSchemeChanged.connect(self._apply)
        self._apply()

    def follow(self, menu: WindowMenu) -> None:
        """Let a menu show what is chosen, and choose."""
        menu.show_scheme(self._scheme)
        menu.scheme_chosen.connect(self.choose)

    @property
    def scheme(self) -> Scheme:
        """What was chosen."""
        return self._scheme

    def choose(self, scheme: Scheme) -> None:
        """Choose another one."""
        self._scheme = scheme
        self._apply()

    def _theme(self) -> Theme:
        if self._scheme is Scheme.FOLLOW:
            dark = QGuiApplication.styleHints().colorScheme() is Qt.ColorScheme.Dark
            return DARK if dark else LIGHT
        return DARK if self._scheme is Scheme.DARK else LIGHT

    def _apply(self) -> None:
        theme = self._theme()
        sheet = style_sheet(theme)
        # Qt lays all widgets out anew for the very same sheet.
        if sheet != self._application.styleSheet():
            self._application.setPalette(palette(theme))
            self._application.setStyleSheet(sheet)
        self._appearance.show(theme)
