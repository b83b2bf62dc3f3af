"""The shelf as a table: rows of tunings, columns of figures, and what a screen reader says of each."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt, Signal

from gainbench.errors import SheetError
from gainbench.results import Level
from gainbench.units import Dimension, unit_size
from gainbench_app.sheet_edits import unit_of
from gainbench_app.shelf.columns import Column, as_table, columns, current_gains_text
from gainbench_app.shelf.tunings import LIVE, Kind, Row, Shelf

Index = QModelIndex | QPersistentModelIndex

LINE, NAME, FIRST = 0, 1, 2
"""Columns: the sample of the line, the name, and the first figure."""
CHANGE = Qt.ItemDataRole.UserRole
"""Role of the difference to the reference, as text."""
UNSTABLE = "unstable"
_PENDING = "\N{HORIZONTAL ELLIPSIS}"
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter


class ShelfModel(QAbstractTableModel):
    """What stands in the table."""

    refused = Signal(str)
    """Why an edit was refused."""

    def __init__(self, shelf: Shelf, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._shelf = shelf
        self._rows: tuple[Row, ...] = ()
        self._columns: tuple[Column, ...] = ()
        self._columns_of: tuple[object, ...] = ()
        self._cells: list[tuple[str, ...]] = []
        self._changes: list[tuple[str, ...]] = []
        self.refresh()
        shelf.changed.connect(self.refresh)
        shelf.live_changed.connect(self._refresh_live)

    @property
    def shelf_rows(self) -> tuple[Row, ...]:
        """The rows, from top to bottom."""
        return self._rows

    @property
    def heads(self) -> list[str]:
        """Of the columns with figures."""
        return [one.head for one in self._columns]

    def refresh(self) -> None:
        """Take the rows anew; where only their contents differ, the view keeps its place."""
        rows = self._shelf.rows()
        anew = [row.key for row in rows] != [row.key for row in self._rows]
        desk = self._shelf.desk
        firmware = desk.sheet.aims.firmware
        unit = unit_of(desk.state.document.typed("duty.reference_speed")) or "rpm"
        heads_anew = self._columns_of != (firmware, unit)
        if anew:
            self.beginResetModel()
        if heads_anew:
            self._columns_of = (firmware, unit)
            self._columns = columns(firmware, speed_unit=unit, speed_size=unit_size(unit, Dimension.SPEED))
        self._rows = rows
        self._tell()
        if anew:
            self.endResetModel()
            return
        if heads_anew:
            self.headerDataChanged.emit(Qt.Orientation.Horizontal, FIRST, self.columnCount() - 1)
        self.dataChanged.emit(self.index(0, 0), self.index(len(rows) - 1, self.columnCount() - 1))

    def _refresh_live(self) -> None:
        """The live path: only cells whose words differ are painted anew."""
        self._rows = (self._shelf.live_row(), *self._rows[1:])
        if self._shelf.reference == LIVE:
            self._tell()
            self.dataChanged.emit(self.index(0, FIRST), self.index(len(self._rows) - 1, self.columnCount() - 1))
            return
        before = (self._cells[0], self._changes[0])
        self._tell_row(0)
        pairs = zip(zip(*before, strict=True), zip(self._cells[0], self._changes[0], strict=True), strict=True)
        moved = [column for column, (old, new) in enumerate(pairs) if old != new]
        if moved:
            self.dataChanged.emit(self.index(0, FIRST + moved[0]), self.index(0, FIRST + moved[-1]))

    def _tell(self) -> None:
        """Put all cells into words."""
        self._cells = [()] * len(self._rows)
        self._changes = [()] * len(self._rows)
        for number in range(len(self._rows)):
            self._tell_row(number)

    def _tell_row(self, number: int) -> None:
        row = self._rows[number]
        self._cells[number] = tuple(self._cell(row, column) for column in self._columns)
        self._changes[number] = tuple(self._change(row, column) for column in self._columns)

    def _cell(self, row: Row, column: Column) -> str:
        known = row.known
        if known is None:
            return _PENDING
        if known.trouble.endswith("unstable") and column.head == "phase margin":
            return UNSTABLE
        return column.cell(known)

    def cell(self, row: int, column: int) -> str:
        """The words of a figure."""
        return self._cells[row][column - FIRST]

    def change(self, row: int, column: int) -> str:
        """What it differs by from the reference."""
        return self._changes[row][column - FIRST]

    def is_reference(self, row: int) -> bool:
        """Whether the others are held against it."""
        return self._rows[row].key == self._shelf.reference

    # What Qt asks

    def rowCount(self, parent: Index | None = None) -> int:  # noqa: N802
        """Tunings."""
        return 0 if parent is not None and parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index | None = None) -> int:  # noqa: N802
        """Line, name and figures."""
        return 0 if parent is not None and parent.isValid() else FIRST + len(self._columns)

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Names of kept tunings can be edited, lines of all but the live one switched."""
        flags = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
        kind = self._rows[index.row()].key.kind if index.isValid() else Kind.LIVE
        if index.column() == NAME and kind is Kind.KEPT:
            flags |= Qt.ItemFlag.ItemIsEditable
        if index.column() == LINE and kind is not Kind.LIVE:
            flags |= Qt.ItemFlag.ItemIsUserCheckable
        return flags

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> Any:  # noqa: N802
        """Heads, and what they mean when pointed at."""
        if orientation is not Qt.Orientation.Horizontal:
            return None
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _RIGHT if section >= FIRST else _LEFT
        if section < FIRST:
            return {LINE: "", NAME: "tuning"}[section] if role == Qt.ItemDataRole.DisplayRole else None
        column = self._columns[section - FIRST]
        if role == Qt.ItemDataRole.DisplayRole:
            return column.head
        return column.meaning if role == Qt.ItemDataRole.ToolTipRole else None

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """One cell."""
        if not index.isValid():
            return None
        row, column = self._rows[index.row()], index.column()
        if column == LINE:
            return self._line(row, role)
        if column == NAME:
            return self._name(row, role)
        return self._figure(index.row(), column, role)

    def _line(self, row: Row, role: int) -> Any:
        drawn = row.key.kind is Kind.LIVE or row.pattern is not None
        if role == Qt.ItemDataRole.CheckStateRole and row.key.kind is not Kind.LIVE:
            return Qt.CheckState.Checked if drawn else Qt.CheckState.Unchecked
        if role == Qt.ItemDataRole.AccessibleTextRole:
            return f"{row.name}, {'drawn' if drawn else 'not drawn'}"
        if role == Qt.ItemDataRole.ToolTipRole and row.key.kind is not Kind.LIVE:
            return "drawn over the live curves; click or Space hides it" if drawn else "click or Space draws it"
        return None

    def _name(self, row: Row, role: int) -> Any:
        if role in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.EditRole):
            return row.key.name if role == Qt.ItemDataRole.EditRole else row.name
        if role == Qt.ItemDataRole.ToolTipRole:
            return "\n".join(one for one in (row.name, row.note, self._told(row)) if one)
        if role == Qt.ItemDataRole.AccessibleTextRole:
            reference = ", the reference" if row.key == self._shelf.reference else ""
            return ", ".join(one for one in (f"{row.name}{reference}", row.note, self._told(row)) if one)
        return None

    def _told(self, row: Row) -> str:
        known = row.known
        if known is None:
            return "being assessed"
        words = [current_gains_text(known, self._shelf.desk.sheet.aims.firmware), known.trouble]
        if not known.trouble and known.level is not Level.HOLDS:
            words.append({Level.THIN: "some findings are thin", Level.BREAKS: "a finding breaks"}[known.level])
        return ", ".join(one for one in words if one)

    def _figure(self, row: int, column: int, role: int) -> Any:
        known = self._rows[row].known
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _RIGHT
        if role == Qt.ItemDataRole.DisplayRole:
            return self.cell(row, column)
        if role == CHANGE:
            return self.change(row, column)
        if role == Qt.ItemDataRole.ToolTipRole and known is not None:
            return known.trouble or None
        if role == Qt.ItemDataRole.AccessibleTextRole:
            text = self.cell(row, column) if known is not None else "being assessed"
            change = self.change(row, column)
            head = self._columns[column - FIRST].head
            return f"{head} {text}" + (f", {change} to the reference" if change else "")
        return None

    def _change(self, row: Row, column: Column) -> str:
        reference = self._shelf.reference
        if reference is None or row.key == reference or row.known is None:
            return ""
        base = next((one.known for one in self._rows if one.key == reference), None)
        return column.change(row.known, base) if base is not None else ""

    def setData(self, index: Index, value: Any, role: int = Qt.ItemDataRole.EditRole) -> bool:  # noqa: N802
        """A name that was typed, or a line that was switched."""
        row = self._rows[index.row()]
        if index.column() == LINE and role == Qt.ItemDataRole.CheckStateRole:
            self._shelf.draw(row.key, Qt.CheckState(value) is Qt.CheckState.Checked)
            return True
        if index.column() != NAME or role != Qt.ItemDataRole.EditRole:
            return False
        try:
            self._shelf.rename(row.key, str(value))
        except SheetError as error:
            self.refused.emit(str(error))
            return False
        return True

    def as_text(self, *, markdown: bool) -> str:
        """The whole table for the clipboard."""
        rows = []
        for number, row in enumerate(self._rows):
            cells = [row.name]
            for column in range(FIRST, self.columnCount()):
                index = self.index(number, column)
                change = self.data(index, CHANGE)
                cells.append(f"{self.data(index)}" + (f" ({change})" if change else ""))
            rows.append(cells)
        return as_table(["tuning", *self.heads], rows, markdown=markdown)
