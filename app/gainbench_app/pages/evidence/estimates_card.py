"""The card of the estimates: each with its bounds beside what the sheet has, to be accepted one by one or together."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication, QResizeEvent
from PySide6.QtWidgets import QGridLayout, QLabel, QPushButton, QWidget

from gainbench.evidence.estimate import EstimateName
from gainbench_app.desk import Desk
from gainbench_app.pages.evidence.estimate_rows import EstimateRow, estimate_rows
from gainbench_app.pages.evidence.fitting import Fitting
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.check_box import CheckBox

_HEADS = ("", "", "fitted", "", "95 % of this fit", "run spread", "regression", "sheet", "difference", "")
_ROW_PX = 22
_CLOSE_PX, _APART_PX, _WIDE_PX = 6, 16, 940
_LEAST_NAME_PX = 96
"""In a small window names give way before numbers do."""
_TIPS = {
    4: "bounds of 95 % confidence of this fit, coloured residuals allowed for",
    5: "the same with the spread between runs; half of it becomes the tolerance",
    6: "the linear estimate that the fit started from",
    7: "what the sheet has now, as a total at the motor shaft",
}
_NOTE = (
    "Inertia and frictions are totals at the motor shaft. Bounds know nothing of a sensor's gain or of a wrong column:"
    " try gains from them with a low current limit first."
)


class EstimateLine:
    """The widgets of one row."""

    def __init__(self, row: EstimateRow, appearance: Appearance, grid: QGridLayout, line: int) -> None:
        self.name = row.name
        self.tick = CheckBox("", f"accept {row.words} with the others", appearance)
        self.tick.setChecked(True)
        self.words = QLabel(row.words)
        self.words.setMinimumWidth(_LEAST_NAME_PX)
        self.cells = [QLabel() for _ in range(7)]
        for place, cell in enumerate(self.cells):
            left = place == 1
            cell.setAlignment(
                (Qt.AlignmentFlag.AlignLeft if left else Qt.AlignmentFlag.AlignRight) | Qt.AlignmentFlag.AlignVCenter
            )
            cell.setTextFormat(Qt.TextFormat.PlainText)
        for place in (1, 2, 3, 4):
            self.cells[place].setProperty("role", "small")
        self.accept = QPushButton("accept")
        self.accept.setProperty("flat", True)
        self.accept.setAccessibleName(f"accept {row.words}")
        grid.setRowMinimumHeight(line, _ROW_PX)
        for place, widget in enumerate((self.tick, self.words, *self.cells, self.accept)):
            grid.addWidget(widget, line, place)
        self.show_row(row)

    def widgets(self) -> tuple[QWidget, ...]:
        """All of them."""
        return (self.tick, self.words, *self.cells, self.accept)

    def show_row(self, row: EstimateRow) -> None:
        """Show other numbers of the same estimate."""
        self.row = row
        for cell, text in zip(
            self.cells,
            (row.value, row.unit, row.fit, row.runs, row.linear, row.sheet, row.difference),
            strict=True,
        ):
            cell.setText(text)
        font = self.cells[6].font()
        font.setBold(row.outside)
        self.cells[6].setFont(font)
        self.cells[6].setToolTip("the sheet's value lies beyond the bounds with run spread" if row.outside else "")
        able = not row.refused
        self.tick.setVisible(able)
        self.accept.setVisible(able)
        self.words.setToolTip(row.refused)
        self.accept.setToolTip(f"set in the sheet:\n{row.target}" if able else row.refused)
        self.words.setProperty("role", "" if able else "small")


class EstimatesCard(Card):
    """All estimates."""

    def __init__(self, desk: Desk, fitting: Fitting, appearance: Appearance) -> None:
        super().__init__("Estimates", appearance, foldable=False)
        self._desk = desk
        self._fitting = fitting
        self._appearance = appearance
        self.lines: list[EstimateLine] = []
        self._of: tuple[object, ...] = ()
        self.stale = QLabel("of logs, columns or spans as they were: fit again")
        self.stale.setProperty("role", "problem")
        self.stale.setVisible(False)
        self.all = QPushButton("Accept all")
        self.all.setToolTip("set what is ticked in the sheet, with tolerances and their source; one step of undo")
        self.all.clicked.connect(self._accept_ticked)
        self.copy = QPushButton("copy")
        self.copy.setProperty("flat", True)
        self.copy.setToolTip("copy the table as text with tabs")
        self.copy.setAccessibleName("copy the estimates")
        self.copy.clicked.connect(lambda: QGuiApplication.clipboard().setText(self.as_text()))
        self.head_line.addWidget(self.stale)
        self.head_line.addWidget(self.copy)
        self.head_line.addWidget(self.all)
        self._inner = QWidget()
        self._grid = QGridLayout(self._inner)
        self._grid.setContentsMargins(0, 4, 0, 4)
        self._grid.setHorizontalSpacing(_CLOSE_PX)
        self._grid.setVerticalSpacing(0)
        for place, words in enumerate(_HEADS):
            head = QLabel(words)
            head.setProperty("role", "small")
            head.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignBottom)
            head.setToolTip(_TIPS.get(place, ""))
            self._grid.addWidget(head, 0, place)
        self._grid.setColumnStretch(len(_HEADS), 1)
        self._grid.setRowMinimumHeight(0, _ROW_PX)
        self.rows.addWidget(self._inner)
        self.nothing = QLabel("No log tells any of it: the remarks below say why.")
        self.nothing.setProperty("role", "muted")
        self.nothing.setWordWrap(True)
        self.rows.addWidget(self.nothing)
        self.problem = QLabel()
        self.problem.setProperty("role", "problem")
        self.problem.setWordWrap(True)
        self.problem.setVisible(False)
        self.rows.addWidget(self.problem)
        self.note = QLabel(_NOTE)
        self.note.setProperty("role", "small")
        self.note.setWordWrap(True)
        self.rows.addWidget(self.note)

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Where there is room the columns stand apart."""
        super().resizeEvent(event)
        self._grid.setHorizontalSpacing(_CLOSE_PX if self.width() < _WIDE_PX else _APART_PX)

    def refresh(self) -> None:
        """Follow the report and the sheet."""
        report = self._fitting.report
        found = report.found if report is not None else None
        if found is None:
            self._of = ()
            self.setVisible(False)
            return
        self.setVisible(True)
        self.stale.setVisible(self._fitting.stale)
        sheet = self._desk.sheet
        of = (found, sheet)
        if of != self._of:
            self._of = of
            self._show(estimate_rows(sheet, found, typed=self._desk.state.document.typed))

    def _show(self, rows: tuple[EstimateRow, ...]) -> None:
        if [one.name for one in self.lines] != [one.name for one in rows]:
            for line in self.lines:
                for widget in line.widgets():
                    self._grid.removeWidget(widget)
                    widget.hide()
                    widget.deleteLater()
            self.lines = []
            for number, row in enumerate(rows):
                line = EstimateLine(row, self._appearance, self._grid, number + 1)
                line.tick.toggled.connect(self._show_ticked)
                line.accept.clicked.connect(partial(self._accept, row.name))
                self.lines.append(line)
        else:
            for line, row in zip(self.lines, rows, strict=True):
                line.show_row(row)
        self._inner.setVisible(bool(rows))
        self.nothing.setVisible(not rows)
        self.note.setVisible(bool(rows))
        self._show_ticked()

    def as_text(self) -> str:
        """The table with tabs."""
        lines = [("estimate", "fitted", "unit", *_HEADS[4:9])]
        for line in self.lines:
            row = line.row
            lines.append((row.words, row.value, row.unit, row.fit, row.runs, row.linear, row.sheet, row.difference))
        return "\n".join("\t".join(one) for one in lines)

    def _able(self) -> list[EstimateLine]:
        return [one for one in self.lines if not one.row.refused]

    def _show_ticked(self) -> None:
        able = self._able()
        ticked = sum(one.tick.isChecked() for one in able)
        self.all.setText("Accept all" if ticked == len(able) else f"Accept {ticked} of {len(able)}")
        self.all.setEnabled(ticked > 0)
        self.all.setVisible(bool(able))

    def _accept(self, name: EstimateName) -> None:
        self._say(self._fitting.accept((name,)))

    def _accept_ticked(self) -> None:
        self._say(self._fitting.accept([one.name for one in self._able() if one.tick.isChecked()]))

    def _say(self, problem: str) -> None:
        self.problem.setText(problem)
        self.problem.setVisible(bool(problem))
