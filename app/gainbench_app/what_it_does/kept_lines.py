"""Tunings of the shelf as thin broken lines below the live curves: painted with the axes, so that a drag is free."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QPainter, QPen

from gainbench_app.shown_tuning import ShownTuning
from gainbench_app.what_it_does.loop_marks import bode_curve
from gainbench_app.what_it_does.spans import Span
from gainbench_app.what_it_does.traces import Array, decimated
from gainbench_app.widgets.figure import Axes, polygon

_TWICE = (-0.2, 0.2)
_LEAST_RIPPLE = 0.01
"""Of what a curve spans; its ripple is drawn as the mean."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class KeptLine:
    """One curve of a tuning."""

    x: Array
    y: Array
    pattern: tuple[float, ...]
    """Dashes and gaps [px]."""
    lowest: float
    """Smallest value."""
    highest: float


def _kept_line(x: Array, y: Array, pattern: tuple[float, ...]) -> KeptLine:
    return KeptLine(x=x, y=y, pattern=pattern, lowest=float(y.min()), highest=float(y.max()))


def time_lines(
    tunings: tuple[ShownTuning, ...], *, span: Span, speed_size: float, columns: int
) -> tuple[tuple[KeptLine, ...], tuple[KeptLine, ...], tuple[KeptLine, ...]]:
    """Speed, current and voltage of tunings over a span.

    Parameters
    ----------
    tunings : tuple of ShownTuning
        Those without a response give no lines.
    span : Span
        What is shown.
    speed_size : float
        The unit of speed [rad/s].
    columns : int
        Pixel columns.

    Returns
    -------
    tuple
        The lines of each panel.
    """
    found: tuple[list[KeptLine], list[KeptLine], list[KeptLine]] = ([], [], [])
    for one in tunings:
        if one.assessment.response is None:
            continue
        trace = one.assessment.response.trace
        first = max(0, int(np.searchsorted(trace.time, span.start)) - 1)
        last = min(len(trace.time), int(np.searchsorted(trace.time, span.stop)) + 2)
        if last - first < 2:
            continue
        cut = slice(first, last)
        for lines, values in zip(
            found, (trace.speed[cut] / speed_size, trace.current[cut], trace.voltage[cut]), strict=True
        ):
            ripple = _LEAST_RIPPLE * float(np.ptp(values))
            drawn = decimated(trace.time[cut], values, columns=columns, least_ripple=ripple)
            lines.append(_kept_line(drawn.x, drawn.y, one.pattern))
    return tuple(found[0]), tuple(found[1]), tuple(found[2])


def loop_lines(tunings: tuple[ShownTuning, ...], loop: str) -> tuple[tuple[KeptLine, ...], tuple[KeptLine, ...]]:
    """Magnitude and phase of a loop, ``speed`` or ``current``, of tunings."""
    magnitudes, phases = [], []
    for one in tunings:
        assessed = one.assessment.speed if loop == "speed" else one.assessment.current
        if assessed.curve is not None:
            curve = bode_curve(assessed.curve, assessed.figures)
            magnitudes.append(_kept_line(curve.frequency_hz, curve.magnitude_db, one.pattern))
            phases.append(_kept_line(curve.frequency_hz, curve.phase_deg, one.pattern))
    return tuple(magnitudes), tuple(phases)


def paint_kept(painter: QPainter, axes: Axes, lines: tuple[KeptLine, ...], *, colour: str) -> None:
    """Broken lines in a panel, in the hue of the quantity."""
    if not lines:
        return
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setClipRect(axes.box.adjusted(0.0, -1.5, 1.0, 1.5), Qt.ClipOperation.IntersectClip)
    # A pen wider than one pixel takes thirty times as long: twice a pixel looks the same.
    pen = QPen(QColor(colour), 1.0)
    pen.setCosmetic(True)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    for line in lines:
        pen.setDashPattern(list(line.pattern))
        painter.setPen(pen)
        points = polygon(axes.across(line.x), axes.down(line.y))
        for shift in _TWICE:
            painter.translate(shift, shift)
            painter.drawPolyline(points)
            painter.translate(-shift, -shift)
    painter.restore()
