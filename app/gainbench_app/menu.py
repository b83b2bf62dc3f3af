"""The menu behind "More"."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Signal
from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMenu, QWidget

from gainbench_app.theme import Scheme

# Both in use on every system; asking Qt for its standard keys may give one of them twice, and then neither works.
_REDO = ("Ctrl+Shift+Z", "Ctrl+Y")
_SCHEME_NAMES = {Scheme.FOLLOW: "as the system", Scheme.LIGHT: "light", Scheme.DARK: "dark"}


class WindowMenu(QMenu):
    """Undo, demo sheets, theme."""

    demo_chosen = Signal(str)
    scheme_chosen = Signal(Scheme)

    def __init__(self, demos: Sequence[str], parent: QWidget) -> None:
        super().__init__(parent)
        self.undo = self._action("Undo", QKeySequence.StandardKey.Undo)
        self.redo = self._action("Redo", _REDO[0])
        self.redo.setShortcuts([QKeySequence(keys) for keys in _REDO])
        self.addSeparator()
        self.save_as = self._action("Save as...", "Ctrl+Shift+S")
        self.demos = self.addMenu("Demo sheets")
        for name in demos:
            action = self.demos.addAction(name.replace("-", " ").capitalize())
            action.triggered.connect(lambda _=False, name=name: self.demo_chosen.emit(name))
        self.addSeparator()
        themes = self.addMenu("Theme")
        group = QActionGroup(self)
        self.schemes: dict[Scheme, QAction] = {}
        for scheme, shown in _SCHEME_NAMES.items():
            action = themes.addAction(shown)
            action.setCheckable(True)
            action.triggered.connect(lambda _=False, scheme=scheme: self.scheme_chosen.emit(scheme))
            group.addAction(action)
            self.schemes[scheme] = action
        self.addSeparator()
        self.quit = self._action("Quit", "Ctrl+Q")
        parent.addActions([self.undo, self.redo, self.save_as, self.quit])

    def show_scheme(self, scheme: Scheme) -> None:
        """Mark the theme that is chosen."""
        self.schemes[scheme].setChecked(True)

    def _action(self, name: str, keys: QKeySequence.StandardKey | str) -> QAction:
        action = self.addAction(name)
        action.setShortcut(QKeySequence(keys))
        return action
