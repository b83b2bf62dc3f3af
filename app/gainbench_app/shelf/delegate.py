"""How the cells of the shelf look: a line's sample, names and figures, and differences in grey before them.

Painted from the model's words directly: a style sheet, or asking for each word through Qt, takes several times as long.
"""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QAbstractItemModel, QEvent, QObject, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QStyle, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from gainbench_app.shelf.head import PAD_PX as _PAD
from gainbench_app.shelf.model import FIRST, LINE, NAME, UNSTABLE, Index, ShelfModel
from gainbench_app.shelf.tunings import Kind, Row
from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.widgets.appearance import Appearance

_SAMPLE_PX = 34.0
_GAP_PX = 6.0
_RIGHT = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
_LEFT = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)


class ShelfDelegate(QStyledItemDelegate):
    """Paints cells by itself."""

    def __init__(self, model: ShelfModel, appearance: Appearance, parent: QWidget) -> None:
        super().__init__(parent)
        self._model = model
        self._appearance = appearance
        font = parent.font()
        self._plain, self._strong, self._small = sized(font, 13), sized(font, 13, bold=True), sized(font, SMALL_PX)
        self._widths = {id(one): QFontMetricsF(one) for one in (self._plain, self._strong, self._small)}

    @property
    def ground(self) -> str:
        """The colour below the cells."""
        return self._appearance.theme.paper

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:  # noqa: N802
        """As wide as its words."""
        return QSize(round(self._width(self._plain, str(index.data() or "")) + 2.0 * _PAD), 24)

    def _width(self, font: QFont, words: str) -> float:
        return self._widths[id(font)].horizontalAdvance(words)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """One cell."""
        state = option.state
        self.paint_row(
            painter,
            index.row(),
            cells={index.column(): QRectF(option.rect)},
            chosen=bool(state & QStyle.StateFlag.State_Selected),
            focused=index.column() if state & QStyle.StateFlag.State_HasFocus else None,
        )

    def paint_row(
        self, painter: QPainter, number: int, *, cells: Mapping[int, QRectF], chosen: bool, focused: int | None
    ) -> None:
        """Cells of a row that stand side by side, by their columns.

        They stand on the ground of the chosen row, and the one with the focus has a line around it.
        """
        if not cells:
            return
        theme, row = self._appearance.theme, self._model.shelf_rows[number]
        boxes = list(cells.values())
        whole = boxes[0].united(boxes[-1])
        if chosen:
            painter.fillRect(whole, QColor(theme.mixed(theme.outline, 0.16)))
        self.paint_rule(painter, QRectF(whole.left(), whole.top(), whole.width(), 1.0))
        if LINE in cells:
            self._paint_sample(painter, cells[LINE], row)
        if NAME in cells:
            self._paint_name(painter, cells[NAME], number)
        self._paint_figures(painter, number, row, cells={at: box for at, box in cells.items() if at >= FIRST})
        if focused in cells:
            painter.setPen(QPen(QColor(theme.ink), 1.0))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(cells[focused].adjusted(0.5, 1.5, -0.5, -1.5))

    def paint_rule(self, painter: QPainter, line: QRectF) -> None:
        """The line above a row."""
        painter.fillRect(line, QColor(self._appearance.theme.rule))

    def _paint_sample(self, painter: QPainter, box: QRectF, row: Row) -> None:
        theme = self._appearance.theme
        middle = round(box.center().y()) + 0.5
        right = box.right() - _PAD
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if row.key.kind is Kind.LIVE or row.pattern is not None:
            pen = QPen(QColor(theme.speed), 2.0 if row.pattern is None else 1.6)
            if row.pattern is not None:
                pen.setDashPattern([one / pen.widthF() for one in row.pattern])
                pen.setCapStyle(Qt.PenCapStyle.FlatCap)
            painter.setPen(pen)
            painter.drawLine(QPointF(right - _SAMPLE_PX, middle), QPointF(right, middle))
        else:
            painter.setPen(QPen(QColor(theme.outline), 1.0))
            painter.drawEllipse(QPointF(right - _SAMPLE_PX / 2.0, middle), 4.0, 4.0)
        painter.restore()

    def _paint_name(self, painter: QPainter, box: QRectF, number: int) -> None:
        theme = self._appearance.theme
        row = self._model.shelf_rows[number]
        font = self._strong if row.key.kind is Kind.LIVE else self._plain
        inner = box.adjusted(_PAD, 0.0, -_PAD, 0.0)
        words = self._widths[id(font)].elidedText(row.name, Qt.TextElideMode.ElideRight, inner.width())
        painter.setFont(font)
        painter.setPen(QColor(theme.ink))
        painter.drawText(inner, _LEFT, words)
        if self._model.is_reference(number):
            x = inner.left() + self._width(font, words) + _GAP_PX
            painter.setFont(self._small)
            painter.setPen(QColor(theme.muted))
            painter.drawText(QRectF(x, inner.top(), inner.right() - x, inner.height()), _LEFT, "reference")

    def _paint_figures(self, painter: QPainter, number: int, row: Row, *, cells: Mapping[int, QRectF]) -> None:
        theme = self._appearance.theme
        font = self._strong if row.key.kind is Kind.LIVE else self._plain
        usual = QColor(theme.ink if row.known else theme.muted)
        painter.setFont(font)
        painter.setPen(usual)
        for column, box in cells.items():
            text, change = self._model.cell(number, column), self._model.change(number, column)
            inner = box.adjusted(0.0, 0.0, -_PAD, 0.0)
            if text == UNSTABLE:
                painter.setPen(QColor(theme.breaks))
            painter.drawText(inner, _RIGHT, text)
            if change:
                width = self._width(font, text)
                if self._width(self._small, change) + _GAP_PX + width <= inner.width():
                    painter.setFont(self._small)
                    painter.setPen(QColor(theme.muted))
                    painter.drawText(inner.adjusted(0.0, 0.0, -width - _GAP_PX, 0.0), _RIGHT, change)
                    painter.setFont(font)
            if change or text == UNSTABLE:
                painter.setPen(usual)

    def editorEvent(  # noqa: N802
        self, event: QEvent, model: QAbstractItemModel, option: QStyleOptionViewItem, index: Index
    ) -> bool:
        """A click anywhere on the sample, or Space, switches the line."""
        if index.column() != LINE or not model.flags(index) & Qt.ItemFlag.ItemIsUserCheckable:
            return super().editorEvent(event, model, option, index)
        clicked = (
            event.type() == QEvent.Type.MouseButtonRelease
            and isinstance(event, QMouseEvent)
            and event.button() == Qt.MouseButton.LeftButton
            and option.rect.contains(event.position().toPoint())
        )
        pressed = (
            event.type() == QEvent.Type.KeyPress and isinstance(event, QKeyEvent) and event.key() == Qt.Key.Key_Space
        )
        if clicked or pressed:
            drawn = model.data(index, Qt.ItemDataRole.CheckStateRole) is Qt.CheckState.Checked
            return model.setData(
                index, Qt.CheckState.Unchecked if drawn else Qt.CheckState.Checked, Qt.ItemDataRole.CheckStateRole
            )
        return False

    def eventFilter(self, editor: QObject, event: QEvent) -> bool:  # noqa: N802
        """Enter takes a name at once: Qt would wait for its next round, and rows that change meanwhile lose it."""
        if (
            event.type() == QEvent.Type.KeyPress
            and isinstance(event, QKeyEvent)
            and isinstance(editor, QWidget)
            and event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter)
        ):
            self.commitData.emit(editor)
            self.closeEditor.emit(editor, QStyledItemDelegate.EndEditHint.NoHint)
            return True
        return super().eventFilter(editor, event)
