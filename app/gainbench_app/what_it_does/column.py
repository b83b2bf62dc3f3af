"""Verdict, time plots, headroom and Bode plot, one above the other."""

from __future__ import annotations

from PySide6.QtWidgets import QButtonGroup, QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from gainbench.assess import Assessment
from gainbench.units import Dimension, unit_size
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness
from gainbench_app.sheet_edits import unit_of
from gainbench_app.what_it_does.bode import BodePlot
from gainbench_app.what_it_does.headroom import headroom_line
from gainbench_app.what_it_does.spans import Span, SpanChoice, load_span, step_span, whole_span
from gainbench_app.what_it_does.time_plots import TimePlots, TimeView
from gainbench_app.what_it_does.verdict import Verdict, verdict
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.legend import Legend
from gainbench_app.widgets.level_mark import LevelMark
from gainbench_app.widgets.words import WordLine

_LOOPS = {"both loops": ("speed", "current"), "speed": ("speed",), "current": ("current",)}


class Choices(QWidget):
    """A few words in a row, one of them underlined."""

    def __init__(self, name: str, words: tuple[str, ...], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName(name)
        line = QHBoxLayout(self)
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(4)
        self.group = QButtonGroup(self)
        self.buttons: dict[str, QPushButton] = {}
        for word in words:
            button = QPushButton(word)
            button.setProperty("flat", True)
            button.setCheckable(True)
            button.setAccessibleName(f"{name}: {word}")
            self.group.addButton(button)
            self.buttons[word] = button
            line.addWidget(button)
        self.buttons[words[0]].setChecked(True)

    @property
    def word(self) -> str:
        """The word chosen."""
        return next((word for word, button in self.buttons.items() if button.isChecked()), "")

    def clear(self) -> None:
        """Choose none."""
        self.group.setExclusive(False)
        for button in self.buttons.values():
            button.setChecked(False)
        self.group.setExclusive(True)


class WhatItDoes(QWidget):
    """The middle column."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._dragged: Span | None = None
        self._verdict: Verdict | None = None
        self.mark = LevelMark(appearance, size=12)
        self.words = QLabel()
        self.words.setProperty("role", "large")
        self.more = QLabel()
        self.more.setProperty("role", "muted")
        self.more.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.spans = Choices(
            "span of the time plots", (SpanChoice.WHOLE.value, SpanChoice.STEP.value, SpanChoice.LOAD.value)
        )
        self.spans.group.buttonClicked.connect(self._span_chosen)
        self.plots = TimePlots(appearance)
        self.plots.span_dragged.connect(self._span_dragged)
        self.plots.span_reset.connect(self._span_reset)
        self.headroom = WordLine("headroom", appearance, line_px=22)
        self.bode = BodePlot(appearance)
        self.loops = Choices("loops of the Bode plot", tuple(_LOOPS))
        self.loops.group.buttonClicked.connect(self.refresh)
        self.legend = Legend(appearance, ("speed", "current"))
        self._lay_out()
        desk.assessed.connect(self.refresh)
        desk.changed.connect(self._show_verdict)
        desk.opened.connect(self._span_reset)
        self.refresh()

    def _lay_out(self) -> None:
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(6)
        head = QHBoxLayout()
        head.setContentsMargins(3, 0, 0, 0)
        head.setSpacing(10)
        head.addWidget(self.mark)
        head.addWidget(self.words)
        head.addWidget(self.more, 1)
        head.addWidget(self.spans)
        layout.addLayout(head)
        layout.addWidget(_framed(self.plots), 58)
        layout.addWidget(self.headroom)
        bode_head = QHBoxLayout()
        bode_head.setContentsMargins(11, 5, 8, 0)
        name = QLabel("Open loops")
        name.setProperty("role", "head")
        bode_head.addWidget(name)
        bode_head.addSpacing(10)
        bode_head.addWidget(self.legend)
        bode_head.addStretch(1)
        bode_head.addWidget(self.loops)
        frame = _framed(self.bode, head=bode_head)
        layout.addWidget(frame, 42)

    # Spans

    def _span_chosen(self) -> None:
        self._dragged = None
        self.refresh()

    def _span_dragged(self, start: float, stop: float) -> None:
        if stop > start:
            self._dragged = Span(start=start, stop=stop)
            self.spans.clear()
            self.refresh()

    def _span_reset(self) -> None:
        self._dragged = None
        self.spans.buttons[SpanChoice.WHOLE.value].setChecked(True)
        self.refresh()

    def _span(self, assessment: Assessment) -> tuple[Span, bool]:
        """The span, and whether speed is scaled to its deviation."""
        duty = assessment.sheet.duty
        figures = assessment.response.figures if assessment.response is not None else None
        if self._dragged is not None:
            stop = min(self._dragged.stop, duty.length)
            if self._dragged.start < stop:
                return Span(start=self._dragged.start, stop=stop), True
        if self.spans.word == SpanChoice.STEP.value:
            return step_span(duty, figures), False
        if self.spans.word == SpanChoice.LOAD.value:
            return load_span(duty, figures), True
        return whole_span(duty), False

    # Showing

    def refresh(self) -> None:
        """Show the newest assessment."""
        self._show_verdict()
        assessment = self._desk.assessment
        if assessment is None:
            return
        speed_unit = unit_of(self._desk.state.document.typed("duty.reference_speed")) or "rpm"
        speed_size = unit_size(speed_unit, Dimension.SPEED)
        span, deviation = self._span(assessment)
        machine, plant = assessment.sheet.rig.machine, assessment.plant
        response = assessment.response
        self.plots.show_view(
            TimeView(
                trace=response.trace if response is not None else None,
                message=self._why_no_response(assessment),
                span=span,
                speed_unit=speed_unit,
                speed_size=speed_size,
                speed_limit=machine.max_speed,
                current_limit=plant.current_limit,
                voltage_limit=plant.voltage_limit,
                deviation=deviation,
            )
        )
        figures = response.figures if response is not None else None
        self.headroom.show_pieces(headroom_line(figures, plant, speed_unit=speed_unit, speed_size=speed_size))
        loops = {"speed": assessment.speed, "current": assessment.current}
        self.bode.show_loops({name: loops[name] for name in _LOOPS[self.loops.word or "both loops"]})

    def _why_no_response(self, assessment: Assessment) -> str:
        if self._desk.readiness is not Readiness.ALL:
            return "the response is being prepared: the first start compiles it"
        for name, loop in (("current", assessment.current), ("speed", assessment.speed)):
            if loop.refusal is not None:
                return f"no response: the targets of the {name} loop cannot be met"
            if loop.figures is not None and not loop.figures.stable:
                return f"no response: the {name} loop is unstable"
        return "no response: see the findings"

    def _show_verdict(self) -> None:
        found = verdict(
            self._desk.assessment,
            problems=self._desk.state.problems,
            preparing=self._desk.readiness is not Readiness.ALL,
        )
        if found == self._verdict:
            return
        self._verdict = found
        self.mark.show_level(found.level)
        self.words.setText(found.words)
        self.more.setText(found.more)
        stale = "" if self._desk.valid else "last valid sheet"
        self.plots.show_stale(stale)
        self.bode.show_stale(stale)


def _framed(inner: QWidget, *, head: QHBoxLayout | None = None) -> QFrame:
    frame = QFrame()
    frame.setObjectName("card")
    layout = QVBoxLayout(frame)
    layout.setContentsMargins(1, 4, 1, 3)
    layout.setSpacing(0)
    if head is not None:
        layout.addLayout(head)
    layout.addWidget(inner, 1)
    return frame
