"""Noise on the voltage that drives a winding's model: how much of it there is, and how far it draws the fit."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.confidence import not_negative
from gainbench.evidence.output_error import Fit

Array = NDArray[np.float64]

_LINES = 256
_HIGHEST = 0.35
"""Cycles a sample above which the softened signals hold next to nothing."""
_TURNS = 4
_FASTEST, _SLOWEST = 1e-6, 30.0
"""Samples over a winding's time constant between which its lag shows."""


def input_noise(fit: Fit, keep: float) -> float:
    """Variance of white noise that enters a first-order model with its drive, told from noise of what is measured.

    The disturbance ``e[k] = r[k] - keep r[k-1]`` has the spectrum ``|B|^2 (A + M |1 - keep z^-1|^2)``: A came in with
    the drive, M with the measurement, and B softened both.

    Parameters
    ----------
    fit : Fit
        With its residual.
    keep : float
        Share of the model's state that is left after one sample.

    Returns
    -------
    float
        A, in the square of the output's unit.
    """
    from scipy.signal import welch

    disturbance = fit.residual - keep * np.concatenate(([0.0], fit.residual[:-1]))
    disturbance[fit.bounds[:-1]] = 0.0
    n = disturbance.size
    frequency, power = welch(disturbance, nperseg=min(_LINES, n), detrend=False)
    below = (frequency > 0.0) & (frequency < _HIGHEST)
    frequency, power = frequency[below], 0.5 * power[below] * n / max(1, n - fit.bounds.size + 1)
    if power.size < 4 or not power.max() > 0.0:
        return 0.0
    soft = softened(frequency)
    shapes = np.stack((soft, soft * np.abs(1.0 - keep * np.exp(-2j * np.pi * frequency)) ** 2), axis=1)
    weight = 1.0 / np.maximum(power, 1e-9 * power.max())
    found = np.zeros(2)
    for _ in range(_TURNS):
        found = not_negative(shapes * weight[:, None], power * weight)
        weight = 1.0 / np.maximum(shapes @ found, 1e-9 * power.max())
    return float(found[0])


def softened(frequency: Array) -> Array:
    """What softening leaves of a power, by frequency in cycles a sample, a pure number."""
    return np.asarray(np.cos(np.pi * frequency) ** 8)


def undrawn(fit: Fit, *, size: Array, noise: float, step: float) -> Array:
    """Values of R and L without what noise on the voltage draws them by.

    Noise that is filtered by the winding adds ``n V(R, L)`` to the sum of squares, with
    ``V = A (g/g0)^2 mean of |B|^2/|1 - a z^-1|^2``, ``a = exp(-R h/L)``, ``g = (1 - a)/R``: least squares is drawn to
    where less of it passes. The values move back by ``H^-1`` times half of its gradient.

    Parameters
    ----------
    fit : Fit
        Values R [ohm] and L [H] first; the last is a dead time in samples.
    size : ndarray, shape (p,)
        Of the parameters, as the fit's information has them.
    noise : float
        A, from :func:`input_noise` [A^2].
    step : float
        From sample to sample [s].

    Returns
    -------
    ndarray, shape (p,)

    References
    ----------
    T. Soederstroem, Errors-in-variables methods in system identification, Automatica 43, 2007, section 5, for
    compensated least squares (from memory).
    """
    # Where nothing lags there is nothing to draw, nor where a fit ran to the end of its bounds.
    if noise <= 0.0 or not _FASTEST < fit.values[0] * step / fit.values[1] < _SLOWEST:
        return fit.values
    frequency = np.asarray((np.arange(2048) + 0.5) / 4096.0, dtype=np.float64)
    turn, soft = np.exp(-2j * np.pi * frequency), softened(frequency)

    def passed(resistance: float, inductance: float) -> float:
        keep = np.exp(-resistance * step / inductance)
        gain = (1.0 - keep) / resistance
        return float(gain**2 * np.mean(soft / np.abs(1.0 - keep * turn) ** 2))

    resistance, inductance = float(fit.values[0]), float(fit.values[1])
    own = (1.0 - np.exp(-resistance * step / inductance)) / resistance
    gradient = np.zeros(fit.values.size)
    nudge = 1e-4
    for index, moved in enumerate(((1.0 + nudge, 1.0), (1.0, 1.0 + nudge))):
        more = passed(resistance * moved[0], inductance * moved[1])
        less = passed(resistance * (2.0 - moved[0]), inductance * (2.0 - moved[1]))
        slope = (more - less) / (2.0 * nudge * fit.values[index]) * size[index]
        gradient[index] = 0.5 * fit.residual.size * noise / own**2 * slope
    return np.asarray(fit.values + size * np.linalg.solve(fit.information, gradient))
