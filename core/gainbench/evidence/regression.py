"""Linear regression whose bounds hold for coloured residuals, robust against what stands out."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.confidence import SPARE, block_covariance, spectral_covariance, wider

Array = NDArray[np.float64]

_TURNS = 5
"""Of reweighting."""
_FAR = 5.0
"""Standard deviations from which on a residual's pull does not grow."""
_RIDGE = 1e-12


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Regression:
    """Coefficients with their covariance."""

    values: Array
    """shape (p,)."""
    covariance: Array
    """shape (p, p)."""
    spare: float
    """Degrees of freedom behind the covariance."""
    fit_percent: float
    """100 (1 - |residual|/|target - its mean|)."""
    residual: float
    """Root mean square, in the target's unit."""


def regress(target: Array, columns: Array) -> Regression:
    """Least squares with Huber's weights, scaled by the median size of the residual.

    Parameters
    ----------
    target : ndarray, shape (n,)
        In any unit.
    columns : ndarray, shape (p, n)
        What it is a sum of, in units of their own.

    Returns
    -------
    Regression
        In the target's unit over the columns'.

    References
    ----------
    P. Huber, Robust Statistics, 1981, chapter 7 (from memory).
    """
    size = np.sqrt(np.mean(columns**2, axis=1))
    size[size == 0.0] = 1.0
    scaled = columns / size[:, None]
    weights = np.ones_like(target)
    values = np.zeros(columns.shape[0])
    residual = target
    for _ in range(_TURNS):
        values = np.linalg.lstsq((scaled * weights).T, target * weights, rcond=1e-10)[0]
        residual = target - values @ scaled
        spread = 1.4826 * float(np.median(np.abs(residual)))
        far = np.abs(residual) > _FAR * spread
        if spread == 0.0 or not np.any(far):
            break
        weights = np.where(far, np.sqrt(_FAR * spread / np.maximum(np.abs(residual), 1e-300)), 1.0)
    rows = np.vstack((residual * weights, scaled * weights))
    ridge = np.full(columns.shape[0], _RIDGE * target.size)
    whole = np.array([0, target.size])
    spectral = spectral_covariance(rows, whole, keep=0.0, ridge=ridge, disturbance=rows[0])
    covariance = wider(spectral, block_covariance(rows, ridge=ridge))
    around = float(np.linalg.norm(target - target.mean()))
    return Regression(
        values=values / size,
        covariance=covariance / np.outer(size, size),
        spare=SPARE,
        fit_percent=100.0 * (1.0 - float(np.linalg.norm(residual)) / around) if around > 0.0 else 0.0,
        residual=float(np.sqrt(np.mean(residual**2))),
    )
