"""The window of the guide: its pages on the left, the one that is read beside them."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QPoint, QRect, QSize, Qt
from PySide6.QtGui import QFont, QGuiApplication, QShortcut
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gainbench_app.guide.find_bar import FindBar
from gainbench_app.guide.pages import FIRST, GROUPS, title
from gainbench_app.guide.view import GuideView
from gainbench_app.shortcuts import guide_sequences
from gainbench_app.theme import MARGIN_PX, SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

_SIZE = (880, 700)
_LIST_PX = 190
_ROW_PX, _HEAD_PX = 26, 30
_GAP_PX = 8
"""Between a dialog and the guide beside it."""
_PAGE = Qt.ItemDataRole.UserRole


class GuideWindow(QWidget):
    """Stays beside the bench window: both can be used at the same time."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent, Qt.WindowType.Window)
        self.setObjectName("paper")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setWindowTitle("Guide")
        self.resize(*_SIZE)
        self.setMinimumSize(560, 360)
        self.view = GuideView(appearance)
        self.find_bar = FindBar(self.view)
        self.pages = QListWidget()
        self.back = self._button("back", self.view.go_back)
        self.forward = self._button("forward", self.view.go_forward)
        self.find = self._button("find", self.find_bar.start)
        self._fill_list()
        self._lay_out()
        keys: dict[str, Callable[[], None]] = {
            "back": self.view.go_back,
            "forward": self.view.go_forward,
            "find": self.find_bar.start,
            "next": lambda: self.find_bar.step(backward=False),
            "previous": lambda: self.find_bar.step(backward=True),
            "close": self._close,
        }
        for name, act in keys.items():
            for sequence in guide_sequences(name):
                QShortcut(sequence, self).activated.connect(act)
        self.view.page_shown.connect(self._show_place)
        self.pages.currentItemChanged.connect(self._choose)
        self.open(FIRST)

    def open(self, page: str, section: str = "") -> None:
        """Show a page at one of its sections."""
        self.view.open(page, section)

    def stand_over(self, below: QWidget) -> None:
        """Belong to a window or dialog: what a dialog shuts out are the windows that do not stand over it."""
        if self.windowHandle() is None:
            # What belongs to what is told to the screen when a window is shown first.
            self.create()
        self.windowHandle().setTransientParent(below.windowHandle())

    def stand_beside(self, dialog: QWidget) -> None:
        """Cover as little of a dialog as the screen lets; where the guide is in sight beside it, it stays."""
        taken = dialog.frameGeometry()
        if not self.isVisible() or self.frameGeometry().intersects(taken):
            self.move(_beside(self.frameGeometry().size(), taken, room=dialog.screen().availableGeometry()))

    def bring_up(self) -> None:
        """Show the window before the others, with the keys in its page."""
        if self.isMinimized():
            self.showNormal()
        self.show()
        # WORKAROUND: Qt 6.11's offscreen platform cannot raise a window, and warns.
        if QGuiApplication.platformName() != "offscreen":
            self.raise_()
        self.activateWindow()
        self.view.setFocus(Qt.FocusReason.OtherFocusReason)

    def _button(self, words: str, act: Callable[[], None]) -> QPushButton:
        button = QPushButton(words)
        button.setProperty("flat", True)
        keys = ", ".join(one.toString(one.SequenceFormat.NativeText) for one in guide_sequences(words))
        button.setToolTip(keys)
        button.clicked.connect(act)
        return button

    def _fill_list(self) -> None:
        self.pages.setObjectName("guideList")
        self.pages.setAccessibleName("pages of the guide")
        self.pages.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.pages.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.pages.setFixedWidth(_LIST_PX)
        small = sized(QFont(self.font()), SMALL_PX, bold=True)
        for head, names in GROUPS.items():
            item = QListWidgetItem(head)
            item.setFlags(Qt.ItemFlag.NoItemFlags)
            item.setFont(small)
            item.setSizeHint(QSize(0, _HEAD_PX))
            item.setTextAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignBottom)
            self.pages.addItem(item)
            for name in names:
                item = QListWidgetItem(title(name))
                item.setData(_PAGE, name)
                item.setSizeHint(QSize(0, _ROW_PX))
                self.pages.addItem(item)

    def _lay_out(self) -> None:
        head = QHBoxLayout()
        head.setSpacing(4)
        head.addWidget(self.back)
        head.addWidget(self.forward)
        head.addStretch(1)
        head.addWidget(self.find)
        page = QVBoxLayout()
        page.setSpacing(6)
        page.addLayout(head)
        page.addWidget(self.view, 1)
        page.addWidget(self.find_bar)
        line = QHBoxLayout(self)
        line.setContentsMargins(MARGIN_PX - 6, 10, MARGIN_PX, MARGIN_PX)
        line.setSpacing(12)
        line.addWidget(self.pages)
        line.addLayout(page, 1)

    def _choose(self, item: QListWidgetItem | None) -> None:
        name = item.data(_PAGE) if item is not None else None
        if isinstance(name, str) and name != self.view.page:
            self.view.open(name)

    def _show_place(self, page: str) -> None:
        """Mark the page in the list, and whether there is a way back."""
        for number in range(self.pages.count()):
            item = self.pages.item(number)
            if item.data(_PAGE) == page and self.pages.currentItem() is not item:
                self.pages.setCurrentItem(item)
        self.back.setEnabled(self.view.can_go_back)
        self.forward.setEnabled(self.view.can_go_forward)
        self.setWindowTitle(f"{title(page)} - Guide")

    def _close(self) -> None:
        """Esc ends a search first."""
        if self.find_bar.isVisible():
            self.find_bar.leave()
        else:
            self.close()


def _beside(size: QSize, taken: QRect, *, room: QRect) -> QPoint:
    """The upper left corner beside a dialog, on the side where the screen has more room."""
    on_right = room.right() - taken.right() >= taken.left() - room.left()
    wanted = taken.right() + 1 + _GAP_PX if on_right else taken.left() - _GAP_PX - size.width()
    x = max(room.left(), min(wanted, room.right() + 1 - size.width()))
    return QPoint(x, max(room.top(), min(taken.top(), room.bottom() + 1 - size.height())))
