"""The open loops over frequency, with their crossovers and margins as lengths."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QWidget

from gainbench.results import LoopAssessment
from gainbench_app.shown_tuning import ShownTuning
from gainbench_app.theme import SMALL_PX
from gainbench_app.what_it_does.kept_lines import KeptLine, loop_lines, paint_kept
from gainbench_app.what_it_does.loop_marks import BodeCurve, LengthMark, LoopMarks, bode_curve, loop_marks
from gainbench_app.what_it_does.measured_bode import LoopOverlay
from gainbench_app.what_it_does.measured_legend import readings_room
from gainbench_app.what_it_does.word_ground import WordGround
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, Figure, paint_pixels
from gainbench_app.widgets.scales import Range, frequency_text, number_text

_LEFT, _RIGHT, _TOP, _BOTTOM, _GAP = 112.0, 22.0, 10.0, 26.0, 18.0
_NAME_RIGHT = 64.0
_LOWEST_DB, _HIGHEST_DB = -60.0, 80.0
_LOWEST_DEG, _HIGHEST_DEG = -315.0, 45.0
_BELOW_CROSSOVER = 1.5
"""Decades shown below the lowest crossover."""
_LEAST_PX = 4.0
"""Words that are not needed keep this far."""
_WORD_PX = 16.0
"""Height of words."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Loop:
    name: str
    of: LoopAssessment
    curve: BodeCurve
    marks: LoopMarks

    def is_of(self, other: LoopAssessment) -> bool:
        """Whether another assessment has the same curve and figures."""
        mine, its = self.of.curve, other.curve
        return (
            self.of.figures == other.figures
            and mine is not None
            and its is not None
            and np.array_equal(mine.open_loop, its.open_loop)
            and np.array_equal(mine.frequency_hz, its.frequency_hz)
        )


class BodePlot(Figure):
    """Magnitude above phase, for one loop or both."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setMinimumHeight(150)
        self.setAccessibleName("open loops over frequency, with crossover and margins")
        self._loops: tuple[_Loop, ...] = ()
        self._kept_curves: tuple[ShownTuning, ...] = ()
        self._kept: dict[str, tuple[tuple[KeptLine, ...], tuple[KeptLine, ...]]] = {}
        self._x = Range(low=0.0, high=4.0, step=1.0)
        self._magnitude = Range(low=-40.0, high=40.0, step=40.0)
        self._phase = Range(low=-270.0, high=-90.0, step=90.0)
        self.measured = LoopOverlay(appearance, self, left=_LEFT - 14.0, changed=self._set_ranges)

    def show_loops(self, loops: dict[str, LoopAssessment]) -> None:
        """Show loops by their names, ``speed`` and ``current``."""
        before = {loop.name: loop for loop in self._loops}
        found = []
        for name, loop in loops.items():
            if loop.curve is None:
                continue
            known = before.get(name)
            if known is not None and known.is_of(loop):
                # The inner loop stays while the outer one is tuned.
                found.append(known)
                continue
            curve = bode_curve(loop.curve, loop.figures)
            found.append(_Loop(name=name, of=loop, curve=curve, marks=loop_marks(curve, loop.figures)))
        self._loops = tuple(found)
        self.measured.follow({one.name: (one.curve, loops[one.name]) for one in found})
        self._set_ranges()

    @property
    def kept_curves(self) -> tuple[ShownTuning, ...]:
        """The tunings that are drawn below the live curves."""
        return self._kept_curves

    def show_kept(self, tunings: tuple[ShownTuning, ...]) -> None:
        """Draw other tunings below the live curves."""
        if tunings != self._kept_curves:
            self._kept_curves = tunings
            self._kept = {name: loop_lines(tunings, name) for name in ("speed", "current")}
            self.forget_background()

    def background_key(self) -> tuple[object, ...]:
        """Lines of kept tunings are painted with the axes."""
        return (self._kept_curves, *(loop.name for loop in self._loops))

    @property
    def marks(self) -> dict[str, LoopMarks]:
        """What is marked, by the name of the loop."""
        return {loop.name: loop.marks for loop in self._loops}

    def _set_ranges(self) -> None:
        self.update()
        if not self._loops:
            return
        high = max(float(loop.curve.frequency_hz[-1]) for loop in self._loops)
        crossings = [loop.marks.crossover_hz for loop in self._loops if loop.marks.crossover_hz is not None]
        first = max(float(loop.curve.frequency_hz[0]) for loop in self._loops)
        wanted = math.log10(min(crossings)) - _BELOW_CROSSOVER if crossings else math.log10(high) - 3.0
        low = math.floor(2.0 * max(wanted, min(math.log10(first), wanted + 0.5))) / 2.0
        if self.measured.lowest_hz is not None:
            low = max(min(low, math.floor(2.0 * math.log10(self.measured.lowest_hz)) / 2.0), low - 1.0)
        self._x = Range(low=low, high=max(math.log10(high), low + 1.0), step=1.0)
        magnitudes, phases = [0.0], [-180.0]
        for loop in self._loops:
            seen = loop.curve.frequency_hz >= 10.0**low
            if seen.any():
                magnitudes += [float(loop.curve.magnitude_db[seen].min()), float(loop.curve.magnitude_db[seen].max())]
                phases += [float(loop.curve.phase_deg[seen].min()), float(loop.curve.phase_deg[seen].max())]
            magnitudes += self.measured.seen(loop.name, "magnitude_db", above_hz=10.0**low)
            phases += self.measured.seen(loop.name, "phase_deg", above_hz=10.0**low)
        bottom, top = max(min(magnitudes), _LOWEST_DB), min(max(magnitudes), _HIGHEST_DB)
        self._magnitude = Range(
            low=20.0 * math.floor(bottom / 20.0),
            high=20.0 * math.ceil(max(top, 20.0) / 20.0),
            step=20.0 if top - bottom <= 80.0 else 40.0,
        )
        bottom, top = max(min(phases), _LOWEST_DEG), min(max(phases), _HIGHEST_DEG)
        self._phase = Range(low=45.0 * math.floor(bottom / 45.0), high=45.0 * math.ceil(top / 45.0), step=90.0)

    def update(self) -> None:
        """Paint anew, but for the legend: its words do not follow the hand."""
        super().update(0, 0, self.width(), self.height() - self.measured.legend.height_px)

    # Painting

    def panels(self) -> list[Axes]:
        """Magnitude above phase."""
        height = max(60.0, self.height() - _TOP - _BOTTOM - _GAP - self.measured.legend.height_px)
        width = max(60.0, self.width() - _LEFT - _RIGHT)
        upper = round(0.5 * height)
        return [
            Axes(box=QRectF(_LEFT, _TOP, width, upper), x=self._x, y=self._magnitude, log_x=True),
            Axes(box=QRectF(_LEFT, _TOP + upper + _GAP, width, height - upper), x=self._x, y=self._phase, log_x=True),
        ]

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Decades, numbers and names."""
        decades = [float(10.0**tick) for tick in self._x.ticks()]
        for axes, name, unit in zip(panels, ("|L|", "phase"), ("dB", "deg"), strict=True):
            ticks = axes.y.ticks()
            down = [axes.top_of(tick) for tick in ticks]
            self.paint_grid(painter, axes, across=[axes.left_of(one) for one in decades], down=down)
            zero = 0.0 if name == "|L|" else -180.0
            level = round(axes.top_of(zero)) + 0.5
            painter.setPen(QPen(QColor(self.theme.outline), 1.0))
            painter.drawLine(QPointF(axes.box.left(), level), QPointF(axes.box.right(), level))
            self.paint_y_labels(
                painter, axes, labels=[(y, number_text(tick, axes.y.step)) for y, tick in zip(down, ticks, strict=True)]
            )
            self.paint_name(painter, axes, name=name, unit=unit, right=_NAME_RIGHT)
        for loop in self._loops:
            for axes, lines in zip(panels, self._kept.get(loop.name, ((), ())), strict=True):
                paint_kept(painter, axes, lines, colour=getattr(self.theme, loop.name))
        last = panels[-1]
        labels = [(last.left_of(one), _decade_text(one)) for one in decades]
        self.paint_x_labels(painter, last, labels=labels)

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """The loops, then their marks over them."""
        magnitude, phase = panels
        # Below what is shown a curve has more points than within.
        least = 10.0**self._x.low
        parts = [slice(max(0, int(loop.curve.frequency_hz.searchsorted(least)) - 1), None) for loop in self._loops]
        across = [magnitude.across(loop.curve.frequency_hz[cut]) for loop, cut in zip(self._loops, parts, strict=True)]
        grounds = []
        self.measured.paint(painter, panels, self.theme)
        for axes, part in ((magnitude, "magnitude_db"), (phase, "phase_deg")):
            curves = [
                (x, axes.down(getattr(loop.curve, part)[cut]))
                for x, loop, cut in zip(across, self._loops, parts, strict=True)
            ]
            painter.save()
            painter.setClipRect(axes.box.adjusted(0.0, -1.0, 1.0, 1.0))
            for (x, down), loop in zip(curves, self._loops, strict=True):
                paint_pixels(painter, axes, across=x, down=down, colour=getattr(self.theme, loop.name))
            painter.restore()
            grounds.append(WordGround(axes.box, curves))
        # Words keep clear of all marks, so the marks come first.
        for loop in self._loops:
            self._paint_lengths(painter, magnitude, phase, loop, grounds)
        for loop in self._loops:
            self._paint_words(painter, magnitude, phase, loop, grounds)
        for loop in self._loops:
            self._paint_gain_words(painter, magnitude, loop, grounds[0])
        if not self._loops:
            painter.setFont(self.hand(SMALL_PX + 1).font)
            painter.setPen(QColor(self.theme.muted))
            painter.drawText(magnitude.box.center() - QPointF(80.0, 0.0), "no gains, no open loop")
        self._paint_cursor(painter, panels)
        self.measured.paint_legend(painter, self.theme)

    def _paint_lengths(
        self, painter: QPainter, magnitude: Axes, phase: Axes, loop: _Loop, grounds: Sequence[WordGround]
    ) -> None:
        """The crossover as a dot with a line down, margins as bars with ends."""
        marks, ink = loop.marks, QColor(self.theme.ink)
        if marks.crossover_hz is not None:
            at = magnitude.point(marks.crossover_hz, 0.0)
            pen = QPen(ink, 1.0)
            pen.setDashPattern([1.5, 2.5])
            painter.setPen(pen)
            painter.drawLine(at, QPointF(at.x(), magnitude.box.bottom()))
            painter.setPen(QPen(QColor(self.theme.card), 1.5))
            painter.setBrush(ink)
            painter.drawEllipse(at, 4.5, 4.5)
            grounds[0].take(QRectF(at.x() - 5.0, at.y() - 5.0, 10.0, 10.0))
        for axes, mark, ground in (
            (phase, marks.phase_margin, grounds[1]),
            (magnitude, marks.gain_margin, grounds[0]),
        ):
            ends = self._ends(axes, mark)
            if ends is None:
                continue
            start, stop = ends
            painter.setPen(QPen(ink, 2.4))
            painter.drawLine(start, stop)
            painter.setPen(QPen(ink, 1.6))
            for end in ends:
                painter.drawLine(end - QPointF(4.0, 0.0), end + QPointF(4.0, 0.0))
            top, bottom = sorted((start.y(), stop.y()))
            ground.take(QRectF(start.x() - 4.0, top, 8.0, max(bottom - top, 1.0)))

    def _ends(self, axes: Axes, mark: LengthMark | None) -> tuple[QPointF, QPointF] | None:
        """Both ends of a bar, within the panel; None where it is not in sight."""
        if mark is None:
            return None
        start, stop = axes.point(mark.frequency_hz, mark.start), axes.point(mark.frequency_hz, mark.stop)
        box = axes.box
        if not box.left() <= start.x() <= box.right():
            return None
        for end in (start, stop):
            end.setY(min(max(end.y(), box.top()), box.bottom()))
        return start, stop

    def _paint_words(
        self, painter: QPainter, magnitude: Axes, phase: Axes, loop: _Loop, grounds: Sequence[WordGround]
    ) -> None:
        """The crossover and the phase margin in numbers."""
        marks = loop.marks
        if marks.crossover_hz is not None:
            at = magnitude.point(marks.crossover_hz, 0.0)
            x, y = at.x(), at.y()
            places = ((x + 9.0, y - 11.0), (x + 9.0, y + 12.0), (x + 2.0, y - 26.0))
            words = frequency_text(marks.crossover_hz)
            self._place(painter, magnitude, grounds[0], words=words, places=places, left=x - 9.0)
        ends = self._ends(phase, marks.phase_margin)
        if ends is not None and marks.phase_margin is not None:
            x, y = ends[0].x() + 7.0, 0.5 * (ends[0].y() + ends[1].y())
            words = f"{marks.phase_margin.value:.1f}°"
            places = ((x, y), (x, y + 14.0), (x, y - 14.0))
            self._place(painter, phase, grounds[1], words=words, places=places, left=x - 14.0)

    def _paint_gain_words(self, painter: QPainter, magnitude: Axes, loop: _Loop, ground: WordGround) -> None:
        """The gain margin in numbers, where there is room; the card of the loop has it anyhow."""
        marks = loop.marks
        ends = self._ends(magnitude, marks.gain_margin)
        if ends is not None and marks.gain_margin is not None:
            x, start, stop = ends[0].x(), ends[0].y(), ends[1].y()
            # Below to the left a falling curve is not.
            places = (
                (x + 7.0, stop + 11.0),
                (x + 7.0, start - 11.0),
                (x + 7.0, 0.5 * (start + stop)),
                (x - 12.0, start - 14.0),
                (x - 20.0, stop + 14.0),
            )
            words = f"{marks.gain_margin.value:.1f}\N{NO-BREAK SPACE}dB"
            self._place(painter, magnitude, ground, words=words, places=places, left=x - 5.0, needed=False)

    def _place(
        self,
        painter: QPainter,
        axes: Axes,
        ground: WordGround,
        *,
        words: str,
        places: tuple[tuple[float, float], ...],
        left: float,
        needed: bool = True,
    ) -> None:
        """Write words where the curves and other words are far: at one of the places, or at its height to the left.

        Words that are not needed are left out where there is no room; the card of the loop has them.
        """
        width = self.hand(bold=True).width(words) + 4.0
        beside = (*places, *((left - width, y) for _, y in places))
        spot = ground.best(beside, width=width, height=_WORD_PX)
        if needed or spot.room >= _LEAST_PX:
            at = QPointF(spot.x, spot.y)
            ground.take(self.paint_tag(painter, words, at=at, colour=self.theme.ink, axes=axes))

    def _paint_cursor(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        at = self.cursor_at
        if at is None or not self._loops or not panels[0].box.left() <= at.x() <= panels[0].box.right():
            return
        hertz = panels[0].x_at(at.x())
        ends = (panels[1].box.center().y() - 18.0, self.height() - self.measured.legend.height_px)
        parts = (("magnitude_db", " dB"), ("phase_deg", "°"))
        for axes, (part, ending), end in zip(panels, parts, ends, strict=True):
            readings = []
            for loop in self._loops:
                curve = loop.curve
                value = float(np.interp(hertz, curve.frequency_hz, getattr(curve, part)))
                if curve.frequency_hz[0] <= hertz <= curve.frequency_hz[-1]:
                    readings.append((f"{value:.1f}{ending}", getattr(self.theme, loop.name)))
            measured = self.measured.readings(part, hertz, ending=ending, theme=self.theme)
            readings += measured[: max(0, readings_room(axes, end) - len(readings))]
            self.paint_readings(painter, axes, readings=readings, right=_NAME_RIGHT)
        self.paint_hair(painter, panels, x=at.x(), words=frequency_text(hertz))

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """The legend stays at the bottom."""
        super().resizeEvent(event)
        self.measured.legend.place(self.width(), self.height())


def _decade_text(hertz: float) -> str:
    if hertz >= 1000.0:
        return f"{hertz / 1000.0:g}\N{NO-BREAK SPACE}kHz"
    return f"{hertz:g}\N{NO-BREAK SPACE}Hz"
