"""The window: three columns that read as a sentence."""

from __future__ import annotations

import gc
import os
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path

from PySide6.QtCore import QCoreApplication, QEvent, QPoint, Qt, QUrl, Signal
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent, QResizeEvent, QShortcut
from PySide6.QtWidgets import (
    QApplication,
    QFrame,
    QHBoxLayout,
    QLabel,
    QMainWindow,
    QMenu,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from gainbench.errors import GainbenchError, SheetError
from gainbench.handover import refusal
from gainbench.sheetfile import SUFFIX
from gainbench_app.desk import Desk
from gainbench_app.dialogs import Dialogs, Unsaved
from gainbench_app.guide.opening import Guide
from gainbench_app.habits import Memory, with_recent, without_recent
from gainbench_app.hand_over import hand_over
from gainbench_app.live import Readiness
from gainbench_app.menu import WindowMenu
from gainbench_app.on_bench.column import OnBench
from gainbench_app.pages.switching import Pages
from gainbench_app.pictures import copy_picture, save_picture
from gainbench_app.places import config_folder
from gainbench_app.printing import Page, print_page
from gainbench_app.restarting import SET_OUTSIDE, scale_in_force, set_outside, told
from gainbench_app.shelf.panel import ShelfPanel
from gainbench_app.shelf.tunings import Key, Kind, Shelf
from gainbench_app.shortcuts import ShortcutList, sequences
from gainbench_app.theme import MARGIN_PX
from gainbench_app.top_bar import TopBar
from gainbench_app.what_it_does.column import WhatItDoes
from gainbench_app.what_we_ask.column import WhatWeAsk
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Figure
from gainbench_app.widgets.value_box import ValueBox
from gainbench_resources import demo_sheet, demo_sheet_names

_LEFT_PX, _RIGHT_PX = 344, 320
_SHEET_ENDINGS = (".toml",)
"""Of files that can be dropped on the window."""


class Window(QMainWindow):
    """One open sheet."""

    restart_wanted = Signal()
    """The program is to start again, with the sheet as it is."""

    def __init__(
        self,
        desk: Desk,
        *,
        appearance: Appearance,
        dialogs: Dialogs | None = None,
        memory: Memory | None = None,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.desk = desk
        self.dialogs = dialogs or Dialogs()
        self.appearance = appearance
        self.memory = memory or Memory(config_folder() / "window.json")
        self.menu_of_more = WindowMenu(demo_sheet_names(), self)
        self.top = TopBar(desk, self.menu_of_more)
        self.on_bench = OnBench(desk, appearance)
        self.what_it_does = WhatItDoes(desk, appearance)
        self.what_we_ask = WhatWeAsk(desk, appearance)
        self.shelf = ShelfPanel(Shelf(desk, self), appearance, dialogs=self.dialogs, hand_over=self.hand_over_tuning)
        self.guide = Guide(self, appearance)
        self._lay_out()
        self._connect()
        self.setAcceptDrops(True)
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
        tuning = QWidget()
        beside = QHBoxLayout(tuning)
        beside.setContentsMargins(0, 0, 0, 0)
        beside.setSpacing(0)
        beside.addWidget(self.middle, 1)
        beside.addWidget(self.right)
        self.pages = Pages(tuning, self.desk, self.appearance, dialogs=self.dialogs, parent=self)
        line.addWidget(self.left)
        line.addWidget(self.pages.stack, 1)
        outer.addLayout(line, 1)
        outer.addWidget(self.shelf)
        self.setCentralWidget(self.page)

    def _connect(self) -> None:
        self.top.open.clicked.connect(self.open)
        self.top.save.clicked.connect(self.save)
        self.top.evidence.clicked.connect(self.pages.toggle)
        self.top.keep.clicked.connect(self.keep)
        self.top.handover.clicked.connect(self.handover)
        menu = self.menu_of_more
        menu.save_as.triggered.connect(self.save_as)
        menu.undo.triggered.connect(self.undo)
        menu.redo.triggered.connect(self.redo)
        menu.demo_chosen.connect(self.open_demo)
        menu.recent_chosen.connect(lambda path: self.open_recent(Path(path)))
        menu.recent.aboutToShow.connect(lambda: menu.show_recent(self.memory.habits().recent))
        menu.aboutToShow.connect(lambda: menu.show_recent(self.memory.habits().recent))
        menu.evidence.triggered.connect(self.pages.toggle)
        self.pages.switched.connect(self.top.show_evidence)
        self.pages.switched.connect(menu.show_evidence)
        self.pages.figure_made.connect(self._give_picture_menu)
        menu.paste_rows.triggered.connect(self.paste_rows)
        menu.copy_picture.triggered.connect(lambda: copy_picture(self.figures()))
        menu.save_picture.triggered.connect(lambda: self.save_picture(self.figures()))
        menu.print.triggered.connect(self.print)
        menu.scale_chosen.connect(self.choose_scale)
        menu.show_scale(self.memory.habits().scale)
        menu.guide.triggered.connect(self.guide.open)
        menu.shortcuts.triggered.connect(self.show_shortcuts)
        menu.quit.triggered.connect(self.close)
        acts: dict[str, Callable[[], object]] = {
            "open": self.open,
            "save": self.save,
            "keep": self.keep,
            "handover": self.handover,
            "bench": self.on_bench.cards[0].head.setFocus,
            "does": partial(self.pages.focus_in_tuning, self.what_it_does.spans.buttons["whole"]),
            "ask": partial(self.pages.focus_in_tuning, self.what_we_ask.speed.method),
            "shelf": self.shelf.table.setFocus,
            "findings": self.go_to_findings,
        }
        for name, act in acts.items():
            for keys in sequences(name):
                QShortcut(keys, self).activated.connect(partial(_call, act))
        for figure in self.findChildren(Figure):
            self._give_picture_menu(figure)
        self.what_we_ask.pointed_at.connect(self.on_bench.point_at)
        self.what_it_does.findings_wanted.connect(self.go_to_findings)
        self.desk.changed.connect(self._show_title)
        self.desk.changed.connect(self._show_handover)
        self.desk.words_due.connect(self._show_handover)
        # Places are shared anew before the words are painted, and not once more after it.
        self.desk.words_due.connect(lambda: QCoreApplication.sendPostedEvents(None, QEvent.Type.LayoutRequest.value))
        self.desk.trouble.connect(lambda message: self.dialogs.tell(self, "The text cannot follow", message))

    # What is shown

    def _show_title(self) -> None:
        star = "[*]"
        title = f"{self.desk.sheet.title}{star} - Gainbench"
        if self.windowTitle() != title:
            self.setWindowTitle(title)
        unsaved = self.desk.unsaved_since is not None
        if self.isWindowModified() is not unsaved:
            self.setWindowModified(unsaved)
        self.menu_of_more.undo.setEnabled(self.desk.can_undo)
        self.menu_of_more.redo.setEnabled(self.desk.can_redo)

    def _show_handover(self) -> None:
        self.top.show_handover(self.handover_refusal())
        self.top.show_keep("" if self._has_gains() else "there are no gains to keep")

    def _has_gains(self) -> bool:
        found = self.desk.assessment
        return found is not None and found.current.gains is not None and found.speed.gains is not None

    def figures(self) -> list[Figure]:
        """The plots that are shown, from top to bottom, maps and small ones left out."""
        return self.pages.figures() or [one for one in self.what_it_does.findChildren(Figure) if one.isVisible()]

    def handover_refusal(self) -> str:
        """Why nothing can be handed over; empty where it can."""
        if not self.desk.valid:
            return "no handover: the sheet is not valid"
        if self.desk.assessment is None:
            return "no handover yet: nothing is assessed"
        if self.desk.readiness is not Readiness.ALL:
            return "no handover yet: the response is being prepared"
        held = next((loop for loop in ("speed", "current") if self.desk.held(loop)), "")
        if held:
            return f"no handover: the {held} loop's gains are held, and not in the sheet"
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
        else:
            self.memory.change(partial(with_recent, path=path))

    def open_recent(self, path: Path) -> None:
        """Open a sheet that was open before; one that is gone is forgotten."""
        if not path.exists():
            self.memory.change(partial(without_recent, path=path))
        if self.may_leave():
            self.open_path(path)

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
        self.memory.change(partial(with_recent, path=path))
        return True

    def keep(self) -> None:
        """Ask for a name and put the gains in force on the shelf."""
        self.finish_typing()
        self.desk.compute_now()
        if self._has_gains():
            self.shelf.keep()

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

    def hand_over_tuning(self, key: Key) -> None:
        """Write the header of a tuning of the shelf."""
        if key.kind is Kind.LIVE:
            self.handover()
            return
        self.finish_typing()
        if not self.desk.valid or self.desk.readiness is not Readiness.ALL:
            self.dialogs.tell(self, "Nothing was handed over", self.handover_refusal())
            return
        try:
            hand_over(self, self.desk, self.dialogs, tuning=key.name)
        except GainbenchError as error:
            self.dialogs.tell(self, "Nothing was handed over", str(error))

    def paste_rows(self) -> None:
        """Show what rows of a data sheet would set, and set what is confirmed."""
        self.finish_typing()
        chosen = self.dialogs.rows_to_set(self, self.desk)
        if chosen:
            self.desk.set_values(chosen)

    def go_to_findings(self) -> None:
        """Show the tuning, and go to the worst finding."""
        self.pages.show_tuning()
        self.what_we_ask.findings.go()

    def show_shortcuts(self) -> None:
        """Show the list of shortcuts."""
        self.dialogs.show(ShortcutList(self))

    def choose_scale(self, scale: int) -> None:
        """Remember another size, and offer to start again with it: Qt takes it up at a start only."""
        self.memory.change(lambda habits: replace(habits, scale=scale))
        self.finish_typing()
        if set_outside(os.environ):
            self.dialogs.tell(self, "Size", SET_OUTSIDE)
        elif scale != round(scale_in_force(os.environ)) and self.dialogs.restart_now(self, told(self.desk, scale)):
            self.restart_wanted.emit()

    # Pictures and paper

    def _give_picture_menu(self, figure: Figure) -> None:
        figure.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        figure.customContextMenuRequested.connect(partial(self._show_picture_menu, figure))

    def _show_picture_menu(self, figure: Figure, at: QPoint) -> None:
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        menu.addAction("Copy picture").triggered.connect(lambda: copy_picture([figure]))
        menu.addAction("Save picture...").triggered.connect(lambda: self.save_picture([figure]))
        menu.popup(figure.mapToGlobal(at))

    def save_picture(self, figures: list[Figure]) -> None:
        """Ask for a file and save a picture of plots."""
        if not figures:
            return
        name = (self.desk.state.document.name or "sheet").removesuffix(SUFFIX)
        path = self.dialogs.picture_to_save(self, f"{name}.png")
        if path is None:
            return
        try:
            save_picture(figures, path, title=self.desk.sheet.title)
        except SheetError as error:
            self.dialogs.tell(self, "The picture was not saved", str(error))

    def print(self) -> None:
        """Ask for a printer and print what is shown."""
        self.finish_typing()
        self.desk.compute_now()
        self.shelf.shelf.compute_now()
        device = self.dialogs.printer(self)
        if device is not None:
            print_page(device, self.printed())

    def printed(self) -> Page:
        """What is printed."""
        rows = [line.split("\t") for line in self.shelf.model.as_text(markdown=False).splitlines()]
        return Page(
            title=self.desk.sheet.title,
            file=str(self.desk.path or self.desk.state.document.name),
            verdict=self.what_it_does.words.text(),
            figures=self.figures(),
            heads=rows[0][1:],
            rows=rows[1:],
            findings=self.desk.assessment.findings if self.desk.assessment is not None else (),
        )

    # Dropping a sheet

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:  # noqa: N802
        """Take sheets and logs that are dragged over."""
        urls = event.mimeData().urls()
        if _dropped(urls) is not None or self.pages.logs_among(urls):
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:  # noqa: N802
        """Open the sheet, or add the logs."""
        urls = event.mimeData().urls()
        path = _dropped(urls)
        if path is not None:
            event.acceptProposedAction()
            if self.may_leave():
                self.open_path(path)
        elif logs := self.pages.logs_among(urls):
            event.acceptProposedAction()
            self.pages.add_logs(logs)

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """A low window has a low shelf."""
        super().resizeEvent(event)
        self.shelf.follow_height(self.height())

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
            self.pages.close_down()
            event.accept()
        else:
            event.ignore()


def _call(act: Callable[[], object]) -> None:
    act()


def _dropped(urls: list[QUrl]) -> Path | None:
    """The one sheet among what is dropped."""
    paths = [Path(one.toLocalFile()) for one in urls if one.isLocalFile()]
    sheets = [one for one in paths if one.suffix.lower() in _SHEET_ENDINGS]
    return sheets[0] if len(sheets) == len(paths) == 1 else None


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
