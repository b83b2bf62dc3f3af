"""What is asked of one loop, and what it gets: method, targets, margins and gains."""

from __future__ import annotations

from PySide6.QtWidgets import QLabel, QVBoxLayout, QWidget

from gainbench.assess import Assessment
from gainbench.firmware_form import FirmwareGain, LoopName, firmware_gains
from gainbench.model import CURRENT_METHODS, SPEED_METHODS, DesignMethod
from gainbench.plant import refer
from gainbench.results import Level, LoopAssessment
from gainbench.units import Dimension, pretty, show
from gainbench_app.desk import Desk
from gainbench_app.theme import LARGE_PX
from gainbench_app.what_we_ask.target_row import TargetRow
from gainbench_app.what_we_ask.targets import METHOD_NAMES, targets
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_app.widgets.level_mark import LevelMark
from gainbench_app.widgets.scales import frequency_text
from gainbench_app.widgets.words import Piece, WordLine

_GAP = "\N{NO-BREAK SPACE}"
_GAIN_NAMES = {"kp": "Kp", "ki": "Ki", "ti": "Ti", "wi": "Ki/Kp"}


class LoopCard(Card):
    """The card of one loop."""

    def __init__(self, loop: LoopName, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(f"{loop.capitalize()} loop", appearance, parent=parent)
        self.loop: LoopName = loop
        self._desk = desk
        self._appearance = appearance
        self._target_rows: dict[str, TargetRow] = {}
        self.state = QLabel()
        self.state.setProperty("role", "small")
        self.mark = LevelMark(appearance, size=10)
        self.head_line.addWidget(self.state)
        self.head_line.addWidget(self.mark)
        methods = CURRENT_METHODS if loop == "current" else SPEED_METHODS
        self.method = ChoiceBox(
            f"design method of the {loop} loop", [(one.value, METHOD_NAMES[one]) for one in methods], appearance
        )
        self.method.chosen.connect(lambda word: desk.choose_method(loop, DesignMethod(word)))
        self.rows.addWidget(self.method)
        self.rows.setSpacing(4)
        self._targets = QVBoxLayout()
        self._targets.setContentsMargins(0, 4, 0, 0)
        self._targets.setSpacing(3)
        self.rows.addLayout(self._targets)
        self.figures = WordLine(f"figures of the {loop} loop", appearance, line_px=27)
        self.others = WordLine(f"more figures of the {loop} loop", appearance)
        self.gains = WordLine(f"gains of the {loop} loop, in the firmware's form", appearance)
        outer = self.layout()
        assert isinstance(outer, QVBoxLayout)
        for line in (self.figures, self.others, self.gains):
            outer.addWidget(line)
        desk.changed.connect(self.refresh)
        desk.assessed.connect(self.show_assessment)
        self.refresh()
        self.show_assessment()

    def row(self, key: str) -> TargetRow:
        """The row of a target, ``crossover``."""
        return self._target_rows[f"aims.{self.loop}.{key}"]

    @property
    def target_keys(self) -> tuple[str, ...]:
        """The targets shown, from top to bottom."""
        return tuple(path.rpartition(".")[2] for path in self._target_rows)

    def refresh(self) -> None:
        """Show what the sheet asks."""
        path = f"aims.{self.loop}"
        self.method.show_word(self._desk.text(f"{path}.method"))
        self.method.mark(self._desk.problem(f"{path}.method") or "")
        sheet = self._desk.sheet
        wanted = targets(self.loop, sheet, plant=refer(sheet.rig))
        if [one.path for one in wanted] != list(self._target_rows):
            for row in self._target_rows.values():
                self._targets.removeWidget(row)
                row.hide()
                row.deleteLater()
            self._target_rows = {}
            for target in wanted:
                row = TargetRow(target, self._desk, self._appearance, colour=self.loop)
                self._targets.addWidget(row)
                self._target_rows[target.path] = row
        for target in wanted:
            self._target_rows[target.path].refresh(target)

    def show_assessment(self) -> None:
        """Show what the loop gets."""
        assessment = self._desk.assessment
        if assessment is None:
            for line in (self.figures, self.others, self.gains):
                line.show_pieces()
            self._show_state("", None)
            return
        loop = assessment.current if self.loop == "current" else assessment.speed
        self._show_figures(loop)
        self._show_level(assessment, loop)
        self.gains.show_pieces(self._gain_pieces(assessment, loop))

    def _show_figures(self, loop: LoopAssessment) -> None:
        figures = loop.figures
        if figures is None or not figures.stable:
            words = "no gains" if loop.gains is None else "unstable"
            self.figures.show_pieces((Piece(text=words, strong=True, size=LARGE_PX),))
            self.others.show_pieces()
            return
        crossover, margin = figures.crossover_hz, figures.phase_margin_deg
        large = [frequency_text(crossover) if crossover is not None else "no crossover"]
        if margin is not None:
            large.append(f"{margin:.1f}°")
        self.figures.show_pieces(
            tuple(
                Piece(text=one, strong=True, size=LARGE_PX, gap=16.0 if index else 0.0)
                for index, one in enumerate(large)
            )
        )
        pairs = []
        if figures.gain_margin_db is not None:
            pairs.append(("gain", f"{figures.gain_margin_db:.1f}{_GAP}dB"))
        if figures.peak_sensitivity is not None:
            pairs.append(("sensitivity", f"{figures.peak_sensitivity:.2f}"))
        self.others.show_pieces(_pieces(pairs))

    def _show_level(self, assessment: Assessment, loop: LoopAssessment) -> None:
        own = [one.level for one in assessment.findings if one.subject == self.loop]
        if loop.refusal is not None or loop.figures is None or not loop.figures.stable or Level.BREAKS in own:
            level = Level.BREAKS
        else:
            level = Level.THIN if Level.THIN in own else Level.HOLDS
        words = {Level.HOLDS: "", Level.THIN: "thin", Level.BREAKS: "breaks"}[level]
        if loop.refusal is not None:
            words = "cannot be met"
        self._show_state(words, level)

    def _show_state(self, words: str, level: Level | None) -> None:
        if self.state.text() != words:
            self.state.setText(words)
        if self.mark.level is not level:
            self.mark.show_level(level)

    def _gain_pieces(self, assessment: Assessment, loop: LoopAssessment) -> tuple[Piece, ...]:
        """The gains in the firmware's own form."""
        if loop.gains is None:
            return (Piece(text="the findings say why, and what is nearest"),)
        stage = assessment.sheet.rig.stage
        pair = firmware_gains(
            self.loop,
            loop.gains,
            firmware=assessment.sheet.aims.firmware,
            period=stage.current_period if self.loop == "current" else stage.speed_period,
            torque_constant=assessment.plant.torque,
        )
        pieces: list[Piece] = []
        for one in pair:
            if one.value is not None:
                number, unit = _gain_text(one)
                pieces.append(Piece(text=_GAIN_NAMES[one.name], gap=12.0 if pieces else 0.0))
                pieces += [Piece(text=number, strong=True, gap=4.0), Piece(text=unit, gap=4.0)]
        return tuple(pieces)


def _pieces(pairs: list[tuple[str, str]]) -> tuple[Piece, ...]:
    found: list[Piece] = []
    for name, value in pairs:
        found += [Piece(text=name, gap=10.0 if found else 0.0), Piece(text=value, strong=True, gap=4.0)]
    return tuple(found)


def _gain_text(gain: FirmwareGain) -> tuple[str, str]:
    """Number and unit; a time in the unit that gives it a handy size."""
    assert gain.value is not None
    if gain.name == "ti":
        number, _, unit = show(gain.value, Dimension.TIME).partition(" ")
        return number, pretty(unit)
    return f"{gain.value:.4g}", pretty(gain.unit)
