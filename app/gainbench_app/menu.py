"""The menu behind "More"."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TypeVar

from PySide6.QtCore import Signal
from PySide6.QtGui import QAction, QActionGroup
from PySide6.QtWidgets import QMenu, QWidget

from gainbench_app.habits import SCALES
from gainbench_app.shortcuts import sequences
from gainbench_app.theme import Scheme

_Key = TypeVar("_Key", Scheme, int)
_SCHEME_NAMES = {Scheme.FOLLOW: "as the system", Scheme.LIGHT: "light", Scheme.DARK: "dark"}


class WindowMenu(QMenu):
    """Undo, sheets, pictures, theme and size."""

    demo_chosen = Signal(str)
    recent_chosen = Signal(str)
    scheme_chosen = Signal(Scheme)
    scale_chosen = Signal(int)

    def __init__(self, demos: Sequence[str], parent: QWidget) -> None:
        super().__init__(parent)
        self.undo = self._action("Undo", "undo")
        self.redo = self._action("Redo", "redo")
        self.addSeparator()
        self.save_as = self._action("Save as...", "save_as")
        self.recent = self.addMenu("Recent sheets")
        self.show_recent(())
        self.demos = self.addMenu("Demo sheets")
        for name in demos:
            action = self.demos.addAction(name.replace("-", " ").capitalize())
            action.triggered.connect(lambda _=False, name=name: self.demo_chosen.emit(name))
        self.addSeparator()
        self.evidence = self._action("Evidence", "evidence")
        self.paste_rows = self._action("Paste rows from a data sheet...", "paste_rows")
        self.addSeparator()
        self.copy_picture = self._action("Copy picture of the plots", "copy_picture")
        self.save_picture = self.addAction("Save picture of the plots...")
        self.print = self._action("Print...", "print")
        self.addSeparator()
        self.schemes = self._choices("Theme", _SCHEME_NAMES)
        for scheme, action in self.schemes.items():
            action.triggered.connect(lambda _=False, scheme=scheme: self.scheme_chosen.emit(scheme))
        self.scales = self._choices("Size", {scale: f"{scale} %" for scale in SCALES})
        for scale, action in self.scales.items():
            action.triggered.connect(lambda _=False, scale=scale: self.scale_chosen.emit(scale))
        self.guide = self._action("Guide", "guide")
        self.shortcuts = self._action("Shortcuts", "shortcuts")
        self.addSeparator()
        self.quit = self._action("Quit", "quit")
        parent.addActions(
            [
                self.undo,
                self.redo,
                self.save_as,
                self.evidence,
                self.paste_rows,
                self.copy_picture,
                self.print,
                self.guide,
                self.shortcuts,
                self.quit,
            ]
        )

    def _choices(self, name: str, shown: Mapping[_Key, str]) -> dict[_Key, QAction]:
        """A menu of which one is marked."""
        menu = self.addMenu(name)
        group = QActionGroup(menu)
        found = {}
        for key, words in shown.items():
            action = menu.addAction(words)
            action.setCheckable(True)
            group.addAction(action)
            found[key] = action
        return found

    def show_evidence(self, shown: bool) -> None:
        """Say where the entry leads."""
        self.evidence.setText("Back to tuning" if shown else "Evidence")

    def show_scheme(self, scheme: Scheme) -> None:
        """Mark the theme that is chosen."""
        self.schemes[scheme].setChecked(True)

    def show_scale(self, scale: int) -> None:
        """Mark the size that is chosen."""
        self.scales[scale].setChecked(True)

    def show_recent(self, paths: Sequence[str]) -> None:
        """List the sheets that were open last."""
        self.recent.clear()
        for path in paths:
            action = self.recent.addAction(Path(path).name.replace("&", "&&"))
            action.setToolTip(path)
            action.triggered.connect(lambda _=False, path=path: self.recent_chosen.emit(path))
        self.recent.setToolTipsVisible(True)
        self.recent.setEnabled(bool(paths))

    def _action(self, name: str, keys: str) -> QAction:
        action = self.addAction(name)
        action.setShortcuts(sequences(keys))
        return action
