"""Which of a fit's parameters the log tells, and words for those that it does not."""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.confidence import quantile
from gainbench.evidence.estimate import EstimateName, Ratio, Told
from gainbench.evidence.output_error import Fit

Array = NDArray[np.float64]

_WIDEST = 0.5
"""Share of the value that the 95 % bounds of a told parameter may be away from it."""
_HELD = (-1.0, 0.5)
"""Shifts in samples that are the way a signal is held between samples, and no dead time."""
_EXACT = 1e-18
"""Share of a square below which a variance is rounding."""
_SURE = 3.0
"""Standard deviations that a dead time must be away from zero to be one."""


def tell(
    ratios: Sequence[Ratio], values: Array, covariance: Array, *, spare: float, floors: Array
) -> tuple[Told, list[str]]:
    """Keep what is told to within half its value, or to within a floor where it may well be zero.

    Parameters
    ----------
    ratios : sequence of Ratio
        What the parameters are.
    values : ndarray, shape (n,)
        SI.
    covariance : ndarray, shape (n, n)
        SI.
    spare : float
        Degrees of freedom, a pure number.
    floors : ndarray, shape (n,)
        SI; 0 where a parameter cannot be zero.

    Returns
    -------
    told : Told
        What is kept.
    remarks : list of str
        One for each that is not.
    """
    variance = np.diag(covariance)
    half = quantile(spare) * np.sqrt(np.where(variance > 0.0, variance, np.inf))
    # What a covariance gives to a variance of nothing, an exact log, is as sure as numbers are.
    half = np.where(np.abs(variance) <= _EXACT * values**2, _EXACT * np.abs(values), half)
    finite = np.isfinite(half) & np.isfinite(values)
    narrow = half <= np.maximum(_WIDEST * np.abs(values), floors)
    possible = (values > 0.0) | (floors > 0.0)
    kept = [int(index) for index in np.flatnonzero(finite & narrow & possible)]
    told = Told(
        ratios=tuple(ratios[index] for index in kept),
        values=values[kept],
        covariance=covariance[np.ix_(kept, kept)],
        spare=spare,
    )
    remarks = [
        f"this log does not tell the {ratio.of.words}: it fits anywhere within {_around(values[index], half[index])}"
        f" {ratio.of.si}{'' if ratio.per is None else f' per {ratio.per.si}'}"
        for index, ratio in enumerate(ratios)
        if index not in kept
    ]
    return told, remarks


def without(told: Told, names: Collection[EstimateName]) -> Told:
    """The same but for some estimates."""
    kept = [index for index, ratio in enumerate(told.ratios) if ratio.of not in names]
    return Told(
        ratios=tuple(told.ratios[index] for index in kept),
        values=told.values[kept],
        covariance=told.covariance[np.ix_(kept, kept)],
        spare=told.spare,
    )


def _around(value: float, half: float) -> str:
    return f"{value:.3g} plus or minus {half:.2g}" if np.isfinite(half) and np.isfinite(value) else "any value"


def dead_time_remark(drive: str, answer: str, fit: Fit, step: float) -> list[str]:
    """What is to be said of the dead time, the fit's last parameter in samples of ``step`` [s], in words."""
    shift = float(fit.values[-1])
    deviation = float(np.sqrt(max(fit.covariance[-1, -1], 0.0)))
    if _HELD[0] <= shift <= _HELD[1] or not abs(shift) > _SURE * deviation:
        return []
    late, early = (drive, answer) if shift > 0.0 else (answer, drive)
    return [
        f"dead time: the {late} acts {1e3 * abs(shift) * step:.4g} ms ({abs(shift):.2f} samples) later than its column"
        f" says, against the {early}; the fit allows for it"
    ]
