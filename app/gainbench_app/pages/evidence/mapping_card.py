"""The card of one log: what its columns hold, in which units, with what was guessed and why."""

from __future__ import annotations

import math

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QGridLayout, QLabel, QScrollArea, QWidget

from gainbench.errors import UnitError
from gainbench.evidence import LogSurvey, SurveyedColumn
from gainbench.evidence.guessing import spelled
from gainbench.model import SIGNAL_DIMENSIONS, LogColumn, SignalName
from gainbench.units import unit_size
from gainbench_app.pages.evidence.guesses import SIGNALS, why_guessed
from gainbench_app.pages.evidence.logs import LogEntry, Logs, names_of
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_app.widgets.value_box import ValueBox

MOST_ROWS = 60
"""Columns that are shown; those with numbers come first."""
_SHORT = 12
_WORDS = (("", "nothing"), *((signal.value, words) for signal, words in SIGNALS.items()))
_FORMS = {"text": "text", "matlab": "MATLAB file", "parquet": "parquet file"}
_SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab", " ": "blank"}


class ColumnRow(QWidget):
    """What one column holds. What is not complete stays here until it is."""

    mapped = Signal(object, str, str, float)
    """Column, signal, unit, scale."""
    cleared = Signal(object)

    def __init__(self, column: SurveyedColumn, appearance: Appearance, grid: QGridLayout, line: int) -> None:
        super().__init__()
        self.column = column
        self._known: LogColumn | None = None
        self.name = QLabel(column.name)
        self.name.setTextFormat(Qt.TextFormat.PlainText)
        self.name.setToolTip(f"{column.name}\nstarts with {', '.join(column.first_values[:4])}")
        self.name.setMinimumWidth(60)
        self.signal_box = ChoiceBox(f"what column {column.name} holds", _WORDS, appearance)
        self.unit = ValueBox(f"unit of column {column.name}")
        self.unit.setFixedWidth(72)
        self.scale = ValueBox(f"scale of column {column.name}")
        self.scale.setFixedWidth(64)
        self.scale.setToolTip("what the column is multiplied by; a sign that is wrong is put right with -1")
        self.why = QLabel()
        self.why.setProperty("role", "small")
        self.why.setTextFormat(Qt.TextFormat.PlainText)
        self.why.setWordWrap(True)
        self.problem = QLabel()
        self.problem.setProperty("role", "problem")
        self.problem.setTextFormat(Qt.TextFormat.PlainText)
        self.problem.setWordWrap(True)
        self.problem.setVisible(False)
        values = ", ".join(_short(one) for one in column.first_values[:3])
        self.why.setText(f"{why_guessed(column)} \N{MIDDLE DOT} {values}" if values else why_guessed(column))
        for place, widget in enumerate((self.name, self.signal_box, self.unit, self.scale)):
            grid.addWidget(widget, 3 * line, place)
            widget.setEnabled(column.numeric or place == 0)
        grid.addWidget(self.why, 3 * line + 1, 0, 1, 4)
        grid.addWidget(self.problem, 3 * line + 2, 0, 1, 4)
        self.signal_box.chosen.connect(self._choose)
        self.unit.committed.connect(lambda _: self._offer())
        self.scale.committed.connect(lambda _: self._offer())

    def widgets(self) -> tuple[QWidget, ...]:
        """All that it put into the grid."""
        return (self.name, self.signal_box, self.unit, self.scale, self.why, self.problem)

    def show_mapping(self, mapped: LogColumn | None) -> None:
        """Show what the sheet has for this column."""
        if mapped == self._known and not self.problem.isHidden():
            return
        self._known = mapped
        self._put(mapped)

    def _put(self, mapped: LogColumn | None) -> None:
        self.say("")
        self.signal_box.show_word(mapped.signal.value if mapped is not None else "")
        self.unit.show_text(mapped.unit if mapped is not None else "")
        self.scale.show_text(f"{mapped.scale:.9g}" if mapped is not None else "")
        self._open()

    def _open(self) -> None:
        used = bool(self.signal_box.currentData())
        self.unit.setEnabled(used)
        self.scale.setEnabled(used)

    def say(self, problem: str) -> None:
        """Say why it is not in the sheet; empty takes it away."""
        self.problem.setText(problem)
        self.problem.setVisible(bool(problem))
        self.unit.mark(problem if "unit" in problem else "")
        self.scale.mark(problem if "scale" in problem else "")
        self.signal_box.mark(problem if problem and "unit" not in problem and "scale" not in problem else "")

    def _choose(self, word: str) -> None:
        self._open()
        if not word:
            self.cleared.emit(self.column)
            return
        if not self._fits(self.unit.text(), SignalName(word)):
            self.unit.show_text(self._unit_for(SignalName(word)))
        if not self.scale.text():
            self.scale.show_text("1")
        self._offer()

    def _unit_for(self, signal: SignalName) -> str:
        """The file's own unit where it is one of this signal; nothing is made up."""
        guess = self.column.guess
        own = guess.unit if guess is not None and guess.unit else spelled(self.column.unit)
        return own if self._fits(own, signal) else ""

    @staticmethod
    def _fits(unit: str, signal: SignalName) -> bool:
        try:
            unit_size(unit, SIGNAL_DIMENSIONS[signal])
        except UnitError:
            return False
        return bool(unit)

    def _offer(self) -> None:
        """Hand over what is complete."""
        word = self.signal_box.currentData()
        if not word:
            return
        signal, unit = SignalName(word), self.unit.text().strip()
        if not unit:
            example = SIGNAL_DIMENSIONS[signal].unit
            self.say(f"not in the sheet yet: type its unit, for example {example}")
            return
        try:
            unit_size(unit, SIGNAL_DIMENSIONS[signal])
        except UnitError as error:
            self.say(f"unit: {error.reason}")
            return
        try:
            scale = float(self.scale.text().strip().replace(",", ".") or "1")
        except ValueError:
            scale = math.nan
        if not math.isfinite(scale) or scale == 0.0:
            self.say("scale: a number other than 0 is meant, for example 35.15 or -1")
            return
        self.say("")
        self.mapped.emit(self.column, word, unit, scale)


class MappingCard(Card):
    """All columns of the chosen log."""

    def __init__(self, logs: Logs, appearance: Appearance) -> None:
        super().__init__("Columns", appearance, foldable=False)
        self._logs = logs
        self._appearance = appearance
        self._entry: LogEntry | None = None
        self._of: tuple[object, ...] = ()
        self.columns: list[ColumnRow] = []
        self.form = QLabel()
        self.form.setProperty("role", "small")
        self.head_line.addWidget(self.form)
        inner = QWidget()
        self._grid = QGridLayout(inner)
        self._grid.setContentsMargins(0, 0, 8, 0)
        self._grid.setHorizontalSpacing(8)
        self._grid.setVerticalSpacing(0)
        self._grid.setColumnStretch(0, 1)
        self.area = QScrollArea()
        self.area.setWidgetResizable(True)
        self.area.setFrameShape(QFrame.Shape.NoFrame)
        self.area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.area.setWidget(inner)
        words = QLabel("column, what it holds, unit and scale; a number of the file times the scale is in the unit")
        words.setProperty("role", "small")
        words.setWordWrap(True)
        self.rows.addWidget(words)
        self.rows.addWidget(self.area, 1)
        self.rest = QLabel()
        self.rest.setProperty("role", "small")
        self.rest.setVisible(False)
        self.rows.addWidget(self.rest)

    def show_entry(self, entry: LogEntry | None, survey: LogSurvey | None) -> None:
        """Show another log, or its other mapping."""
        self._entry = entry
        of = (entry.file, survey) if entry is not None else ()
        if of != self._of:
            self._of = of
            self._fill(survey)
        for row in self.columns:
            names = names_of(row.column)
            columns = entry.columns if entry is not None else ()
            row.show_mapping(next((one for one in columns if one.column in names), None))

    def _fill(self, survey: LogSurvey | None) -> None:
        for row in self.columns:
            for widget in row.widgets():
                self._grid.removeWidget(widget)
                widget.hide()
                widget.deleteLater()
            row.deleteLater()
        self.columns = []
        self.form.setText(_form(survey) if survey is not None else "")
        ordered = sorted(survey.columns, key=lambda one: not one.numeric) if survey is not None else []
        for line, column in enumerate(ordered[:MOST_ROWS]):
            row = ColumnRow(column, self._appearance, self._grid, line)
            row.setParent(self)
            row.hide()
            row.mapped.connect(self._map)
            row.cleared.connect(self._clear)
            self.columns.append(row)
        self._grid.setRowStretch(3 * MOST_ROWS, 1)
        left = len(ordered) - len(self.columns)
        self.rest.setText(f"{left} columns more are not shown; name one in the sheet to use it")
        self.rest.setVisible(left > 0)

    def _row_of(self, column: object) -> ColumnRow | None:
        return next((one for one in self.columns if one.column is column), None)

    def _map(self, column: SurveyedColumn, signal: str, unit: str, scale: float) -> None:
        if self._entry is None:
            return
        why = self._logs.map_column(self._entry, column, signal=SignalName(signal), unit=unit, scale=scale)
        self._tell(column, why)

    def _clear(self, column: SurveyedColumn) -> None:
        if self._entry is not None:
            self._tell(column, self._logs.unmap_column(self._entry, column))

    def _tell(self, column: SurveyedColumn, why: str) -> None:
        row = self._row_of(column)
        if why and row is not None:
            row.say(why)


def _short(text: str) -> str:
    """A number without digits that nobody reads here."""
    if len(text) <= _SHORT:
        return text
    try:
        return f"{float(text.replace(',', '.')):.6g}"
    except ValueError:
        return text[:_SHORT] + "\N{HORIZONTAL ELLIPSIS}"


def _form(survey: LogSurvey) -> str:
    parts = [_FORMS.get(survey.form, survey.form)]
    if survey.layout is not None:
        separator = survey.layout.separator
        parts.append(f"separated by {_SEPARATORS.get(separator, repr(separator))}")
        if survey.layout.decimal_mark == ",":
            parts.append("decimal comma")
    return ", ".join(parts)
