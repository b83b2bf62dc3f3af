"""The sensitivity of both loops over frequency, with its peaks."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from gainbench.results import LoopAssessment
from gainbench_app.what_it_does.captioned import CAPTION_PX, CaptionedFigure, Sample
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, paint_line
from gainbench_app.widgets.scales import Range, frequency_text, number_text, stepped

Array = NDArray[np.float64]

_LEFT, _RIGHT, _BOTTOM = 52.0, 22.0, 26.0
_LOWEST_DB, _LEAST_TOP_DB = -40.0, 6.0
_DECADES = 4.0


@dataclass(frozen=True, slots=True, kw_only=True)
class SensitivityCurve:
    """``|1/(1 + L)|`` of one loop."""

    frequency_hz: Array
    level_db: Array
    peak: float | None
    """The exact figure."""
    peak_hz: float
    """Where the curve is highest."""


def sensitivity_curve(loop: LoopAssessment) -> SensitivityCurve | None:
    """The curve of a loop; None where it has no gains or is unstable, since there it tells nothing."""
    if loop.curve is None or loop.figures is None or not loop.figures.stable:
        return None
    distance = np.maximum(np.abs(1.0 + loop.curve.open_loop), 1e-300)
    level = -20.0 * np.log10(distance)
    return SensitivityCurve(
        frequency_hz=loop.curve.frequency_hz,
        level_db=level,
        peak=loop.figures.peak_sensitivity,
        peak_hz=float(loop.curve.frequency_hz[int(np.argmax(level))]),
    )


class SensitivityPlot(CaptionedFigure):
    """Both loops in one panel."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setAccessibleName("sensitivity of both loops over frequency")
        self._curves: dict[str, SensitivityCurve] = {}
        self._x = Range(low=0.0, high=4.0, step=1.0)
        self._y: Range | None = None

    @property
    def curves(self) -> dict[str, SensitivityCurve]:
        """What is drawn, by loop."""
        return dict(self._curves)

    def show_loops(self, loops: dict[str, LoopAssessment]) -> None:
        """Show loops by their names."""
        found = {name: sensitivity_curve(loop) for name, loop in loops.items()}
        self._curves = {name: curve for name, curve in found.items() if curve is not None}
        if self._curves:
            high = math.log10(max(float(one.frequency_hz[-1]) for one in self._curves.values()))
            self._x = Range(low=math.floor(2.0 * (high - _DECADES)) / 2.0, high=high, step=1.0)
            top = max([_LEAST_TOP_DB, *(float(one.level_db.max()) for one in self._curves.values())])
            self._y = stepped(self._y, low=_LOWEST_DB, high=min(top * 1.15, 40.0), most=5)
        told = [
            f"{name} loop peak {one.peak:.2f} at {frequency_text(one.peak_hz)}"
            for name, one in self._curves.items()
            if one.peak is not None
        ]
        self.setAccessibleDescription("; ".join(told) or "no stable loop")
        self.update()

    def panels(self) -> list[Axes]:
        """One panel."""
        box = QRectF(
            _LEFT,
            CAPTION_PX + 4.0,
            max(60.0, self.width() - _LEFT - _RIGHT),
            max(40.0, self.height() - CAPTION_PX - 4.0 - _BOTTOM),
        )
        return [Axes(box=box, x=self._x, y=self._y or Range(low=-40.0, high=10.0, step=10.0), log_x=True)]

    def background_key(self) -> tuple[object, ...]:
        """Which loops there are."""
        return tuple(self._curves)

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Grid and numbers."""
        axes = panels[0]
        decades = [float(10.0**tick) for tick in axes.x.ticks()]
        ticks = axes.y.ticks()
        across, down = [float(axes.across(one)) for one in decades], [float(axes.down(one)) for one in ticks]
        self.paint_grid(painter, axes, across=across, down=down)
        level = round(float(axes.down(0.0))) + 0.5
        painter.setPen(QPen(QColor(self.theme.outline), 1.0))
        painter.drawLine(QPointF(axes.box.left(), level), QPointF(axes.box.right(), level))
        numbers = [number_text(one, axes.y.step) for one in ticks]
        self.paint_y_labels(painter, axes, labels=list(zip(down, numbers, strict=True)))
        words = [frequency_text(one, digits=1) for one in decades]
        self.paint_x_labels(painter, axes, labels=list(zip(across, words, strict=True)))
        samples = [Sample(words=f"{name} loop", colour=getattr(self.theme, name)) for name in self._curves]
        self.paint_caption(painter, [Sample(words="|1/(1+L)| in dB:"), *samples])

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Curves, their peaks, and what is below the mouse."""
        axes = panels[0]
        if not self._curves:
            self.paint_message(painter, "no stable loop, no sensitivity")
            return
        painter.save()
        painter.setClipRect(axes.box.adjusted(0.0, -1.0, 1.0, 1.0))
        for name, curve in self._curves.items():
            colour = getattr(self.theme, name)
            paint_line(painter, axes, x=curve.frequency_hz, y=curve.level_db, colour=colour)
        painter.restore()
        taken: list[QRectF] = []
        for curve in self._curves.values():
            if curve.peak is None:
                continue
            at = axes.point(curve.peak_hz, 20.0 * math.log10(curve.peak))
            painter.setPen(QPen(QColor(self.theme.card), 1.5))
            painter.setBrush(QColor(self.theme.ink))
            painter.drawEllipse(at, 4.5, 4.5)
            words = f"{curve.peak:.2f}"
            place = at + QPointF(-12.0, -15.0)
            if any(box.intersects(QRectF(place.x(), place.y() - 8.0, 34.0, 16.0)) for box in taken):
                place = at + QPointF(8.0, 14.0)
            taken.append(self.paint_tag(painter, words, at=place, colour=self.theme.ink, axes=axes))
        self._paint_cursor(painter, panels)

    def _paint_cursor(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        at, axes = self.cursor_at, panels[0]
        if at is None or not axes.box.left() <= at.x() <= axes.box.right():
            return
        hertz = axes.x_at(at.x())
        parts = []
        for name, one in self._curves.items():
            if one.frequency_hz[0] <= hertz <= one.frequency_hz[-1]:
                level = float(np.interp(hertz, one.frequency_hz, one.level_db))
                parts.append(f"{name} {10.0 ** (level / 20.0):.3g}")
        self.paint_reading(painter, "|1/(1+L)|   " + "   ".join(parts))
        self.paint_hair(painter, panels, x=at.x(), words=frequency_text(hertz))
