"""What is asked of one loop, and what it gets: method, targets, margins and gains."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from gainbench.assess import Assessment
from gainbench.firmware_form import FirmwareGain, LoopName, firmware_gains
from gainbench.model import CURRENT_METHODS, SPEED_METHODS, DesignMethod
from gainbench.plant import refer
from gainbench.results import Level, LoopAssessment
from gainbench.units import Dimension, pretty, show
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness
from gainbench_app.sheet_edits import loop_aims
from gainbench_app.theme import LARGE_PX
from gainbench_app.what_we_ask.map_targets import asks_for_a_point, targets_at
from gainbench_app.what_we_ask.reach_view import KeptPoints, ReachKeeper
from gainbench_app.what_we_ask.target_row import TargetRow
from gainbench_app.what_we_ask.targets import METHOD_NAMES, targets
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.check_box import CheckBox
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_app.widgets.level_mark import LevelMark
from gainbench_app.widgets.reach_plot import ReachPlot
from gainbench_app.widgets.scales import frequency_text
from gainbench_app.widgets.words import Piece, WordLine

_GAP = "\N{NO-BREAK SPACE}"
_OTHERS_PX = 97
_REST_MS = 200
"""After the last move the map is computed as far as it may be asked for."""
_GAIN_NAMES = {"kp": "Kp", "ki": "Ki", "ti": "Ti", "wi": "Ki/Kp"}


class LoopCard(Card):
    """The card of one loop."""

    def __init__(
        self, loop: LoopName, desk: Desk, appearance: Appearance, kept: KeptPoints, parent: QWidget | None = None
    ) -> None:
        super().__init__(f"{loop.capitalize()} loop", appearance, parent=parent)
        self.loop: LoopName = loop
        self._desk = desk
        self._appearance = appearance
        self._target_rows: dict[str, TargetRow] = {}
        self._asked: tuple[object, ...] = ()
        """What ``refresh`` has shown."""
        self._got: tuple[object, ...] = ()
        """What ``show_words`` has."""
        self.mark = LevelMark(appearance, size=10)
        self.hold = CheckBox("hold gains", f"hold the gains of the {loop} loop", appearance)
        self.hold.setToolTip("keep these gains while machine, train and stage are edited; the method waits")
        self.hold.clicked.connect(lambda on: desk.hold(loop, on))
        self.head_line.addWidget(self.hold)
        self.head_line.addWidget(self.mark)
        methods = CURRENT_METHODS if loop == "current" else SPEED_METHODS
        self.method = ChoiceBox(
            f"design method of the {loop} loop", [(one.value, METHOD_NAMES[one]) for one in methods], appearance
        )
        self.method.chosen.connect(lambda word: desk.choose_method(loop, DesignMethod(word)))
        self.by_hand = QPushButton("by hand")
        self.by_hand.setProperty("flat", True)
        self.by_hand.setAccessibleName(f"write the gains of the {loop} loop into the sheet as gains by hand")
        self.by_hand.setToolTip("write these gains into the sheet as gains by hand")
        self.by_hand.clicked.connect(lambda: desk.take_over(loop))
        line = QHBoxLayout()
        line.setSpacing(4)
        line.addWidget(self.method, 1)
        line.addWidget(self.by_hand)
        self.rows.addLayout(line)
        self.rows.setSpacing(3)
        self.map = ReachPlot(loop, appearance)
        self._keeper = ReachKeeper(loop, kept)
        self.map.grabbed.connect(lambda: desk.begin_gesture(f"aims.{loop}"))
        self.map.moved.connect(self._move)
        self.map.stepped.connect(lambda bandwidth, margin: self._ask({"bandwidth": bandwidth, "phase_margin": margin}))
        self.map.dropped.connect(desk.end_gesture)
        self.map.dropped.connect(lambda: self._show_map())
        self._resting = QTimer(self)
        self._resting.setSingleShot(True)
        self._resting.setInterval(_REST_MS)
        self._resting.timeout.connect(lambda: self._show_map(quick=False))
        self.map.taken_back.connect(desk.cancel_gesture)
        self.rows.addWidget(self.map)
        self._targets = QVBoxLayout()
        self._targets.setContentsMargins(0, 0, 0, 0)
        self._targets.setSpacing(1)
        self._pair = QHBoxLayout()
        self._pair.setSpacing(10)
        self._targets.addLayout(self._pair)
        self.rows.addLayout(self._targets)
        self.figures = WordLine(f"figures of the {loop} loop", appearance, line_px=30, tells_moves=True)
        self.others = WordLine(f"more figures of the {loop} loop", appearance, lines=2, line_px=15, tells_moves=True)
        self.gains = WordLine(f"gains of the {loop} loop, in the firmware's form", appearance, tells_moves=True)
        outer = self.layout()
        assert isinstance(outer, QVBoxLayout)
        # What is asked stands above the findings, which are to be in sight as well.
        outer.setContentsMargins(11, 5, 11, 7)
        outer.setSpacing(1)
        large = QHBoxLayout()
        large.setContentsMargins(0, 2, 0, 0)
        large.setSpacing(6)
        large.addWidget(self.figures, 1)
        self.others.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.others.setFixedWidth(_OTHERS_PX)
        large.addWidget(self.others)
        outer.addLayout(large)
        outer.addWidget(self.gains)
        desk.changed.connect(self.refresh)
        desk.number_moved.connect(self._follow)
        desk.assessed.connect(self._show_map)
        desk.words_due.connect(self.show_words)
        self.refresh()
        self._show_map()
        self.show_words()

    def row(self, key: str) -> TargetRow:
        """The row of a target, ``crossover``."""
        return self._target_rows[f"aims.{self.loop}.{key}"]

    @property
    def target_keys(self) -> tuple[str, ...]:
        """The targets shown, from top to bottom."""
        return tuple(path.rpartition(".")[2] for path in self._target_rows)

    def refresh(self) -> None:
        """Show what the sheet asks; what the other loop asks moves nothing here."""
        state, held = self._desk.state, self._desk.held(self.loop)
        own = (state.document, state.wrong, state.problems, state.sheet.rig, loop_aims(state.sheet, self.loop), held)
        if len(own) == len(self._asked) and all(a is b for a, b in zip(own, self._asked, strict=True)):
            return
        self._asked = own
        path = f"aims.{self.loop}"
        self.method.show_word(self._desk.text(f"{path}.method"))
        self.method.mark(self._desk.problem(f"{path}.method") or "")
        sheet = self._desk.sheet
        wanted = targets(self.loop, sheet, plant=refer(sheet.rig))
        if [one.path for one in wanted] != list(self._target_rows):
            for row in self._target_rows.values():
                (self._pair if row.paired else self._targets).removeWidget(row)
                row.hide()
                row.deleteLater()
            self._target_rows = {}
            for target in wanted:
                row = TargetRow(target, self._desk, self._appearance, colour=self.loop)
                (self._pair if row.paired else self._targets).addWidget(row, 1)
                self._target_rows[target.path] = row
            alone = [row for row in self._target_rows.values() if not row.paired]
            for row in alone:
                row.name.setFixedWidth(max(one.name.sizeHint().width() for one in alone))
        for target in wanted:
            self._target_rows[target.path].refresh(target, held=held)
        if self.hold.isChecked() is not held:
            self.hold.setChecked(held)
        self._follow_on_map()

    def _follow(self, path: str) -> None:
        """Steps that come faster than frames add up, so that what moved is shown at once; all else waits."""
        row = self._target_rows.get(path)
        if row is not None:
            self._asked = ()
            row.follow()
            self._follow_on_map()

    def _follow_on_map(self) -> None:
        aims, view = loop_aims(self._desk.sheet, self.loop), self.map.view
        if view is not None and view.asked and aims.phase_margin is not None:
            if aims.method is DesignMethod.BANDWIDTH_MARGIN and aims.bandwidth is not None:
                self.map.show_asked(aims.bandwidth, aims.phase_margin)
            elif aims.method is DesignMethod.CROSSOVER_MARGIN and aims.crossover is not None:
                self.map.show_point(aims.crossover, aims.phase_margin)

    def _move(self, crossover: float, margin: float) -> None:
        """Move the method's targets to a place of the map."""
        sampled, view = self._keeper.sampled, self.map.view
        if sampled is not None and view is not None:
            method = loop_aims(self._desk.sheet, self.loop).method
            here = view.point if view.met else None
            self._ask(targets_at(method, sampled, crossover=crossover, margin=margin, here=here))

    def _ask(self, targets: Mapping[str, float]) -> None:
        """Move targets together, and leave alone what stays."""
        aims, path = loop_aims(self._desk.sheet, self.loop), f"aims.{self.loop}"
        moves = {f"{path}.{key}": one for key, one in targets.items() if one != getattr(aims, key)}
        self._desk.move_all(path, moves)

    def _show_map(self, *, quick: bool = True) -> None:
        assessment = self._desk.assessment
        if assessment is None or self._desk.readiness is not Readiness.ALL:
            self.map.show_view(None)
            return
        method = loop_aims(self._desk.sheet, self.loop).method
        asked = asks_for_a_point(method) and not self._desk.held(self.loop)
        still = self.map.movement.under_way
        self.map.show_view(self._keeper.view(assessment, asked=asked, still=still, quick=quick))
        if not self._keeper.whole:
            self._resting.start()

    def show_words(self) -> None:
        """Say what the loop gets."""
        assessment = self._desk.assessment
        there = assessment is not None and self._loop_of(assessment).gains is not None
        already = loop_aims(self._desk.sheet, self.loop).method is DesignMethod.BY_HAND
        self.by_hand.setEnabled(there and (not already or self._desk.held(self.loop)))
        if assessment is None:
            for line in (self.figures, self.others, self.gains):
                line.show_pieces()
            self._show_mark(None)
            self._got = ()
            return
        loop = self._loop_of(assessment)
        self.hold.setEnabled(loop.gains is not None)
        self._show_level(assessment, loop)
        sheet = assessment.sheet
        got = (loop.gains, loop.figures, loop.refusal, sheet.rig, sheet.aims.firmware)
        if got != self._got:
            self._got = got
            self._show_figures(loop)
            self.gains.show_pieces(self._gain_pieces(assessment, loop))

    def _loop_of(self, assessment: Assessment) -> LoopAssessment:
        return assessment.current if self.loop == "current" else assessment.speed

    def _show_figures(self, loop: LoopAssessment) -> None:
        figures = loop.figures
        if figures is None or not figures.stable:
            words = (
                "unstable" if loop.gains is not None else "cannot be met" if loop.refusal is not None else "no gains"
            )
            self.figures.show_pieces((Piece(text=words, strong=True, size=LARGE_PX),))
            self.others.show_pieces()
            return
        crossover, margin = figures.crossover_hz, figures.phase_margin_deg
        large = [frequency_text(crossover) if crossover is not None else "no crossover"]
        if margin is not None:
            large.append(f"{margin:.1f}°")
        self.figures.show_pieces(
            tuple(
                Piece(text=one, strong=True, size=LARGE_PX, gap=13.0 if index else 0.0)
                for index, one in enumerate(large)
            )
        )
        pairs = []
        if figures.gain_margin_db is not None:
            pairs.append(("gain", f"{figures.gain_margin_db:.1f}{_GAP}dB"))
        if figures.peak_sensitivity is not None:
            pairs.append(("sensitivity", f"{figures.peak_sensitivity:.2f}"))
        self.others.show_pieces(*(_pieces([pair]) for pair in pairs))

    def _show_level(self, assessment: Assessment, loop: LoopAssessment) -> None:
        own = [one.level for one in assessment.findings if one.subject == self.loop]
        if loop.refusal is not None or loop.figures is None or not loop.figures.stable or Level.BREAKS in own:
            level = Level.BREAKS
        else:
            level = Level.THIN if Level.THIN in own else Level.HOLDS
        self._show_mark(level)

    def _show_mark(self, level: Level | None) -> None:
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
                pieces.append(Piece(text=_GAIN_NAMES[one.name], gap=12.0 if pieces else 0.0, breaks=bool(pieces)))
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
