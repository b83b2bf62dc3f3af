"""The dialog for rows of a data sheet: what each would set is shown, and only what is confirmed is set."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QResizeEvent, QShowEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QDialog,
    QDialogButtonBox,
    QHeaderView,
    QLabel,
    QPlainTextEdit,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from gainbench.sheetfile import EntryValue
from gainbench_app.desk import Desk
from gainbench_app.on_bench.entries import entry_name
from gainbench_app.paste_rows import PastedRow, recognised
from gainbench_app.theme import MARGIN_PX

_HEADS = ("entry", "now", "becomes", "row")


class PasteDialog(QDialog):
    """Rows above, what they would set below."""

    def __init__(self, desk: Desk, text: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._rows: tuple[PastedRow, ...] = ()
        self.setWindowTitle("Paste rows from a data sheet")
        self.resize(900, 580)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(MARGIN_PX + 2, MARGIN_PX, MARGIN_PX + 2, MARGIN_PX)
        layout.setSpacing(10)
        what = QLabel("One row in each line: a name, a number and a unit, in any order.")
        what.setProperty("role", "muted")
        layout.addWidget(what)
        self.text = QPlainTextEdit(text)
        self.text.setAccessibleName("rows of a data sheet")
        self.text.setTabChangesFocus(True)
        self.text.textChanged.connect(self._read)
        layout.addWidget(self.text, 2)
        self.table = QTableWidget(0, len(_HEADS))
        self.table.setAccessibleName("what the rows would set")
        self.table.setHorizontalHeaderLabels(_HEADS)
        self.table.verticalHeader().hide()
        self.table.verticalHeader().setMinimumSectionSize(24)
        self.table.verticalHeader().setDefaultSectionSize(24)
        self.table.setShowGrid(False)
        self.table.setTabKeyNavigation(False)
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setWordWrap(True)
        head = self.table.horizontalHeader()
        for column, width in enumerate((160, 120, 330)):
            head.resizeSection(column, width)
        head.setSectionResizeMode(len(_HEADS) - 1, QHeaderView.ResizeMode.Stretch)
        self.table.itemChanged.connect(self._count)
        layout.addWidget(self.table, 3)
        buttons = QDialogButtonBox()
        self.take = buttons.addButton("Set", QDialogButtonBox.ButtonRole.AcceptRole)
        buttons.addButton("Cancel", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        layout.addWidget(buttons)
        self._read()

    def values(self) -> dict[str, EntryValue]:
        """What is confirmed."""
        found: dict[str, EntryValue] = {}
        for number, row in enumerate(self._rows):
            item = self.table.item(number, 0)
            if row.usable and item is not None and item.checkState() is Qt.CheckState.Checked:
                found[row.path] = row.value
        return found

    def _read(self) -> None:
        self._rows = recognised(
            self.text.toPlainText(),
            winding_values=self._desk.text("machine.winding_values"),
            current_values=self._desk.text("machine.current_values"),
        )
        self.table.blockSignals(True)
        self.table.setRowCount(len(self._rows))
        for number, row in enumerate(self._rows):
            self._show(number, row)
        self.table.blockSignals(False)
        self.table.resizeRowsToContents()
        self._count()

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Another width breaks lines elsewhere."""
        super().resizeEvent(event)
        self.table.resizeRowsToContents()

    def showEvent(self, event: QShowEvent) -> None:  # noqa: N802
        """The columns have their widths."""
        super().showEvent(event)
        self.table.resizeRowsToContents()

    def _show(self, number: int, row: PastedRow) -> None:
        now = (self._desk.text(row.path) or "not given") if row.path else ""
        becomes = row.value if row.usable else row.reason
        for column, words in enumerate((entry_name(row.path), now, becomes, row.row)):
            item = QTableWidgetItem(words)
            item.setToolTip(words)
            item.setFlags(Qt.ItemFlag.ItemIsSelectable | Qt.ItemFlag.ItemIsEnabled)
            if column == 0 and row.usable:
                item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
                item.setCheckState(Qt.CheckState.Checked)
            self.table.setItem(number, column, item)

    def _count(self) -> None:
        count = len(self.values())
        self.take.setText(f"Set {count} {'entry' if count == 1 else 'entries'}" if count else "Set")
        self.take.setEnabled(count > 0)
