"""Methods with a closed formula: lag cancellation, magnitude and symmetric optimum, pole placement.

They design on a simplified continuous loop; their margins are then read on the sampled loop like any other's.
"""

from __future__ import annotations

import math

from gainbench.model import SpeedSensor, Stage
from gainbench.plant import Plant
from gainbench.results import Gains, Refusal
from gainbench.tuning.outcome import Design


def current_lag_cancellation(plant: Plant, *, crossover: float) -> Design:
    """Kp = wc L, Ki = wc R: the controller's zero on the winding's lag L/R, the back EMF left aside.

    Parameters
    ----------
    plant : Plant
        L [H], R [ohm].
    crossover : float
        wc [rad/s], > 0.

    Returns
    -------
    Design

    References
    ----------
    L. Harnefors, H.-P. Nee, Model-based current control of AC machines using the internal model control method,
    IEEE Trans. Ind. Appl. 34(1), 1998 (from memory).
    """
    return Design(gains=Gains(kp=crossover * plant.inductance, ki=crossover * plant.resistance))


def magnitude_optimum(plant: Plant, *, stage: Stage) -> Design:
    """Kp = L/(2 T), Ki = R/(2 T) with T = (update_delay + 1/2) Ts + current_filter.

    Parameters
    ----------
    plant : Plant
        L [H], R [ohm].
    stage : Stage
        Delay, rate and filter.

    Returns
    -------
    Design

    References
    ----------
    C. Kessler, Ueber die Vorausberechnung optimal abgestimmter Regelkreise, Regelungstechnik 3, 1955 (from memory).
    """
    lag = (stage.update_delay + 0.5) * stage.current_period + stage.current_filter
    return Design(gains=Gains(kp=plant.inductance / (2.0 * lag), ki=plant.resistance / (2.0 * lag)))


def current_pole_placement(plant: Plant, *, natural_frequency: float, damping: float) -> Design:
    """Kp = 2 z w0 L - R, Ki = w0^2 L: poles of s^2 + 2 z w0 s + w0^2 on the winding, without delay.

    Parameters
    ----------
    plant : Plant
        L [H], R [ohm].
    natural_frequency : float
        w0 [rad/s], > 0.
    damping : float
        z, > 0.

    Returns
    -------
    Design
        A refusal where Kp is not positive.
    """
    kp = 2.0 * damping * natural_frequency * plant.inductance - plant.resistance
    if kp <= 0.0:
        least = plant.resistance / (2.0 * damping * plant.inductance)
        return Design(
            refusal=Refusal(
                reason=f"the winding alone already damps more than asked: Kp = 2 z w0 L - R is not positive at "
                f"w0 = {natural_frequency:.4g} rad/s, and needs w0 above R/(2 z L) = {least:.4g} rad/s"
            )
        )
    return Design(gains=Gains(kp=kp, ki=natural_frequency**2 * plant.inductance))


def speed_lag_cancellation(plant: Plant, *, crossover: float) -> Design:
    """Kp = wc J/Kt, Ki = wc b/Kt: the controller's zero on the mechanical lag J/b.

    Parameters
    ----------
    plant : Plant
        J and b of the whole train at the motor shaft [kg m^2], [N m s/rad].
    crossover : float
        wc [rad/s], > 0.

    Returns
    -------
    Design
        A refusal without viscous friction: Ki would be nothing.
    """
    if plant.viscous <= 0.0:
        return Design(
            refusal=Refusal(
                reason="there is no viscous friction in the sheet, so that this method's Ki = wc b/Kt is zero and "
                "nothing would remove a steady error"
            )
        )
    return Design(gains=Gains(kp=crossover * plant.inertia / plant.torque, ki=crossover * plant.viscous / plant.torque))


def symmetric_optimum(plant: Plant, *, stage: Stage, spread: float, current_crossover_hz: float) -> Design:
    """Kp = J/(a Kt T), Ki = Kp/(a^2 T): crossover 1/(a T) midway between the controller's zero and the lag T.

    ``T = 1/(2 pi current.crossover_hz) + Tw/2 + speed_delay Ts + m Tw/2 (encoder) + speed_filter``.

    Parameters
    ----------
    plant : Plant
        J [kg m^2] and Kt [N m/A].
    stage : Stage
        Rates, window and filter.
    spread : float
        a, > 1.
    current_crossover_hz : float
        Of the current loop as designed [Hz].

    Returns
    -------
    Design

    References
    ----------
    C. Kessler, Das symmetrische Optimum, Regelungstechnik 6, 1958 (from memory).
    """
    lag = (
        1.0 / (math.tau * current_crossover_hz)
        + 0.5 * stage.speed_period
        + stage.speed_delay * stage.current_period
        + stage.speed_filter
    )
    if stage.speed_sensor is SpeedSensor.ENCODER:
        lag += 0.5 * stage.speed_window * stage.speed_period
    kp = plant.inertia / (spread * plant.torque * lag)
    return Design(gains=Gains(kp=kp, ki=kp / (spread**2 * lag)))


def speed_pole_placement(plant: Plant, *, natural_frequency: float, damping: float) -> Design:
    """Kp = (2 z w0 J - b)/Kt, Ki = w0^2 J/Kt: poles of s^2 + 2 z w0 s + w0^2 on the inertia, without delay.

    Parameters
    ----------
    plant : Plant
        J, b and Kt at the motor shaft.
    natural_frequency : float
        w0 [rad/s], > 0.
    damping : float
        z, > 0.

    Returns
    -------
    Design
        A refusal where Kp is not positive.
    """
    kp = (2.0 * damping * natural_frequency * plant.inertia - plant.viscous) / plant.torque
    if kp <= 0.0:
        least = plant.viscous / (2.0 * damping * plant.inertia)
        return Design(
            refusal=Refusal(
                reason=f"friction alone already damps more than asked: Kp = (2 z w0 J - b)/Kt is not positive at "
                f"w0 = {natural_frequency:.4g} rad/s, and needs w0 above b/(2 z J) = {least:.4g} rad/s"
            )
        )
    return Design(gains=Gains(kp=kp, ki=natural_frequency**2 * plant.inertia / plant.torque))
