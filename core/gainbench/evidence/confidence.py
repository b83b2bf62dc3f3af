"""How far an estimate can be trusted: covariance for coloured residuals, and bounds."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

CONFIDENCE = 0.95
SPARE = 30.0
"""Degrees of freedom of a spectrum that is averaged over some twenty lines and more."""
_BLOCKS = (40, 80, 160, 320, 640)
"""How many blocks the samples are cut into: the fewest of these of which none holds too much."""
_HELD = 0.3
"""Share of what is known of any mix of parameters that one block may hold."""
_SHORTEST_BLOCK = 4
"""Samples."""
_HIGHEST = 0.35
"""Cycles a sample above which softened signals hold next to nothing."""
_TURNS = 6
_FEWEST_LINES = 8
_BAND = 24
"""Lines of the spectrum that are averaged, at least."""


def block_covariance(rows: Array, *, ridge: Array) -> Array:
    """Covariance of least-squares estimates whose residuals are neither white nor of one size.

    The samples are cut into blocks, 40 where that will do: long against the memory of the residuals. Each block is left
    out in turn, the estimate moves by ``(H - H_b)^-1 (g - g_b)``, and the spread of these is the covariance: the
    jackknife over blocks. Where no block stands out it is the sandwich ``H^-1 (sum g_b g_b') H^-1``. Where one block
    holds much of what is known, as with a single step, the blocks are made shorter.

    Parameters
    ----------
    rows : ndarray, shape (1 + p, n)
        Residual and its sensitivities with the sign of the prediction, in any unit.
    ridge : ndarray, shape (p,)
        Added to the information's diagonal, so that what is not told does not divide by zero.

    Returns
    -------
    ndarray, shape (p, p)
        Of the parameters in their unit.

    References
    ----------
    C. Bester, T. Conley, C. Hansen, Inference with dependent data using cluster covariance estimators, Journal of
    Econometrics 165, 2011; H. Kuensch, The jackknife and the bootstrap for general stationary observations, Annals of
    Statistics 17, 1989 (both from memory).
    """
    from gainbench.kernels.identify_reduce import block_sums

    rows = np.ascontiguousarray(rows)
    most = max(2, rows.shape[1] // _SHORTEST_BLOCK)
    for blocks in dict.fromkeys(min(count, most) for count in _BLOCKS):
        scores, information = block_sums(rows, blocks)
        whole = information.sum(axis=0) + np.diag(ridge)
        shares = np.linalg.eigvals(np.linalg.solve(whole, information)).real
        if shares.max() <= _HELD:
            break
    # A block that holds all that is known of a parameter must not make what is left singular.
    left = whole - information + 1e-9 * np.diag(np.diag(whole))
    moved = np.linalg.solve(left, (scores.sum(axis=0) - scores)[:, :, None])[:, :, 0]
    moved -= moved.mean(axis=0)
    return np.asarray(moved.T @ moved * (blocks - 1) / blocks)


def spectral_covariance(
    rows: Array, bounds: NDArray[np.int64], *, keep: float, ridge: Array, disturbance: Array
) -> Array:
    """Covariance of least-squares estimates from the spectrum of the disturbance behind the residuals.

    A disturbance ``e`` that enters the model's state piles up in the residual, ``r[k] = keep r[k-1] + e[k]``, and a fit
    over a few of the model's time constants hides what piled up slowly. The disturbance itself has little memory: with
    the adjoint ``l`` of the sensitivities the scores are ``sum l e``, and
    ``C = H^-1 (mean over f of S_e(f) l(f) l(f)*) H^-1`` with its spectrum ``S_e``.

    Parameters
    ----------
    rows : ndarray, shape (1 + p, n)
        Residual and its sensitivities with the sign of the prediction, in any unit.
    bounds : ndarray, shape (n_segments + 1,)
        First sample of each segment, and n at the end.
    keep : float
        Share of a state that is left after one sample.
    ridge : ndarray, shape (p,)
        Added to the information's diagonal.
    disturbance : ndarray, shape (m,)
        ``e`` over as long unbroken stretches as there are, in the residual's unit: where segments begin anew its
        spectrum near zero would be that of the breaks.

    Returns
    -------
    ndarray, shape (p, p)
        Of the parameters in their unit.

    References
    ----------
    P. Whittle, Estimation and information in stationary time series, Arkiv foer Matematik 2, 1953 (from memory).
    """
    from scipy.fft import next_fast_len

    from gainbench.kernels.identify_reduce import unroll

    unrolled = unroll(np.ascontiguousarray(rows), bounds, keep)
    n = rows.shape[1]
    size = next_fast_len(n)
    lines = np.fft.rfft(unrolled[1:], size, axis=1)
    weight = np.full(lines.shape[1], 2.0)
    weight[0] = 1.0
    if size % 2 == 0:
        weight[-1] = 1.0
    at = np.asarray(np.fft.rfftfreq(size), dtype=np.float64)
    weight *= disturbance_spectrum(disturbance, keep, at=at) / size
    middle = ((lines * weight) @ lines.conj().T).real
    inverse = np.linalg.inv(rows[1:] @ rows[1:].T + np.diag(ridge))
    return np.asarray(inverse @ middle @ inverse)


def disturbance_spectrum(disturbance: Array, keep: float, *, at: Array) -> Array:
    """Spectrum of a disturbance, as variance per line, also close to zero where there may be next to nothing.

    Noise of a measured state shows in a disturbance as ``|1 - keep z^-1|^2``, that of a measured angle as that times
    ``|1 - z^-1|^2``: near zero the spectrum is what entered with the drive, many decades below the rest. The three are
    fitted by Whittle's likelihood to the tapered lines of the whole record; what the lines are over that, averaged over
    bands, is all that they do not explain.

    Parameters
    ----------
    disturbance : ndarray, shape (n,)
        In any unit.
    keep : float
        Share of the model's state that is left after one sample; 0 for a plain regression.
    at : ndarray, shape (m,)
        Frequencies in cycles a sample, a pure number.

    Returns
    -------
    ndarray, shape (m,)
    """
    frequency, power = _lines(disturbance, keep)
    if power.size < _FEWEST_LINES or not power.max() > 0.0:
        return np.full(at.shape, float(np.mean(disturbance**2)))
    found = _parts(frequency, power, keep)
    ratio = power / np.maximum(_shapes(frequency, keep) @ found, 1e-15 * power.max())
    edges = [0]
    while edges[-1] < ratio.size:
        edges.append(min(ratio.size, edges[-1] + max(_BAND, edges[-1] // 2)))
    if len(edges) > 2 and edges[-1] - edges[-2] < _BAND:
        del edges[-2]
    means = np.add.reduceat(ratio, edges[:-1]) / np.diff(edges)
    middles = np.array([frequency[first:last].mean() for first, last in itertools.pairwise(edges)])
    return np.asarray((_shapes(at, keep) @ found) * np.interp(at, middles, means))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Parts:
    """What a disturbance is made of."""

    variances: Array
    """Of what entered with the drive, as noise on a measured state and as noise on a measured angle, in the square of
    the disturbance's unit, shape (3,)."""
    spare: float
    """Degrees of freedom behind the first of them: it is told from the few lines that it stands out in."""


def disturbance_parts(disturbance: Array, keep: float) -> Parts:
    """How much of a disturbance entered with the drive, as noise on a measured state, as noise on a measured angle.

    Parameters
    ----------
    disturbance : ndarray, shape (n,)
        In any unit.
    keep : float
        Share of the model's state that is left after one sample, a pure number.

    Returns
    -------
    Parts
        All zero where there is nothing to tell them from.
    """
    frequency, power = _lines(disturbance, keep)
    if power.size < _FEWEST_LINES or not power.max() > 0.0:
        return Parts(variances=np.zeros(3), spare=0.0)
    found = _parts(frequency, power, keep)
    # Whittle's information on the logarithms; a line has two degrees of freedom.
    shares = _shapes(frequency, keep) * found
    shares /= np.maximum(shares.sum(axis=1, keepdims=True), 1e-300)
    known = shares[:, found > 0.0]
    if found[0] <= 0.0:
        return Parts(variances=found, spare=0.0)
    variance = float(np.linalg.inv(known.T @ known + 1e-9 * np.eye(known.shape[1]))[0, 0])
    return Parts(variances=found, spare=2.0 / variance)


def _lines(disturbance: Array, keep: float) -> tuple[Array, Array]:
    """Frequencies in cycles a sample, and the tapered lines of the whole record there."""
    from scipy.signal.windows import hann

    n = disturbance.size
    taper = hann(n, sym=False)
    power = np.abs(np.fft.rfft(disturbance * taper)) ** 2 / np.sum(taper**2)
    frequency = np.asarray(np.fft.rfftfreq(n), dtype=np.float64)
    below = (frequency > 1.5 / n) & (frequency < (_HIGHEST if keep > 0.0 else 0.5))
    return frequency[below], np.asarray(power[below], dtype=np.float64)


def _parts(frequency: Array, power: Array, keep: float) -> Array:
    """Whittle's fit of the three shapes to the lines."""
    shapes = _shapes(frequency, keep)
    found = np.maximum(not_negative(shapes, power), 1e-9 * power.mean())
    for _ in range(_TURNS):
        weight = 1.0 / np.maximum(shapes @ found, 1e-15 * power.max())
        found = not_negative(shapes * weight[:, None], power * weight)
    return np.asarray(found)


def not_negative(columns: Array, target: Array) -> Array:
    """Least squares with no coefficient below zero, for a few columns of many rows.

    Parameters
    ----------
    columns : ndarray, shape (n, p)
        In any unit.
    target : ndarray, shape (n,)
        In any unit.

    Returns
    -------
    ndarray, shape (p,)
        In the target's unit over the columns'.
    """
    from scipy.optimize import nnls

    size = np.sqrt(np.sum(columns**2, axis=0))
    size[size == 0.0] = 1.0
    scaled = columns / size
    triangle = np.linalg.cholesky(scaled.T @ scaled + 1e-13 * np.eye(size.size))
    found, _ = nnls(triangle.T, np.linalg.solve(triangle, scaled.T @ target))
    return np.asarray(found / size)


def _shapes(frequency: Array, keep: float) -> Array:
    """Spectra of what entered with the drive, of noise on a measured state and of noise on a measured angle."""
    turn = np.exp(-2j * np.pi * frequency)
    soft = np.cos(np.pi * frequency) ** 8 if keep > 0.0 else np.ones_like(frequency)
    state = np.abs(1.0 - (keep if keep > 0.0 else 1.0) * turn) ** 2
    return np.asarray(np.stack((soft, soft * state, soft * state * np.abs(1.0 - turn) ** 2), axis=1), dtype=np.float64)


def wider(first: Array, second: Array) -> Array:
    """The first covariance, each variance raised to the second's where that is larger, in the same units."""
    scale = np.sqrt(np.maximum(1.0, np.diag(second) / np.maximum(np.diag(first), 1e-300)))
    return np.asarray(first * np.outer(scale, scale))


def quantile(spare: float) -> float:
    """Student's two-sided 95 % quantile for this many spare degrees of freedom, a pure number; at least 2 are taken."""
    from scipy.stats import t

    return float(t.ppf(0.5 + 0.5 * CONFIDENCE, max(2.0, spare)))
