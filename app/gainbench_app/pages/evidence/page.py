"""The evidence page: logs, their columns and signals, the fit, and what follows from it."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QProgressBar,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from gainbench.model import Experiment
from gainbench_app.desk import Desk
from gainbench_app.dialogs import Dialogs
from gainbench_app.pages.evidence.estimates_card import EstimatesCard
from gainbench_app.pages.evidence.fit_task import FitReport
from gainbench_app.pages.evidence.fitting import Fitting
from gainbench_app.pages.evidence.log_list import LogList
from gainbench_app.pages.evidence.logs import Logs
from gainbench_app.pages.evidence.mapping_card import MappingCard
from gainbench_app.pages.evidence.recipe_card import RecipeCard
from gainbench_app.pages.evidence.run_card import RunCard
from gainbench_app.pages.evidence.signals_card import SignalsCard
from gainbench_app.theme import MARGIN_PX
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Figure
from gainbench_resources import demo_log

_DEMOS = ("label-unwinder-driven.csv", "label-unwinder-step.csv")
_DETAIL_PX = 292
_SETTLED_MS = 60
"""After new cards have their sizes."""


class EvidencePage(QFrame):
    """Takes the place of the middle and right columns."""

    left = Signal()
    """Esc: back to the tuning."""
    figure_made = Signal(object)
    """A Figure that came after the page."""

    def __init__(self, desk: Desk, appearance: Appearance, *, dialogs: Dialogs) -> None:
        super().__init__()
        self._desk = desk
        self._appearance = appearance
        self._dialogs = dialogs
        self._report: FitReport | None = None
        self.setAccessibleName("Evidence")
        self.logs = Logs(desk, self)
        self.fitting = Fitting(desk, self.logs, self)
        self.list = LogList(desk, self.logs, appearance)
        self.mapping = MappingCard(self.logs, appearance)
        self.recipe = RecipeCard(appearance)
        self.signals = SignalsCard(self.logs, appearance)
        self.estimates = EstimatesCard(desk, self.fitting, appearance)
        self.runs: list[RunCard] = []
        self._lay_out()
        self.list.add.clicked.connect(self.ask_for_log)
        self.list.demo.clicked.connect(self.add_demo)
        self.recipe.chosen.connect(self._choose_experiment)
        self.recipe.experiment.currentIndexChanged.connect(self._show_place_in_guide)
        self.fit.clicked.connect(self.start)
        self.cancel.clicked.connect(self.fitting.cancel)
        self.logs.changed.connect(self.refresh)
        self.fitting.changed.connect(self.refresh)
        self.fitting.failed.connect(self.list.say)
        desk.changed.connect(self._follow_sheet)
        self._show_place_in_guide()
        self.refresh()

    def _lay_out(self) -> None:
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 10, 0, 0)
        outer.setSpacing(6)
        line = QHBoxLayout()
        line.setContentsMargins(MARGIN_PX - 2, 0, MARGIN_PX - 2, 0)
        line.setSpacing(10)
        name = QLabel("Evidence")
        name.setProperty("role", "column")
        self.words = QLabel()
        self.words.setProperty("role", "small")
        self.progress = QProgressBar()
        self.progress.setTextVisible(False)
        self.progress.setFixedSize(140, 8)
        self.progress.setAccessibleName("progress of the fit")
        self.cancel = QPushButton("Cancel")
        self.cancel.setToolTip("stop the fit at once; the last estimates stay")
        self.cancel.setAccessibleName("cancel the fit")
        self.fit = QPushButton("Fit")
        self.fit.setToolTip("identify from all logs of the sheet, each over its span")
        self.fit.setAccessibleName("fit all logs")
        line.addWidget(name)
        line.addStretch(1)
        for widget in (self.words, self.progress, self.cancel, self.fit):
            line.addWidget(widget)
        outer.addLayout(line)
        inner = QWidget()
        self._cards = QVBoxLayout(inner)
        self._cards.setContentsMargins(12, 0, 12, 12)
        self._cards.setSpacing(8)
        self._cards.addWidget(self.list)
        self.detail = QWidget()
        self.detail.setFixedHeight(_DETAIL_PX)
        beside = QHBoxLayout(self.detail)
        beside.setContentsMargins(0, 0, 0, 0)
        beside.setSpacing(8)
        beside.addWidget(self.mapping, 5)
        beside.addWidget(self.recipe, 4)
        self._cards.addWidget(self.detail)
        self._cards.addWidget(self.signals)
        self._cards.addWidget(self.estimates)
        self._cards.addStretch(1)
        self.area = QScrollArea()
        self.area.setWidgetResizable(True)
        self.area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.area.setWidget(inner)
        outer.addWidget(self.area, 1)

    # What can be done

    def enter(self) -> None:
        """The page is shown."""
        self.logs.look_again()
        self.list.add.setFocus()

    def leave(self) -> None:
        """The page is left; a fit goes on."""
        self.logs.rest()

    def close_down(self) -> None:
        """The window closes: nothing goes on."""
        self.fitting.cancel()
        self.logs.close()

    def ask_for_log(self) -> None:
        """Ask for a log and add it."""
        path = self._dialogs.log_to_open(self)
        if path is not None:
            self.add(path)

    def add_demo(self) -> None:
        """Add the invented logs: one to fit, one to lie over the prediction."""
        self.add_all([Path(str(demo_log(name))) for name in _DEMOS])

    def add(self, path: Path) -> None:
        """Add a log."""
        self.add_all([path])

    def add_all(self, paths: Sequence[Path]) -> None:
        """Add some logs."""
        self.list.say("")
        for path in paths:
            self.logs.add(path)

    def start(self) -> None:
        """Fit."""
        self.list.say("")
        self.logs.look_again()
        self.fitting.start()

    def figures(self) -> list[Figure]:
        """The plots of the page, from top to bottom."""
        found: list[Figure] = [self.signals.plots, *(plots for run in self.runs for plots in run.plots)]
        return [one for one in found if one.isVisible()]

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802
        """Esc goes back."""
        if event.key() == Qt.Key.Key_Escape:
            self.left.emit()
        else:
            super().keyPressEvent(event)

    def _choose_experiment(self, experiment: Experiment) -> None:
        entry = self.logs.chosen
        if entry is not None and entry.experiment is not experiment:
            self.logs.choose_experiment(entry, experiment)

    # What is shown

    def _show_place_in_guide(self) -> None:
        """Pages of experiments are called by the sheet's own words for them."""
        self.setProperty("guide", str(self.recipe.experiment.currentData()))

    def refresh(self) -> None:
        """Follow logs and fit."""
        entry = self.logs.chosen
        survey = self.logs.survey(entry) if entry is not None else None
        self.mapping.setVisible(entry is not None)
        self.mapping.show_entry(entry, survey)
        self.recipe.show_entry(entry)
        self.signals.show_entry(entry)
        self._show_progress()
        self.estimates.refresh()
        self._show_runs()

    def _follow_sheet(self) -> None:
        if self.fitting.report is not None and self.isVisible():
            self.estimates.refresh()

    def _show_progress(self) -> None:
        progress = self.fitting.progress
        running = progress is not None
        self.fit.setVisible(not running)
        self.cancel.setVisible(running)
        self.progress.setVisible(running)
        able = any(one.index is not None for one in self.logs.entries)
        self.fit.setEnabled(able)
        if progress is not None:
            self.progress.setMaximum(progress.steps)
            self.progress.setValue(progress.done)
            self.words.setText(f"{progress.words}, step {progress.done + 1} of {progress.steps}")
        else:
            self.words.setText("" if able else "there is no log to fit yet")

    def _show_runs(self) -> None:
        report = self.fitting.report
        if report is self._report:
            return
        self._report = report
        for run in self.runs:
            self._cards.removeWidget(run)
            run.hide()
            run.deleteLater()
        self.runs = []
        if report is not None:
            for entry, one in zip(self.fitting.evidence, report.runs, strict=True):
                card = RunCard(entry, one, self._appearance)
                self._cards.insertWidget(self._cards.count() - 1, card)
                self.runs.append(card)
                for plots in card.plots:
                    self.figure_made.emit(plots)
            QTimer.singleShot(_SETTLED_MS, self, self._show_what_came)

    def _show_what_came(self) -> None:
        """Bring the estimates into sight."""
        if self.isVisible() and self.runs:
            first = self.estimates if self.estimates.isVisible() else self.runs[0]
            self.area.verticalScrollBar().setValue(max(0, first.y() - 8))
