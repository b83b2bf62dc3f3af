"""The card of the experiment: which it is, what it tells and cannot tell, how it is run, and what to beware of."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QLabel, QScrollArea, QVBoxLayout, QWidget

from gainbench.handover import CAUTIONS, ESTIMATE, NOT_MODELLED
from gainbench.model import Experiment
from gainbench_app.pages.evidence.guesses import EXPERIMENTS, guessed_experiment
from gainbench_app.pages.evidence.logs import LogEntry
from gainbench_app.pages.evidence.recipe_text import rich_recipe
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_resources import recipe


class RecipeCard(Card):
    """Beside the columns."""

    chosen = Signal(Experiment)

    def __init__(self, appearance: Appearance) -> None:
        super().__init__("Experiment", appearance, foldable=False)
        words = [(one.value, shown) for one, shown in EXPERIMENTS.items()]
        self.experiment = ChoiceBox("experiment that the log is of", words, appearance)
        self.experiment.chosen.connect(self._choose)
        self.rows.addWidget(self.experiment)
        self.guessed = QLabel()
        self.guessed.setProperty("role", "small")
        self.guessed.setWordWrap(True)
        self.guessed.setContentsMargins(2, 1, 0, 5)
        self.rows.addWidget(self.guessed)
        self.text = QLabel()
        self.text.setTextFormat(Qt.TextFormat.RichText)
        self.text.setWordWrap(True)
        self.text.setAlignment(Qt.AlignmentFlag.AlignTop)
        inner = QWidget()
        layout = QVBoxLayout(inner)
        layout.setContentsMargins(0, 0, 8, 0)
        layout.addWidget(self.text)
        layout.addStretch(1)
        self.area = QScrollArea()
        self.area.setWidgetResizable(True)
        self.area.setFrameShape(QFrame.Shape.NoFrame)
        self.area.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.area.setAccessibleName("recipe of the experiment, and cautions")
        self.area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.area.setWidget(inner)
        self.rows.addWidget(self.area, 1)
        self._shown: Experiment | None = None
        self._entry: LogEntry | None = None

    def show_entry(self, entry: LogEntry | None) -> None:
        """Show another log's experiment."""
        self._entry = entry
        if entry is None:
            self.guessed.setText("how each is run, what it tells, and what it cannot")
            self.show_recipe(self._shown or Experiment.DRIVEN)
            return
        self.experiment.show_word(entry.experiment.value)
        guess = guessed_experiment([one.signal for one in entry.columns])
        same = guess is entry.experiment
        self.guessed.setText(
            "as its columns suggest; choose what was really done"
            if same
            else f"its columns would suggest: {EXPERIMENTS[guess]}"
        )
        self.show_recipe(entry.experiment)

    def show_recipe(self, experiment: Experiment) -> None:
        """Show the recipe of an experiment, without a log as well."""
        self.experiment.show_word(experiment.value)
        if experiment is not self._shown:
            self._shown = experiment
            self.text.setText(recipe_and_cautions(experiment))
            self.area.verticalScrollBar().setValue(0)

    def _choose(self, word: str) -> None:
        if self._entry is None:
            self.show_recipe(Experiment(word))
        else:
            self.chosen.emit(Experiment(word))


def recipe_and_cautions(experiment: Experiment) -> str:
    """The guide's recipe and the cautions that hold for every experiment, as rich text."""
    markdown = recipe(experiment.value).read_text(encoding="utf-8")
    cautions = "".join(f"<li style='margin-bottom:3px'>{escape(one, quote=False)}</li>" for one in CAUTIONS)
    head = "<p style='font-weight:600; margin:10px 0 2px 0'>{}</p>"
    return (
        rich_recipe(markdown)
        + head.format("Before power is on")
        + f"<ul style='margin:0 0 0 -22px'>{cautions}</ul>"
        + head.format("Not modelled")
        + f"<p style='margin:0 0 4px 0'>{escape(', '.join(NOT_MODELLED), quote=False)}.</p>"
        + f"<p style='margin:0'>{escape(ESTIMATE, quote=False)}</p>"
    )
