"""Each loop as its PI controller meets it: the plant sampled exactly at the loop's own rate.

At the sample instant t_k = k Ts the current is sampled; the voltage that follows from it acts from
t_k + update_delay Ts until the next one does. A speed tick comes first in its instant. The current loop is opened
at the voltage command with the mechanics included and the feedforward cut; the speed loop is opened at the current
reference with the closed current loop inside, feedforward included, and the fast rate raised to the slow one.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.loop_records import SampledPlant
from gainbench.model import Firmware, IntegratorRule, SpeedSensor, Stage
from gainbench.plant import Plant, sampled_state, state_matrices
from gainbench.results import Gains

_RULES = {IntegratorRule.BACKWARD: 0, IntegratorRule.FORWARD: 1, IntegratorRule.TRAPEZOID: 2}
_SPEED = 1
"""Index of the motor's speed among the states."""
_WHOLE = 1e-9
"""An update delay this close to a whole number of periods is that number."""


class Loop(Protocol):
    """What margins and design methods need to know of a loop."""

    @property
    def plant(self) -> SampledPlant:
        """From the controller's output to its measured value."""

    @property
    def rule(self) -> int:
        """Integrator rule: 0 backward, 1 forward, 2 trapezoid."""

    @property
    def modes(self) -> tuple[complex, ...]:
        """Continuous eigenvalues whose resonance or antiresonance the loop may show [1/s]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class UpdateDelay:
    """The update delay as the kernels take it: ``held`` whole periods and a ``part`` of one."""

    held: int
    part: float


def update_delay(stage: Stage) -> UpdateDelay:
    """Split ``update_delay`` into whole periods and the rest, 0 to below 1."""
    held = math.floor(stage.update_delay + _WHOLE)
    part = stage.update_delay - held
    return UpdateDelay(held=held, part=part if part > _WHOLE else 0.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Hardware:
    """The plant over one current period, with the current loop's timing."""

    tick: NDArray[np.float64]
    """exp(a Ts) - I, then the columns of the older and of the newer voltage of a period, shape (n, n + 2)."""
    sampled_current: int
    period: float
    """Ts [s]."""
    delay: UpdateDelay
    modes: tuple[complex, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CurrentLoop:
    """The current loop, opened at the voltage command."""

    hardware: Hardware
    plant: SampledPlant
    rule: int

    @property
    def modes(self) -> tuple[complex, ...]:
        """As :class:`Loop`."""
        return self.hardware.modes


@dataclass(frozen=True, slots=True, kw_only=True)
class SpeedLoop:
    """The speed loop, opened at the current reference, with one set of current gains inside."""

    plant: SampledPlant
    rule: int
    modes: tuple[complex, ...]


def hardware(plant: Plant, stage: Stage) -> Hardware:
    """Plant and timing as the kernels take them.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    stage : Stage
        Rates and delays.

    Returns
    -------
    Hardware
        SI.
    """
    from gainbench.kernels.lifting import tick_step

    a, b = state_matrices(plant)
    delay, period = update_delay(stage), stage.current_period
    return Hardware(
        tick=tick_step(a, b[:, 0].copy(), period, delay.part),
        sampled_current=sampled_state(plant),
        period=period,
        delay=delay,
        modes=_elastic_modes(plant),
    )


def current_loop(own: Hardware, firmware: Firmware) -> CurrentLoop:
    """The current loop on this hardware.

    ``G(z) = c (z I - Phi)^-1 (g_old z^-(q+1) + g_new z^-q)`` with the update delay q + f: over the first f Ts of a
    period the voltage of q + 1 ticks ago acts, over the rest that of q ticks ago.

    Parameters
    ----------
    own : Hardware
        Plant and timing.
    firmware : Firmware
        For its integrator rule.

    Returns
    -------
    CurrentLoop
        Sampled at Ts.

    References
    ----------
    K. J. Astrom, B. Wittenmark, Computer-Controlled Systems, 3rd ed., 1997, section 2.3 (from memory).
    """
    # The last state, the angle, feeds nothing back.
    n = own.tick.shape[0] - 1
    nothing = np.zeros(n)
    sampled = np.zeros(n)
    sampled[own.sampled_current] = 1.0
    return CurrentLoop(
        hardware=own,
        plant=SampledPlant(
            m=own.tick[:n, :n].copy(),
            c=sampled,
            b0=own.tick[:n, n + 2].copy(),
            b1=own.tick[:n, n + 1].copy(),
            bw=nothing,
            d0=0.0,
            d1=0.0,
            dw=0.0,
            period=own.period,
            shift=own.delay.held,
            window=1,
            scale=1.0,
            filter_gain=1.0,
        ),
        rule=_RULES[firmware.integrator],
    )


def speed_loop(own: Hardware, plant: Plant, *, stage: Stage, firmware: Firmware, current: Gains) -> SpeedLoop:
    """The speed loop on this hardware, with these current gains inside.

    The one-tick map of the closed current loop is raised to the speed period: ``speed_delay`` ticks with the older
    current reference, the rest with the new one. An encoder measures ``(theta[n] - theta[n-m])/(m Tw)``, in the
    linear analysis without its counts.

    Parameters
    ----------
    own : Hardware
        Of the same plant and stage.
    plant : Plant
        For its back-EMF constant.
    stage : Stage
        Rates, sensor and filters.
    firmware : Firmware
        Integrator rule and feedforward.
    current : Gains
        Of the current loop [V/A], [V/(A s)].

    Returns
    -------
    SpeedLoop
        Sampled at Tw.

    References
    ----------
    T. Chen, B. Francis, Optimal Sampled-Data Control Systems, 1995, chapter 8, for the lifting (from memory).
    """
    from gainbench.kernels.lifting import lifted_loop

    encoder = stage.speed_sensor is SpeedSensor.ENCODER
    period, rule = stage.speed_period, _RULES[firmware.integrator]
    lifted, by_new, by_older, by_measured = lifted_loop(
        own.tick,
        own.sampled_current,
        own.delay.held,
        own.delay.part > 0.0,
        current.kp,
        current.ki * own.period,
        rule,
        plant.back_emf if firmware.back_emf_feedforward else 0.0,
        stage.speed_delay,
        stage.speed_divisor,
    )
    n = lifted.shape[1]
    seen = lifted[n + 3]
    if not encoder:
        seen = np.zeros(n)
        seen[_SPEED] = 1.0
        by_new = by_older = by_measured = 0.0
    return SpeedLoop(
        plant=SampledPlant(
            m=lifted[:n],
            c=seen,
            b0=lifted[n],
            b1=lifted[n + 1],
            bw=lifted[n + 2],
            d0=by_new,
            d1=by_older,
            dw=by_measured,
            period=period,
            shift=1 if encoder else 0,
            window=stage.speed_window if encoder else 1,
            scale=1.0 / (stage.speed_window * period) if encoder else 1.0,
            filter_gain=1.0 if stage.speed_filter <= 0.0 else -math.expm1(-period / stage.speed_filter),
        ),
        rule=rule,
        modes=own.modes,
    )


def _elastic_modes(plant: Plant) -> tuple[complex, ...]:
    """Resonance of the free train and antiresonance at the motor, where there are any."""
    if not plant.elastic:
        return ()
    modes = []
    for compliance in (1.0 / plant.load_inertia, 1.0 / plant.load_inertia + 1.0 / plant.motor_inertia):
        square = plant.stiffness * compliance
        decay = 0.5 * plant.damping * compliance + 0.5 * plant.load_viscous / plant.load_inertia
        if square > decay * decay:
            modes.append(complex(-decay, math.sqrt(square - decay * decay)))
    return tuple(modes)
