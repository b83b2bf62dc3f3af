"""Measured steps over the predicted response of the time plots."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QWidget

from gainbench.evidence.step_check import StepCheck
from gainbench.model import Duty, Experiment
from gainbench_app.theme import Theme
from gainbench_app.what_it_does.measured_legend import LegendEntry, MeasuredLegend, unread_entry
from gainbench_app.what_it_does.measured_lines import PANELS, MeasuredLine, measured_lines, value_at
from gainbench_app.what_it_does.measured_logs import MeasuredStep, Measurements
from gainbench_app.what_it_does.measured_marks import BEAD_PX, Layer, bead_of, paint_beads, paint_thread
from gainbench_app.what_it_does.spans import Span
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes
from gainbench_app.widgets.scales import number_text, time_text

_GAP = "\N{NO-BREAK SPACE}"
_ANOTHER = 0.02
"""Share by which the height of a logged step differs from the duty's where it is another step."""


class TimeOverlay:
    """Which measured lines the time plots draw; they stay while only the prediction moves."""

    def __init__(self, appearance: Appearance, parent: QWidget, *, left: float, changed: Callable[[], None]) -> None:
        """The plots that it belongs to, where their panels begin [px], and what to call when the box is ticked."""
        self.legend = MeasuredLegend("measured steps", appearance, parent, left=left, threaded=True)
        self.legend.box.toggled.connect(lambda _: changed())
        self.layer = Layer()
        self._found = Measurements()
        self._duty: Duty | None = None
        self._lines: tuple[tuple[MeasuredLine, ...], ...] = ((), (), ())
        self._of: tuple[object, ...] = ()
        self._entries_of: tuple[object, ...] = ()

    @property
    def lines(self) -> tuple[tuple[MeasuredLine, ...], ...]:
        """The lines of each panel that are drawn."""
        return self._lines

    @property
    def steps(self) -> tuple[MeasuredStep, ...]:
        """The steps that are drawn."""
        return self._found.steps if self.legend.shows and self._duty is not None else ()

    def show(self, found: Measurements, *, duty: Duty, speed_unit: str, speed_size: float) -> None:
        """Follow the logs and the duty; the lines come with the next :meth:`prepare`."""
        self._found, self._duty = found, duty
        of = (found, duty.reference_speed, speed_unit)
        if of != self._entries_of:
            self._entries_of = of
            entries = [
                _entry(one, place, duty=duty, speed_unit=speed_unit, speed_size=speed_size)
                for place, one in enumerate(found.steps)
            ]
            self.legend.show_entries([*entries, *map(unread_entry, found.unread_of(Experiment.STEP_CHECK))])

    def prepare(self, span: Span, *, speed_size: float, columns: int) -> None:
        """Find the lines of a span, where they are other than before."""
        steps, duty = self.steps, self._duty
        shifts = tuple(one.step.shift_to(duty) for one in steps) if duty is not None else ()
        of = (tuple(one.step for one in steps), shifts, span, speed_size, columns)
        if of == self._of:
            return
        self._of = of
        if duty is None or not steps:
            self._lines = ((), (), ())
            return
        self._lines = measured_lines(steps, duty=duty, span=span, speed_size=speed_size, columns=columns, bead=BEAD_PX)

    @property
    def extremes(self) -> tuple[tuple[float, ...], ...]:
        """The smallest and the largest value of each line, by panel."""
        return tuple(tuple(edge for line in lines for edge in (line.lowest, line.highest)) for lines in self._lines)

    def paint(self, painter: QPainter, panels: Sequence[Axes], theme: Theme) -> None:
        """The lines, over bands of ripple and below the predicted lines."""
        if any(self._lines):
            key = (self._lines, theme, *((axes.box.getRect(), axes.x, axes.y) for axes in panels))
            self.layer.paint(painter, key, lambda own: self._draw(own, panels, theme))

    def paint_legend(self, painter: QPainter, theme: Theme) -> None:
        """The legend in a picture; on the screen it is a widget of its own."""
        if not isinstance(painter.device(), QWidget):
            self.legend.paint_into(painter, theme)

    def _draw(self, painter: QPainter, panels: Sequence[Axes], theme: Theme) -> None:
        for axes, lines, signal in zip(panels, self._lines, PANELS, strict=True):
            colour = getattr(theme, signal.value)
            painter.save()
            painter.setClipRect(axes.box.adjusted(0.0, -2.5, 2.0, 2.5), Qt.ClipOperation.IntersectClip)
            for line in lines:
                paint_thread(painter, across=axes.across(line.x), down=axes.down(line.y), colour=colour, theme=theme)
                paint_beads(
                    painter,
                    across=axes.across(line.bead_x),
                    down=axes.down(line.bead_y),
                    bead=bead_of(line.log),
                    colour=colour,
                    theme=theme,
                )
            painter.restore()

    def readings(self, panel: int, instant: float, *, size: float, step: float, colour: str) -> list[tuple[str, str]]:
        """What was measured at an instant, for the read-out of the cursor.

        Parameters
        ----------
        panel : int
            0 for speed, 1 for current, 2 for voltage.
        instant : float
            Of the plots [s].
        size : float
            The unit of the panel.
        step : float
            Of the digits.
        colour : str
            Of the quantity.

        Returns
        -------
        list of tuple
            Words behind a bead, and their colour, for each log that has a value there.
        """
        if self._duty is None:
            return []
        values = [value_at(one, PANELS[panel], instant, duty=self._duty) for one in self.steps]
        return [(f"• {number_text(value / size, step)}", colour) for value in values if value is not None]


def _entry(one: MeasuredStep, place: int, *, duty: Duty, speed_unit: str, speed_size: float) -> LegendEntry:
    """A log in the legend."""
    asked, logged = duty.reference_speed, one.step.duty.reference_speed
    another = abs(logged - asked) > _ANOTHER * max(abs(logged), abs(asked))
    size = logged / speed_size
    height = f"steps to {number_text(size, abs(size) / 500.0 or 1.0)}{_GAP}{speed_unit}, not as the duty"
    words = [height] if another else []
    words.append(figures_words(one.check) if one.check is not None else "nothing predicted to hold it against")
    lines = [f"{one.name}: its step is laid where that of the duty begins" if one.step.has_reference else one.name]
    lines += [height] if another else []
    if one.check is not None:
        lines += one.check.outcome.remarks
        if one.check.outcome.fit_percent is not None:
            lines.append(f"speed fits to {one.check.outcome.fit_percent:.1f} %")
    else:
        lines += one.step.remarks
    return LegendEntry(name=one.name, more=", ".join(words), tip="\n".join(lines), bead=bead_of(place))


def figures_words(check: StepCheck) -> str:
    """Overshoot, rise and settling as measured, each with the predicted one."""
    seen, told = check.measured_figures, check.predicted_figures
    rows = (
        ("overshoot", _percent(seen.overshoot_percent), _percent(told.overshoot_percent)),
        ("rise", _time(seen.rise_time_s), _time(told.rise_time_s)),
        ("settling", _time(seen.settling_time_s), _time(told.settling_time_s)),
    )
    words = []
    for name, measured, predicted in rows:
        if measured or predicted:
            number, _, unit = predicted.partition(_GAP)
            # The unit stands once where both have it.
            told_short = number if measured.endswith(f"{_GAP}{unit}") else predicted
            more = "predicted " if not words else ""
            words.append(f"{name}{_GAP}{measured or 'none'} ({more}{told_short or 'none'})")
    return ", ".join(words)


def _percent(value: float | None) -> str:
    return "" if value is None else f"{value:.1f}{_GAP}%"


def _time(value: float | None) -> str:
    return "" if value is None else time_text(value)
