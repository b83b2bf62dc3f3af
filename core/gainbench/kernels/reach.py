"""Which phase margins a PI controller can give at one crossover with a stable loop, from the edge of stability.

At a crossover ``wc`` the margin ``phi`` takes ``C = -exp(j phi)/G(wc)``: as the margin grows, the gains walk clockwise
along an ellipse around the origin of their plane, and stability can change only where the edge crosses that ellipse. An
edge that leaves the ellipse with rising frequency has its better side ahead: two poles outside fewer for a larger
margin. How many are outside on one piece is counted along the straight way out from the origin.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.frequency import workspace
from gainbench.kernels.lifting import BACKWARD, FORWARD
from gainbench.kernels.loop_records import SampledPlant
from gainbench.kernels.stability_edge import Edge, needed, slope

PIECES = 24
"""Most pieces of one crossover; of more the widest are kept."""
BESIDE = 1e-6
"""How near the crossover itself, as a share, the edge is left alone: it crosses there by definition, at margin 0."""
WIDE = 0.25
"""Crossings this far outside the margins looked at are not refined [rad]."""
NARROW = 1e-13
CLEAR = 0.3
"""Points of the edge are clear of the ellipse where they are this share of its square inside or outside."""
HALVINGS = 40
LARGEST = 0.5 * math.pi
"""Margins are looked at from 0 to this [rad]."""


class Ellipse(NamedTuple):
    """Where the gains lie that give one crossover."""

    w: float
    """[rad/s]."""
    angle: float
    """Of -1/G there [rad]."""
    square: float
    """Size of -1/G there, squared."""
    slope: float
    """The integral part's imaginary part for Ki T = 1, below 0."""


class Walk(NamedTuple):
    """The edge as one ellipse sees it."""

    w: NDArray[np.float64]
    """[rad/s]."""
    x: NDArray[np.float64]
    y: NDArray[np.float64]
    gap: NDArray[np.float64]
    """As :func:`gap`."""
    crossover: int
    """Index of the last point below the crossover; the next is the first above."""


class Crossings(NamedTuple):
    """Margins at which stability changes, within one span."""

    margin: NDArray[np.float64]
    change: NDArray[np.int64]
    """Poles outside beyond it, less those before it."""


@inlined
def beyond(ellipse: Ellipse, x: float, y: float) -> float:
    """Above 0 outside the ellipse."""
    across = y * ellipse.slope
    return x * x + across * across - ellipse.square


@inlined
def margin_at(ellipse: Ellipse, x: float, y: float) -> float:
    """The margin whose gains lie in this direction from the origin, -pi to pi."""
    turn = math.atan2(y * ellipse.slope, x) - ellipse.angle
    return turn - math.tau * round(turn / math.tau)


@compiled
def edge_point(plant: SampledPlant, w: float, work: NDArray[np.complex128]) -> tuple[float, float]:
    """x and y of the edge at one frequency."""
    value = needed(plant, w, work)
    return value.real, value.imag / slope(w, plant.period)


@compiled
def gap(plant: SampledPlant, ellipse: Ellipse, w: float, work: NDArray[np.complex128]) -> float:
    """How far the edge is outside the ellipse, without its crossing at the ellipse's own frequency."""
    x, y = edge_point(plant, w, work)
    return beyond(ellipse, x, y) / (w - ellipse.w)


@compiled
def crossing(
    plant: SampledPlant,
    ellipse: Ellipse,
    low: float,
    high: float,
    at_low: float,
    at_high: float,
    work: NDArray[np.complex128],
) -> float:
    """The frequency in a bracket at which the edge crosses, by the Illinois rule with a halving where that stalls."""
    side = 0
    for turn in range(60):
        if high - low <= NARROW * high:
            break
        middle = low - at_low * (high - low) / (at_high - at_low)
        if turn % 4 == 3 or not low < middle < high:
            middle = 0.5 * (low + high)
        if middle in (low, high):
            break
        value = gap(plant, ellipse, middle, work)
        if value == 0.0:
            return middle
        if (value > 0.0) == (at_low > 0.0):
            low, at_low = middle, value
            if side == -1:
                at_high *= 0.5
            side = -1
        else:
            high, at_high = middle, value
            if side == 1:
                at_low *= 0.5
            side = 1
    return 0.5 * (low + high)


@compiled
def hidden(
    plant: SampledPlant, ellipse: Ellipse, low: float, high: float, sign: float, work: NDArray[np.complex128]
) -> float:
    """A frequency in a bracket at which ``sign`` times the gap is below 0; NaN where a golden search finds none."""
    ratio = 0.5 * (math.sqrt(5.0) - 1.0)
    left, right = high - ratio * (high - low), low + ratio * (high - low)
    at_left = sign * gap(plant, ellipse, left, work)
    at_right = sign * gap(plant, ellipse, right, work)
    for _ in range(24):
        if at_left < 0.0:
            return left
        if at_right < 0.0:
            return right
        if at_left < at_right:
            high, right, at_right = right, left, at_left
            left = high - ratio * (high - low)
            at_left = sign * gap(plant, ellipse, left, work)
        else:
            low, left, at_left = left, right, at_right
            right = low + ratio * (high - low)
            at_right = sign * gap(plant, ellipse, right, work)
    return math.nan


@compiled
def positive_span(ellipse: Ellipse, rule: int) -> tuple[float, float]:
    """The margins from 0 to 90 degrees at which both gains are above 0; empty where the second is not the larger.

    The controller's own angle runs from that of an integral part alone to 0, a proportional part alone.
    """
    share = 0.5 if rule == BACKWARD else -0.5 if rule == FORWARD else 0.0
    width = 0.5 * math.pi + math.atan(share / ellipse.slope)
    high = -ellipse.angle
    high += math.tau * math.ceil(-high / math.tau)
    return max(high - width, 0.0), min(high, LARGEST)


@compiled
def seen_from(plant: SampledPlant, edge: Edge, ellipse: Ellipse, work: NDArray[np.complex128]) -> Walk:
    """The edge's points with their gaps, one put on either side of the crossover and none between those two."""
    size = edge.w.size
    first, last = (1.0 - BESIDE) * ellipse.w, (1.0 + BESIDE) * ellipse.w
    below = 0
    while below < size and edge.w[below] < first:
        below += 1
    above = below
    while above < size and edge.w[above] <= last:
        above += 1
    shift = below + 2 - above
    w, x, y, gaps = (np.empty(size + shift), np.empty(size + shift), np.empty(size + shift), np.empty(size + shift))
    for k in range(w.size):
        if k < below or k > below + 1:
            source = k if k < below else k - shift
            w[k], x[k], y[k] = edge.w[source], edge.x[source], edge.y[source]
        else:
            w[k] = first if k == below else last
            x[k], y[k] = edge_point(plant, w[k], work)
        gaps[k] = beyond(ellipse, x[k], y[k]) / (w[k] - ellipse.w)
    return Walk(w, x, y, gaps, below)


@compiled
def may_matter(ellipse: Ellipse, walk: Walk, k: int, low: float, high: float) -> bool:
    """Whether a crossing before point ``k`` may lie in the span: not where both points are well to one side of it."""
    one = margin_at(ellipse, walk.x[k - 1], walk.y[k - 1])
    two = margin_at(ellipse, walk.x[k], walk.y[k])
    return abs(one - two) > LARGEST or (max(one, two) > low - WIDE and min(one, two) < high + WIDE)


@compiled
def hides_pair(walk: Walk, k: int) -> bool:
    """Whether the edge comes near the ellipse at point ``k`` and turns back, so that a pair may hide beside it."""
    if k + 1 >= walk.w.size or k in (walk.crossover, walk.crossover + 1):
        return False
    sign = 1.0 if walk.gap[k] > 0.0 else -1.0
    before, here, after = sign * walk.gap[k - 1], sign * walk.gap[k], sign * walk.gap[k + 1]
    return bool(0.0 < here <= before and here <= after and here < 2.0 * max(before - here, after - here))


@compiled
def put_in(margin: NDArray[np.float64], change: NDArray[np.int64], count: int, place: float, by: int) -> int:
    """Put a crossing in its place among the first ``count``, and say how many there are now."""
    k = count
    while k > 0 and margin[k - 1] > place:
        margin[k], change[k] = margin[k - 1], change[k - 1]
        k -= 1
    margin[k], change[k] = place, by
    return count + 1


@compiled
def crossings_of(
    plant: SampledPlant, edge: Edge, ellipse: Ellipse, low: float, high: float, work: NDArray[np.complex128]
) -> Crossings:
    """Where the edge crosses the ellipse between two margins, in rising order."""
    walk = seen_from(plant, edge, ellipse, work)
    size = walk.w.size
    margin = np.empty(2 * size + 1)
    change = np.empty(2 * size + 1, dtype=np.int64)
    count = 0
    for k in range(1, size):
        if k == walk.crossover + 1:
            continue
        one, two, at_one, at_two = walk.w[k - 1], walk.w[k], walk.gap[k - 1], walk.gap[k]
        parts = 1
        middle = at_middle = math.nan
        if (at_one > 0.0) != (at_two > 0.0):
            if not may_matter(ellipse, walk, k, low, high):
                continue
        elif hides_pair(walk, k):
            two, at_two = walk.w[k + 1], walk.gap[k + 1]
            middle = hidden(plant, ellipse, one, two, 1.0 if at_one > 0.0 else -1.0, work)
            if math.isnan(middle):
                continue
            at_middle = gap(plant, ellipse, middle, work)
            parts = 2
        else:
            continue
        for part in range(parts):
            if parts == 1:
                found = crossing(plant, ellipse, one, two, at_one, at_two, work)
                rises = at_two > 0.0
            elif part == 0:
                found = crossing(plant, ellipse, one, middle, at_one, at_middle, work)
                rises = at_middle > 0.0
            else:
                found = crossing(plant, ellipse, middle, two, at_middle, at_two, work)
                rises = at_two > 0.0
            x, y = edge_point(plant, found, work)
            place = margin_at(ellipse, x, y)
            if low < place < high:
                # Below the crossover the gap's sign is turned round.
                count = put_in(margin, change, count, place, -2 if rises == (found > ellipse.w) else 2)
    if abs(edge.last) < math.sqrt(ellipse.square):
        y = -math.sqrt(ellipse.square - edge.last * edge.last) / ellipse.slope
        place = margin_at(ellipse, edge.last, y)
        if low < place < high:
            count = put_in(margin, change, count, place, 1 if y < edge.y[edge.w.size - 1] else -1)
    return Crossings(margin[:count].copy(), change[:count].copy())


@compiled
def outside_at(plant: SampledPlant, edge: Edge, ellipse: Ellipse, margin: float, work: NDArray[np.complex128]) -> int:
    """Poles outside the circle with the gains of a margin, more than with next to no gain."""
    radius = math.sqrt(ellipse.square)
    x = radius * math.cos(margin + ellipse.angle)
    y = radius * math.sin(margin + ellipse.angle) / ellipse.slope
    square = ellipse.slope * ellipse.slope
    before = edge.x[0] * y - edge.y[0] * x
    # The edge starts on the axis of no integral, at the plant's gain at rest or, of a free train, in the origin.
    count = 2 if before > 0.0 and edge.y[0] > 0.0 else 0
    for k in range(1, edge.w.size):
        after = edge.x[k] * y - edge.y[k] * x
        if (after > 0.0) != (before > 0.0):
            share = before / (before - after)
            at_x = edge.x[k - 1] + share * (edge.x[k] - edge.x[k - 1])
            at_y = edge.y[k - 1] + share * (edge.y[k] - edge.y[k - 1])
            first = beyond(ellipse, edge.x[k - 1], edge.y[k - 1])
            second = beyond(ellipse, edge.x[k], edge.y[k])
            between = beyond(ellipse, at_x, at_y)
            inside = max(first, second) < -CLEAR * ellipse.square
            clear = min(first, second, between) > CLEAR * ellipse.square
            if not (inside or clear):
                low, high = edge.w[k - 1], edge.w[k]
                for _ in range(HALVINGS):
                    middle = 0.5 * (low + high)
                    at_x, at_y = edge_point(plant, middle, work)
                    if (at_x * y - at_y * x > 0.0) == (before > 0.0):
                        low = middle
                    else:
                        high = middle
                between = beyond(ellipse, at_x, at_y)
            if between < 0.0 and at_x * x + at_y * y * square > 0.0:
                count += 2 if after > 0.0 else -2
        before = after
    if 0.0 < edge.last / x < 1.0:
        below = y * edge.last / x < edge.y[edge.w.size - 1]
        count += 1 if below == (x > 0.0) else -1
    return count


@compiled
def reach(
    plant: SampledPlant, edge: Edge, rule: int, crossover: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.int64]]:
    """Pieces of margins at each crossover, and the poles outside on each, less those with next to no gain.

    ``plant`` reduced. Margins, shape (n, PIECES, 2), start and end [rad], NaN beyond the last piece; counts,
    shape (n, PIECES).
    """
    work = workspace(plant)
    span = np.full((crossover.size, PIECES, 2), np.nan)
    outside = np.zeros((crossover.size, PIECES), dtype=np.int64)
    for column in range(crossover.size):
        w = crossover[column]
        own = needed(plant, w, work)
        square = own.real * own.real + own.imag * own.imag
        if not 0.0 < square < math.inf:
            continue
        ellipse = Ellipse(w, math.atan2(own.imag, own.real), square, slope(w, plant.period))
        low, high = positive_span(ellipse, rule)
        if not low < high:
            continue
        found = crossings_of(plant, edge, ellipse, low, high, work)
        count = found.margin.size + 1
        ends = np.empty(count + 1)
        ends[0], ends[count] = low, high
        for k in range(1, count):
            ends[k] = found.margin[k - 1]
        widest = 0
        for k in range(count):
            if ends[k + 1] - ends[k] > ends[widest + 1] - ends[widest]:
                widest = k
        poles = np.empty(count, dtype=np.int64)
        poles[widest] = outside_at(plant, edge, ellipse, 0.5 * (ends[widest] + ends[widest + 1]), work)
        for k in range(widest + 1, count):
            poles[k] = poles[k - 1] + found.change[k - 1]
        for k in range(widest - 1, -1, -1):
            poles[k] = poles[k + 1] - found.change[k]
        kept = np.ones(count, dtype=np.bool_)
        for _ in range(count - PIECES):
            narrowest = -1
            for k in range(count):
                if kept[k] and (narrowest < 0 or ends[k + 1] - ends[k] < ends[narrowest + 1] - ends[narrowest]):
                    narrowest = k
            kept[narrowest] = False
        place = 0
        for k in range(count):
            if kept[k]:
                span[column, place, 0], span[column, place, 1] = ends[k], ends[k + 1]
                outside[column, place] = poles[k]
                place += 1
    return span, outside
