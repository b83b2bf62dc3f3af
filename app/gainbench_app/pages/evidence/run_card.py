"""The card of one log after a fit: how well it fits, what is to be said of it, and measured over fitted."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QLabel, QWidget

from gainbench.model import EvidenceLog
from gainbench_app.pages.evidence.fit_task import CheckRow, RunResult
from gainbench_app.pages.evidence.guesses import COMPARED, EXPERIMENTS, SIGNALS
from gainbench_app.pages.evidence.log_list import shortened
from gainbench_app.pages.evidence.residual_plots import ResidualPlots
from gainbench_app.theme import Theme
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card

_POOR = 80.0
"""Percent of a fit below which it is doubted; common practice."""
_HEADS = ("", "measured", "predicted", "difference")


class RunCard(Card):
    """One log; made anew for each report."""

    def __init__(self, entry: EvidenceLog, run: RunResult, appearance: Appearance) -> None:
        super().__init__(shortened(entry.log.rpartition("/")[2]), appearance)
        self._appearance = appearance
        words = [EXPERIMENTS[entry.experiment]]
        if run.fit_percent is not None:
            what = "prediction lies" if entry.experiment in COMPARED else "fit lies"
            words.append(f"{what} {run.fit_percent:.2f} % on the log")
        head = QLabel(" \N{MIDDLE DOT} ".join(words))
        head.setProperty("role", "small")
        self.head_line.addWidget(head)
        self.problem = QLabel(run.problem or _doubt(entry, run))
        self.problem.setProperty("role", "problem")
        self.remarks = QLabel("\n".join(f"\N{EN DASH} {one}" for one in run.remarks))
        self.remarks.setProperty("role", "muted")
        for label in (self.problem, self.remarks):
            label.setTextFormat(Qt.TextFormat.PlainText)
            label.setWordWrap(True)
            label.setVisible(bool(label.text()))
            self.rows.addWidget(label)
        self.checks = _table(run.checks) if run.checks else None
        if self.checks is not None:
            self.rows.addWidget(self.checks)
        self.plots: list[ResidualPlots] = []
        self._captions: list[tuple[QLabel, str, str, str]] = []
        for trace in run.traces:
            caption = QLabel()
            caption.setProperty("role", "small")
            caption.setWordWrap(True)
            caption.setContentsMargins(0, 6, 0, 0)
            fitted = "predicted" if entry.experiment in COMPARED else "fitted"
            hue = {"speed": "speed", "current": "current", "voltage": "voltage"}.get(trace.signal.value, "muted")
            share = f"{trace.fit_percent:.2f} % explained" if trace.fit_percent > 0.0 else "explains nothing"
            told = f"{share} \N{MIDDLE DOT} {trace.words}"
            self._captions.append((caption, SIGNALS[trace.signal], hue, f"{fitted}|{told}"))
            plots = ResidualPlots(appearance)
            plots.show_trace(trace, entry.columns)
            self.plots.append(plots)
            self.rows.addWidget(caption)
            self.rows.addWidget(plots)
        appearance.changed.connect(self._colour)
        self._colour()

    def _colour(self) -> None:
        theme = self._appearance.theme
        for caption, name, hue, rest in self._captions:
            fitted, _, told = rest.partition("|")
            caption.setText(_caption(theme, name, hue=hue, fitted=fitted, told=told))


def _doubt(entry: EvidenceLog, run: RunResult) -> str:
    """What is to be thought of before anything is accepted."""
    if entry.experiment in COMPARED or run.fit_percent is None or run.fit_percent >= _POOR:
        return ""
    return "fits poorly: look at columns, experiment, span and the residual before anything of it is accepted"


def _caption(theme: Theme, name: str, *, hue: str, fitted: str, told: str) -> str:
    return (
        f"<span style='color:{getattr(theme, hue)}; font-weight:600'>\N{EM DASH} {name} measured</span>&nbsp;&nbsp;"
        f"<span style='color:{theme.ink}; font-weight:600'>- - {fitted}</span>&nbsp;&nbsp; {told}"
    )


def _table(rows: tuple[CheckRow, ...]) -> QWidget:
    inner = QWidget()
    inner.setAccessibleName("figures measured and predicted")
    grid = QGridLayout(inner)
    grid.setContentsMargins(0, 4, 0, 4)
    grid.setHorizontalSpacing(18)
    grid.setVerticalSpacing(2)
    grid.setColumnStretch(4, 1)
    for place, words in enumerate(_HEADS):
        _put(grid, words, 0, place, role="small")
    for line, row in enumerate(rows, start=1):
        _put(grid, row.name, line, 0, role="muted")
        _put(grid, _number(row.measured, row), line, 1)
        _put(grid, _number(row.predicted, row), line, 2)
        if row.measured is not None and row.predicted is not None:
            apart = row.measured - row.predicted
            _put(grid, ("+" if apart >= 0.0 else "") + _number(apart, row), line, 3)
    return inner


def _put(grid: QGridLayout, words: str, line: int, place: int, *, role: str = "") -> None:
    label = QLabel(words)
    label.setProperty("role", role)
    side = Qt.AlignmentFlag.AlignLeft if place == 0 else Qt.AlignmentFlag.AlignRight
    label.setAlignment(side | Qt.AlignmentFlag.AlignVCenter)
    grid.addWidget(label, line, place)


def _number(value: float | None, row: CheckRow) -> str:
    if value is None:
        return "none"
    return f"{value:.{row.digits}g}\N{NO-BREAK SPACE}{row.unit}".replace("-", "\N{MINUS SIGN}")
