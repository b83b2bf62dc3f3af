"""Opens the guide over a window, at the page that speaks of what has the focus."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject
from PySide6.QtWidgets import QApplication, QWidget

from gainbench_app.widgets.appearance import Appearance

if TYPE_CHECKING:
    from gainbench_app.guide.window import GuideWindow


class Guide(QObject):
    """Makes the guide's window when it is first asked for, and closes it with the window that it belongs to."""

    def __init__(self, owner: QWidget, appearance: Appearance) -> None:
        super().__init__(owner)
        self._owner = owner
        self._appearance = appearance
        self._window: GuideWindow | None = None
        owner.installEventFilter(self)

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

    def open_at(self, place: str) -> None:
        """Show a place of the guide, ``page#section``."""
        # What only readers need is not loaded with the window.
        from gainbench_app.guide.window import GuideWindow

        page, _, section = place.partition("#")
        if self._window is None:
            self._window = GuideWindow(self._appearance, self._owner)
        self._window.open(page, section)
        self._window.bring_up()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:  # noqa: N802
        """The guide goes with its owner."""
        if event.type() == QEvent.Type.Hide and not event.spontaneous() and self._window is not None:
            self._window.close()
        return False
