"""Crossover and margin, met exactly on the sampled loop, and what is nearest where they cannot be met.

At a frequency wc the loop is exp(j (margin - pi)) for one controller value only, ``C = exp(j (margin - pi))/G(wc)``.
With ``C = kp + (Ki T) k(wc)`` and the integrator's ``k``, that is two real equations for two real gains.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from gainbench.margins import is_stable, plant_response
from gainbench.results import Gains, Refusal
from gainbench.sampling import Loop
from gainbench.tuning.outcome import Design

DECADES = 5.0
"""How far below the Nyquist frequency crossovers are looked for."""
GRID = 320
FINEST = 1e-7
"""Relative width at which the edge of what can be met is known."""
MARGIN_STEP = math.radians(0.5)
"""Step of the search for the largest margin."""


def gains_for(loop: Loop, crossover: float, *, margin: float) -> Gains | None:
    """The one pair of gains of any sign with ``|L| = 1`` and this margin at the crossover; None at Nyquist and above.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    crossover : float
        wc [rad/s], > 0.
    margin : float
        [rad].

    Returns
    -------
    Gains or None
    """
    period = loop.plant.period
    if not crossover * period < math.pi:
        return None
    from gainbench.kernels.frequency import gains_for_margin

    kp, ki_period = gains_for_margin(loop.plant, crossover, loop.rule, margin)
    return Gains(kp=kp, ki=ki_period / period)


def holds(loop: Loop, gains: Gains | None) -> bool:
    """Whether gains are positive, finite, and keep the loop stable."""
    if gains is None or not (0.0 < gains.kp < math.inf and 0.0 < gains.ki < math.inf):
        return False
    return is_stable(loop, gains)


def gains_that_hold(loop: Loop, crossover: float, *, margin: float) -> Gains | None:
    """As :func:`gains_for`; None too where they are not positive and finite, or do not keep the loop stable.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    crossover : float
        wc [rad/s], > 0.
    margin : float
        [rad].

    Returns
    -------
    Gains or None
    """
    gains = gains_for(loop, crossover, margin=margin)
    return gains if holds(loop, gains) else None


def crossover_margin(loop: Loop, *, crossover: float, margin: float) -> Design:
    """Gains with this margin at this crossover, exact on the sampled loop.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    crossover : float
        wc [rad/s], > 0.
    margin : float
        Phase margin there [rad], 0 to pi/2.

    Returns
    -------
    Design
        A refusal where no positive gains with a stable loop meet both, with the nearest crossover and the largest
        margin that can be met.
    """
    gains = gains_that_hold(loop, crossover, margin=margin)
    if gains is not None:
        return Design(gains=gains, stable=True, asked_crossover=crossover)
    return Design(
        refusal=Refusal(
            reason=_limit(loop, crossover=crossover, margin=margin),
            nearest_crossover=nearest_crossover(loop, crossover, margin=margin),
            largest_margin=largest_margin(loop, crossover),
        ),
        asked_crossover=crossover,
    )


def crossover_grid(loop: Loop) -> NDArray[np.float64]:
    """Rising crossovers to look on, up to just below the Nyquist frequency [rad/s], shape (n,)."""
    nyquist = math.pi / loop.plant.period
    return np.geomspace(nyquist * 10.0**-DECADES, nyquist * (1.0 - 1e-6), GRID)


def nearest_crossover(loop: Loop, crossover: float, *, margin: float) -> float | None:
    """The crossover closest to the asked one, by ratio, that positive gains with a stable loop meet; None if none."""
    from gainbench.kernels.frequency import gains_over

    period = loop.plant.period
    grid = crossover_grid(loop)
    kp, ki_period = gains_over(plant_response(loop, grid), grid, period, loop.rule, margin)
    candidates = np.flatnonzero((kp > 0.0) & (ki_period > 0.0))
    order = candidates[np.argsort(np.abs(np.log(grid[candidates] / crossover)))]
    for k in order:
        if is_stable(loop, Gains(kp=float(kp[k]), ki=float(ki_period[k]) / period)):
            beyond = min(max(crossover, grid[0]), grid[-1])
            return _edge(
                lambda w: gains_that_hold(loop, w, margin=margin) is not None,
                met=float(grid[k]),
                unmet=float(grid[k - 1] if beyond < grid[k] else grid[min(k + 1, GRID - 1)]),
                stop=beyond,
            )
    return None


def largest_margin(loop: Loop, crossover: float) -> float | None:
    """The largest margin, up to 90 degrees, that positive gains with a stable loop meet there [rad]; None if none."""
    if not crossover * loop.plant.period < math.pi:
        return None
    top = math.pi / 2.0
    steps = np.arange(top, -1e-9, -MARGIN_STEP)
    for k, margin in enumerate(steps):
        if gains_that_hold(loop, crossover, margin=float(margin)) is not None:
            if k == 0:
                return top
            return _edge(
                lambda value: gains_that_hold(loop, crossover, margin=value) is not None,
                met=float(margin),
                unmet=float(steps[k - 1]),
                stop=float(steps[k - 1]),
            )
    return None


def _edge(meets: Callable[[float], bool], *, met: float, unmet: float, stop: float) -> float:
    """The value closest to ``unmet`` that still meets, never beyond ``stop``."""
    unmet = max(unmet, stop) if unmet < met else min(unmet, stop)
    if unmet == met or meets(unmet):
        return unmet
    while abs(unmet - met) > FINEST * abs(met) + 1e-12:
        middle = 0.5 * (met + unmet)
        if meets(middle):
            met = middle
        else:
            unmet = middle
    return met


def _limit(loop: Loop, *, crossover: float, margin: float) -> str:
    """What stands in the way, as a sentence."""
    gains = gains_for(loop, crossover, margin=margin)
    hertz, wanted = crossover / math.tau, math.degrees(margin)
    nyquist = 0.5 / loop.plant.period
    if gains is None:
        return f"{hertz:.4g} Hz is not below {nyquist:.4g} Hz, half the rate of this loop"
    # Followed from far below: the phase itself is only known to whole turns.
    way = np.geomspace(crossover_grid(loop)[0] * min(1.0, crossover * loop.plant.period), crossover, 400)
    room = 180.0 + math.degrees(float(np.unwrap(np.angle(plant_response(loop, way)))[-1]))
    if wanted > room:
        if room <= 0.0:
            return (
                f"at {hertz:.4g} Hz delay and plant have already turned the phase to {room - 180.0:.1f} degrees, "
                f"and a PI controller can only take more"
            )
        return (
            f"at {hertz:.4g} Hz delay and plant leave {room:.1f} degrees with a proportional part alone, less than the "
            f"{wanted:.1f} asked for"
        )
    if wanted < room - 90.0:
        return (
            f"at {hertz:.4g} Hz even an integral part alone leaves {room - 90.0:.1f} degrees, more than the "
            f"{wanted:.1f} asked for, and a PI controller cannot take away more"
        )
    if not (gains.kp > 0.0 and gains.ki > 0.0):
        return (
            f"at {hertz:.4g} Hz {wanted:.1f} degrees would take a gain that is zero or negative: Kp {gains.kp:.4g}, "
            f"Ki {gains.ki:.4g} in SI units"
        )
    return (
        f"the only gains that give {wanted:.1f} degrees at {hertz:.4g} Hz make the loop unstable, because of what it "
        f"does at other frequencies"
    )
