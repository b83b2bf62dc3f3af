"""Stability, open loop, margins and bandwidth of the sampled loops themselves.

``L = C(z) G(z)`` with ``C`` the PI controller and ``G`` of :mod:`gainbench.sampling`, from above 0 to the loop's own
Nyquist frequency, that one included.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.loop_grid import loop_grid
from gainbench.plant import Plant
from gainbench.results import Gains, LockedStep, LoopCurve, LoopFigures
from gainbench.sampling import Hardware, Loop

POLE_TOLERANCE = 1e-9
"""A closed-loop pole below 1 by less than this, or above by less, is on the unit circle and counts as stable."""
LARGEST_WINDOW = 60
"""Speed windows of more periods are judged by the argument principle: their state matrices take seconds."""
_NOTHING = np.empty(0)
_NOTHING.setflags(write=False)
_SHARP = 0.35
"""A pole whose decay is less than this share of its frequency gets points of its own on the curve."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopReading:
    """A loop with one set of gains: its figures and its curve."""

    figures: LoopFigures
    curve: LoopCurve


def is_stable(loop: Loop, gains: Gains) -> bool:
    """Whether all closed-loop poles are below 1 + 1e-9 in size, the free rotor angle left out.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    gains : Gains
        Of its PI controller.

    Returns
    -------
    bool
    """
    if loop.plant.window > LARGEST_WINDOW:
        return _winds_inside(loop, gains)
    return all(_inside(pole) for pole in closed_poles(loop, gains))


def closed_poles(loop: Loop, gains: Gains) -> list[complex]:
    """All closed-loop poles less one, the free rotor angle left out.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    gains : Gains
        Of its PI controller.

    Returns
    -------
    list
        Of the states of plant and controller.
    """
    from gainbench.kernels.lifting import closed_loop

    return _poles(closed_loop(loop.plant, gains.kp, gains.ki * loop.plant.period, loop.rule))


def _poles(matrix: NDArray[np.float64]) -> list[complex]:
    """Eigenvalues; LAPACK by name, since its general wrapper costs twice the work on matrices of this size."""
    from scipy.linalg.lapack import dgeev

    real, imaginary, _, _, trouble = dgeev(matrix, compute_vl=0, compute_vr=0)
    if trouble != 0:
        raise np.linalg.LinAlgError("the eigenvalues of a loop did not converge")
    return list(map(complex, real.tolist(), imaginary.tolist()))


def _inside(pole: complex) -> bool:
    """Whether a pole, less one, is on or within the unit circle: ``|1 + pole|^2 - 1`` keeps the digits close to one."""
    return 2.0 * pole.real + pole.real * pole.real + pole.imag * pole.imag < 2.0 * POLE_TOLERANCE


def _winds_inside(loop: Loop, gains: Gains) -> bool:
    from gainbench.kernels.winding import growth

    others = _poles(loop.plant.m)
    slowest = min(others, key=abs)
    taken_out = slowest.imag == 0.0
    slow = slowest.real if taken_out else math.nan
    if taken_out:
        others.remove(slowest)
    grid = loop_grid(loop.plant.period, loop.plant.window, peaks=_NOTHING, spreads=_NOTHING)
    turns = growth(loop.plant, gains.kp, gains.ki * loop.plant.period, loop.rule, slow, grid.w)
    beyond = sum(not _inside(pole) for pole in others)
    # Zeros within less poles within, of what is left: poles that were taken out leave a zero more.
    return bool(beyond + int(taken_out) + int(gains.ki != 0.0) - round(turns) == 0)


def plant_response(loop: Loop, frequency: NDArray[np.float64]) -> NDArray[np.complex128]:
    """G over frequency: the measured value over the controller's output.

    Parameters
    ----------
    loop : Loop
        Current loop: A/V; speed loop: rad/(s A).
    frequency : ndarray, shape (n,)
        Up to the Nyquist frequency [rad/s], > 0.

    Returns
    -------
    ndarray, shape (n,)
    """
    from gainbench.kernels import frequency as kernel

    response: NDArray[np.complex128] = kernel.plant_response(
        loop.plant, np.ascontiguousarray(frequency, dtype=np.float64)
    )
    return response


def open_loop(loop: Loop, gains: Gains, *, frequency: NDArray[np.float64]) -> NDArray[np.complex128]:
    """L over frequency.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    gains : Gains
        Of its PI controller.
    frequency : ndarray, shape (n,)
        Up to the Nyquist frequency [rad/s], > 0.

    Returns
    -------
    ndarray, shape (n,)
    """
    from gainbench.kernels import frequency as kernel

    w = np.ascontiguousarray(frequency, dtype=np.float64)
    period = loop.plant.period
    controller = [kernel.pi_at(gains.kp, gains.ki * period, loop.rule, one, period) for one in w]
    product: NDArray[np.complex128] = kernel.plant_response(loop.plant, w) * np.array(controller, dtype=np.complex128)
    return product


def read_loop(loop: Loop, gains: Gains, *, stable: bool | None = None) -> LoopReading:
    """All figures of a loop with one set of gains, and its curve for drawing.

    Figures are found as brackets on the curve and refined on the loop itself: the first fall of ``|L|`` through 1,
    over all ``|L| = 1`` the smallest distance of the phase to -180 degrees and the smallest delay, the nearest
    crossings of the negative real axis (the Nyquist frequency included), the largest ``|1/(1 + L)|`` and the first
    fall of ``|L/(1 + L)|`` through ``1/sqrt(2)``.

    Parameters
    ----------
    loop : Loop
        Current or speed loop.
    gains : Gains
        Of its PI controller.
    stable : bool, optional
        Whether the loop is stable, where that is known already.

    Returns
    -------
    LoopReading
        Figures other than ``stable`` are None where the loop is unstable.
    """
    from gainbench.kernels.loop_figures import loop_numbers

    if stable is None:
        stable = is_stable(loop, gains)
    period = loop.plant.period
    peaks, spreads = sharp_modes(loop)
    grid = loop_grid(period, loop.plant.window, peaks=peaks, spreads=spreads)
    found, frequency_hz, response = loop_numbers(loop.plant, gains.kp, gains.ki * period, loop.rule, grid)
    frequency_hz.setflags(write=False)
    response.setflags(write=False)
    curve = LoopCurve(frequency_hz=frequency_hz, open_loop=response)
    if not stable:
        return LoopReading(figures=LoopFigures(stable=False), curve=curve)
    crossover, phase_margin, delay_margin, gain_margin, gain_reduction, sensitivity, bandwidth = map(_known, found)
    return LoopReading(
        figures=LoopFigures(
            stable=True,
            crossover_hz=crossover,
            phase_margin_deg=phase_margin,
            delay_margin_s=delay_margin,
            gain_margin_db=gain_margin,
            gain_reduction_db=gain_reduction,
            peak_sensitivity=sensitivity,
            bandwidth_hz=bandwidth,
        ),
        curve=curve,
    )


def _known(value: float) -> float | None:
    """None for what the kernel found none of, and for a sensitivity without bound."""
    return value if math.isfinite(value) else None


def sharp_modes(loop: Loop) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Frequencies and half widths [rad/s] of what the even grid could miss."""
    modes = [mode for mode in loop.modes if -mode.real < _SHARP * mode.imag]
    if loop.plant.m.shape[0] > 2:
        period = loop.plant.period
        for pole in _poles(loop.plant.m):
            # The lower one of a pair turns the other way, and a positive real one not at all.
            if pole.imag < 0.0 or (pole.imag == 0.0 and pole.real > -1.0):
                continue
            turn, size = math.atan2(pole.imag, 1.0 + pole.real), abs(1.0 + pole)
            if turn > 0.0 and size > 0.0 and abs(math.log(size)) < _SHARP * turn:
                modes.append(complex(math.log(size), turn) / period)
    if not modes:
        return _NOTHING, _NOTHING
    return np.array([mode.imag for mode in modes]), np.array([abs(mode.real) for mode in modes])


def locked_step(own: Hardware, plant: Plant, *, gains: Gains, rule: int) -> LockedStep:
    """The current loop's step with the rotor locked, without a clamp, until it settles.

    ``L di/dt = v - R i`` between ticks, so that 10 % and 90 % are met in closed form and not at whole ticks. The loop
    is linear: a tenth of the current limit, or any other reference, gives the same share.

    Parameters
    ----------
    own : Hardware
        Timing of the current loop.
    plant : Plant
        R, L and the sampler's filter.
    gains : Gains
        Of the current loop.
    rule : int
        Integrator rule: 0 backward, 1 forward, 2 trapezoid.

    Returns
    -------
    LockedStep
        Figures are None where the step does not get there, as with a locked loop that does not settle.
    """
    from gainbench.kernels import locked_step as kernel

    winding = kernel.Winding(plant.resistance, plant.inductance, plant.filter_time)
    pi = kernel.LockedPi(gains.kp, gains.ki * own.period, rule)
    rise, largest, time, curve = kernel.locked_step(winding, own.period, own.delay.held, own.delay.part, pi)
    time.setflags(write=False)
    curve.setflags(write=False)
    return LockedStep(
        rise_s=_known(rise),
        overshoot_percent=_known(max(100.0 * (largest - 1.0), 0.0 * largest)),
        time=time,
        current=curve,
    )
