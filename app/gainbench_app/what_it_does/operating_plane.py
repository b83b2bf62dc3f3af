"""The operating plane: torque against speed, with what voltage, current and machine allow, and the response's path."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen
from PySide6.QtWidgets import QWidget

from gainbench.assess import Assessment
from gainbench.plant import Plant, current_size
from gainbench_app.what_it_does.captioned import CAPTION_PX, CaptionedFigure, Sample
from gainbench_app.what_it_does.plane_limits import Array, least_circle_share, plane_limits
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, paint_dashed, paint_hatched, paint_line, polygon
from gainbench_app.widgets.scales import Range, number_text, stepped

_LEFT, _RIGHT, _BOTTOM = 66.0, 20.0, 26.0
_SPEEDS = 121
_POINTS = 1500
_ROOM = 1.15
_QUADRANT = 0.2
"""A path that needs less of the torque than this, backwards, does not need all of it shown."""
_FAR = 4.0
"""Speeds of at most so many times the path's highest are shown."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Shown:
    plant: Plant
    rated_torque: float | None
    max_speed: float | None
    speed_unit: str
    speed_size: float
    speed: Array
    torque: Array
    share: float | None


class OperatingPlane(CaptionedFigure):
    """Torque of the motor over its speed."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setAccessibleName("operating plane: torque over speed")
        self._shown: _Shown | None = None
        self._x: Range | None = None
        self._y: Range | None = None

    def show_assessment(self, assessment: Assessment, *, speed_unit: str, speed_size: float) -> None:
        """Show the limits of an assessment and the path of its response."""
        plant, machine, response = assessment.plant, assessment.sheet.rig.machine, assessment.response
        rated = machine.rated_current
        speed, torque, share = np.zeros(0), np.zeros(0), None
        if response is not None:
            trace = response.trace
            step = max(1, len(trace.time) // _POINTS)
            speed, torque = trace.speed[::step], plant.torque * trace.current[::step]
            share = least_circle_share(plant, trace)
        if self._shown is not None and speed_size != self._shown.speed_size:
            self._x = None
        self._shown = _Shown(
            plant=plant,
            rated_torque=None if rated is None else plant.torque * rated * current_size(machine),
            max_speed=machine.max_speed,
            speed_unit=speed_unit,
            speed_size=speed_size,
            speed=speed,
            torque=torque,
            share=share,
        )
        self._set_ranges(self._shown)
        self.setAccessibleDescription(self._told(self._shown))
        self.update()

    @property
    def circle_share(self) -> float | None:
        """Smallest share of the voltage circle left to the q axis; None for other machines."""
        return self._shown.share if self._shown is not None else None

    def _told(self, shown: _Shown) -> str:
        stall = shown.plant.torque * shown.plant.current_limit
        idle = shown.plant.voltage_limit / shown.plant.back_emf / shown.speed_size
        words = f"current limit {stall:.4g} N·m, no load at the voltage limit {idle:.4g} {shown.speed_unit}"
        if shown.speed.size:
            words += (
                f"; path up to {float(np.max(np.abs(shown.speed))) / shown.speed_size:.4g} {shown.speed_unit} "
                f"and {float(np.max(np.abs(shown.torque))):.4g} N·m"
            )
        return words

    def _set_ranges(self, shown: _Shown) -> None:
        path = shown.speed / shown.speed_size
        low, high = (float(path.min()), float(path.max())) if path.size else (0.0, 0.0)
        idle = shown.plant.voltage_limit / shown.plant.back_emf
        far = min(idle, shown.max_speed * 1.08) if shown.max_speed is not None else idle
        far /= shown.speed_size
        reach = max(abs(low), abs(high))
        end = min(far, _FAR * reach) if reach > 0.0 else far
        high, low = (max(high, end), min(low, 0.0)) if high >= -low else (max(high, 0.0), min(low, -end))
        self._x = stepped(self._x, low=low, high=high, most=4)
        most = _ROOM * shown.plant.torque * shown.plant.current_limit / self._torque_size
        least = float(shown.torque.min()) / self._torque_size if shown.torque.size else 0.0
        greatest = float(shown.torque.max()) / self._torque_size if shown.torque.size else most
        # Ripple about no torque is no second quadrant.
        low, high = (-most if least < -_QUADRANT * most else min(0.0, _ROOM * least)), most
        if greatest < _QUADRANT * most and low == -most:
            high = max(0.0, _ROOM * greatest)
        self._y = stepped(self._y, low=low, high=high, most=4)

    @property
    def _torque_size(self) -> float:
        """One unit of the axis [N m]."""
        shown = self._shown
        return 1e-3 if shown is not None and shown.plant.torque * shown.plant.current_limit < 2.0 else 1.0

    def panels(self) -> list[Axes]:
        """One panel."""
        box = QRectF(
            _LEFT,
            CAPTION_PX + 4.0,
            max(60.0, self.width() - _LEFT - _RIGHT),
            max(40.0, self.height() - CAPTION_PX - 4.0 - _BOTTOM),
        )
        empty = Range(low=0.0, high=1.0, step=0.5)
        return [Axes(box=box, x=self._x or empty, y=self._y or empty)]

    def background_key(self) -> tuple[object, ...]:
        """Limits are part of the axes."""
        shown = self._shown
        if shown is None:
            return ()
        return (shown.plant, shown.rated_torque, shown.max_speed, shown.speed_unit, shown.share is None)

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Grid, numbers, and all that cannot be, hatched."""
        shown, axes = self._shown, panels[0]
        x_ticks, y_ticks = axes.x.ticks(), axes.y.ticks()
        across, down = [float(axes.across(one)) for one in x_ticks], [float(axes.down(one)) for one in y_ticks]
        if shown is not None:
            self._paint_limits(painter, axes, shown)
        self.paint_grid(painter, axes, across=across, down=down)
        zero = float(axes.down(0.0))
        painter.setPen(QPen(QColor(self.theme.outline), 1.0))
        painter.drawLine(QPointF(axes.box.left(), zero), QPointF(axes.box.right(), zero))
        unit = "mN·m" if self._torque_size < 1.0 else "N·m"
        numbers = [number_text(one, axes.y.step) for one in y_ticks]
        self.paint_y_labels(painter, axes, labels=list(zip(down, numbers, strict=True)))
        speed_unit = shown.speed_unit if shown is not None else ""
        words = [number_text(one, axes.x.step) for one in x_ticks]
        if words:
            words[-1] += f"\N{NO-BREAK SPACE}{speed_unit}"
        self.paint_x_labels(painter, axes, labels=list(zip(across, words, strict=True)))
        samples = [
            Sample(words=f"{unit}:"),
            Sample(words="path", colour=self.theme.speed),
            Sample(words="voltage", colour=self.theme.voltage),
        ]
        if shown is not None and shown.rated_torque is not None:
            samples.append(Sample(words="rated", colour=self.theme.current, dashed=True))
        self.paint_caption(painter, samples)

    def _paint_limits(self, painter: QPainter, axes: Axes, shown: _Shown) -> None:
        limits = plane_limits(shown.plant, np.linspace(axes.x.low, axes.x.high, _SPEEDS) * shown.speed_size)
        speed = limits.speed / shown.speed_size
        known = ~np.isnan(limits.low)
        if shown.max_speed is not None:
            known &= np.abs(limits.speed) <= shown.max_speed
        within = QPainterPath()
        if known.any():
            x, low, high = speed[known], limits.low[known], limits.high[known]
            if shown.max_speed is not None:
                # The band ends at the speed itself, not at the last of the speeds computed.
                ends = np.clip([x[0] - 1e9, x[-1] + 1e9], axes.x.low, axes.x.high)
                most = shown.max_speed / shown.speed_size
                x = x.copy()
                x[0], x[-1] = max(ends[0], -most), min(ends[1], most)
            outline = np.concatenate((low, high[::-1])) / self._torque_size
            within.addPolygon(polygon(axes.across(np.concatenate((x, x[::-1]))), axes.down(outline)))
            within.closeSubpath()
        beyond = QPainterPath()
        beyond.addRect(axes.box)
        painter.save()
        painter.setClipPath(beyond.subtracted(within))
        paint_hatched(painter, axes.box, theme=self.theme)
        painter.restore()
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setClipRect(axes.box)
        for edge in (limits.voltage_low, limits.voltage_high):
            drawn = ~np.isnan(edge)
            if drawn.any():
                paint_line(painter, axes, x=speed[drawn], y=edge[drawn] / self._torque_size, colour=self.theme.voltage)
        if shown.rated_torque is not None:
            ends = np.array([axes.x.low, axes.x.high])
            for sign in (-1.0, 1.0):
                level = np.full(2, sign * shown.rated_torque / self._torque_size)
                paint_dashed(painter, axes, x=ends, y=level, colour=self.theme.current)
        painter.restore()

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """The path, and what is below the mouse."""
        shown, axes = self._shown, panels[0]
        if shown is None:
            return
        painter.save()
        painter.setClipRect(axes.box.adjusted(0.0, -1.5, 1.5, 1.0))
        x, y = shown.speed / shown.speed_size, shown.torque / self._torque_size
        if x.size:
            paint_line(painter, axes, x=x, y=y, colour=self.theme.speed)
        painter.restore()
        at = self.cursor_at
        if at is not None and axes.box.contains(at):
            speed = axes.x_at(at.x())
            torque = axes.y.low + (axes.box.bottom() - at.y()) / axes.box.height() * axes.y.span
            limits = plane_limits(shown.plant, np.array([speed * shown.speed_size]))
            room = float(limits.high[0]) / self._torque_size
            unit = "mN·m" if self._torque_size < 1.0 else "N·m"
            words = f"{number_text(torque, axes.y.step / 50.0)} {unit}"
            words += f", at most {number_text(room, axes.y.step / 50.0)}" if math.isfinite(room) else ", out of reach"
            self.paint_reading(painter, words)
            self.paint_hair(
                painter,
                panels,
                x=at.x(),
                words=f"{number_text(speed, axes.x.step / 50.0)}\N{NO-BREAK SPACE}{shown.speed_unit}",
            )
        elif shown.share is not None:
            self.paint_at_right(painter, f"q axis at least {100.0 * shown.share:.1f} %")
