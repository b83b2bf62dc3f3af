"""The shelf along the bottom: a table of tunings, and above it what can be done with the chosen one."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QPoint, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFontMetricsF, QGuiApplication, QKeyEvent, QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHBoxLayout,
    QLabel,
    QMenu,
    QPushButton,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from gainbench.errors import GainbenchError
from gainbench_app.dialogs import Dialogs
from gainbench_app.shelf.delegate import ShelfDelegate
from gainbench_app.shelf.edits import free_name
from gainbench_app.shelf.head import PAD_PX, ShelfHead
from gainbench_app.shelf.model import NAME, ShelfModel
from gainbench_app.shelf.tunings import Key, Kind, Row, Shelf
from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

ROW_PX, HEAD_PX, TITLE_PX = 24, 22, 26
_LINE_PX, _NAME_PX, _LEAST_NAME_PX = 58.0, 176.0, 110.0
_LEAST_PX = 96.0
_MOST_ROWS, _FEW_ROWS = 3, 2
_LOW_WINDOW_PX = 760
"""Below this height of the window the shelf shows two rows, and scrolls."""


class _Table(QTableView):
    """The table, with the keys that act on its chosen row."""

    resized = Signal()

    def __init__(self, panel: ShelfPanel, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._panel = panel

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Columns share another width."""
        super().resizeEvent(event)
        self.resized.emit()

    def edit_name(self) -> None:
        """Edit the name of the chosen row, unless that is being done already."""
        if self.state() != self.State.EditingState:
            self.edit(self.model().index(self.currentIndex().row(), NAME))

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: N802
        """Only the cells that have changed, without asking Qt's styles about each of them."""
        delegate = self.itemDelegate()
        assert isinstance(delegate, ShelfDelegate)
        # All of it is painted here, so that nothing below has to be: a style sheet takes this mark away.
        self.viewport().setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        dirty = event.region().boundingRect()
        model, current, focused = self.model(), self.currentIndex(), self.hasFocus()
        lines = [(self.rowViewportPosition(row), self.rowHeight(row)) for row in range(model.rowCount())]
        columns = [(self.columnViewportPosition(one), self.columnWidth(one)) for one in range(model.columnCount())]
        with QPainter(self.viewport()) as painter:
            painter.fillRect(dirty, QColor(delegate.ground))
            for row, (top, height) in enumerate(lines):
                if top + height <= dirty.top() or top > dirty.bottom():
                    continue
                if top == dirty.bottom():
                    # Qt asks for one pixel more than has changed: of the next row that is its rule.
                    delegate.paint_rule(painter, QRectF(dirty.left(), top, dirty.width(), 1.0))
                    continue
                chosen = row == current.row()
                delegate.paint_row(
                    painter,
                    row,
                    cells={
                        column: QRectF(left, top, width, height)
                        for column, (left, width) in enumerate(columns)
                        if left + width > dirty.left() and left <= dirty.right()
                    },
                    chosen=chosen,
                    focused=current.column() if focused and chosen else None,
                )

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Enter recalls, Delete takes off, Alt with the arrows moves."""
        alt = bool(event.modifiers() & Qt.KeyboardModifier.AltModifier)
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self.state() != self.State.EditingState:
            self._panel.recall()
        elif event.key() == Qt.Key.Key_Delete:
            self._panel.take_off()
        elif alt and event.key() in (Qt.Key.Key_Up, Qt.Key.Key_Down):
            self._panel.shift(-1 if event.key() == Qt.Key.Key_Up else 1)
        elif event.key() == Qt.Key.Key_Space and self._panel.row is not None:
            self._panel.toggle_drawn()
        else:
            super().keyPressEvent(event)


class ShelfPanel(QFrame):
    """The whole strip."""

    def __init__(
        self,
        shelf: Shelf,
        appearance: Appearance,
        *,
        dialogs: Dialogs,
        hand_over: Callable[[Key], None],
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.shelf = shelf
        self._dialogs = dialogs
        self._hand_over = hand_over
        self._most = _MOST_ROWS
        self._chosen: Key | None = None
        self.setObjectName("shelf")
        self.setAccessibleName("Shelf")
        self.model = ShelfModel(shelf, self)
        self.model.refused.connect(lambda why: dialogs.tell(self, "The shelf stays as it is", why))
        self.table = _Table(self)
        self.actions_of_row: dict[str, QPushButton] = {}
        self._lay_out(appearance)
        shelf.changed.connect(self._show_actions)
        self.model.modelReset.connect(self._choose_something)
        appearance.changed.connect(self.table.viewport().update)
        self._choose_something()
        self._fit()

    def _lay_out(self, appearance: Appearance) -> None:
        outer = QVBoxLayout(self)
        outer.setContentsMargins(12, 2, 12, 4)
        outer.setSpacing(0)
        line = QHBoxLayout()
        line.setContentsMargins(2, 0, 0, 0)
        line.setSpacing(2)
        name = QLabel("Shelf")
        name.setProperty("role", "column")
        line.addWidget(name)
        self.hint = QLabel()
        self.hint.setProperty("role", "small")
        self.hint.setContentsMargins(12, 0, 0, 0)
        line.addWidget(self.hint)
        line.addStretch(1)
        for words, tip, act in (
            ("draw", "draw the chosen tuning over the live curves, or no more (Space)", self.toggle_drawn),
            ("reference", "show what the others differ by from the chosen tuning", self.toggle_reference),
            ("recall", "put the chosen tuning in force, by hand (Enter)", self.recall),
            ("rename", "give the chosen tuning another name (F2)", self.rename),
            ("note", "write a note to the chosen tuning", self.note),
            ("up", "put the chosen tuning further up (Alt+Up)", lambda: self.shift(-1)),
            ("down", "put the chosen tuning further down (Alt+Down)", lambda: self.shift(1)),
            ("take off", "take the chosen tuning off the shelf (Delete)", self.take_off),
            ("hand over", "write the firmware's header of the chosen tuning", self.hand_over),
        ):
            line.addWidget(self._button(words, tip, act, name=f"{words}: chosen tuning"))
        line.addSpacing(14)
        line.addWidget(self._button("beside...", "lay another sheet's tunings beside these", self.open_beside))
        copy = QPushButton("copy")
        copy.setProperty("flat", True)
        copy.setToolTip("copy the table as text")
        copy.setAccessibleName("copy the table")
        menu = QMenu(copy)
        menu.addAction("as text with tabs").triggered.connect(lambda: self.copy_table(markdown=False))
        menu.addAction("as Markdown").triggered.connect(lambda: self.copy_table(markdown=True))
        copy.setMenu(menu)
        self.copy = copy
        line.addWidget(copy)
        outer.addLayout(line)
        self._prepare_table(appearance)
        outer.addWidget(self.table)

    def _button(self, words: str, tip: str, act: Callable[[], None], *, name: str = "") -> QPushButton:
        button = QPushButton(words)
        button.setProperty("flat", True)
        button.setToolTip(tip)
        button.setAccessibleName(name or words)
        button.clicked.connect(lambda: act())
        self.actions_of_row[words] = button
        return button

    def _prepare_table(self, appearance: Appearance) -> None:
        table = self.table
        table.setAccessibleName("tunings side by side")
        table.setModel(self.model)
        table.setItemDelegate(ShelfDelegate(self.model, appearance, table))
        table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        table.setEditTriggers(
            QAbstractItemView.EditTrigger.DoubleClicked | QAbstractItemView.EditTrigger.EditKeyPressed
        )
        table.setShowGrid(False)
        table.setTabKeyNavigation(False)
        table.setMouseTracking(True)
        table.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        table.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        table.verticalHeader().hide()
        table.verticalHeader().setDefaultSectionSize(ROW_PX)
        table.verticalHeader().setMinimumSectionSize(ROW_PX)
        head = ShelfHead(appearance, table)
        head.setFixedHeight(HEAD_PX)
        table.setHorizontalHeader(head)
        self.model.headerDataChanged.connect(self.share_width)
        table.resized.connect(self.share_width)
        table.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        table.customContextMenuRequested.connect(self._show_menu)
        table.selectionModel().currentRowChanged.connect(lambda *_: self._remember())

    def share_width(self) -> None:
        """Give every column what its head needs, and an equal share of the rest."""
        head = self.table.horizontalHeader()
        metrics = QFontMetricsF(sized(self.table.font(), SMALL_PX))
        heads = [metrics.horizontalAdvance(one) + 2.0 * PAD_PX + 1.0 for one in self.model.heads]
        figures = [max(one, _LEAST_PX) for one in heads]
        room = self.table.viewport().width() - _LINE_PX - sum(figures)
        name = min(max(room, _LEAST_NAME_PX), _NAME_PX)
        share = max(0.0, room - name) / max(1, len(figures))
        for section, width in enumerate([_LINE_PX, name, *(one + share for one in figures)]):
            head.resizeSection(section, int(width))

    # The chosen row

    @property
    def row(self) -> Row | None:
        """The chosen tuning."""
        index = self.table.currentIndex()
        rows = self.model.shelf_rows
        return rows[index.row()] if index.isValid() and index.row() < len(rows) else None

    def choose(self, key: Key) -> None:
        """Choose a tuning."""
        for number, row in enumerate(self.model.shelf_rows):
            if row.key == key:
                self.table.setCurrentIndex(self.model.index(number, NAME))

    def _remember(self) -> None:
        """The choice outlasts rows that come and go."""
        row = self.row
        if row is not None:
            self._chosen = row.key
        self._show_actions()

    def _choose_something(self) -> None:
        if self._chosen is not None:
            self.choose(self._chosen)
        if self.row is None and self.model.shelf_rows:
            self.table.setCurrentIndex(self.model.index(len(self.model.shelf_rows) - 1, NAME))
        self._show_actions()
        self._fit()

    def _show_actions(self) -> None:
        row = self.row
        kind = row.key.kind if row is not None else Kind.LIVE
        kept = kind is Kind.KEPT
        count = len(self.shelf.desk.sheet.kept)
        names = [one.name for one in self.shelf.desk.sheet.kept]
        place = names.index(row.key.name) if kept and row is not None and row.key.name in names else 0
        enabled = {
            "draw": kind is not Kind.LIVE,
            "reference": row is not None,
            "recall": kind is not Kind.LIVE,
            "rename": kept,
            "note": kept,
            "up": kept and place > 0,
            "down": kept and place < count - 1,
            "take off": kind is not Kind.LIVE,
            "hand over": row is not None and row.known is not None and kind is not Kind.BESIDE,
            "beside...": True,
        }
        for words, button in self.actions_of_row.items():
            if button.isEnabled() is not enabled[words]:
                button.setEnabled(enabled[words])
        hint = "" if count else "keep a tuning to lay it beside the live one (Ctrl+K)"
        if self.hint.text() != hint:
            self.hint.setText(hint)

    def _show_menu(self, at: QPoint) -> None:
        index = self.table.indexAt(at)
        if index.isValid():
            self.table.setCurrentIndex(self.model.index(index.row(), NAME))
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        for words, button in self.actions_of_row.items():
            action = menu.addAction(words)
            action.setEnabled(button.isEnabled())
            action.triggered.connect(lambda _=False, button=button: button.click())
        menu.popup(self.table.viewport().mapToGlobal(at))

    # What can be done

    def keep(self) -> None:
        """Ask for a name and put the gains in force on the shelf."""
        named = self._dialogs.name_of_tuning(self, free_name(self.shelf.desk.state.document))
        if named is not None and self._try(lambda: self.shelf.keep(named.name, named.note)):
            self.choose(Key(kind=Kind.KEPT, name=self.shelf.desk.sheet.kept[-1].name))
            self.table.scrollToBottom()

    def toggle_drawn(self) -> None:
        """Draw the chosen tuning, or no more."""
        row = self.row
        if row is not None:
            self.shelf.draw(row.key, row.pattern is None)

    def toggle_reference(self) -> None:
        """Hold the others against the chosen tuning, or no more."""
        row = self.row
        if row is not None:
            self.shelf.hold_against(None if self.shelf.reference == row.key else row.key)
            self.table.viewport().update()

    def recall(self) -> None:
        """Put the chosen tuning in force."""
        row = self.row
        if row is not None:
            self._try(lambda: self.shelf.recall(row.key))

    def rename(self) -> None:
        """Edit the chosen tuning's name in its place."""
        row = self.row
        if row is not None and row.key.kind is Kind.KEPT:
            self.table.setFocus()
            self.table.edit_name()

    def note(self) -> None:
        """Ask for the chosen tuning's note."""
        row = self.row
        if row is not None and row.key.kind is Kind.KEPT:
            note = self._dialogs.note(self, row.name, row.note)
            if note is not None:
                self._try(lambda: self.shelf.note(row.key, note))

    def shift(self, by: int) -> None:
        """Put the chosen tuning further up or down."""
        row = self.row
        if row is not None and self._try(lambda: self.shelf.move(row.key, by)):
            self.choose(row.key)

    def take_off(self) -> None:
        """Take the chosen tuning off the shelf; undo brings it back."""
        row = self.row
        if row is not None:
            self._try(lambda: self.shelf.take_off(row.key))

    def hand_over(self) -> None:
        """Write the header of the chosen tuning."""
        row = self.row
        if row is not None and row.key.kind is not Kind.BESIDE:
            self._hand_over(row.key)

    def open_beside(self) -> None:
        """Ask for another sheet and lay its tunings beside these."""
        path = self._dialogs.sheet_to_open(self)
        if path is not None:
            self._try(lambda: self.shelf.open_beside(path))

    def copy_table(self, *, markdown: bool) -> None:
        """Put the table on the clipboard."""
        self.shelf.compute_now()
        QGuiApplication.clipboard().setText(self.model.as_text(markdown=markdown))

    def _try(self, act: Callable[[], None]) -> bool:
        try:
            act()
        except GainbenchError as error:
            self._dialogs.tell(self, "The shelf stays as it is", str(error))
            return False
        return True

    # Size

    def follow_height(self, window_height: int) -> None:
        """Show two rows in a low window, else up to three."""
        self._most = _FEW_ROWS if window_height < _LOW_WINDOW_PX else _MOST_ROWS
        self._fit()

    def _fit(self) -> None:
        rows = min(max(len(self.model.shelf_rows), _FEW_ROWS), self._most)
        height = HEAD_PX + rows * ROW_PX + 2
        if self.table.height() != height or self.table.minimumHeight() != height:
            self.table.setFixedHeight(height)
