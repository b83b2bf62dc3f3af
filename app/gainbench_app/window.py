"""The window: three columns that read as a sentence."""

from __future__ import annotations

import gc
import sys
from functools import partial
from pathlib import Path

from PySide6.QtCore import QSettings, Qt, QTimer
from PySide6.QtGui import QCloseEvent, QGuiApplication, QKeySequence, QShortcut
from PySide6.QtWidgets import (
    QApplication,
    QFrame,
    QHBoxLayout,
    QLabel,
    QMainWindow,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from gainbench.assess import warm_up
from gainbench.errors import GainbenchError, SheetError
from gainbench.handover import refusal
from gainbench.sheetfile import SUFFIX, SheetDocument, parse_sheet, read_sheet
from gainbench_app.desk import Desk
from gainbench_app.dialogs import Dialogs, Unsaved
from gainbench_app.hand_over import hand_over
from gainbench_app.live import Readiness, WarmUp
from gainbench_app.menu import WindowMenu
from gainbench_app.on_bench.column import OnBench
from gainbench_app.theme import DARK, LIGHT, MARGIN_PX, Scheme, Theme, body_font, palette, style_sheet
from gainbench_app.top_bar import TopBar
from gainbench_app.what_it_does.column import WhatItDoes
from gainbench_app.what_we_ask.column import WhatWeAsk
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.value_box import ValueBox
from gainbench_resources import demo_sheet, demo_sheet_names

_LEFT_PX, _RIGHT_PX = 334, 300
_SETTINGS = ("Gainbench", "Gainbench")
_SCHEME_KEY = "theme"


class Window(QMainWindow):
    """One open sheet."""

    def __init__(
        self, desk: Desk, *, appearance: Appearance, dialogs: Dialogs | None = None, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self.desk = desk
        self.dialogs = dialogs or Dialogs()
        self.appearance = appearance
        self.menu_of_more = WindowMenu(demo_sheet_names(), self)
        self.top = TopBar(desk, self.menu_of_more)
        self.on_bench = OnBench(desk, appearance)
        self.what_it_does = WhatItDoes(desk, appearance)
        self.what_we_ask = WhatWeAsk(desk, appearance)
        self._lay_out()
        self._connect()
        self.setMinimumSize(1180, 660)
        room = self.screen().availableSize()
        self.resize(min(1400, room.width()), min(900, room.height()))
        self._show_title()
        self._show_handover()
        self.page.setFocus()

    def _lay_out(self) -> None:
        self.page = QWidget()
        self.page.setObjectName("paper")
        outer = QVBoxLayout(self.page)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(0)
        outer.addWidget(self.top)
        line = QHBoxLayout()
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(0)
        self.left = _column("On the bench", self.on_bench, scrolls=True)
        self.left.setObjectName("sideLeft")
        self.left.setFixedWidth(_LEFT_PX)
        self.middle = _column("What it does", self.what_it_does, scrolls=False)
        self.right = _column("What we ask", self.what_we_ask, scrolls=True)
        self.right.setObjectName("sideRight")
        self.right.setFixedWidth(_RIGHT_PX)
        line.addWidget(self.left)
        line.addWidget(self.middle, 1)
        line.addWidget(self.right)
        outer.addLayout(line, 1)
        self.setCentralWidget(self.page)

    def _connect(self) -> None:
        self.top.open.clicked.connect(self.open)
        self.top.save.clicked.connect(self.save)
        self.top.handover.clicked.connect(self.handover)
        menu = self.menu_of_more
        menu.save_as.triggered.connect(self.save_as)
        menu.undo.triggered.connect(self.undo)
        menu.redo.triggered.connect(self.redo)
        menu.demo_chosen.connect(self.open_demo)
        menu.quit.triggered.connect(self.close)
        for keys, action in (
            (QKeySequence.StandardKey.Open, self.open),
            (QKeySequence.StandardKey.Save, self.save),
            ("Ctrl+E", self.handover),
            ("Ctrl+1", lambda: self.on_bench.cards[0].head.setFocus()),
            ("Ctrl+2", lambda: self.what_it_does.spans.buttons["whole"].setFocus()),
            ("Ctrl+3", lambda: self.what_we_ask.speed.method.setFocus()),
        ):
            QShortcut(QKeySequence(keys), self).activated.connect(action)
        self.desk.changed.connect(self._show_title)
        self.desk.changed.connect(self._show_handover)
        self.desk.assessed.connect(self._show_handover)
        self.desk.trouble.connect(lambda message: self.dialogs.tell(self, "The text cannot follow", message))

    # What is shown

    def _show_title(self) -> None:
        star = "[*]"
        title = f"{self.desk.sheet.title}{star} - Gainbench"
        if self.windowTitle() != title:
            self.setWindowTitle(title)
        self.setWindowModified(self.desk.unsaved_since is not None)
        self.menu_of_more.undo.setEnabled(self.desk.can_undo)
        self.menu_of_more.redo.setEnabled(self.desk.can_redo)

    def _show_handover(self) -> None:
        self.top.show_handover(self.handover_refusal())

    def handover_refusal(self) -> str:
        """Why nothing can be handed over; empty where it can."""
        if not self.desk.valid:
            return "no handover: the sheet is not valid"
        if self.desk.assessment is None:
            return "no handover yet: nothing is assessed"
        if self.desk.readiness is not Readiness.ALL:
            return "no handover yet: the response is being prepared"
        if not refusal(self.desk.assessment):
            return ""
        loops = {"current": self.desk.assessment.current, "speed": self.desk.assessment.speed}
        for name, loop in loops.items():
            if loop.gains is None:
                return f"no handover: the targets of the {name} loop cannot be met"
        name = next((name for name, loop in loops.items() if loop.figures is None or not loop.figures.stable), "")
        return f"no handover: the {name} loop is unstable" if name else "no handover: see the findings"

    # What can be done

    def finish_typing(self) -> None:
        """Hand over what stands in the box that is being typed into."""
        box = QApplication.focusWidget()
        if isinstance(box, ValueBox) and self.isAncestorOf(box):
            box.commit()

    def undo(self) -> None:
        """Take the last step back."""
        self.desk.undo()

    def redo(self) -> None:
        """Take the last undo back."""
        self.desk.redo()

    def open(self) -> None:
        """Ask for a sheet and open it."""
        if self.may_leave():
            path = self.dialogs.sheet_to_open(self)
            if path is not None:
                self.open_path(path)

    def open_path(self, path: Path) -> None:
        """Open a sheet; what cannot be read is said, and what was open stays."""
        try:
            self.desk.open_path(path)
        except SheetError as error:
            self.dialogs.tell(self, "This sheet cannot be opened", str(error))

    def open_demo(self, name: str) -> None:
        """Open one of the demo sheets."""
        if self.may_leave():
            file = demo_sheet(name)
            self.desk.open_text(file.read_text(encoding="utf-8"), file.name)

    def save(self) -> bool:
        """Save the sheet to its file, asking for one where there is none; True where it is saved."""
        self.finish_typing()
        if self.desk.path is None:
            return self.save_as()
        return self._save(self.desk.path)

    def save_as(self) -> bool:
        """Save the sheet under another name; True where it is saved."""
        self.finish_typing()
        suggestion = self.desk.path or Path(self.desk.state.document.name or f"sheet{SUFFIX}")
        path = self.dialogs.sheet_to_save(self, suggestion)
        return path is not None and self._save(path)

    def _save(self, path: Path) -> bool:
        try:
            self.desk.save(path)
        except SheetError as error:
            self.dialogs.tell(self, "Not saved", str(error))
            return False
        return True

    def handover(self) -> None:
        """Ask where to, show the cautions, and write the firmware's header."""
        self.finish_typing()
        self.desk.compute_now()
        if self.handover_refusal():
            return
        try:
            hand_over(self, self.desk, self.dialogs)
        except GainbenchError as error:
            self.dialogs.tell(self, "Nothing was handed over", str(error))

    def may_leave(self) -> bool:
        """Whether the open sheet may be left: unsaved work is asked about."""
        self.finish_typing()
        if self.desk.unsaved_since is None:
            return True
        answer = self.dialogs.unsaved(self, self.desk.sheet.title)
        if answer is Unsaved.SAVE:
            return self.save()
        return answer is Unsaved.DISCARD

    def settle_memory(self) -> None:
        """Leave what lives as long as the program out of later collections: with the kernels loaded one takes 0.1 s."""
        gc.collect()
        gc.freeze()

    def tell_failure(self, message: str) -> None:
        """The kernels could not be compiled."""
        self.dialogs.tell(self, "Nothing can be computed", f"The numerical code could not be compiled: {message}")

    def closeEvent(self, event: QCloseEvent) -> None:  # noqa: N802
        """Closing asks about unsaved work."""
        if self.may_leave():
            event.accept()
        else:
            event.ignore()


def _column(name: str, inner: QWidget, *, scrolls: bool) -> QFrame:
    frame = QFrame()
    frame.setAccessibleName(name)
    layout = QVBoxLayout(frame)
    layout.setContentsMargins(0, 10, 0, 0)
    layout.setSpacing(6)
    label = QLabel(name)
    label.setProperty("role", "column")
    label.setContentsMargins(MARGIN_PX - 2, 0, 0, 0)
    layout.addWidget(label)
    if scrolls:
        inner.setContentsMargins(12, 0, 12, 12)
        area = QScrollArea()
        area.setWidgetResizable(True)
        area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        area.setWidget(inner)
        layout.addWidget(area, 1)
    else:
        inner.setContentsMargins(12, 0, 12, 12)
        layout.addWidget(inner, 1)
    return frame


class Themes:
    """Puts a theme in force: the system's, or one of the two."""

    def __init__(self, application: QApplication, appearance: Appearance, *, menu: WindowMenu, scheme: Scheme) -> None:
        self._application = application
        self._appearance = appearance
        self._scheme = scheme
        menu.show_scheme(scheme)
        menu.scheme_chosen.connect(self.choose)
        hints = QGuiApplication.styleHints()
        hints.colorSchemeChanged.connect(self._apply)
        self._apply()

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
        self._application.setPalette(palette(theme))
        self._application.setStyleSheet(style_sheet(theme))
        self._appearance.show(theme)


def open_window(path: str | None) -> int:
    """Open the window and run until it is closed.

    Parameters
    ----------
    path : str, optional
        A bench sheet; without one the demo sheet opens. One that cannot be read is said in a dialog over the demo.

    Returns
    -------
    int
        Exit status of the application.
    """
    existing = QApplication.instance()
    application = existing if isinstance(existing, QApplication) else QApplication(sys.argv[:1])
    application.setApplicationName("Gainbench")
    application.setStyle("Fusion")
    application.setFont(body_font())
    document, file, trouble = _first_document(path)
    desk = Desk(document, path=file, readiness=Readiness.NOTHING)
    appearance = Appearance()
    window = Window(desk, appearance=appearance)
    settings = QSettings(*_SETTINGS)
    stored = str(settings.value(_SCHEME_KEY, Scheme.FOLLOW.value))
    scheme = Scheme(stored) if stored in set(Scheme) else Scheme.FOLLOW
    themes = Themes(application, appearance, menu=window.menu_of_more, scheme=scheme)
    warming = WarmUp(partial(warm_up, simulated=False), warm_up)
    warming.reached.connect(desk.reach)
    warming.finished.connect(window.settle_memory)
    warming.failed.connect(window.tell_failure)
    window.show()
    warming.start()
    if trouble:
        QTimer.singleShot(0, window, lambda: window.dialogs.tell(window, "This sheet cannot be opened", trouble))
    status = application.exec()
    settings.setValue(_SCHEME_KEY, themes.scheme.value)
    warming.requestInterruption()
    warming.wait()
    return status


def _first_document(path: str | None) -> tuple[SheetDocument, Path | None, str]:
    """The sheet to open with, its file, and what is to be said about one that cannot be read."""
    trouble = ""
    if path is not None:
        try:
            return read_sheet(path), Path(path), ""
        except SheetError as error:
            trouble = str(error)
    file = demo_sheet(demo_sheet_names()[0])
    return parse_sheet(file.read_text(encoding="utf-8"), file.name), None, trouble
