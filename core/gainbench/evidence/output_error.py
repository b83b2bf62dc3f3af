"""Output-error fits: a model runs over segments of a log, and its parameters move until its output lies on the log.

Each segment starts from a state of its own, which is fitted too and taken out of the normal equations at once. Long
segments use all that a clean log tells; short ones keep disturbances that the model does not know from piling up. Which
length tells most is judged by the covariance that allows for coloured residuals.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.confidence import SPARE, block_covariance, spectral_covariance, wider

Array = NDArray[np.float64]

_SHORTEST = 24
"""Samples of the shortest segments that are tried."""
_LADDER = 4
"""Each length that is tried over the one before."""
_NUDGE = 1e-5
"""Share of a parameter's size by which it is moved to see what it does."""
_RIDGE = 1e-6
"""Of the information of one residual: keeps what is not told in place without moving what is."""
_EVALUATIONS = 30
_ROUNDING = 1e-13
"""Added to normalised products so that they stay positive."""
_FAR = 8.0
"""Standard deviations, by the median, from which on a residual is an outlier."""
_MOST_OUTLIERS = 0.02
"""Share of samples above which they are no outliers but what the model lacks."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Outputs:
    """What a model puts out, and what moves it."""

    output: Array
    """shape (n,)."""
    sensitivities: Array
    """Change of the output per size of each parameter, shape (p, n)."""
    nuisance: Array
    """Change of the output per unit of each state at the segment's start, shape (q, n)."""


class Model(Protocol):
    """A model of one log with p parameters and q states that start unknown."""

    @property
    def measured(self) -> Array:
        """What the output should lie on, shape (n,)."""

    @property
    def pieces(self) -> NDArray[np.int64]:
        """First sample of each unbroken piece and n at the end."""

    @property
    def size(self) -> Array:
        """Size of each parameter in its unit, > 0, shape (p,)."""

    def keep(self, values: Array) -> float:
        """Share of its slowest state that is left after one sample, with these parameters [each its own unit]."""

    def first_starts(self, bounds: NDArray[np.int64]) -> Array:
        """Measured states at the start of each segment, shape (n_segments, q)."""

    def run(self, values: Array, bounds: NDArray[np.int64], *, starts: Array, nudge: float) -> Outputs:
        """The output with these parameters [each its own unit], and its sensitivities by steps of ``nudge`` sizes."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Fit:
    """Where an output-error fit came to rest."""

    values: Array
    """shape (p,)."""
    covariance: Array
    """shape (p, p)."""
    spare: float
    """Degrees of freedom behind the covariance."""
    fit_percent: float
    """100 (1 - |residual|/|measured - its mean|)."""
    segment: int
    """Samples of a segment."""
    outliers: int
    """Samples that were left out."""
    residual: Array
    """In the output's unit, behind the fitted starts, shape (n,)."""
    information: Array
    """Of the parameters, each in its own size, over the square of the output's unit, shape (p, p)."""
    bounds: NDArray[np.int64]
    """First sample of each segment, and n at the end."""
    starts: Array
    """Fitted states at the start of each segment, shape (n_segments, q)."""
    disturbance: Array
    """What enters the model's state at each sample, from one run over each unbroken piece, shape (n,)."""


def segment_bounds(pieces: NDArray[np.int64], length: int) -> NDArray[np.int64]:
    """Cut each piece into segments of about a length.

    Parameters
    ----------
    pieces : ndarray, shape (n_pieces + 1,)
        First sample of each piece and n at the end.
    length : int
        Samples.

    Returns
    -------
    ndarray, shape (n_segments + 1,)
        First sample of each segment and n at the end.
    """
    cuts = [
        np.linspace(first, last, max(1, round((last - first) / length)) + 1).round().astype(np.int64)[:-1]
        for first, last in itertools.pairwise(pieces)
    ]
    return np.concatenate([*cuts, pieces[-1:]])


def fit_output(model: Model, start: Array, *, lower: Array, upper: Array, segment: int | None = None) -> Fit:
    """Fit a model's parameters to its log.

    Parameters
    ----------
    model : Model
        With its log.
    start : ndarray, shape (p,)
        Where to begin, each parameter in its own unit.
    lower, upper : ndarray, shape (p,)
        Physical bounds in the same units.
    segment : int, optional
        Samples of a segment, where that is known already.

    Returns
    -------
    Fit
        Of the segment length whose covariance is least.

    References
    ----------
    L. Ljung, System Identification, 2nd ed., 1999, chapters 5 and 10; G. Golub, V. Pereyra, The differentiation of
    pseudo-inverses and nonlinear least squares problems whose variables separate, 1973 (both from memory).
    """
    longest = int(np.diff(model.pieces).max())
    lengths = [longest if segment is None else segment]
    while segment is None and lengths[-1] > _SHORTEST * _LADDER:
        lengths.append(max(_SHORTEST, lengths[-1] // _LADDER))
    values = np.clip(start, lower, upper)
    best: Fit | None = None
    worse = 0
    for length in reversed(lengths):
        task = _Task(model, segment_bounds(model.pieces, length), np.ones(model.measured.size))
        found = _settle(task, values, lower=lower, upper=upper)
        values = found.values
        if best is None or spread(found, model.size) < spread(best, model.size):
            best, worse = found, 0
        else:
            worse += 1
            if worse > 1:
                break
    assert best is not None
    return best


def spread(fit: Fit, size: Array) -> float:
    """Mean logarithm of the variances over the parameters' sizes, a pure number: the less, the more is told."""
    return float(np.mean(np.log(np.maximum(np.diag(fit.covariance) / size**2, 1e-300))))


class _Task:
    """One length of segments: residuals and sensitivities over the parameters, the last of them kept."""

    def __init__(self, model: Model, bounds: NDArray[np.int64], weights: Array) -> None:
        self.model, self.bounds, self.weights = model, bounds, weights
        self._known: tuple[bytes, Array, Array] = (b"", np.empty(0), np.empty(0))

    def starts(self, values: Array) -> Array:
        """Fitted states at the start of each segment."""
        self.rows(values)
        return self._known[2]

    def rows(self, values: Array) -> Array:
        """Residual and sensitivities per size of the parameters, free of the starts, shape (1 + p, n)."""
        from gainbench.kernels.identify_reduce import project

        key = values.tobytes()
        if key == self._known[0]:
            return self._known[1]
        starts = self.model.first_starts(self.bounds)
        for last in (False, True):
            found = self.model.run(values, self.bounds, starts=starts, nudge=_NUDGE if last else 0.0)
            residual = self.model.measured - found.output
            rows = np.vstack((residual[None], found.sensitivities)) if last else residual[None].copy()
            rows *= self.weights
            moved = project(rows, found.nuisance * self.weights, self.bounds)
            starts = starts + moved
        self._known = (key, rows, starts)
        return rows


def _settle(task: _Task, start: Array, *, lower: Array, upper: Array) -> Fit:
    """Fit, leave out outliers, fit again."""
    values = _solve(task, start, lower=lower, upper=upper)
    rows = task.rows(values)
    spread = 1.4826 * float(np.median(np.abs(rows[0])))
    far = np.abs(rows[0]) > _FAR * spread
    outliers = int(np.sum(far))
    if 0 < outliers <= _MOST_OUTLIERS * far.size and _stands_alone(far):
        task = _Task(task.model, task.bounds, np.where(far, 0.0, task.weights))
        values = _solve(task, values, lower=lower, upper=upper)
        rows = task.rows(values)
    size = task.model.size
    most = float(np.max(np.sum(rows[1:] ** 2, axis=1), initial=0.0))
    ridge = np.full(size.size, _RIDGE * float(np.mean(rows[0] ** 2)) + (_ROUNDING * most if most > 0.0 else 1.0))
    keep = task.model.keep(values)
    disturbance = _disturbance(task, values, keep)
    spectral = spectral_covariance(rows, task.bounds, keep=keep, ridge=ridge, disturbance=disturbance)
    blocks = block_covariance(rows, ridge=ridge)
    # Where residuals pile up either may see too little; those of a predictor have no memory, and neither is blind.
    covariance = wider(spectral, blocks) if keep > 0.0 else 0.5 * (spectral + blocks)
    measured = task.model.measured
    around = float(np.linalg.norm(measured - measured.mean()))
    return Fit(
        values=values,
        covariance=covariance * np.outer(size, size),
        spare=SPARE,
        fit_percent=100.0 * (1.0 - float(np.linalg.norm(rows[0])) / around) if around > 0.0 else 0.0,
        segment=int(np.diff(task.bounds).max()),
        outliers=int(np.sum(task.weights == 0.0)),
        residual=rows[0],
        information=rows[1:] @ rows[1:].T + np.diag(ridge),
        bounds=task.bounds,
        starts=task.starts(values),
        disturbance=disturbance,
    )


def _disturbance(task: _Task, values: Array, keep: float) -> Array:
    """What enters the model's state at each sample, from one run over each unbroken piece."""
    from gainbench.kernels.identify_reduce import project

    model = task.model
    starts = model.first_starts(model.pieces)
    residual = np.zeros(model.measured.size)
    for _ in range(2):
        found = model.run(values, model.pieces, starts=starts, nudge=0.0)
        residual = model.measured - found.output
        rows = np.ascontiguousarray(residual[None] * task.weights)
        starts = starts + project(rows, found.nuisance * task.weights, model.pieces)
    out = task.weights == 0.0
    if out.any():
        residual[out] = np.interp(np.flatnonzero(out), np.flatnonzero(~out), residual[~out])
    disturbance = residual - keep * np.concatenate(([0.0], residual[:-1]))
    disturbance[model.pieces[:-1]] = 0.0
    # An angle has no growth before the first sample of a piece, and the disturbance of the second is no difference.
    second = np.minimum(model.pieces[:-1] + 1, residual.size - 1)
    disturbance[second] = 0.0
    return disturbance


def _stands_alone(far: NDArray[np.bool_]) -> bool:
    """Whether outliers come a few at a time: what the model lacks comes in stretches."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], far, [False])).astype(np.int8)))
    return bool(np.median(edges[1::2] - edges[::2]) <= 3)


def _solve(task: _Task, start: Array, *, lower: Array, upper: Array) -> Array:
    """Minimise the residual over the parameters, from the triangle of its QR decomposition.

    The triangle has the same sum of squares, the same gradient and the same information as all samples together.
    """
    from scipy.optimize import least_squares

    size = task.model.size
    first = task.rows(start)
    scale = math.sqrt(max(float(np.mean(first[0] ** 2)), 1e-300))
    ridge = math.sqrt(_RIDGE)
    count = size.size

    kept: list[tuple[bytes, Array]] = []

    def triangle(x: Array) -> Array:
        if not kept or kept[0][0] != x.tobytes():
            rows = task.rows(np.clip(x * size, lower, upper)) / scale
            kept[:] = [(x.tobytes(), _triangle(rows[1:], rows[0]))]
        return kept[0][1]

    def residual(x: Array) -> Array:
        return np.concatenate((triangle(x)[:, count], ridge * (x - start / size)))

    def jacobian(x: Array) -> Array:
        return np.vstack((-triangle(x)[:, :count], ridge * np.eye(count)))

    low, high = lower / size, upper / size
    begin = np.clip(start / size, np.nextafter(low, np.inf), np.nextafter(high, -np.inf))
    found = least_squares(
        residual, begin, jac=jacobian, bounds=(low, high), xtol=1e-6, ftol=1e-7, gtol=1e-12, max_nfev=_EVALUATIONS
    )
    return np.asarray(np.clip(found.x * size, lower, upper), dtype=np.float64)


def _triangle(sensitivities: Array, residual: Array) -> Array:
    """Upper triangle of the QR decomposition of both side by side, from their products, shape (p + 1, p + 1)."""
    rows = np.vstack((sensitivities, residual))
    norms = np.sqrt(np.einsum("pn,pn->p", rows, rows))
    norms[norms == 0.0] = 1.0
    products = (rows @ rows.T) / np.outer(norms, norms)
    products += _ROUNDING * np.eye(norms.size)
    return np.asarray(np.linalg.cholesky(products).T * norms)
