"""What a place of the reach map asks of a method: its crossover, or the bandwidth that the loop has there."""

from __future__ import annotations

import math

from gainbench.model import DesignMethod, LoopAims
from gainbench.results import LoopAssessment
from gainbench.sampling import Loop
from gainbench.tuning.bandwidth import crossover_for_bandwidth, reached_bandwidth
from gainbench_app.widgets.map_view import MapPoint

POINT_METHODS = (DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN)
"""Whose two targets are a point of the map."""
_SAME = 1e-4
"""Relative distance within which the design comes back to the crossover that was asked for."""
_DIGITS = 5e-4
"""Largest relative distance of a bandwidth from the one that is saved, with four digits."""
_BESIDE = 0.05
"""Relative distance of the crossovers that these two may lead to."""
_STEPS_BACK = tuple(1.0 - 0.5**power for power in range(6, -1, -1))
"""Shares of the way to a place that are tried from the place on, before the last one is found by halving."""
_HALVINGS = 5
_USUAL_RATIO = 1.5
"""Bandwidth over crossover where the loop has none (common practice)."""


def asks_for_a_point(method: DesignMethod) -> bool:
    """Whether a method's targets are a point of the map."""
    return method in POINT_METHODS


def asked_point(aims: LoopAims, assessed: LoopAssessment, *, before: MapPoint | None = None) -> MapPoint | None:
    """Where the targets of a loop are on the map.

    Parameters
    ----------
    aims : LoopAims
        Of a method that asks for a point.
    assessed : LoopAssessment
        What came of them.
    before : MapPoint, optional
        Where they were; a bandwidth that cannot be met has no crossover, and is shown in the same distance from it.

    Returns
    -------
    MapPoint or None
        None where the sheet does not hold both.
    """
    if aims.phase_margin is None:
        return None
    if aims.method is DesignMethod.CROSSOVER_MARGIN:
        return None if aims.crossover is None else MapPoint(crossover=aims.crossover, margin=aims.phase_margin)
    if aims.bandwidth is None:
        return None
    figures = assessed.figures
    if figures is not None and figures.crossover_hz is not None:
        crossover = math.tau * figures.crossover_hz
    else:
        known = before is not None and before.bandwidth is not None
        crossover = aims.bandwidth * before.crossover / before.bandwidth if known else aims.bandwidth / _USUAL_RATIO
    return MapPoint(crossover=crossover, margin=aims.phase_margin, bandwidth=aims.bandwidth)


def targets_at(
    method: DesignMethod, sampled: Loop, *, crossover: float, margin: float, here: MapPoint | None
) -> dict[str, float]:
    """The targets that lead to a place of the map.

    A bandwidth is that of the loop which crosses over there. Not every place has one of its own: behind a resonance
    the loop may have crossed over before, or another crossover may have the same bandwidth. Then it is the last place
    on the way there that has, be it behind others that have none.

    Parameters
    ----------
    method : DesignMethod
        One of those that ask for a point.
    sampled : Loop
        The loop that the map is of.
    crossover : float
        Of the place [rad/s].
    margin : float
        Of the place [rad].
    here : MapPoint or None
        Where the point is now.

    Returns
    -------
    dict
        Keys of the loop's aims, and SI values; empty where no target leads there.
    """
    if method is DesignMethod.CROSSOVER_MARGIN:
        return {"crossover": crossover, "phase_margin": margin}
    found = _own_target(sampled, crossover, margin=margin)
    if found or here is None:
        return found

    def on_the_way(share: float) -> dict[str, float]:
        between = here.crossover * (crossover / here.crossover) ** share
        return _own_target(sampled, between, margin=here.margin + (margin - here.margin) * share)

    unmet = 1.0
    for met in _STEPS_BACK:
        found = on_the_way(met)
        if found:
            break
        unmet = met
    if not found:
        return {}
    for _ in range(_HALVINGS):
        middle = 0.5 * (met + unmet)
        further = on_the_way(middle)
        if further:
            met, found = middle, further
        else:
            unmet = middle
    return found


def _own_target(sampled: Loop, crossover: float, *, margin: float) -> dict[str, float]:
    """Bandwidth and margin that lead to a place; empty where no bandwidth does."""
    bandwidth = _own_bandwidth(sampled, crossover, margin=margin)
    return {} if bandwidth is None else {"bandwidth": bandwidth, "phase_margin": margin}


def _own_bandwidth(sampled: Loop, crossover: float, *, margin: float) -> float | None:
    """The bandwidth by which the design comes back to this crossover [rad/s]; None where there is none."""
    bandwidth = reached_bandwidth(sampled, crossover, margin=margin)
    if bandwidth is None:
        return None
    # Also in the digits that are saved: next to an edge they are refused, or lead to a crossover far away.
    for asked, away in ((1.0, _SAME), (1.0 - _DIGITS, _BESIDE), (1.0 + _DIGITS, _BESIDE)):
        found = crossover_for_bandwidth(sampled, asked * bandwidth, margin=margin)
        if found is None or abs(found / crossover - 1.0) > away:
            return None
    return bandwidth
