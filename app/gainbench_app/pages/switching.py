"""From the tuning to a page in its place, and back."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import shiboken6
from PySide6.QtCore import QObject, QUrl, Signal
from PySide6.QtWidgets import QApplication, QStackedWidget, QWidget

from gainbench_app.desk import Desk
from gainbench_app.dialogs import Dialogs
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Figure

if TYPE_CHECKING:
    from gainbench_app.pages.evidence.page import EvidencePage

ENDINGS = (".csv", ".tsv", ".mat", ".parquet")
"""Of files that are logs wherever in the window they are dropped."""
_SHEETS = ".toml"


class Pages(QObject):
    """The tuning, and the evidence page, which is made when it is first asked for."""

    switched = Signal(bool)
    """Whether the evidence page is shown."""
    figure_made = Signal(object)
    """Each Figure of the page, when it is made."""

    def __init__(
        self, tuning: QWidget, desk: Desk, appearance: Appearance, *, dialogs: Dialogs, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._desk, self._appearance, self._dialogs = desk, appearance, dialogs
        self.stack = QStackedWidget()
        self.stack.addWidget(tuning)
        self._evidence: EvidencePage | None = None
        self._from: QWidget | None = None
        """Where the focus was before."""

    @property
    def evidence(self) -> EvidencePage:
        """The evidence page."""
        if self._evidence is None:
            # What the page imports would cost every start of the window.
            from gainbench_app.pages.evidence.page import EvidencePage

            self._evidence = EvidencePage(self._desk, self._appearance, dialogs=self._dialogs)
            self._evidence.left.connect(self.show_tuning)
            self.stack.addWidget(self._evidence)
            for figure in self._evidence.findChildren(Figure):
                self.figure_made.emit(figure)
            self._evidence.figure_made.connect(self.figure_made)
        return self._evidence

    @property
    def shows_evidence(self) -> bool:
        """Whether the evidence page is shown."""
        return self.stack.currentIndex() > 0

    def toggle(self) -> None:
        """To the evidence page, or back."""
        if self.shows_evidence:
            self.show_tuning()
        else:
            self.show_evidence()

    def show_evidence(self) -> None:
        """Show the evidence page."""
        if not self.shows_evidence:
            self._from = QApplication.focusWidget()
            self.stack.setCurrentWidget(self.evidence)
            self.switched.emit(True)
            self.evidence.enter()

    def show_tuning(self) -> None:
        """Show the tuning."""
        if self.shows_evidence:
            self.stack.setCurrentIndex(0)
            self.evidence.leave()
            self.switched.emit(False)
            if self._from is not None and shiboken6.isValid(self._from) and self._from.isVisible():
                self._from.setFocus()
            self._from = None

    def focus_in_tuning(self, widget: QWidget) -> None:
        """Show the tuning, and go to a part of it."""
        self.show_tuning()
        widget.setFocus()

    def add_logs(self, paths: list[Path]) -> None:
        """Open the evidence page with logs that were dropped."""
        self.show_evidence()
        self.evidence.add_all(paths)

    def logs_among(self, urls: list[QUrl]) -> list[Path]:
        """The logs that are dropped, where nothing else is; over the evidence page files of any ending are tried."""
        paths = [Path(one.toLocalFile()) for one in urls if one.isLocalFile()]
        if self.shows_evidence:
            taken = [one for one in paths if one.suffix.lower() != _SHEETS]
        else:
            taken = [one for one in paths if one.suffix.lower() in ENDINGS]
        return taken if len(taken) == len(urls) else []

    def figures(self) -> list[Figure]:
        """The plots of the evidence page while it is shown."""
        return self.evidence.figures() if self.shows_evidence else []

    def close_down(self) -> None:
        """The window closes."""
        if self._evidence is not None:
            self._evidence.close_down()
