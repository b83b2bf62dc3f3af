"""The card with the list of logs: which there are, how each was read, and what is wrong with it."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from gainbench_app.desk import Desk
from gainbench_app.log_places import words_of
from gainbench_app.pages.evidence.guesses import EXPERIMENTS
from gainbench_app.pages.evidence.logs import LogEntry, Logs
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.scales import frequency_text, number_text, time_text

_EMPTY = (
    "No log yet. Drop a csv, tsv, .mat or parquet file on the window, or press Add a log. Files are only read; what"
    " their columns hold is saved in the sheet."
)

_MOST_SAID = 4
_LONGEST = 44
"""Characters of a file's name that are shown."""


def shortened(name: str) -> str:
    """A file's name without the middle of a very long one."""
    return name if len(name) <= _LONGEST else f"{name[: _LONGEST - 17]}\N{HORIZONTAL ELLIPSIS}{name[-16:]}"


class LogRow(QWidget):
    """One log: its name to choose it by, its state, and a way out."""

    removed = Signal()

    def __init__(self, entry: LogEntry) -> None:
        super().__init__()
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 2)
        outer.setSpacing(0)
        line = QHBoxLayout()
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(10)
        self.name = QPushButton(shortened(entry.file.name).replace("&", "&&"))
        self.name.setProperty("flat", True)
        self.name.setCheckable(True)
        self.name.setToolTip(str(entry.file))
        self.name.setAccessibleName(f"log {entry.file.name}, show it")
        self.state = QLabel()
        self.state.setProperty("role", "small")
        self.state.setTextFormat(Qt.TextFormat.PlainText)
        self.state.setWordWrap(True)
        self.remove = QPushButton("remove")
        self.remove.setProperty("flat", True)
        self.remove.setToolTip("take this log out of the sheet; its file stays")
        self.remove.setAccessibleName(f"remove log {entry.file.name}")
        self.remove.clicked.connect(self.removed)
        line.addWidget(self.name)
        line.addWidget(self.state, 1)
        line.addWidget(self.remove)
        outer.addLayout(line)
        self.problem = QLabel()
        self.problem.setProperty("role", "problem")
        self.problem.setWordWrap(True)
        self.problem.setTextFormat(Qt.TextFormat.PlainText)
        self.problem.setContentsMargins(4, 0, 0, 3)
        self.problem.setVisible(False)
        outer.addWidget(self.problem)

    def show_state(self, words: str, problem: str) -> None:
        """How it was read, and why it cannot be used."""
        self.state.setText(words)
        self.problem.setText(problem)
        self.problem.setVisible(bool(problem))
        self.name.setAccessibleDescription("; ".join(one for one in (words, problem) if one))


class LogList(Card):
    """All logs."""

    def __init__(self, desk: Desk, logs: Logs, appearance: Appearance) -> None:
        super().__init__("Logs", appearance, foldable=False)
        self._desk = desk
        self._logs = logs
        self.add = QPushButton("Add a log...")
        self.add.setToolTip("choose a csv, tsv, .mat or parquet file; one can be dropped on the window as well")
        self.demo = QPushButton("Try the demo logs")
        self.demo.setToolTip("an invented driven run and a step check of the label unwinder")
        self.head_line.addWidget(self.demo)
        self.head_line.addWidget(self.add)
        self.rows_shown: list[LogRow] = []
        self._shown: tuple[object, ...] = ()
        self._group = QButtonGroup(self)
        self.words = QLabel(_EMPTY)
        self.words.setProperty("role", "muted")
        self.words.setWordWrap(True)
        self.rows.addWidget(self.words)
        self.trouble = QLabel()
        self.trouble.setProperty("role", "problem")
        self.trouble.setWordWrap(True)
        self.trouble.setTextFormat(Qt.TextFormat.PlainText)
        self.trouble.setVisible(False)
        self.rows.addWidget(self.trouble)
        self._list = QVBoxLayout()
        self._list.setSpacing(0)
        self.rows.addLayout(self._list)
        logs.changed.connect(self.refresh)
        logs.refused.connect(self.say)
        self.refresh()

    def say(self, trouble: str) -> None:
        """Say why something was not done, below what was said just before; empty takes all of it away."""
        said = self.trouble.text().splitlines() if trouble else []
        lines = [*(one for one in said if one != trouble), *([trouble] if trouble else [])][-_MOST_SAID:]
        self.trouble.setText("\n".join(lines))
        self.trouble.setVisible(bool(lines))

    def refresh(self) -> None:
        """Follow the list."""
        entries = self._logs.entries
        listed = tuple((one.index, one.log) for one in entries)
        if listed != self._shown:
            self._shown = listed
            self._fill(entries)
        self.words.setVisible(not entries and not self._logs.reading)
        self.demo.setVisible(not entries)
        for row, entry in zip(self.rows_shown, entries, strict=True):
            row.name.setChecked(entry is self._logs.chosen)
            row.show_state(self._state(entry), self._logs.problem(entry))

    def _fill(self, entries: tuple[LogEntry, ...]) -> None:
        had_focus = any(row.isAncestorOf(self.focusWidget() or self) for row in self.rows_shown)
        for row in self.rows_shown:
            self._group.removeButton(row.name)
            self._list.removeWidget(row)
            row.hide()
            row.deleteLater()
        self.rows_shown = []
        for place, entry in enumerate(entries):
            row = LogRow(entry)
            self._group.addButton(row.name)
            row.name.clicked.connect(partial(self._choose, place))
            row.removed.connect(partial(self._remove, place))
            self._list.addWidget(row)
            self.rows_shown.append(row)
        if had_focus:
            self.add.setFocus()

    def _choose(self, place: int) -> None:
        self.say("")
        self._logs.choose(place)

    def _remove(self, place: int) -> None:
        self.say("")
        self._logs.remove(self._logs.entries[place])

    def _state(self, entry: LogEntry) -> str:
        parts = [EXPERIMENTS[entry.experiment]]
        found = self._logs.overview(entry)
        survey = self._logs.survey(entry)
        if self._logs.pending(entry):
            parts.append("being read")
        elif found is not None:
            parts.append(f"{_rows(found.rows)}, {time_text(found.length)} at {frequency_text(found.rate)}")
            if found.pieces > 1:
                parts.append(f"{found.pieces} pieces")
        elif survey is not None and survey.rows is not None:
            parts.append(_rows(survey.rows))
        span = self._logs.span(entry)
        if span is not None:
            parts.append(f"{span.start:.4g} to {span.stop:.4g} s of it count")
        parts.append(words_of(entry.log, self._desk.path))
        return " \N{MIDDLE DOT} ".join(one for one in parts if one)


def _rows(count: int) -> str:
    return f"{number_text(float(count), 1.0)} row{'' if count == 1 else 's'}"
