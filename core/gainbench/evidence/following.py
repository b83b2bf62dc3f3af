"""How far a predictor of a shaft's motion follows what was measured, and the fit of such a predictor.

A fit of a freely running motion lets noise of the drive pile up in the speed; cut into short segments it forgets what
tells friction best. A predictor that is moved towards the measured motion after every sample leaves residuals without
memory, and least squares of those wastes nothing of what a log with both kinds of noise tells.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.confidence import Parts, disturbance_parts, quantile
from gainbench.evidence.motion_model import MotionModel
from gainbench.evidence.output_error import Fit, fit_output, spread

Array = NDArray[np.float64]

_SURE = 10.0
"""Degrees of freedom from which on it is known how far to follow."""
_NO_BETTER = 2.0
"""Mean logarithm of variances by which a predictor may then seem to tell less than a free run: what is the least of
many spectra near zero has often been lucky."""
_FEWEST = 64
_SEGMENT = 1024
_HIGH = 1.0 / 3.0
"""Cycles a sample above which a drive holds little but noise."""
_FLOOR = 0.1
"""Variance of the logarithm to which a noise floor is trusted to go on down to the slowest lines."""
_AGREE = 2.0
"""Standard deviations by which both may differ."""
_LEAST = 1e-7
"""Share of the larger of two variances that the smaller counts as at least."""


def steady_gains(parts: Array, *, keep: float, step: float, is_angle: bool) -> tuple[float, float]:
    """Gains of the steady Kalman filter of speed and angle.

    ``w[k+1] = keep w[k] + e``, ``a[k+1] = a[k] + h (w[k] + w[k+1])/2``; e is what enters with the drive.

    Parameters
    ----------
    parts : ndarray, shape (3,)
        Variances of what entered with the drive, of noise on the speed and of noise on the angle over the step
        [rad^2/s^2].
    keep : float
        Share of the speed that is left after one sample.
    step : float
        From sample to sample [s].
    is_angle : bool
        True where the angle is measured, False where the speed is.

    Returns
    -------
    tuple of float
        For the speed [1, or 1/s where the angle is measured] and for the angle [1]; zero twice where nothing entered
        with the drive.

    References
    ----------
    B. Anderson, J. Moore, Optimal Filtering, 1979, chapter 4 (from memory).
    """
    drive, speed, angle = (float(one) for one in parts)
    if not drive > 0.0:
        return 0.0, 0.0
    if not is_angle:
        noise = max(speed + 2.0 * angle, _LEAST * drive)
        # P = keep^2 P N/(P + N) + A, solved for P.
        half = 0.5 * (drive - (1.0 - keep**2) * noise)
        ahead = half + float(np.sqrt(half**2 + drive * noise))
        return ahead / (ahead + noise), 0.0
    from scipy.linalg import LinAlgError, solve_discrete_are

    flow = np.array([[keep, 0.0], [0.5 * (1.0 + keep), 1.0]])
    enters = np.array([[1.0], [0.5]])
    # Angles over the step, so that all is in rad/s.
    own = drive * (enters @ enters.T) + np.diag([0.0, speed])
    noise = max(angle, _LEAST * float(np.trace(own)))
    try:
        ahead = solve_discrete_are(flow.T, np.array([[0.0], [1.0]]), own, np.array([[noise]]))
    except LinAlgError:
        return 0.0, 0.0
    gains = ahead[:, 1] / (ahead[1, 1] + noise)
    return float(gains[0]) / step, float(gains[1])


def noise_floor(values: Array) -> float:
    """Variance of the white noise on a signal, by the median of its spectrum's upper third, in the unit squared."""
    from scipy.signal import welch

    second = np.diff(values, n=2)
    if second.size < _FEWEST:
        return 0.0
    frequency, power = welch(second, nperseg=min(_SEGMENT, second.size), detrend=False)
    high = frequency > _HIGH
    # Second differences, so that a slow signal does not leak; a density over frequencies up to a half.
    return float(np.median(0.5 * power[high] / (2.0 * np.sin(np.pi * frequency[high])) ** 4))


def with_floor(parts: Parts, own: float) -> Parts:
    """Parts with what the drive's own noise is known to bring in, where both agree.

    What entered with the drive stands out in the slowest lines only, often in a handful. Its logarithm, with variance
    2 over its degrees of freedom, and that of the floor, known to some ten percent, are put together by weight.

    Parameters
    ----------
    parts : Parts
        From a disturbance.
    own : float
        Variance that the drive's noise brings in, in the same unit.

    Returns
    -------
    Parts
        The same where the floor says nothing or something else.
    """
    if not own > 0.0:
        return parts
    told = float(parts.variances[0])
    if not told > 0.0:
        # Nothing stands out although there is noise on the drive: what is measured hides it.
        return Parts(variances=np.array([own, *parts.variances[1:]]), spare=2.0 / _FLOOR)
    doubt = 2.0 / parts.spare
    away = float(np.log(own / told))
    if abs(away) > _AGREE * np.sqrt(doubt + _FLOOR):
        return parts
    both = told * float(np.exp(away * doubt / (doubt + _FLOOR)))
    spare = 2.0 * (1.0 / doubt + 1.0 / _FLOOR)
    return Parts(variances=np.array([both, *parts.variances[1:]]), spare=spare)


def fit_following(model: MotionModel, free: Fit, *, drive: Array, lower: Array, upper: Array) -> Fit:
    """Fit the predictor that follows the motion as its noises ask for, where that tells more than the free fit.

    Parameters
    ----------
    model : MotionModel
        That runs freely.
    free : Fit
        Of it.
    drive : ndarray, shape (n,)
        As it was measured, without softening, in the model's unit.
    lower, upper : ndarray, shape (p,)
        Physical bounds, each in its parameter's unit.

    Returns
    -------
    Fit
        With the free fit's share of the motion that it foretells, and its segment length; the free fit itself where
        following does not tell more.

    References
    ----------
    L. Ljung, System Identification, 2nd ed., 1999, chapters 3 and 9 (from memory).
    """
    keep = model.state_keep(free.values)
    parts = disturbance_parts(free.disturbance, keep)
    own = noise_floor(drive) * (model.step / float(free.values[0])) ** 2
    parts = with_floor(parts, own)
    gains = steady_gains(parts.variances, keep=keep, step=model.step, is_angle=model.is_angle)
    if gains == (0.0, 0.0):
        return free
    whole = int(np.diff(model.pieces).max())
    found = fit_output(replace(model, follow=gains), free.values, lower=lower, upper=upper, segment=whole)
    # How far to follow is itself told from few lines only: the covariance is as wide as that makes it.
    doubt = (quantile(min(parts.spare, found.spare)) / quantile(found.spare)) ** 2
    found = replace(found, covariance=doubt * found.covariance, fit_percent=free.fit_percent, segment=free.segment)
    worse = spread(found, model.size) - spread(free, model.size)
    return found if worse < (_NO_BETTER if parts.spare > _SURE else 0.0) else free
