"""Panels of envelopes one above the other, over one axis of time."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from PySide6.QtCore import QRectF
from PySide6.QtGui import QPainter

from gainbench.model import SignalName
from gainbench_app.pages.evidence.overview import Envelope
from gainbench_app.theme import Theme
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, Figure, paint_dashed, paint_line
from gainbench_app.widgets.scales import Range, nice_range, nice_step, number_text

LEFT_PX, RIGHT_PX = 138.0, 18.0
NAME_RIGHT_PX = 62.0
_BOTTOM, _GAP = 26.0, 16.0
_HUES: Mapping[SignalName, str] = {
    SignalName.SPEED: "speed",
    SignalName.ANGLE: "speed",
    SignalName.SPEED_REFERENCE: "ink",
    SignalName.CURRENT: "current",
    SignalName.CURRENT_REFERENCE: "ink",
    SignalName.TORQUE: "muted",
    SignalName.VOLTAGE: "voltage",
}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Curve:
    """One line of a panel."""

    envelope: Envelope
    """In SI over seconds."""
    hue: str
    """The name of a colour of the theme."""
    dashed: bool = False
    """Drawn over the others, so that they show in its gaps."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Panel:
    """What one panel shows."""

    name: str
    unit: str
    size: float
    """One of that unit in SI."""
    curves: tuple[Curve, ...]
    share: float = 1.0
    """Of the height, beside that of the others."""
    about_zero: bool = False
    """Whether zero is always in sight."""


def hue_of(signal: SignalName) -> str:
    """The colour that a signal has everywhere."""
    return _HUES[signal]


class StackedFigure(Figure):
    """Draws panels; the lines are reduced to the columns of the screen once for each width."""

    top_px = 8.0

    def __init__(self, appearance: Appearance) -> None:
        super().__init__(appearance)
        self._shown: tuple[Panel, ...] = ()
        self._ranges: tuple[Range, ...] = ()
        self._span = Range(low=0.0, high=1.0, step=0.2)
        self._lines: dict[tuple[int, int], Envelope] = {}
        self._lines_of = 0

    @property
    def shown(self) -> tuple[Panel, ...]:
        """The panels."""
        return self._shown

    def show_panels(self, panels: Sequence[Panel], *, length: float) -> None:
        """Show other curves over a time from zero on [s]."""
        self._shown = tuple(panels)
        self._span = Range(low=0.0, high=length, step=nice_step(length, 6))
        self._ranges = tuple(_range_of(one) for one in self._shown)
        self._lines.clear()
        self.forget_background()

    def panels(self) -> list[Axes]:
        """One below the other."""
        count = max(1, len(self._shown))
        height = max(30.0 * count, self.height() - self.top_px - _BOTTOM - _GAP * (count - 1))
        total = sum(one.share for one in self._shown) or 1.0
        width = max(60.0, self.width() - LEFT_PX - RIGHT_PX)
        found, top = [], self.top_px
        for one, own in zip(self._shown, self._ranges, strict=True):
            part = round(height * one.share / total)
            found.append(Axes(box=QRectF(LEFT_PX, top, width, part), x=self._span, y=own))
            top += part + _GAP
        return found

    def background_key(self) -> tuple[object, ...]:
        """Names and units are part of the axes."""
        return tuple((one.name, one.unit) for one in self._shown)

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Grids, numbers and names."""
        for axes, one in zip(panels, self._shown, strict=True):
            ticks = axes.y.ticks()
            down = [float(axes.down(tick)) for tick in ticks]
            across = [float(axes.across(tick)) for tick in axes.x.ticks()]
            self.paint_grid(painter, axes, across=across, down=down)
            labels = [(at, number_text(tick, axes.y.step)) for at, tick in zip(down, ticks, strict=True)]
            self.paint_y_labels(painter, axes, labels=labels)
            self.paint_name(painter, axes, name=one.name, unit=one.unit, right=NAME_RIGHT_PX)
        if panels:
            last = panels[-1]
            step = last.x.step
            words = [
                (float(last.across(tick)), f"{number_text(tick, step)}\N{NO-BREAK SPACE}s") for tick in last.x.ticks()
            ]
            self.paint_x_labels(painter, last, labels=words)

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """All lines."""
        width = round(panels[0].box.width()) if panels else 0
        if width != self._lines_of:
            self._lines.clear()
            self._lines_of = width
        for row, (axes, one) in enumerate(zip(panels, self._shown, strict=True)):
            painter.save()
            painter.setClipRect(axes.box.adjusted(0.0, -1.5, 1.0, 1.5))
            for column, curve in enumerate(one.curves):
                x, y = self._reduced((row, column), curve, width).line()
                colour = colour_of(self.theme, curve.hue)
                if curve.dashed:
                    paint_dashed(painter, axes, x=x, y=y / one.size, colour=colour)
                else:
                    paint_line(painter, axes, x=x, y=y / one.size, colour=colour)
            painter.restore()
        self.paint_over(painter, panels)
        self._paint_cursor(painter, panels)

    def paint_over(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """What lies over the lines; nothing, unless a subclass has something."""

    def reads_out(self) -> bool:
        """Whether what is below the mouse is told."""
        return True

    def _reduced(self, key: tuple[int, int], curve: Curve, width: int) -> Envelope:
        if key not in self._lines:
            # One stretch for each column: about two points a pixel.
            self._lines[key] = curve.envelope.reduced(max(50, width))
        return self._lines[key]

    def _paint_cursor(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        at = self.cursor_at
        if at is None or not panels or not self.reads_out():
            return
        box = panels[0].box
        if not box.left() <= at.x() <= box.right():
            return
        time = panels[0].x_at(at.x())
        for axes, one in zip(panels, self._shown, strict=True):
            readings = [
                (number_text(_value_at(curve.envelope, time) / one.size, axes.y.step / 50.0), curve.hue)
                for curve in one.curves
            ]
            self.paint_readings(
                painter,
                axes,
                readings=[(words, colour_of(self.theme, hue)) for words, hue in readings],
                right=NAME_RIGHT_PX,
            )
        self.paint_hair(painter, panels, x=at.x(), words=f"{time:.5g}\N{NO-BREAK SPACE}s")


def colour_of(theme: Theme, hue: str) -> str:
    """A colour by its name."""
    return str(getattr(theme, hue))


def _value_at(envelope: Envelope, time: float) -> float:
    index = min(max(int(envelope.x.searchsorted(time)), 0), envelope.x.size - 1)
    return 0.5 * float(envelope.low[index] + envelope.high[index])


def _range_of(panel: Panel) -> Range:
    low = min(float(one.envelope.low.min()) for one in panel.curves) / panel.size
    high = max(float(one.envelope.high.max()) for one in panel.curves) / panel.size
    if panel.about_zero:
        low, high = min(low, 0.0), max(high, 0.0)
    return nice_range(low, high, most=3, pad=0.04)
