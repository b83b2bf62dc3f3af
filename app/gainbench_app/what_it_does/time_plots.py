"""Speed, current and voltage over time, with their limits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QRectF, Qt, Signal
from PySide6.QtGui import QColor, QMouseEvent, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QPushButton, QWidget

from gainbench.results import Trace
from gainbench_app.shown_tuning import ShownTuning
from gainbench_app.theme import SMALL_PX, sized
from gainbench_app.what_it_does.duty_handles import HEIGHT_PX, SIDE_PX, DutyHandles, DutyTime
from gainbench_app.what_it_does.kept_lines import KeptLine, paint_kept, time_lines
from gainbench_app.what_it_does.measured_legend import readings_room
from gainbench_app.what_it_does.measured_time import TimeOverlay
from gainbench_app.what_it_does.spans import Span
from gainbench_app.what_it_does.traces import Array, Drawn, decimated, merged, stretches
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, Figure, paint_band, paint_dashed, paint_hatched, paint_line
from gainbench_app.widgets.scales import Range, corners, nice_step, number_text, stepped

_LEFT, _RIGHT, _TOP, _BOTTOM, _GAP = 112.0, 22.0, 20.0, 26.0, 20.0
_SHARES = (1.45, 1.0, 1.0)
_NAME_RIGHT = 64.0
_NEAR_LIMIT = 0.5
"""A limit is drawn once the curve comes to this share of it."""
_RIPPLE_PX = 2.0
_NAMES = ("speed", "current", "voltage")


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeView:
    """What the time plots are to show."""

    trace: Trace | None
    message: str
    """What stands in the plots where there is no trace."""
    span: Span
    speed_unit: str
    speed_size: float
    """One of that unit [rad/s]."""
    speed_limit: float | None
    """[rad/s]."""
    current_limit: float
    """[A]."""
    voltage_limit: float
    """[V]."""
    times: tuple[DutyTime, ...] = ()
    """Of the duty, to be dragged."""
    deviation: bool = False
    """True scales the speed to its movement about the reference."""


@dataclass(slots=True, kw_only=True)
class _Panel:
    """One panel's curves, in the units of its axis."""

    drawn: Drawn | None = None
    extra: Drawn | None = None
    reference: tuple[Array, Array] | None = None
    limit: float | None = None
    clamped: tuple[tuple[float, float], ...] = ()
    y: Range | None = None
    kept: tuple[KeptLine, ...] = ()
    measured: tuple[float, ...] = ()
    """Values that measured lines reach."""


class TimePlots(Figure):
    """Three panels over one time axis."""

    span_dragged = Signal(float, float)
    span_reset = Signal()

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setMinimumHeight(200)
        self.setAccessibleName("speed, current and voltage over time")
        self._view: TimeView | None = None
        self._parts = (_Panel(), _Panel(), _Panel())
        self._ranges_of: tuple[object, ...] = ()
        self._pressed: float | None = None
        self._columns = 0
        self._kept_curves: tuple[ShownTuning, ...] = ()
        self._kept_of: tuple[object, ...] = ()
        self.handles = DutyHandles(appearance, self)
        self._unit_at: tuple[object, ...] = ()
        self.speed_unit = QPushButton("", self)
        self.speed_unit.setProperty("flat", True)
        self.speed_unit.setFont(sized(self.font(), SMALL_PX))
        self.measured = TimeOverlay(appearance, self, left=_LEFT - 14.0, changed=self._refill)

    @property
    def kept_curves(self) -> tuple[ShownTuning, ...]:
        """The tunings that are drawn below the live curves."""
        return self._kept_curves

    def show_kept(self, tunings: tuple[ShownTuning, ...]) -> None:
        """Draw other tunings below the live curves."""
        if tunings != self._kept_curves:
            self._kept_curves = tunings
            self._refill()

    def _refill(self) -> None:
        """Other curves beside the live ones."""
        self._prepare()
        self.update()

    @property
    def view(self) -> TimeView | None:
        """What is shown."""
        return self._view

    def show_view(self, view: TimeView) -> None:
        """Show something else."""
        self._view = view
        self._prepare()
        self.handles.show_times(view.times, self._time_range())
        self._place_unit()
        self.update_curves()

    def _place_unit(self) -> None:
        """The unit of speed stands below the name of its panel."""
        unit = self._view.speed_unit if self._view is not None else ""
        panels = self.panels()
        at = (unit, panels[0].box.getRect())
        if at == self._unit_at:
            return
        self._unit_at = at
        if self.speed_unit.text() != unit:
            self.speed_unit.setText(unit)
            self.speed_unit.setAccessibleName(f"unit of speed: {unit}")
            self.speed_unit.setToolTip("show speed in another unit")
        size = self.speed_unit.sizeHint()
        middle = round(panels[0].box.center().y())
        self.speed_unit.setGeometry(round(_NAME_RIGHT) + 4 - size.width(), middle - 4, size.width(), 21)

    def _prepare(self) -> None:
        view = self._view
        if view is None:
            return
        kept = (view.span, view.speed_size, view.deviation)
        if kept != self._ranges_of:
            for part in self._parts:
                part.y = None
            self._ranges_of = kept
        self._columns = max(50, round(self.width() - _LEFT - _RIGHT))
        if view.trace is None:
            for part in self._parts:
                part.drawn = part.extra = part.reference = None
                part.clamped = ()
            return
        self._fill_kept(view)
        self.measured.prepare(view.span, speed_size=view.speed_size, columns=self._columns)
        for part, values in zip(self._parts, self.measured.extremes, strict=True):
            part.measured = values
        self._fill(view, view.trace)

    def _fill_kept(self, view: TimeView) -> None:
        """Lines of kept tunings; they stay while only the live curves move."""
        of = (view.span, view.speed_size, self._columns, self._kept_curves)
        if of != self._kept_of:
            self._kept_of = of
            found = time_lines(self._kept_curves, span=view.span, speed_size=view.speed_size, columns=self._columns)
            for part, lines in zip(self._parts, found, strict=True):
                part.kept = lines

    def _fill(self, view: TimeView, trace: Trace) -> None:
        first = max(0, int(np.searchsorted(trace.time, view.span.start)) - 1)
        last = min(len(trace.time), int(np.searchsorted(trace.time, view.span.stop)) + 2)
        cut = slice(first, max(last, first + 2))
        time = trace.time[cut]
        speed, current, voltage = self._parts
        size = view.speed_size
        speed.limit = view.speed_limit / size if view.speed_limit is not None else None
        current.limit, voltage.limit = view.current_limit, view.voltage_limit
        speed.reference = corners(time, trace.reference[cut] / size)
        elastic = trace.load_speed is not trace.speed and not np.array_equal(trace.load_speed[cut], trace.speed[cut])
        speed.extra = self._decimated(speed, time, trace.load_speed[cut] / size) if elastic else None
        speed.drawn = self._decimated(speed, time, trace.speed[cut] / size)
        current.drawn = self._decimated(current, time, trace.current[cut])
        voltage.drawn = self._decimated(voltage, time, trace.voltage[cut])
        gap = view.span.length / self._columns
        current.clamped = tuple(merged(stretches(time, trace.current_clamped[cut]), gap))
        voltage.clamped = tuple(merged(stretches(time, trace.voltage_clamped[cut]), gap))
        for part in self._parts:
            self._set_range(part, deviation=view.deviation and part is speed)

    def _decimated(self, part: _Panel, time: Array, values: Array) -> Drawn:
        height = 0.25 * max(self.height() - 60.0, 100.0)
        span = part.y.span if part.y is not None else float(np.ptp(values))
        return decimated(time, values, columns=self._columns, least_ripple=_RIPPLE_PX * span / height)

    def _set_range(self, part: _Panel, *, deviation: bool) -> None:
        assert part.drawn is not None
        low = min([part.drawn.lowest, *part.measured, *(line.lowest for line in part.kept)])
        high = max([part.drawn.highest, *part.measured, *(line.highest for line in part.kept)])
        if part.reference is not None and not deviation:
            low, high = min(low, float(part.reference[1].min())), max(high, float(part.reference[1].max()))
        if not deviation:
            low, high = min(low, 0.0), max(high, 0.0)
        if part.limit is not None and not deviation:
            if high > _NEAR_LIMIT * part.limit:
                high = max(high, 1.18 * part.limit)
            if low < -_NEAR_LIMIT * part.limit:
                low = min(low, -1.18 * part.limit)
        most = 4 if part is self._parts[0] else 3
        part.y = stepped(part.y, low=low, high=high, most=most, pad=0.06 if deviation or part.limit is None else 0.0)

    def update(self) -> None:
        """Paint anew, but for the legend: its words do not follow the hand."""
        super().update(0, 0, self.width(), self.height() - self.measured.legend.height_px)

    # Painting

    def panels(self) -> list[Axes]:
        """Three panels, one above the other."""
        height = max(90.0, self.height() - _TOP - _BOTTOM - 2.0 * _GAP - self.measured.legend.height_px)
        unit = height / sum(_SHARES)
        x = self._time_range()
        found = []
        top = _TOP
        for part, share in zip(self._parts, _SHARES, strict=True):
            box = QRectF(_LEFT, top, max(60.0, self.width() - _LEFT - _RIGHT), round(share * unit))
            found.append(Axes(box=box, x=x, y=part.y or Range(low=0.0, high=1.0, step=0.5)))
            top += round(share * unit) + _GAP
        return found

    def _time_range(self) -> Range:
        span = self._view.span if self._view is not None else Span(start=0.0, stop=1.0)
        return Range(low=span.start, high=span.stop, step=nice_step(span.length, 6))

    def background_key(self) -> tuple[object, ...]:
        """Limits and units are part of the axes."""
        view = self._view
        unit = view.speed_unit if view is not None else ""
        kept = view is not None and view.trace is not None
        return (unit, *((part.limit, part.y is None, part.kept if kept else ()) for part in self._parts))

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Grids, numbers, names and the bands beyond limits."""
        # The unit of speed is a button.
        units = ("", "A", "V")
        for axes, part, name, unit in zip(panels, self._parts, _NAMES, units, strict=True):
            across = [float(axes.across(tick)) for tick in axes.x.ticks()]
            ticks = axes.y.ticks()
            down = [float(axes.down(tick)) for tick in ticks]
            if part.limit is not None:
                box = axes.box
                if axes.y.high > part.limit:
                    edge = float(axes.down(part.limit))
                    paint_hatched(
                        painter, QRectF(box.left(), box.top(), box.width(), edge - box.top()), theme=self.theme
                    )
                if axes.y.low < -part.limit:
                    edge = float(axes.down(-part.limit))
                    paint_hatched(painter, QRectF(box.left(), edge, box.width(), box.bottom() - edge), theme=self.theme)
            self.paint_grid(painter, axes, across=across, down=down)
            if part.y is not None:
                numbers = [number_text(tick, axes.y.step) for tick in ticks]
                self.paint_y_labels(painter, axes, labels=list(zip(down, numbers, strict=True)))
            self.paint_name(painter, axes, name=name, unit=unit, right=_NAME_RIGHT)
            if self._view is not None and self._view.trace is not None:
                paint_kept(painter, axes, part.kept, colour=getattr(self.theme, name))
        last = panels[-1]
        seconds = last.x.span >= 0.4
        size, unit = (1.0, "s") if seconds else (1e-3, "ms")
        self.paint_x_labels(
            painter,
            last,
            labels=[
                (float(last.across(tick)), f"{number_text(tick / size, last.x.step / size)}\N{NO-BREAK SPACE}{unit}")
                for tick in last.x.ticks()
            ],
        )

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Ripple, references, curves, and when a limit was sat on."""
        theme = self.theme
        for axes, part, name in zip(panels, self._parts, _NAMES, strict=True):
            painter.save()
            painter.setClipRect(axes.box.adjusted(0.0, -1.5, 1.0, 1.5))
            for band in part.drawn.bands if part.drawn is not None else ():
                colour = theme.mixed(getattr(theme, name), 0.36)
                paint_band(painter, axes, x=band.x, low=band.low, high=band.high, colour=colour)
            painter.restore()
        if self._view is not None and self._view.trace is not None:
            self.measured.paint(painter, panels, theme)
        for axes, part, name in zip(panels, self._parts, _NAMES, strict=True):
            colour = getattr(theme, name)
            painter.save()
            painter.setClipRect(axes.box.adjusted(0.0, -1.5, 1.0, 1.5))
            if part.drawn is not None:
                if part.reference is not None:
                    x, y = part.reference
                    paint_dashed(painter, axes, x=x, y=y, colour=theme.ink)
                if part.extra is not None:
                    paint_dashed(painter, axes, x=part.extra.x, y=part.extra.y, colour=colour, dots=True)
                paint_line(painter, axes, x=part.drawn.x, y=part.drawn.y, colour=colour)
            painter.restore()
            self._paint_clamped(painter, axes, part)
        if self._view is not None and self._view.trace is None:
            self._paint_message(painter, panels)
        self._paint_cursor(painter, panels)
        self.measured.paint_legend(painter, theme)

    def _paint_clamped(self, painter: QPainter, axes: Axes, part: _Panel) -> None:
        for start, stop in part.clamped:
            left = max(float(axes.across(start)), axes.box.left())
            right = min(max(float(axes.across(stop)), left + 2.0), axes.box.right() + 1.0)
            if right > left:
                painter.fillRect(QRectF(left, axes.box.bottom() - 4.0, right - left, 4.0), QColor(self.theme.breaks))

    def _paint_message(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        assert self._view is not None
        painter.setFont(sized(self.font(), SMALL_PX + 1))
        painter.setPen(QColor(self.theme.muted))
        painter.drawText(
            panels[0].box, int(Qt.AlignmentFlag.AlignCenter | Qt.TextFlag.TextWordWrap), self._view.message
        )

    def _paint_cursor(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        at, view = self.cursor_at, self._view
        if at is None or view is None or view.trace is None:
            return
        box = panels[0].box
        if not box.left() <= at.x() <= box.right():
            return
        if self._pressed is not None and abs(at.x() - self._pressed) > 2.0:
            left, right = sorted((self._pressed, at.x()))
            painter.setPen(QPen(QColor(self.theme.ink), 1.0))
            for axes in panels:
                painter.drawRect(QRectF(left, axes.box.top(), right - left, axes.box.height()))
            return
        time = panels[0].x_at(at.x())
        index = min(max(int(np.searchsorted(view.trace.time, time)), 0), len(view.trace.time) - 1)
        trace = view.trace
        values = (trace.speed[index] / view.speed_size, trace.current[index], trace.voltage[index])
        ends = [*(axes.box.center().y() - 18.0 for axes in panels[1:]), self.height() - self.measured.legend.height_px]
        for place, (axes, value, name, end) in enumerate(zip(panels, values, _NAMES, ends, strict=True)):
            digits, colour = axes.y.step / 50.0, getattr(self.theme, name)
            readings = [(number_text(float(value), digits), colour)]
            size = view.speed_size if place == 0 else 1.0
            measured = self.measured.readings(place, time, size=size, step=digits, colour=colour)
            readings += measured[: readings_room(axes, end) - 1]
            self.paint_readings(painter, axes, readings=readings, right=_NAME_RIGHT)
        self.paint_hair(painter, panels, x=at.x(), words=f"{time * 1e3:.4g}\N{NO-BREAK SPACE}ms")

    # Dragging a span

    def mousePressEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """A span begins."""
        if event.button() == Qt.MouseButton.LeftButton and self.panels()[0].box.left() <= event.position().x():
            self._pressed = event.position().x()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """The span is shown, where it is one."""
        pressed, self._pressed = self._pressed, None
        if pressed is not None and abs(event.position().x() - pressed) > 6.0:
            axes = self.panels()[0]
            start, stop = sorted((axes.x_at(pressed), axes.x_at(event.position().x())))
            self.span_dragged.emit(max(start, axes.x.low), min(stop, axes.x.high))
        self.update()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:  # noqa: N802
        """Back to all of it."""
        self._pressed = None
        self.span_reset.emit()

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802
        """Another width has other columns."""
        super().resizeEvent(event)
        left, width = round(_LEFT) - SIDE_PX, round(self.width() - _LEFT - _RIGHT) + 2 * SIDE_PX
        self.handles.setGeometry(left, round(_TOP) - HEIGHT_PX, width, HEIGHT_PX)
        self._place_unit()
        self.measured.legend.place(self.width(), self.height())
        self._ranges_of = ()
        self._prepare()
