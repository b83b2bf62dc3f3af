"""The motion of one body under a known torque, for many sets of parameters side by side.

Forwards ``J dw/dt = T - cf - bf w``, backwards ``J dw/dt = T + cb - bb w``; at rest it stays while ``-cb <= T <= cf``.
The torque is constant over an interval, so that every piece between two changes of direction is exact.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.compiled import compiled, inlined

INERTIA = 0
FORWARD_VISCOUS = 1
FORWARD_DRAG = 2
BACKWARD_VISCOUS = 3
BACKWARD_DRAG = 4
COLUMNS = 5
"""Columns of a set of parameters: SI, drags are what brakes a slow motion in that direction."""

_PIECES = 6
"""Changes of direction that one interval may hold; what is left after them is spent at rest."""
_SMALL = 1e-4


@inlined
def first_part(x: float) -> float:
    """(1 - exp(-x))/x."""
    if abs(x) < _SMALL:
        return 1.0 - x * (0.5 - x * (1.0 / 6.0 - x / 24.0))
    return -math.expm1(-x) / x


@inlined
def second_part(x: float) -> float:
    """(x - 1 + exp(-x))/x^2."""
    if abs(x) < 1e-2:
        return 0.5 - x * (1.0 / 6.0 - x * (1.0 / 24.0 - x * (1.0 / 120.0 - x / 720.0)))
    return (x + math.expm1(-x)) / (x * x)


@compiled
def turn(speed: float, torque: float, step: float, row: NDArray[np.float64]) -> tuple[float, float]:
    """Speed after an interval and the angle turned in it, through rest and reversal."""
    angle = 0.0
    for _ in range(_PIECES):
        if speed > 0.0 or (speed == 0.0 and torque > row[FORWARD_DRAG]):
            way, push, slow = 1.0, torque - row[FORWARD_DRAG], row[FORWARD_VISCOUS]
        elif speed < 0.0 or (speed == 0.0 and -torque > row[BACKWARD_DRAG]):
            way, push, slow = -1.0, torque + row[BACKWARD_DRAG], row[BACKWARD_VISCOUS]
        else:
            return 0.0, angle
        push /= row[INERTIA]
        slow /= row[INERTIA]
        x = slow * step
        one, two = first_part(x), second_part(x)
        after = speed * (1.0 - x * one) + push * step * one
        if after * way > 0.0 or (speed == 0.0 and after == 0.0):
            return after, angle + step * (speed * one + push * step * two)
        # exp(slow t) = 1 - slow speed/push where the speed meets zero.
        ratio = -slow * speed / push
        until = -speed / push if abs(ratio) < 1e-8 else math.log1p(ratio) / slow
        until = min(max(until, 0.0), step)
        x = slow * until
        angle += until * (speed * first_part(x) + push * until * second_part(x))
        speed = 0.0
        step -= until
        if step <= 0.0:
            break
    return 0.0, angle


@compiled
def run_motion(
    torque: NDArray[np.float64],
    step: float,
    sets: NDArray[np.float64],
    source: NDArray[np.int64],
    bounds: NDArray[np.int64],
    starts: NDArray[np.float64],
    angle_out: bool,
    measured: NDArray[np.float64],
    follow: NDArray[np.float64],
    out: NDArray[np.float64],
) -> None:
    """Run every set over every segment, each segment from a start of its own.

    Parameters
    ----------
    torque : ndarray, shape (n_sources, n)
        Mean torque from each sample to the next [N m].
    step : float
        From sample to sample [s].
    sets : ndarray, shape (n_sets, 5)
        Parameters in the order of the constants above.
    source : ndarray, shape (n_sets,)
        Which row of ``torque`` drives the set.
    bounds : ndarray, shape (n_segments + 1,)
        First sample of each segment, and n at the end.
    starts : ndarray, shape (n_sets, n_segments, 2)
        Speed [rad/s] and angle [rad] at the first sample of each segment.
    angle_out : bool
        True puts out the angle, False the speed.
    measured : ndarray, shape (n,)
        What is put out, as it was measured [rad or rad/s].
    follow : ndarray, shape (2,)
        Share of what is measured over what is put out that the speed [1 or 1/s] and the angle [1] are moved by after
        every sample; zero twice runs the motion freely.
    out : ndarray, shape (n_sets, n)
        Filled.
    """
    for one in range(sets.shape[0]):
        row = sets[one]
        drive = torque[source[one]]
        inertia = row[INERTIA]
        x = row[FORWARD_VISCOUS] / inertia * step
        forward_decay = 1.0 - x * first_part(x)
        forward_one, forward_two = first_part(x) * step / inertia, second_part(x) * step * step / inertia
        x = row[BACKWARD_VISCOUS] / inertia * step
        backward_decay = 1.0 - x * first_part(x)
        backward_one, backward_two = first_part(x) * step / inertia, second_part(x) * step * step / inertia
        follows = follow[0] != 0.0 or follow[1] != 0.0
        for segment in range(bounds.size - 1):
            speed, angle = starts[one, segment, 0], starts[one, segment, 1]
            first, last = bounds[segment], bounds[segment + 1]
            out[one, first] = angle if angle_out else speed
            for k in range(first, last - 1):
                now = drive[k]
                if follows:
                    beside = measured[k] - out[one, k]
                    speed += follow[0] * beside
                    angle += follow[1] * beside
                if speed > 0.0:
                    push = now - row[FORWARD_DRAG]
                    after = speed * forward_decay + push * forward_one
                    turned = speed * forward_one * inertia + push * forward_two
                    if after <= 0.0:
                        after, turned = turn(speed, now, step, row)
                elif speed < 0.0:
                    push = now + row[BACKWARD_DRAG]
                    after = speed * backward_decay + push * backward_one
                    turned = speed * backward_one * inertia + push * backward_two
                    if after >= 0.0:
                        after, turned = turn(speed, now, step, row)
                else:
                    after, turned = turn(speed, now, step, row)
                speed = after
                angle += turned
                out[one, k + 1] = angle if angle_out else speed
