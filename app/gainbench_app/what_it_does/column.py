"""Verdict, time plots, headroom and Bode plot, one above the other."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Signal
from PySide6.QtGui import QKeySequence, QResizeEvent, QShortcut
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QVBoxLayout, QWidget

from gainbench.assess import Assessment
from gainbench.units import Dimension, unit_size
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness
from gainbench_app.sheet_edits import unit_of
from gainbench_app.what_it_does.bode import BodePlot
from gainbench_app.what_it_does.duty_handles import duty_times
from gainbench_app.what_it_does.headroom import headroom_line
from gainbench_app.what_it_does.measured_reading import MeasuredReading
from gainbench_app.what_it_does.spans import Span, SpanChoice, load_span, step_span, whole_span
from gainbench_app.what_it_does.third_view import ThirdSubject, ThirdView
from gainbench_app.what_it_does.time_plots import TimePlots, TimeView
from gainbench_app.what_it_does.verdict import Verdict, verdict
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.choices import Choices
from gainbench_app.widgets.level_mark import LevelMark
from gainbench_app.widgets.words import WordLine

_LEAST_FOR_THREE_PX = 690
"""In a narrower column the third view leaves."""
_LEAST_FRAME_PX = 220
_SPEED_UNITS = ("rpm", "rad/s")
_SPAN_KEYS = {"1": SpanChoice.WHOLE.value, "2": SpanChoice.STEP.value, "3": SpanChoice.LOAD.value}
_LOOPS = {"both loops": ("speed", "current"), "speed": ("speed",), "current": ("current",)}


class WhatItDoes(QWidget):
    """The middle column."""

    findings_wanted = Signal()
    """The reasons of the verdict are asked for."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._dragged: Span | None = None
        self._chosen_unit: str | None = None
        """None is the unit that the reference was typed in."""
        self._verdict: Verdict | None = None
        self._wide = True
        self.mark = LevelMark(appearance, size=12)
        self.words = QLabel()
        self.words.setProperty("role", "large")
        self.more = QPushButton()
        self.more.setObjectName("verdictMore")
        self.more.setProperty("flat", True)
        self.more.setToolTip("go to the findings (Ctrl+5)")
        self.more.clicked.connect(self.findings_wanted)
        self.more.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.spans = Choices(
            "span of the time plots",
            tuple(_SPAN_KEYS.values()),
            tips={word: f"key {key}; drag across the plots for another span" for key, word in _SPAN_KEYS.items()},
        )
        self.spans.group.buttonClicked.connect(self._span_chosen)
        self.plots = TimePlots(appearance)
        self.plots.span_dragged.connect(self._span_dragged)
        self.plots.span_reset.connect(self._span_reset)
        self.plots.speed_unit.clicked.connect(self._next_unit)
        self._connect_handles()
        for key, word in _SPAN_KEYS.items():
            QShortcut(QKeySequence(key), self).activated.connect(partial(self._choose_span, word))
        self.headroom = WordLine("headroom", appearance, line_px=22, ground="paper")
        self.bode = BodePlot(appearance)
        self.loops = Choices(
            "loops of the Bode plot",
            tuple(_LOOPS),
            appearance=appearance,
            samples={"speed": "speed", "current": "current"},
            tips={"both loops": "the phase ledger is the speed loop's", "current": "the phase ledger follows"},
        )
        self.loops.group.buttonClicked.connect(self.refresh)
        self.third = ThirdView(appearance)
        self.measured = MeasuredReading(desk, self)
        self._lay_out()
        desk.assessed.connect(self._draw)
        desk.words_due.connect(self._show_headroom)
        desk.changed.connect(self._show_verdict)
        desk.opened.connect(self._open)
        desk.kept_shown.connect(self._show_kept)
        self.measured.changed.connect(self.refresh)
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
        bode_head.addStretch(1)
        bode_head.addWidget(self.loops)
        self.more_views = QPushButton("other views")
        self.more_views.setProperty("flat", True)
        self.more_views.setToolTip("phase ledger, operating plane, sensitivity, locked step")
        self.more_views.setVisible(False)
        self.more_views.clicked.connect(lambda: self._show_lower(third=True))
        self.third.back.clicked.connect(lambda: self._show_lower(third=False))
        bode_head.addWidget(self.more_views)
        self.bode_frame = _framed(self.bode, head=bode_head)
        for frame in (self.bode_frame, self.third):
            # Neither keeps the window from becoming so narrow that one of them leaves.
            frame.setMinimumWidth(_LEAST_FRAME_PX)
        lower = QHBoxLayout()
        lower.setSpacing(8)
        lower.addWidget(self.bode_frame, 1)
        lower.addWidget(self.third, 1)
        layout.addLayout(lower, 42)

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Where it is narrow the third view leaves first."""
        super().resizeEvent(event)
        wide = self.width() >= _LEAST_FOR_THREE_PX
        if wide is not self._wide:
            self._wide = wide
            self._show_lower(third=wide)

    def _show_lower(self, *, third: bool) -> None:
        """Both views below where there is room, else the one that is asked for."""
        self.third.setVisible(third)
        self.bode_frame.setVisible(self._wide or not third)
        self.more_views.setVisible(not self._wide)
        self.third.back.setVisible(not self._wide)
        self.third.fill_again()

    def _connect_handles(self) -> None:
        handles, desk = self.plots.handles, self._desk
        handles.grabbed.connect(desk.begin_gesture)
        handles.moved.connect(desk.move)
        handles.dropped.connect(desk.end_gesture)
        handles.dropped.connect(self.refresh)
        handles.taken_back.connect(desk.cancel_gesture)

    def _open(self) -> None:
        """Another sheet has its own units and times."""
        self._chosen_unit = None
        self._span_reset()

    # Units

    def _next_unit(self) -> None:
        """Show speed in the other unit."""
        units = [self._typed_unit(), *(unit for unit in _SPEED_UNITS if unit != self._typed_unit())]
        shown = self._chosen_unit or units[0]
        self._chosen_unit = units[(units.index(shown) + 1) % len(units)] if shown in units else None
        self.refresh()

    def _typed_unit(self) -> str:
        return unit_of(self._desk.state.document.typed("duty.reference_speed")) or "rpm"

    # Spans

    def _choose_span(self, word: str) -> None:
        self.spans.choose(word)
        self._span_chosen()

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
        view = self.plots.view
        if view is not None and self.plots.handles.movement.by_hand:
            # The ground does not move below a handle that is held.
            return view.span, view.deviation
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
        self._draw()
        self._show_headroom()

    def _speed_unit(self) -> tuple[str, float]:
        """The unit that speed is shown in, and its size [rad/s]."""
        unit = self._chosen_unit or self._typed_unit()
        return unit, unit_size(unit, Dimension.SPEED)

    def _show_headroom(self) -> None:
        assessment = self._desk.assessment
        if assessment is not None:
            figures = assessment.response.figures if assessment.response is not None else None
            unit, size = self._speed_unit()
            self.headroom.show_pieces(headroom_line(figures, assessment.plant, speed_unit=unit, speed_size=size))

    def _draw(self) -> None:
        """Verdict and curves."""
        self._show_verdict()
        assessment = self._desk.assessment
        if assessment is None:
            return
        speed_unit, speed_size = self._speed_unit()
        span, deviation = self._span(assessment)
        machine, plant = assessment.sheet.rig.machine, assessment.plant
        response = assessment.response
        found, duty = self.measured.found, assessment.sheet.duty
        self.plots.measured.show(found, duty=duty, speed_unit=speed_unit, speed_size=speed_size)
        self.bode.measured.show(found, sheet=assessment.sheet)
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
                times=duty_times(assessment.sheet.duty),
                deviation=deviation,
            )
        )
        loops = {"speed": assessment.speed, "current": assessment.current}
        self.bode.show_loops({name: loops[name] for name in _LOOPS[self.loops.word or "both loops"]})
        self.third.show_subject(
            ThirdSubject(
                assessment=assessment,
                loop="current" if self.loops.word == "current" else "speed",
                speed_unit=speed_unit,
                speed_size=speed_size,
                prepared=self._desk.readiness is Readiness.ALL,
            )
        )

    def _show_kept(self) -> None:
        self.plots.show_kept(self._desk.shown_kept)
        self.bode.show_kept(self._desk.shown_kept)

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
        self.more.setText(found.more.replace("&", "&&"))
        self.more.setEnabled(bool(found.more))
        stale = "" if self._desk.valid else "last valid sheet"
        self.plots.show_stale(stale)
        self.bode.show_stale(stale)
        self.third.show_stale(stale)


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
