"""Opens the guide over a window or a dialog of it, at the page that speaks of what has the focus."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject, Qt, Slot
from PySide6.QtGui import QGuiApplication, QShortcut
from PySide6.QtWidgets import QApplication, QWidget

from gainbench_app.shortcuts import sequences
from gainbench_app.widgets.appearance import Appearance

if TYPE_CHECKING:
    from gainbench_app.guide.window import GuideWindow

_KEYS = "keys of the guide"
"""Name of the shortcuts in a dialog."""


class Guide(QObject):
    """Makes the guide's window when it is first asked for, and closes it with the window that it belongs to.

    A dialog that must be answered shuts out every other window but those that stand over it. So the guide that is
    asked for in a dialog stands over that dialog, and over the window below once the dialog is gone.
    """

    def __init__(self, owner: QWidget, appearance: Appearance) -> None:
        super().__init__(owner)
        self._owner = owner
        self._appearance = appearance
        self._window: GuideWindow | None = None
        self._below = owner
        """What the guide stands over."""
        owner.installEventFilter(self)
        application = QGuiApplication.instance()
        assert isinstance(application, QGuiApplication)
        application.focusWindowChanged.connect(self._meet)

    @property
    def window(self) -> GuideWindow | None:
        """The guide's window, None before it was asked for."""
        return self._window

    def open(self) -> None:
        """Show the page that speaks of what has the focus in the owner."""
        from gainbench_app.guide.where import place_for

        focus = QApplication.focusWidget()
        inside = focus is not None and (focus is self._owner or self._owner.isAncestorOf(focus))
        self.open_at(place_for(focus if inside else None))

    def open_over(self, dialog: QWidget) -> None:
        """Show the page that speaks of what has the focus in a dialog, beside it, while it waits for its answer."""
        from gainbench_app.guide.where import place_for

        self.open_at(place_for(dialog.focusWidget() or dialog), over=dialog)

    def open_at(self, place: str, *, over: QWidget | None = None) -> None:
        """Show a place of the guide, ``page#section``, over the owner or a dialog of it."""
        # What only readers need is not loaded with the window.
        from gainbench_app.guide.window import GuideWindow

        page, _, section = place.partition("#")
        if self._window is None:
            self._window = GuideWindow(self._appearance, self._owner)
            self._window.installEventFilter(self)
        self._window.open(page, section)
        self._stand_over(over or self._owner)
        if over is not None:
            self._window.stand_beside(over)
        self._window.bring_up()

    @Slot()
    def _meet(self) -> None:
        """A dialog of the owner has come up: let it listen to the guide's keys."""
        dialog = QApplication.activeModalWidget()
        if dialog is None or not self._is_mine(dialog):
            return
        if dialog.findChild(QShortcut, _KEYS, Qt.FindChildOption.FindDirectChildrenOnly) is not None:
            return
        for keys in sequences("guide"):
            shortcut = QShortcut(keys, dialog)
            shortcut.setObjectName(_KEYS)
            shortcut.activated.connect(partial(self.open_over, dialog))
        dialog.installEventFilter(self)

    def _is_mine(self, dialog: QWidget) -> bool:
        above: QWidget | None = dialog
        while above is not None and above is not self._owner:
            above = above.parentWidget()
        return above is not None

    def _stand_over(self, below: QWidget) -> None:
        self._below = below
        if self._window is not None:
            self._window.stand_over(below)

    def _below_of(self, dialog: QWidget) -> QWidget:
        """The window below a dialog that goes."""
        above = dialog.parentWidget()
        while above is not None and not above.window().isVisible():
            above = above.window().parentWidget()
        return above.window() if above is not None else self._owner

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:  # noqa: N802
        """The guide goes with its owner, and stays when a dialog goes; the dialog has the keys when the guide goes."""
        if event.type() != QEvent.Type.Hide or event.spontaneous() or self._window is None:
            return False
        if watched is self._owner:
            self._window.close()
        elif watched is self._window:
            if self._below is not self._owner:
                self._below.activateWindow()
        elif watched is self._below:
            self._stand_over(self._below_of(self._below))
        return False
