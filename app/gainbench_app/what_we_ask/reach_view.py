"""What a reach map shows of an assessment; what has not changed since the last one is not computed anew."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from gainbench.assess import Assessment, assess
from gainbench.assessed import LoopName, assessed_loop
from gainbench.bandwidth_reach import FINE, QUICK, with_own_bandwidth
from gainbench.kept import with_kept
from gainbench.model import DesignMethod, KeptTuning
from gainbench.reach import ReachArea, ReachMap, reach_areas, reach_map
from gainbench.results import LoopAssessment
from gainbench.sampling import Loop
from gainbench_app.sheet_edits import loop_aims
from gainbench_app.what_we_ask.map_targets import asked_point
from gainbench_app.widgets.map_view import MapPoint, MapView
from gainbench_app.widgets.scales import Range

DECADES = 3.0
"""Below the Nyquist frequency, computed."""
COLUMNS = 90
QUICK_COLUMNS = 40
"""Of what is in sight alone, while the loop moves with every frame."""
_BESIDE = 1.12
"""Ratio by which a quick map reaches out of sight."""
_SHOWN = 25.0
"""Largest over smallest crossover shown, unless a point needs more."""
_ROOM = 1.6
"""Room beside a point, as a ratio."""
_FLOOR_DEG = 30.0
_LEAST_SPAN = 0.7
"""Decades."""
_NICE = (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)


class KeptPoints:
    """Where the kept tunings' gains lead on the present plant, computed anew only where the plant or a tuning changes.

    One for all maps, since each tuning has gains of both loops.
    """

    def __init__(self) -> None:
        self._of: tuple[object, ...] = ()
        self._found: list[tuple[KeptTuning, Assessment]] = []

    def of(self, assessment: Assessment, loop: LoopName) -> tuple[MapPoint, ...]:
        """The points of a loop; a tuning that is unstable there, or never crosses, has none."""
        sheet = assessment.sheet
        key = (sheet.rig, sheet.aims.firmware, sheet.kept)
        if key != self._of:
            plain = replace(sheet, tolerances=(), evidence=())
            self._found = [(kept, assess(with_kept(plain, kept), simulated=False)) for kept in sheet.kept]
            self._of = key
        points = []
        for kept, one in self._found:
            point = reached(one.current if loop == "current" else one.speed, name=kept.name)
            if point is not None:
                points.append(point)
        return tuple(points)


class ReachKeeper:
    """The map of one loop; where a bandwidth is asked for, only what a bandwidth leads to."""

    def __init__(self, loop: LoopName, kept: KeptPoints) -> None:
        self._loop: LoopName = loop
        self._kept = kept
        self._of: tuple[object, ...] = ()
        self._areas: tuple[ReachArea, ...] = ()
        self._whole = False
        self._wanted: tuple[float, float] = (1.0, 10.0)
        self._ranges: tuple[Range, Range] | None = None
        self._sampled: Loop | None = None
        self._met: MapPoint | None = None
        """The last point that could be met."""

    @property
    def sampled(self) -> Loop | None:
        """The loop that the map is of; None where there is no map."""
        return self._sampled

    @property
    def whole(self) -> bool:
        """Whether the map is computed as far as it may be asked for, not only in sight."""
        return self._whole

    def view(self, assessment: Assessment, *, asked: bool, still: bool, quick: bool) -> MapView:
        """What the map shows.

        Parameters
        ----------
        assessment : Assessment
            The newest.
        asked : bool
            Whether the point may be dragged: the method asks for one, and gains are not held.
        still : bool
            Keeps the axes where they are, as while the point is dragged.
        quick : bool
            Computes no more than is in sight.

        Returns
        -------
        MapView
        """
        by_bandwidth = asked and loop_aims(assessment.sheet, self._loop).method is DesignMethod.BANDWIDTH_MARGIN
        self._compute(assessment, quick=quick and self._ranges is not None, by_bandwidth=by_bandwidth)
        own = assessment.current if self._loop == "current" else assessment.speed
        point = self._point(assessment, own, asked=asked)
        kept = self._kept.of(assessment, self._loop)
        if self._ranges is None or not still:
            self._ranges = self._ranges_for([*kept, *([point] if point is not None else [])])
        decades, degrees = self._ranges
        return MapView(
            areas=self._areas,
            decades=decades,
            degrees=degrees,
            point=point,
            asked=asked,
            met=own.refusal is None,
            kept=kept,
        )

    def _compute(self, assessment: Assessment, *, quick: bool, by_bandwidth: bool) -> None:
        firmware = assessment.sheet.aims.firmware
        inner = assessment.current.gains if self._loop == "speed" else None
        # The gains of the current loop are in the speed loop's map, its own targets are not.
        rules = (firmware.integrator, firmware.back_emf_feedforward)
        key = (assessment.plant, assessment.sheet.rig.stage, *rules, inner, by_bandwidth)
        if key == self._of and (quick or self._whole):
            return
        self._of, self._whole = key, not quick
        loop = self._sampled = assessed_loop(assessment, self._loop)
        if loop is None:
            self._areas = ()
            return
        nyquist = math.pi / loop.plant.period
        if quick and self._ranges is not None:
            low, high = (math.tau * 10.0**one for one in (self._ranges[0].low, self._ranges[0].high))
            if low < 0.9 * nyquist:
                found = reach_map(loop, lowest=low / _BESIDE, highest=high * _BESIDE, columns=QUICK_COLUMNS)
                self._areas = reach_areas(with_own_bandwidth(loop, found, step=QUICK) if by_bandwidth else found)
                return
        found = reach_map(loop, lowest=nyquist * 10.0**-DECADES, columns=COLUMNS)
        if by_bandwidth:
            found = with_own_bandwidth(loop, found, step=FINE)
        self._areas, self._whole = reach_areas(found), True
        self._wanted = _wanted(found)

    def _point(self, assessment: Assessment, own: LoopAssessment, *, asked: bool) -> MapPoint | None:
        aims = loop_aims(assessment.sheet, self._loop)
        point = asked_point(aims, own, before=self._met) if asked else None
        if point is not None and own.refusal is None:
            self._met = point
        return point if point is not None else reached(own)

    def _ranges_for(self, points: Sequence[MapPoint]) -> tuple[Range, Range]:
        low, high = self._wanted
        for point in points:
            hertz = point.crossover / math.tau
            low, high = min(low, hertz / _ROOM), max(high, hertz * 1.1)
        first, last = math.log10(_nice(low, up=False)), math.log10(_nice(high, up=True))
        floor = _FLOOR_DEG if all(math.degrees(one.margin) >= _FLOOR_DEG + 2.0 for one in points) else 0.0
        return (
            Range(low=first, high=max(last, first + _LEAST_SPAN), step=1.0),
            Range(low=floor, high=90.0, step=30.0),
        )


def reached(loop: LoopAssessment, *, name: str = "") -> MapPoint | None:
    """Where a loop's gains lead; None where it is unstable or never crosses."""
    figures = loop.figures
    if figures is None or figures.crossover_hz is None or figures.phase_margin_deg is None:
        return None
    return MapPoint(crossover=math.tau * figures.crossover_hz, margin=math.radians(figures.phase_margin_deg), name=name)


def _wanted(found: ReachMap) -> tuple[float, float]:
    """Crossovers worth showing [Hz]: up to where the map falls to the lowest margin shown."""
    hertz = found.crossover / math.tau
    top = np.degrees(found.largest_margin)
    met = np.flatnonzero(np.nan_to_num(top, nan=-1.0) >= _FLOOR_DEG)
    if met.size == 0:
        met = np.flatnonzero(~np.isnan(top))
    high = float(hertz[met[-1]]) * 1.05 if met.size else float(hertz[-1])
    return high / _SHOWN, high


def _nice(value: float, *, up: bool) -> float:
    """A round number that is not beyond a value, or not short of it."""
    power = 10.0 ** math.floor(math.log10(value) + 1e-12)
    found = [one * power for one in _NICE]
    if up:
        return next(one for one in found if one >= value * (1.0 - 1e-9))
    return next(one for one in reversed(found) if one <= value * (1.0 + 1e-9))
