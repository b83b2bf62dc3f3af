"""What a reach map shows, in words, and which of its targets is closest to a place."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np
from PySide6.QtCore import QPointF

from gainbench.reach import ReachArea
from gainbench_app.widgets.figure import Array, Axes
from gainbench_app.widgets.scales import Range, frequency_text

_INSIDE = math.radians(0.05)
"""A dragged margin stays this far from an edge, so that the digits shown do not step over it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MapPoint:
    """A point of the map."""

    crossover: float
    """[rad/s]."""
    margin: float
    """[rad]."""
    name: str = ""
    bandwidth: float | None = None
    """What is asked for in place of the crossover, which then follows [rad/s]."""

    @property
    def words(self) -> str:
        """``60.0 Hz and 60.0°``."""
        return f"{frequency_text(self.crossover / math.tau)} and {math.degrees(self.margin):.1f}°"


@dataclass(frozen=True, slots=True, kw_only=True)
class MapView:
    """What a map is to show."""

    areas: tuple[ReachArea, ...] = field(compare=False)
    """Told apart as objects."""
    decades: Range
    """Crossovers shown, as exponents of ten of Hz."""
    degrees: Range
    """Margins shown [deg]."""
    point: MapPoint | None
    """Where the loop is, or what is asked of it."""
    asked: bool
    """Whether the point is asked for, and can be dragged; else it only tells where the gains lead."""
    met: bool
    """Whether positive gains with a stable loop meet the point."""
    kept: tuple[MapPoint, ...] = ()


def nearest_target(view: MapView, axes: Axes, *, at: QPointF) -> MapPoint | None:
    """The target closest to a place that can be met; None where none can.

    Parameters
    ----------
    view : MapView
        The map.
    axes : Axes
        The panel it is drawn in.
    at : QPointF
        On the widget [px].

    Returns
    -------
    MapPoint or None
    """
    best, found = math.inf, None
    for area in view.areas:
        across = axes.across(area.crossover / math.tau)
        columns = _columns(axes, across, at)
        if columns.size == 0:
            continue
        low, high = np.interp(columns, across, area.low), np.interp(columns, across, area.high)
        middle = 0.5 * (low + high)
        low, high = np.minimum(low + _INSIDE, middle), np.maximum(high - _INSIDE, middle)
        asked = math.radians(axes.y.low + (axes.box.bottom() - at.y()) / axes.box.height() * axes.y.span)
        margin = np.clip(asked, low, high)
        away = np.hypot(columns - at.x(), axes.down(np.degrees(margin)) - at.y())
        index = int(np.argmin(away))
        if away[index] < best:
            best = float(away[index])
            found = _rounded(area, math.tau * axes.x_at(float(columns[index])), margin=float(margin[index]))
    return found


def _columns(axes: Axes, across: Array, at: QPointF) -> Array:
    """Pixel columns of a strip that are in the panel, the asked one among them where the strip has it."""
    first, last = max(float(across[0]) + 0.3, axes.box.left()), min(float(across[-1]) - 0.3, axes.box.right())
    if first > last:
        return np.empty(0)
    columns = np.arange(first, last, 1.0)
    return np.append(columns, (last, min(max(at.x(), first), last)))


def _rounded(area: ReachArea, crossover: float, *, margin: float) -> MapPoint:
    """A target no finer than pixels tell, within the strip all the same."""
    fine = math.tau * float(f"{crossover / math.tau:.3g}")
    if area.crossover[0] < fine < area.crossover[-1]:
        crossover = fine
    at = math.log(crossover)
    low, high = (float(np.interp(at, np.log(area.crossover), edge)) for edge in (area.low, area.high))
    middle = 0.5 * (low + high)
    margin = math.radians(round(math.degrees(margin), 1))
    return MapPoint(
        crossover=crossover, margin=min(max(margin, min(low + _INSIDE, middle)), max(high - _INSIDE, middle))
    )


def told(view: MapView | None) -> str:
    """The map in words."""
    if view is None:
        return "being prepared"
    words = []
    if view.point is not None:
        state = "asked for" if view.asked else "reached"
        what = view.point.words
        if view.point.bandwidth is not None:
            asked = f"bandwidth {frequency_text(view.point.bandwidth / math.tau)}"
            what = f"{asked}, {what}" if view.met else f"{asked} and {math.degrees(view.point.margin):.1f}°"
        words.append(f"{state}: {what}" + ("" if view.met else ", which cannot be met"))
        top = largest_margin(view, view.point.crossover)
        words.append("no margin can be met there" if top is None else f"largest margin there {top:.1f}°")
    words += [f"kept {one.name}: {one.words}" for one in view.kept]
    return "; ".join(words)


def largest_margin(view: MapView, crossover: float) -> float | None:
    """The largest margin at a crossover, between those that the map was computed at [deg]; None where there is none."""
    tops = [float(np.interp(crossover, one.crossover, one.high, left=np.nan, right=np.nan)) for one in view.areas]
    known = [top for top in tops if not math.isnan(top)]
    return math.degrees(max(known)) if known else None
