"""The open loop that a measured frequency response stands for, where that is exact."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.evidence.frequency_response import COHERENT, MeasuredResponse, Path
from gainbench.model import Firmware, IntegratorRule, Sheet
from gainbench.results import Gains

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

LOOP_OF = {
    Path.SPEED_LOOP: "speed",
    Path.SPEED_PLANT: "speed",
    Path.CURRENT_LOOP: "current",
    Path.CURRENT_PLANT: "current",
}
"""To which loop a path belongs."""
CLOSED = frozenset({Path.SPEED_LOOP, Path.CURRENT_LOOP})
"""Paths through a closed loop; the others are what its controller meets."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MeasuredLoop:
    """An open loop at the frequencies of a measurement."""

    frequency_hz: Array
    """Rising [Hz], shape (n,)."""
    open_loop: Complex
    """L, shape (n,)."""
    sure: NDArray[np.bool_]
    """Whether L is as well known as a response with a coherence above 0.95, shape (n,)."""


def closed_to_open(response: MeasuredResponse, sheet: Sheet) -> MeasuredLoop:
    """The open loop behind the response of a closed one, ``L = T/(1 - T)``, with the gains of the bench.

    Where T is near 1 its errors count many times over: the noise's share of the power grows by ``1/|1 - T|^2``, and a
    point is only sure where its coherence still is above 0.95 with that.

    Parameters
    ----------
    response : MeasuredResponse
        From the reference of a loop to its answer.
    sheet : Sheet
        Its aims say whether the conversion is exact.

    Returns
    -------
    MeasuredLoop
        Without the frequencies where T is 1.

    Raises
    ------
    LogError
        If T is not L/(1 + L): a reference weight below 1, or a back-EMF feedforward around the current loop.
    """
    aims = sheet.aims
    if response.path is Path.SPEED_LOOP and aims.speed.reference_weight != 1.0:
        raise LogError(
            f"{response.name}: {response.path} with a reference weight of {aims.speed.reference_weight:g} is not"
            " L/(1 + L), so it is not drawn over the open loop; log the current reference as well"
        )
    if response.path is Path.CURRENT_LOOP and aims.firmware.back_emf_feedforward:
        raise LogError(
            f"{response.name}: {response.path} with a back-EMF feedforward is not L/(1 + L), so it is not drawn over"
            " the open loop; log the voltage as well"
        )
    less = 1.0 - response.measured
    kept = np.abs(less) > 1e-9
    less, closed = less[kept], response.measured[kept]
    coherence = response.coherence[kept]
    noise = (1.0 - coherence) / np.abs(less) ** 2
    return MeasuredLoop(
        frequency_hz=response.frequency_hz[kept],
        open_loop=closed / less,
        sure=coherence > COHERENT * (coherence + noise),
    )


def plant_to_open(response: MeasuredResponse, sheet: Sheet, *, gains: Gains) -> MeasuredLoop:
    """The open loop of the measured plant with the controller of the sheet, ``L = C G``.

    Parameters
    ----------
    response : MeasuredResponse
        What the controller of a loop meets.
    sheet : Sheet
        Rates and integrator rule.
    gains : Gains
        Of the controller.

    Returns
    -------
    MeasuredLoop
        As sure as the plant is.
    """
    stage = sheet.rig.stage
    period = stage.speed_period if LOOP_OF[response.path] == "speed" else stage.current_period
    controller = pi_response(gains, sheet.aims.firmware, frequency_hz=response.frequency_hz, period=period)
    return MeasuredLoop(
        frequency_hz=response.frequency_hz,
        open_loop=response.measured * controller,
        sure=response.coherence > COHERENT,
    )


def pi_response(gains: Gains, firmware: Firmware, *, frequency_hz: Array, period: float) -> Complex:
    """C over frequency: ``Kp + Ki T S`` with the integrator rule's ``S`` at ``z = exp(2 pi i f T)``.

    Backward ``S = z/(z - 1)``, forward ``1/(z - 1)``, trapezoid ``(z + 1)/(2 (z - 1))``.

    Parameters
    ----------
    gains : Gains
        SI.
    firmware : Firmware
        Integrator rule.
    frequency_hz : ndarray, shape (n,)
        Above 0, up to half the rate [Hz].
    period : float
        Of the loop [s].

    Returns
    -------
    ndarray, shape (n,)
    """
    # 1/(z - 1) = -1/2 - i/(2 tan(pi f T)): no difference of near numbers at low frequencies.
    forward = -0.5 - 0.5j / np.tan(np.pi * frequency_hz * period)
    later = {IntegratorRule.BACKWARD: 1.0, IntegratorRule.FORWARD: 0.0, IntegratorRule.TRAPEZOID: 0.5}
    return np.asarray(gains.kp + gains.ki * period * (forward + later[firmware.integrator]))
