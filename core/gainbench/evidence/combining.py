"""Several logs together: what each tells, weighed by how well it tells it and by how much runs differ."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.confidence import quantile
from gainbench.evidence.estimate import Estimate, EstimateName, Ratio, Told

Array = NDArray[np.float64]

_PRIOR = 8.0
"""How many runs the usual spread between runs is worth, where the logs themselves tell theirs."""
_OFFSET = 0.03
"""Usual standard deviation of the offset between runs, as a share of the Coulomb friction."""
_SPREAD: Mapping[EstimateName, float] = {
    EstimateName.RESISTANCE: 0.02,
    EstimateName.INDUCTANCE: 0.02,
    EstimateName.TORQUE_CONSTANT: 0.01,
    EstimateName.BACK_EMF_CONSTANT: 0.01,
    EstimateName.INERTIA: 0.01,
    EstimateName.VISCOUS_FRICTION: 0.03,
    EstimateName.VISCOUS_FRICTION_FORWARD: 0.03,
    EstimateName.VISCOUS_FRICTION_BACKWARD: 0.03,
    EstimateName.COULOMB_FRICTION: 0.03,
    EstimateName.COULOMB_FRICTION_FORWARD: 0.03,
    EstimateName.COULOMB_FRICTION_BACKWARD: 0.03,
    EstimateName.TORQUE_OFFSET: 0.0,
}
"""Usual standard deviation between runs, as a share of the value: a winding 5 K warmer has 2 % more resistance, its
magnets 1 % less flux; the rest is common practice and what repeated runs of one axis show."""
_TURNS = 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Known:
    """What the sheet has of what ratios may be over, for where no log tells it."""

    torque_constant: float
    """Kt [N m/A]."""
    inertia: float
    """J [kg m^2]."""
    torque_factor: float
    """Kt over Ke: 3/2 for the q axis of pm-sine, else 1."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Combined:
    """Estimates from all logs, and which values of the sheet they rest on."""

    estimates: Mapping[EstimateName, Estimate]
    borrowed: tuple[EstimateName, ...]


def combine(told: Sequence[Told], known: Known) -> Combined:
    """Weighted least squares over what every log tells.

    A ratio whose lower part no log tells is taken with the sheet's value; the torque constant is ``Kt/Ke`` times the
    back-EMF constant. Weights are one over the fit's variance plus the usual variance between runs. The fit's bounds
    carry the fits' variances alone, the run's bounds the variance between runs as well, as another run would show it:
    the usual one, corrected by the scatter of the logs where several tell the same.

    Parameters
    ----------
    told : sequence of Told
        From all logs, SI.
    known : Known
        From the sheet, SI.

    Returns
    -------
    Combined
        SI.

    References
    ----------
    A. Gelman et al., Bayesian Data Analysis, 3rd ed., 2013, section 2.6, for the scaled inverse chi-squared weight of
    the usual spread (from memory).
    """
    told = [one for one in told if one.ratios]
    names = _names(told)
    if not names:
        return Combined(estimates={}, borrowed=())
    targets = np.concatenate([one.values for one in told])
    ratios = [ratio for one in told for ratio in one.ratios]
    fit = _block_diagonal([one.covariance for one in told])
    usual = {name: _usual(name, told, known) for name in names}
    run = np.array([_run_variance(ratio, value, usual, known) for ratio, value in zip(ratios, targets, strict=True)])
    tiny = 1e-24 * np.maximum(targets**2, np.max(targets**2) * 1e-12)
    weight = np.linalg.inv(_scaled(fit + np.diag(run + tiny)))
    scale = 1.0 / np.sqrt(np.diag(fit) + run + tiny)
    values = _begin(names, told, known)
    for _ in range(_TURNS):
        predicted, slope = _predict(ratios, names, values, known)
        pull = (scale[:, None] * slope).T @ weight
        change = np.linalg.solve(pull @ (scale[:, None] * slope), pull @ (scale * (targets - predicted)))
        values = values + change
    _, slope = _predict(ratios, names, values, known)
    pull = (scale[:, None] * slope).T @ weight
    gain = np.linalg.solve(pull @ (scale[:, None] * slope), pull * scale)
    variance = np.diag(gain @ fit @ gain.T)
    spare = min(one.spare for one in told)
    estimates: dict[EstimateName, Estimate] = {}
    for index, name in enumerate(names):
        half = quantile(spare) * float(np.sqrt(max(variance[index], 0.0)))
        scatter, count = _scatter(name, told)
        prior = usual[name] ** 2
        between = (_PRIOR * prior + scatter) / (_PRIOR + max(0, count - 1))
        extra = quantile(_PRIOR + max(0, count - 1)) * float(np.sqrt(between))
        estimates[name] = _estimate(float(values[index]), half, float(np.hypot(half, extra)))
    if EstimateName.BACK_EMF_CONSTANT in estimates:
        estimates[EstimateName.TORQUE_CONSTANT] = _times(estimates[EstimateName.BACK_EMF_CONSTANT], known.torque_factor)
    ordered = {name: estimates[name] for name in EstimateName if name in estimates}
    borrowed = {ratio.per for ratio in ratios if ratio.per is not None and _own(ratio.per) not in names}
    return Combined(estimates=ordered, borrowed=tuple(name for name in EstimateName if name in borrowed))


def _own(name: EstimateName) -> EstimateName:
    """The unknown that stands for a name: one for both constants."""
    return EstimateName.BACK_EMF_CONSTANT if name is EstimateName.TORQUE_CONSTANT else name


def _names(told: Sequence[Told]) -> list[EstimateName]:
    """The unknowns: what some log tells by itself or over something."""
    found = {_own(ratio.of) for one in told for ratio in one.ratios}
    return [name for name in EstimateName if name in found]


def _estimate(value: float, half: float, run_half: float) -> Estimate:
    return Estimate(
        value=value, low=value - half, high=value + half, run_low=value - run_half, run_high=value + run_half
    )


def _times(one: Estimate, factor: float) -> Estimate:
    return Estimate(
        value=factor * one.value,
        low=factor * one.low,
        high=factor * one.high,
        run_low=factor * one.run_low,
        run_high=factor * one.run_high,
    )


def _factor(name: EstimateName, known: Known) -> float:
    return known.torque_factor if name is EstimateName.TORQUE_CONSTANT else 1.0


def _fallback(name: EstimateName, known: Known) -> float:
    """The sheet's value of what a ratio may be over."""
    return known.inertia if name is EstimateName.INERTIA else known.torque_constant


def _block_diagonal(blocks: Sequence[Array]) -> Array:
    size = sum(block.shape[0] for block in blocks)
    whole = np.zeros((size, size))
    at = 0
    for block in blocks:
        whole[at : at + block.shape[0], at : at + block.shape[0]] = block
        at += block.shape[0]
    return whole


def _scaled(matrix: Array) -> Array:
    scale = 1.0 / np.sqrt(np.diag(matrix))
    return np.asarray(matrix * np.outer(scale, scale))


def _predict(
    ratios: Sequence[Ratio], names: Sequence[EstimateName], values: Array, known: Known
) -> tuple[Array, Array]:
    """Every ratio with these values, and its slope over them."""
    predicted = np.empty(len(ratios))
    slope = np.zeros((len(ratios), len(names)))
    place = {name: index for index, name in enumerate(names)}
    for row, ratio in enumerate(ratios):
        of = place[_own(ratio.of)]
        factor = _factor(ratio.of, known)
        top, below = factor * values[of], 1.0
        if ratio.per is not None:
            own = _own(ratio.per)
            if own in place:
                below = _factor(ratio.per, known) * values[place[own]]
                # A ratio over a torque constant is what the current had to be: the estimate is it times the constant.
                slope[row, place[own]] = -top / below**2 * _factor(ratio.per, known)
            else:
                below = _fallback(ratio.per, known)
        predicted[row] = top / below
        slope[row, of] += factor / below
    return predicted, slope


def _begin(names: Sequence[EstimateName], told: Sequence[Told], known: Known) -> Array:
    """Values to begin from: the first that is told, those over something after what they are over."""
    found: dict[EstimateName, float] = {}
    for wanted_ratio in (False, True):
        for one in told:
            for ratio, value in zip(one.ratios, one.values, strict=True):
                own = _own(ratio.of)
                if own in found or (ratio.per is not None) is not wanted_ratio:
                    continue
                below = 1.0
                if ratio.per is not None:
                    per = _own(ratio.per)
                    below = _factor(ratio.per, known) * found[per] if per in found else _fallback(ratio.per, known)
                found[own] = float(value) * below / _factor(ratio.of, known)
    return np.array([found[name] for name in names])


def _usual(name: EstimateName, told: Sequence[Told], known: Known) -> float:
    """Usual standard deviation of an estimate between runs, SI."""
    value = float(_begin([name], told, known)[0])
    if name is not EstimateName.TORQUE_OFFSET:
        return _SPREAD[name] * abs(value)
    coulomb = [one for one in _names(told) if one is EstimateName.COULOMB_FRICTION]
    friction = float(_begin(coulomb, told, known)[0]) if coulomb else 0.0
    return _OFFSET * max(abs(friction), abs(value))


def _run_variance(ratio: Ratio, value: float, usual: Mapping[EstimateName, float], known: Known) -> float:
    """Usual variance of a ratio between runs: that of its upper part, in the ratio's own unit."""
    per = 1.0 if ratio.per is None else _fallback(ratio.per, known)
    return (usual[_own(ratio.of)] * _factor(ratio.of, known) / per) ** 2 + (1e-6 * value) ** 2


def _scatter(name: EstimateName, told: Sequence[Told]) -> tuple[float, int]:
    """Sum of squared deviations between the logs that tell a name in the same way, less what their fits explain."""
    found: dict[EstimateName | None, list[tuple[float, float]]] = {}
    for one in told:
        for index, ratio in enumerate(one.ratios):
            if _own(ratio.of) is name:
                entry = (float(one.values[index]), float(one.covariance[index, index]))
                found.setdefault(ratio.per, []).append(entry)
    same = found.get(None, [])
    if len(same) < 2:
        return 0.0, 1
    values, variances = np.array(same).T
    squares = float(np.sum((values - values.mean()) ** 2)) - float(variances.mean()) * (len(same) - 1)
    return max(0.0, squares), len(same)
