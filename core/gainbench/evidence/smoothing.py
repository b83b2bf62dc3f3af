"""Smoothed motion: position, speed and acceleration of a noisy signal, up to the frequency where noise takes over."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

ORDER = 4
"""Of the Butterworth filter that is run both ways."""
_HIGHEST = 0.1
"""Share of the rate that the cut is at most, as published for the axis with 1 kHz and 100 Hz."""
_SEGMENT = 4096
"""Samples of a spectrum's segment."""
_ABOVE = 6.0
"""Times the noise floor up to which a spectrum is signal."""
_ROOM = 2.0
"""The cut over the frequency where the signal sinks into noise."""
_LEAST_PERIODS = 10.0
"""Periods of the cut in the whole signal, at least."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Motion:
    """A smoothed motion, per sample."""

    speed: Array
    """[rad/s]."""
    acceleration: Array
    """[rad/s^2]."""
    noise: float
    """Standard deviation of the measured speed, or of the smoothed one where the angle was measured [rad/s]."""


def noise_cut(values: Array, step: float, *, integrated: int) -> float:
    """The frequency to smooth a signal at.

    The spectrum is that of the ``integrated``-th difference, so that a drift does not leak, divided by what the
    difference does to white noise; its upper third is the floor of the noise.

    Parameters
    ----------
    values : ndarray, shape (n,)
        An angle [rad] or a speed [rad/s].
    step : float
        From sample to sample [s].
    integrated : int
        2 for an angle, 1 for a speed.

    Returns
    -------
    float
        [Hz]: twice the frequency where the signal sinks into the noise, at most a tenth of the rate.
    """
    from scipy.signal import welch

    rate = 1.0 / step
    highest = _HIGHEST * rate
    lowest = min(highest, _LEAST_PERIODS / (step * values.size))
    differenced = np.diff(values, n=integrated)
    if differenced.size < 64 or not np.any(differenced):
        return highest
    frequency, power = welch(differenced, fs=rate, nperseg=min(_SEGMENT, differenced.size))
    frequency, power = frequency[1:], power[1:]
    power = power / (2.0 * np.sin(np.pi * frequency * step)) ** (2 * integrated)
    floor = float(np.median(power[2 * power.size // 3 :]))
    # A running mean over a few lines, so that one line neither ends nor prolongs the signal.
    width = max(1, min(9, power.size // 20))
    smooth = np.convolve(power, np.ones(width) / width, mode="same")
    above = np.flatnonzero(smooth > _ABOVE * floor)
    if above.size == 0:
        return lowest
    return float(np.clip(_ROOM * frequency[above[-1]], lowest, highest))


def smooth(values: Array, step: float, *, cut: float) -> Array:
    """A signal behind a Butterworth filter of order 4 run both ways.

    Parameters
    ----------
    values : ndarray, shape (n,)
        In any unit.
    step : float
        From sample to sample [s].
    cut : float
        [Hz].

    Returns
    -------
    ndarray, shape (n,)
    """
    from scipy.signal import butter, sosfiltfilt

    sos = butter(ORDER, min(cut, 0.45 / step), fs=1.0 / step, output="sos")
    pad = min(values.size - 1, round(3.0 / (cut * step)))
    return np.asarray(sosfiltfilt(sos, values, padlen=pad), dtype=np.float64)


def motion_of(values: Array, step: float, *, angle: bool, cut: float) -> Motion:
    """Speed and acceleration by central differences of a smoothed signal.

    Parameters
    ----------
    values : ndarray, shape (n,)
        An angle [rad] or a speed [rad/s].
    step : float
        From sample to sample [s].
    angle : bool
        Which of the two.
    cut : float
        Of the smoothing [Hz].

    Returns
    -------
    Motion
        rad/s and rad/s^2.
    """
    smoothed = smooth(values, step, cut=cut)
    speed = np.gradient(smoothed, step) if angle else smoothed
    off = values - smoothed
    # What is left of white noise below the cut, differentiated where an angle was measured.
    share = np.sqrt(min(1.0, 2.0 * cut * step))
    spread = float(np.median(np.abs(off))) * 1.4826
    noise = spread * share * (2.0 * np.pi * cut / np.sqrt(3.0) if angle else 1.0)
    return Motion(speed=speed, acceleration=np.gradient(speed, step), noise=noise)


def speed_of(signal: Array, step: float, *, angle: bool, bounds: NDArray[np.int64]) -> Array:
    """Smoothed speed at every sample of a signal in pieces.

    Parameters
    ----------
    signal : ndarray, shape (n,)
        An angle [rad] or a speed [rad/s].
    step : float
        From sample to sample [s].
    angle : bool
        Which of the two.
    bounds : ndarray, shape (n_pieces + 1,)
        First sample of each unbroken piece, and n at the end.

    Returns
    -------
    ndarray, shape (n,)
        [rad/s].
    """
    spans = list(itertools.pairwise(bounds))
    cut = float(np.median([noise_cut(signal[a:b], step, integrated=2 if angle else 1) for a, b in spans]))
    return np.concatenate([motion_of(signal[a:b], step, angle=angle, cut=cut).speed for a, b in spans])
