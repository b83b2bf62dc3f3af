"""The open loops over frequency, with their crossovers and margins as lengths."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from gainbench.results import LoopAssessment
from gainbench_app.shown_tuning import ShownTuning
from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.what_it_does.kept_lines import KeptLine, loop_lines, paint_kept
from gainbench_app.what_it_does.loop_marks import BodeCurve, LengthMark, LoopMarks, bode_curve, loop_marks
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Array, Axes, Figure, paint_dashed, paint_line
from gainbench_app.widgets.scales import Range, frequency_text, number_text

_LEFT, _RIGHT, _TOP, _BOTTOM, _GAP = 112.0, 22.0, 10.0, 26.0, 18.0
_NAME_RIGHT = 64.0
_LOWEST_DB, _HIGHEST_DB = -60.0, 80.0
_LOWEST_DEG, _HIGHEST_DEG = -315.0, 45.0
_BELOW_CROSSOVER = 1.5
"""Decades shown below the lowest crossover."""
_ENOUGH_PX = 12.0
"""Words this far from a curve are far enough."""
_LOOKS = 9
"""Places along words where curves are looked for."""
_LEAST_PX = 4.0
"""Words that are not needed keep this far."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Loop:
    name: str
    curve: BodeCurve
    marks: LoopMarks


class BodePlot(Figure):
    """Magnitude above phase, for one loop or both."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setMinimumHeight(150)
        self.setAccessibleName("open loops over frequency, with crossover and margins")
        self._loops: tuple[_Loop, ...] = ()
        self._kept_curves: tuple[ShownTuning, ...] = ()
        self._kept: dict[str, tuple[tuple[KeptLine, ...], tuple[KeptLine, ...]]] = {}
        self._placed: list[QRectF] = []
        self._x = Range(low=0.0, high=4.0, step=1.0)
        self._magnitude = Range(low=-40.0, high=40.0, step=40.0)
        self._phase = Range(low=-270.0, high=-90.0, step=90.0)

    def show_loops(self, loops: dict[str, LoopAssessment]) -> None:
        """Show loops by their names, ``speed`` and ``current``."""
        found = []
        for name, loop in loops.items():
            if loop.curve is not None:
                curve = bode_curve(loop.curve, loop.figures)
                found.append(_Loop(name=name, curve=curve, marks=loop_marks(curve, loop.figures)))
        self._loops = tuple(found)
        if found:
            self._set_ranges()
        self.update()

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
        high = max(float(loop.curve.frequency_hz[-1]) for loop in self._loops)
        crossings = [loop.marks.crossover_hz for loop in self._loops if loop.marks.crossover_hz is not None]
        first = max(float(loop.curve.frequency_hz[0]) for loop in self._loops)
        wanted = math.log10(min(crossings)) - _BELOW_CROSSOVER if crossings else math.log10(high) - 3.0
        low = math.floor(2.0 * max(wanted, min(math.log10(first), wanted + 0.5))) / 2.0
        self._x = Range(low=low, high=max(math.log10(high), low + 1.0), step=1.0)
        magnitudes, phases = [0.0], [-180.0]
        for loop in self._loops:
            seen = loop.curve.frequency_hz >= 10.0**low
            if seen.any():
                magnitudes += [float(loop.curve.magnitude_db[seen].min()), float(loop.curve.magnitude_db[seen].max())]
                phases += [float(loop.curve.phase_deg[seen].min()), float(loop.curve.phase_deg[seen].max())]
        bottom, top = max(min(magnitudes), _LOWEST_DB), min(max(magnitudes), _HIGHEST_DB)
        self._magnitude = Range(
            low=20.0 * math.floor(bottom / 20.0),
            high=20.0 * math.ceil(max(top, 20.0) / 20.0),
            step=20.0 if top - bottom <= 80.0 else 40.0,
        )
        bottom, top = max(min(phases), _LOWEST_DEG), min(max(phases), _HIGHEST_DEG)
        self._phase = Range(low=45.0 * math.floor(bottom / 45.0), high=45.0 * math.ceil(top / 45.0), step=90.0)

    # Painting

    def panels(self) -> list[Axes]:
        """Magnitude above phase."""
        height = max(60.0, self.height() - _TOP - _BOTTOM - _GAP)
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
            down = [float(axes.down(tick)) for tick in ticks]
            self.paint_grid(painter, axes, across=[float(axes.across(one)) for one in decades], down=down)
            zero = 0.0 if name == "|L|" else -180.0
            level = round(float(axes.down(zero))) + 0.5
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
        labels = [(float(last.across(one)), _decade_text(one)) for one in decades]
        self.paint_x_labels(painter, last, labels=labels)

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """The loops, then their marks over them."""
        magnitude, phase = panels
        self._placed = []
        for loop in self._loops:
            colour = getattr(self.theme, loop.name)
            for axes, values in ((magnitude, loop.curve.magnitude_db), (phase, loop.curve.phase_deg)):
                painter.save()
                painter.setClipRect(axes.box.adjusted(0.0, -1.0, 1.0, 1.0))
                paint_line(painter, axes, x=loop.curve.frequency_hz, y=values, colour=colour)
                painter.restore()
        # Words keep clear of all marks, so the marks come first.
        for loop in self._loops:
            self._paint_lengths(painter, magnitude, phase, loop)
        for loop in self._loops:
            self._paint_words(painter, magnitude, phase, loop)
        for loop in self._loops:
            self._paint_gain_words(painter, magnitude, loop)
        if not self._loops:
            painter.setFont(sized(self.font(), SMALL_PX + 1))
            painter.setPen(QColor(self.theme.muted))
            painter.drawText(magnitude.box.center() - QPointF(80.0, 0.0), "no gains, no open loop")
        self._paint_cursor(painter, panels)

    def _paint_lengths(self, painter: QPainter, magnitude: Axes, phase: Axes, loop: _Loop) -> None:
        """The crossover as a dot with a line down, margins as bars with ends."""
        marks = loop.marks
        if marks.crossover_hz is not None:
            at = magnitude.point(marks.crossover_hz, 0.0)
            drop = np.array([at.y(), magnitude.box.bottom()])
            paint_dashed(
                painter,
                magnitude,
                x=np.full(2, marks.crossover_hz),
                y=magnitude.y.low + (magnitude.box.bottom() - drop) / magnitude.box.height() * magnitude.y.span,
                colour=self.theme.ink,
                dots=True,
            )
            painter.setPen(QPen(QColor(self.theme.card), 1.5))
            painter.setBrush(QColor(self.theme.ink))
            painter.drawEllipse(at, 4.5, 4.5)
            self._placed.append(QRectF(at.x() - 5.0, at.y() - 5.0, 10.0, 10.0))
        for axes, mark in ((phase, marks.phase_margin), (magnitude, marks.gain_margin)):
            ends = self._ends(axes, mark)
            if ends is None:
                continue
            start, stop = ends
            painter.setPen(QPen(QColor(self.theme.ink), 2.4))
            painter.drawLine(start, stop)
            painter.setPen(QPen(QColor(self.theme.ink), 1.6))
            for end in ends:
                painter.drawLine(end - QPointF(4.0, 0.0), end + QPointF(4.0, 0.0))
            top, bottom = sorted((start.y(), stop.y()))
            self._placed.append(QRectF(start.x() - 4.0, top, 8.0, max(bottom - top, 1.0)))

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

    def _paint_words(self, painter: QPainter, magnitude: Axes, phase: Axes, loop: _Loop) -> None:
        """The crossover and the phase margin in numbers."""
        marks = loop.marks
        if marks.crossover_hz is not None:
            at = magnitude.point(marks.crossover_hz, 0.0)
            places = (at + QPointF(9.0, -11.0), at + QPointF(9.0, 12.0), at + QPointF(2.0, -26.0))
            self._place(painter, magnitude, words=frequency_text(marks.crossover_hz), places=places, left=at.x() - 9.0)
        ends = self._ends(phase, marks.phase_margin)
        if ends is not None and marks.phase_margin is not None:
            middle = QPointF(ends[0].x() + 7.0, 0.5 * (ends[0].y() + ends[1].y()))
            words = f"{marks.phase_margin.value:.1f}°"
            beside = tuple(middle + QPointF(0.0, down) for down in (0.0, 14.0, -14.0))
            self._place(painter, phase, words=words, places=beside, left=middle.x() - 14.0)

    def _paint_gain_words(self, painter: QPainter, magnitude: Axes, loop: _Loop) -> None:
        """The gain margin in numbers, where there is room; the card of the loop has it anyhow."""
        marks = loop.marks
        ends = self._ends(magnitude, marks.gain_margin)
        if ends is not None and marks.gain_margin is not None:
            start, stop = ends
            right = start.x() + 7.0
            # Below to the left a falling curve is not.
            places = (
                QPointF(right, stop.y() + 11.0),
                QPointF(right, start.y() - 11.0),
                QPointF(right, 0.5 * (start.y() + stop.y())),
                QPointF(start.x() - 12.0, start.y() - 14.0),
                QPointF(start.x() - 20.0, stop.y() + 14.0),
            )
            words = f"{marks.gain_margin.value:.1f}\N{NO-BREAK SPACE}dB"
            self._place(painter, magnitude, words=words, places=places, left=start.x() - 5.0, needed=False)

    def _place(
        self,
        painter: QPainter,
        axes: Axes,
        *,
        words: str,
        places: tuple[QPointF, ...],
        left: float,
        needed: bool = True,
    ) -> None:
        """Write words where the curves and other words are far: at one of the places, or at its height to the left.

        Words that are not needed are left out where there is no room; the card of the loop has them.
        """
        painter.setFont(sized(self.font(), SMALL_PX, bold=True))
        width = painter.fontMetrics().horizontalAdvance(words) + 4.0
        found = [*places, *(QPointF(left - width, place.y()) for place in places)]
        boxes = [self._kept_within(axes, QRectF(place.x(), place.y() - 8.0, width, 16.0)) for place in found]
        rooms = self._rooms(axes, boxes)
        best = int(np.argmax(rooms))
        if needed or rooms[best] >= _LEAST_PX:
            self._placed.append(self.paint_tag(painter, words, at=found[best], colour=self.theme.ink, axes=axes))

    def _kept_within(self, axes: Axes, box: QRectF) -> QRectF:
        """Where words stand that are kept within the panel at its right."""
        return box.translated(min(0.0, axes.box.right() - box.right()), 0.0)

    def _rooms(self, axes: Axes, boxes: Sequence[QRectF]) -> Array:
        """How far curves stay from each of some boxes of one size [px], as far as it matters; -1 where one is taken."""
        left, width = np.array([box.left() for box in boxes]), boxes[0].width()
        middle = np.array([box.center().y() for box in boxes])
        x = left[:, None] + np.linspace(0.0, width, _LOOKS)
        hertz = 10.0 ** (axes.x.low + (x - axes.box.left()) / axes.box.width() * axes.x.span)
        rooms = np.full(len(boxes), _ENOUGH_PX)
        for loop in self._loops:
            values = loop.curve.magnitude_db if axes.y is self._magnitude else loop.curve.phase_deg
            down = axes.down(np.interp(hertz, loop.curve.frequency_hz, values, right=np.inf))
            rooms = np.minimum(rooms, np.abs(down - middle[:, None]).min(axis=1))
        for index, box in enumerate(boxes):
            if not axes.box.contains(box) or any(box.intersects(other) for other in self._placed):
                rooms[index] = -1.0
        return rooms

    def _paint_cursor(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        at = self.cursor_at
        if at is None or not self._loops or not panels[0].box.left() <= at.x() <= panels[0].box.right():
            return
        hertz = panels[0].x_at(at.x())
        for axes, part, ending in ((panels[0], "magnitude_db", " dB"), (panels[1], "phase_deg", "°")):
            readings = []
            for loop in self._loops:
                curve = loop.curve
                value = float(np.interp(hertz, curve.frequency_hz, getattr(curve, part)))
                if curve.frequency_hz[0] <= hertz <= curve.frequency_hz[-1]:
                    readings.append((f"{value:.1f}{ending}", getattr(self.theme, loop.name)))
            self.paint_readings(painter, axes, readings=readings, right=_NAME_RIGHT)
        self.paint_hair(painter, panels, x=at.x(), words=frequency_text(hertz))


def _decade_text(hertz: float) -> str:
    if hertz >= 1000.0:
        return f"{hertz / 1000.0:g}\N{NO-BREAK SPACE}kHz"
    return f"{hertz:g}\N{NO-BREAK SPACE}Hz"
