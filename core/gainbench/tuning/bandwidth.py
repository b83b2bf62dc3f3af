"""Bandwidth and margin, met exactly on the sampled loop.

Every crossover has one pair of gains with the margin; along that curve the crossovers are sought at which
``|L/(1 + L)|`` is ``1/sqrt(2)`` at the bandwidth. Of those whose first fall is there the highest is taken.
"""

from __future__ import annotations

import math

import numpy as np

from gainbench.margins import read_loop
from gainbench.results import Refusal
from gainbench.sampling import Loop
from gainbench.tuning.exact import crossover_grid, gains_for, gains_that_hold
from gainbench.tuning.outcome import Design

AGREES = 1e-6
"""Relative distance within which a figure of the loop is the one asked for."""
COARSE = 4
"""Every so many crossovers of the grid are tried when the nearest bandwidth is sought."""
MARGIN_STEP = math.radians(2.0)
MARGIN_FINEST = math.radians(0.01)


def bandwidth_margin(loop: Loop, *, bandwidth: float, margin: float) -> Design:
    """Gains with this bandwidth, and this margin at their crossover: of several, those of the highest crossover.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    bandwidth : float
        First frequency where ``|L/(1 + L)|`` falls through ``1/sqrt(2)`` [rad/s], > 0.
    margin : float
        Phase margin at the crossover [rad], 0 to pi/2.

    Returns
    -------
    Design
        A refusal where no positive gains with a stable loop meet both, with the nearest bandwidth and the largest
        margin that can be met.
    """
    nyquist_hz = 0.5 / loop.plant.period
    if not bandwidth < math.tau * nyquist_hz:
        reason = f"{bandwidth / math.tau:.4g} Hz is not below {nyquist_hz:.4g} Hz, half the rate of this loop"
        return Design(
            refusal=Refusal(reason=reason, nearest_bandwidth=nearest_bandwidth(loop, bandwidth, margin=margin))
        )
    crossover = crossover_for_bandwidth(loop, bandwidth, margin=margin)
    if crossover is not None:
        return Design(gains=gains_for(loop, crossover, margin=margin), stable=True, asked_crossover=crossover)
    nearest = nearest_bandwidth(loop, bandwidth, margin=margin)
    return Design(
        refusal=Refusal(
            reason=f"no positive gains with a stable loop have a bandwidth of {bandwidth / math.tau:.4g} Hz and "
            f"{math.degrees(margin):.1f} degrees at their crossover: delay, plant and measurement leave no room",
            nearest_bandwidth=nearest,
            largest_margin=_largest_margin(loop, bandwidth),
        )
    )


def reached_bandwidth(loop: Loop, crossover: float, *, margin: float) -> float | None:
    """The bandwidth that a loop has which crosses over here with this margin.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    crossover : float
        wc [rad/s], > 0.
    margin : float
        Phase margin there [rad].

    Returns
    -------
    float or None
        [rad/s]; None where positive gains with a stable loop do not meet the two, where the loop has another crossover
        before this one, or where ``|L/(1 + L)|`` never falls through ``1/sqrt(2)``.
    """
    gains = gains_that_hold(loop, crossover, margin=margin)
    if gains is None:
        return None
    figures = read_loop(loop, gains, stable=True).figures
    if figures.crossover_hz is None or figures.bandwidth_hz is None:
        return None
    if abs(figures.crossover_hz * math.tau / crossover - 1.0) > AGREES:
        return None
    return figures.bandwidth_hz * math.tau


def crossover_for_bandwidth(loop: Loop, bandwidth: float, *, margin: float) -> float | None:
    """The crossover that :func:`bandwidth_margin` designs for, without what is nearest where there is none.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    bandwidth : float
        First frequency where ``|L/(1 + L)|`` falls through ``1/sqrt(2)`` [rad/s], > 0 and below the Nyquist frequency.
    margin : float
        Phase margin at the crossover [rad], 0 to pi/2.

    Returns
    -------
    float or None
        The highest [rad/s]; None where no positive gains with a stable loop meet both.
    """
    from gainbench.kernels.targets import crossovers_for_bandwidth

    found = crossovers_for_bandwidth(loop.plant, loop.rule, margin, bandwidth, crossover_grid(loop))
    for crossover in found:
        reached = reached_bandwidth(loop, float(crossover), margin=margin)
        if reached is not None and abs(reached / bandwidth - 1.0) < AGREES:
            return float(crossover)
    return None


def nearest_bandwidth(loop: Loop, bandwidth: float, *, margin: float) -> float | None:
    """The bandwidth closest to the asked one, by ratio, that can be met with the margin [rad/s]; None if none."""
    grid = crossover_grid(loop)[::COARSE]
    reached = [(w, reached_bandwidth(loop, float(w), margin=margin)) for w in grid]
    known = [(float(w), value) for w, value in reached if value is not None]
    if not known:
        return None

    def distance(value: float | None) -> float:
        return math.inf if value is None else abs(math.log(value / bandwidth))

    best_w, best = min(known, key=lambda pair: distance(pair[1]))
    step = float(grid[1] / grid[0])
    while step > 1.0 + 1e-5:
        for w in (best_w * step, best_w / step):
            value = reached_bandwidth(loop, w, margin=margin)
            if value is not None and distance(value) < distance(best):
                best_w, best = w, value
                break
        else:
            step = math.sqrt(step)
    return best


def _largest_margin(loop: Loop, bandwidth: float) -> float | None:
    """The largest margin, up to 90 degrees, with which the bandwidth can be met [rad]."""
    unmet = math.pi / 2.0
    for margin in np.arange(math.pi / 2.0, -1e-9, -MARGIN_STEP):
        if crossover_for_bandwidth(loop, bandwidth, margin=float(margin)) is not None:
            met = float(margin)
            while unmet - met > MARGIN_FINEST:
                middle = 0.5 * (met + unmet)
                if crossover_for_bandwidth(loop, bandwidth, margin=middle) is not None:
                    met = middle
                else:
                    unmet = middle
            return met
        unmet = float(margin)
    return None
