"""The current's step with the rotor locked, its rise and overshoot marked as lengths."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from gainbench.results import LockedStep
from gainbench_app.what_it_does.captioned import CAPTION_PX, CaptionedFigure, Sample
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, paint_dashed, paint_line
from gainbench_app.widgets.scales import Range, nice_step, number_text, stepped, time_text

_LEFT, _RIGHT, _BOTTOM = 52.0, 22.0, 26.0
_LOW, _HIGH = 0.1, 0.9
_WITHIN = 0.01
"""The step is shown until it stays this close to where it ends."""
_AFTER = 1.35
_HIGHEST = 3.0
"""A step that swings higher than so many times its reference is cut there."""


class LockedStepPlot(CaptionedFigure):
    """Current over its reference."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setAccessibleName("step of the current with the rotor locked")
        self._step: LockedStep | None = None
        self._end = 1e-3
        self._y: Range | None = None

    @property
    def step(self) -> LockedStep | None:
        """What is drawn."""
        return self._step

    @property
    def end(self) -> float:
        """Last instant shown [s]."""
        return self._end

    def show_step(self, step: LockedStep | None) -> None:
        """Show another step; None where there is none."""
        if step is self._step:
            return
        if step is not None and not np.isfinite(step.current).all():
            step = None
        self._step = step
        words = "no stable current loop, no step"
        if step is not None:
            outside = np.flatnonzero(np.abs(step.current - step.current[-1]) > _WITHIN)
            settled = float(step.time[min(int(outside[-1]) + 1, len(step.time) - 1)]) if outside.size else 0.0
            wanted = max(_AFTER * settled, 4.0 * (step.rise_s or 0.0), float(step.time[1]))
            # It moves in steps, so that a drag does not make the plot breathe.
            tick = nice_step(wanted, 5)
            self._end = min(tick * np.ceil(wanted / tick - 1e-9), float(step.time[-1]))
            highest = min(max(1.1, float(step.current.max()) * 1.04), _HIGHEST)
            self._y = stepped(self._y, low=0.0, high=highest, most=5)
            parts = []
            if step.rise_s is not None:
                parts.append(f"rise from 10 to 90 % {time_text(step.rise_s)}")
            if step.overshoot_percent is not None:
                parts.append(f"overshoot {step.overshoot_percent:.1f} %")
            words = ", ".join(parts)
        self.setAccessibleDescription(words)
        self.update()

    def panels(self) -> list[Axes]:
        """One panel."""
        box = QRectF(
            _LEFT,
            CAPTION_PX + 4.0,
            max(60.0, self.width() - _LEFT - _RIGHT),
            max(40.0, self.height() - CAPTION_PX - 4.0 - _BOTTOM),
        )
        x = Range(low=0.0, high=self._end, step=nice_step(self._end, 5))
        return [Axes(box=box, x=x, y=self._y or Range(low=0.0, high=1.25, step=0.25))]

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Grid and numbers."""
        axes = panels[0]
        x_ticks, y_ticks = axes.x.ticks(), axes.y.ticks()
        across, down = [float(axes.across(one)) for one in x_ticks], [float(axes.down(one)) for one in y_ticks]
        self.paint_grid(painter, axes, across=across, down=down)
        numbers = [f"{100.0 * one:.0f}\N{NO-BREAK SPACE}%" for one in y_ticks]
        self.paint_y_labels(painter, axes, labels=list(zip(down, numbers, strict=True)))
        size, unit = (1e-3, "ms") if self._end >= 2e-3 else (1e-6, "µs")
        words = [number_text(one / size, axes.x.step / size) for one in x_ticks]
        words[-1] += f"\N{NO-BREAK SPACE}{unit}"
        self.paint_x_labels(painter, axes, labels=list(zip(across, words, strict=True)))
        samples = [
            Sample(words="current", colour=self.theme.current),
            Sample(words="its reference", colour=self.theme.ink, dashed=True),
        ]
        self.paint_caption(painter, samples)

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """The step, its rise and overshoot, and what is below the mouse."""
        step, axes = self._step, panels[0]
        if step is None:
            self.paint_message(painter, "no stable current loop, no step")
            return
        painter.save()
        painter.setClipRect(axes.box.adjusted(0.0, -1.0, 1.0, 1.0))
        paint_dashed(painter, axes, x=np.array([0.0, self._end]), y=np.ones(2), colour=self.theme.ink)
        paint_line(painter, axes, x=step.time, y=step.current, colour=self.theme.current)
        painter.restore()
        self._paint_rise(painter, axes, step)
        self._paint_overshoot(painter, axes, step)
        at = self.cursor_at
        if at is not None and axes.box.left() <= at.x() <= axes.box.right():
            time = axes.x_at(at.x())
            share = float(np.interp(time, step.time, step.current))
            self.paint_reading(painter, f"{100.0 * share:.1f} %")
            self.paint_hair(painter, panels, x=at.x(), words=time_text(time))

    def _paint_rise(self, painter: QPainter, axes: Axes, step: LockedStep) -> None:
        if step.rise_s is None:
            return
        first = _first_at(step, _LOW)
        start, stop = axes.point(first, _LOW), axes.point(first + step.rise_s, _HIGH)
        level = axes.point(0.0, 0.5 * _LOW).y()
        pen = QPen(QColor(self.theme.outline), 1.0)
        pen.setDashPattern([1.5, 2.5])
        painter.setPen(pen)
        painter.drawLine(start, QPointF(start.x(), level))
        painter.drawLine(stop, QPointF(stop.x(), level))
        self._paint_length(painter, QPointF(start.x(), level), QPointF(stop.x(), level))
        words = f"rise {time_text(step.rise_s)}"
        at = QPointF(stop.x() + 8.0, level - 4.0)
        self.paint_tag(painter, words, at=at, colour=self.theme.ink, axes=axes)

    def _paint_overshoot(self, painter: QPainter, axes: Axes, step: LockedStep) -> None:
        if not step.overshoot_percent:
            return
        time = float(step.time[int(np.argmax(step.current))])
        top, bottom = axes.point(time, 1.0 + step.overshoot_percent / 100.0), axes.point(time, 1.0)
        self._paint_length(painter, top, bottom)
        words = f"overshoot {step.overshoot_percent:.1f} %"
        at = QPointF(top.x() + 10.0, max(top.y() - 4.0, axes.box.top() + 9.0))
        self.paint_tag(painter, words, at=at, colour=self.theme.ink, axes=axes)

    def _paint_length(self, painter: QPainter, start: QPointF, stop: QPointF) -> None:
        """A bar with ends, along either axis."""
        painter.setPen(QPen(QColor(self.theme.ink), 2.2))
        painter.drawLine(start, stop)
        end = QPointF(4.0, 0.0) if abs(start.x() - stop.x()) < 0.5 else QPointF(0.0, 4.0)
        painter.setPen(QPen(QColor(self.theme.ink), 1.6))
        for one in (start, stop):
            painter.drawLine(one - end, one + end)


def _first_at(step: LockedStep, level: float) -> float:
    """When the current first reaches a share of its reference [s]."""
    index = int(np.argmax(step.current >= level))
    if index == 0:
        return float(step.time[0])
    before, after = float(step.current[index - 1]), float(step.current[index])
    share = (level - before) / (after - before)
    return float(step.time[index - 1] + share * (step.time[index] - step.time[index - 1]))
