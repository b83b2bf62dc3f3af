"""Measured frequency responses over the predicted open loops of the Bode plot."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import Qt
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QWidget

from gainbench.evidence.frequency_response import COHERENT
from gainbench.model import Experiment, Sheet
from gainbench.results import LoopAssessment
from gainbench_app.theme import Theme
from gainbench_app.what_it_does.loop_marks import BodeCurve
from gainbench_app.what_it_does.measured_legend import LegendEntry, MeasuredLegend, unread_entry
from gainbench_app.what_it_does.measured_logs import Measurements
from gainbench_app.what_it_does.measured_marks import Layer, bead_of, paint_beads
from gainbench_app.what_it_does.measured_points import LoopLog, LoopPoints
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Array, Axes

_APART_PX = 6.0
"""Points are drawn at least about so far from each other."""
_NEAR = 0.06
"""Share of a frequency within which a point is at the cursor."""


class LoopOverlay:
    """Which measured points the Bode plot draws beside which loop."""

    def __init__(self, appearance: Appearance, parent: QWidget, *, left: float, changed: Callable[[], None]) -> None:
        """The plot that it belongs to, where its panels begin [px], and what to call when the box is ticked."""
        self.legend = MeasuredLegend("measured open loops", appearance, parent, left=left, threaded=False)
        self.legend.box.toggled.connect(lambda _: changed())
        self.layer = Layer()
        self._found = Measurements()
        self._sheet: Sheet | None = None
        self._logs: tuple[LoopLog, ...] = ()
        self._points: dict[str, tuple[LoopPoints, ...]] = {}

    @property
    def points(self) -> Mapping[str, tuple[LoopPoints, ...]]:
        """What is drawn, by the name of its loop."""
        return self._points if self.legend.shows else {}

    def show(self, found: Measurements, *, sheet: Sheet) -> None:
        """Follow the logs; the points come with the loops that :meth:`follow` is told of."""
        if found is not self._found:
            self._found = found
            self._logs = tuple(LoopLog(place, one) for place, one in enumerate(found.responses))
        self._sheet = sheet

    def follow(self, loops: Mapping[str, tuple[BodeCurve, LoopAssessment]]) -> None:
        """Find the points beside these loops: those of plants move with the gains, those of closed loops stay."""
        unread = self._found.unread_of(Experiment.FREQUENCY_RESPONSE)
        if not self._logs and not unread:
            self._points = {}
            self.legend.show_entries(())
            return
        points: dict[str, list[LoopPoints]] = {}
        entries = []
        for log in self._logs:
            found = None
            if log.loop in loops and self._sheet is not None:
                curve, assessed = loops[log.loop]
                found = log.points(self._sheet, gains=assessed.gains, curve=curve)
            if found is not None:
                points.setdefault(log.loop, []).append(found)
            entries.append(_entry(log, drawn=found is not None))
        self._points = {name: tuple(some) for name, some in points.items()}
        self.legend.show_entries([*entries, *map(unread_entry, unread)])

    def seen(self, name: str, part: str, *, above_hz: float) -> list[float]:
        """Values of the sure points of a loop above a frequency: its axis shows them all."""
        return [
            float(edge)
            for one in self.points.get(name, ())
            for values in [getattr(one, part)[one.sure & (one.frequency_hz >= above_hz)]]
            if values.size
            for edge in (values.min(), values.max())
        ]

    @property
    def lowest_hz(self) -> float | None:
        """The lowest frequency of a sure point."""
        lows = [float(one.frequency_hz[one.sure][0]) for some in self.points.values() for one in some if one.sure.any()]
        return min(lows, default=None)

    def paint(self, painter: QPainter, panels: Sequence[Axes], theme: Theme) -> None:
        """The points, below the predicted curves."""
        if self.points:
            key = (
                tuple((name, some) for name, some in self.points.items()),
                theme,
                *((axes.box.getRect(), axes.x, axes.y) for axes in panels),
            )
            self.layer.paint(painter, key, lambda own: self._draw(own, panels, theme))

    def paint_legend(self, painter: QPainter, theme: Theme) -> None:
        """The legend in a picture; on the screen it is a widget of its own."""
        if not isinstance(painter.device(), QWidget):
            self.legend.paint_into(painter, theme)

    def _draw(self, painter: QPainter, panels: Sequence[Axes], theme: Theme) -> None:
        for name, some in self.points.items():
            for axes, part in zip(panels, ("magnitude_db", "phase_deg"), strict=True):
                painter.save()
                painter.setClipRect(axes.box.adjusted(0.0, -2.5, 2.0, 2.5), Qt.ClipOperation.IntersectClip)
                for one in some:
                    across, down = axes.across(one.frequency_hz), axes.down(getattr(one, part))
                    for sure in (False, True):
                        kept = _apart(across, one.sure == sure)
                        paint_beads(
                            painter,
                            across=across[kept],
                            down=down[kept],
                            bead=bead_of(one.log),
                            colour=getattr(theme, name),
                            theme=theme,
                            faint=not sure,
                        )
                painter.restore()

    def readings(self, part: str, hertz: float, *, ending: str, theme: Theme) -> list[tuple[str, str]]:
        """The points at a frequency, for the read-out of the cursor: words behind a bead, and their colour."""
        found = []
        for name, some in self.points.items():
            for one in some:
                place = _nearest(one.frequency_hz, hertz)
                if place is not None:
                    found.append((f"• {getattr(one, part)[place]:.1f}{ending}", getattr(theme, name)))
        return found


def _apart(across: Array, wanted: NDArray[np.bool_]) -> NDArray[np.intp]:
    """Places of the wanted points, those left out that would run together on the screen."""
    places = np.flatnonzero(wanted)
    _, first = np.unique(np.floor(across[places] / _APART_PX), return_index=True)
    return places[first]


def _nearest(frequency_hz: Array, hertz: float) -> int | None:
    off = np.abs(np.log(frequency_hz / hertz))
    place = int(np.argmin(off)) if off.size else -1
    return place if place >= 0 and off[place] < _NEAR else None


def _entry(log: LoopLog, *, drawn: bool) -> LegendEntry:
    """A log in the legend, with what is drawn of it."""
    measured = log.measured
    if log.refusal:
        return LegendEntry(
            name=measured.name,
            more=log.refusal.removeprefix(f"{measured.name}: ").split(", so")[0],
            tip=log.refusal,
        )
    if not drawn:
        words = f"is of the {log.loop} loop"
        return LegendEntry(name=measured.name, more=words, tip=f"{measured.name} {words}, which is not shown")
    lines = [
        f"{measured.name}: {log.what}",
        f"large points: known with a coherence above {COHERENT:g}, small ones less",
    ]
    lines += measured.check.outcome.remarks if measured.check is not None else ()
    return LegendEntry(name=measured.name, more=log.short, tip="\n".join(lines), bead=bead_of(log.place))
