"""Which places of a reach map a bandwidth can ask for.

A bandwidth and a margin lead to one loop, and to the place where it crosses over first. Behind a resonance a loop has
mostly crossed over before, at a lower frequency; other places share their bandwidth with one of a higher crossover.
Positive gains meet such places, but no bandwidth leads there.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.margins import open_loop, plant_response, sharp_modes
from gainbench.reach import ReachMap
from gainbench.results import Gains
from gainbench.sampling import Loop

FINE, QUICK = math.radians(1.5), math.radians(6.0)
"""Steps of the margin [rad]: of a map at rest, and of one that moves with every frame."""
_A_DECADE = 60
"""Frequencies that a loop is read at."""
_BELOW = 0.05
"""Lowest of them over the lowest crossover."""
_AROUND = np.linspace(-3.0, 3.0, 13)
"""More of them around a resonance or antiresonance, in its half widths."""
_JUMP = 6.0
"""A bandwidth that changes by this power of the ratio of two crossovers does not do so continuously."""
_CLEARLY = 1e-3
"""Relative distance by which a bandwidth is between two others."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Grid:
    """What the loop answers at the frequencies it is read at."""

    frequency: NDArray[np.float64]
    """Rising [rad/s]."""
    doubles: NDArray[np.float64]
    """``2 Re L`` from ``kp, ki``, shape (2, n)."""
    squares: NDArray[np.float64]
    """``|L|^2`` from ``kp^2, 2 kp ki, ki^2``, shape (3, n)."""


def with_own_bandwidth(loop: Loop, reach: ReachMap, *, step: float) -> ReachMap:
    """The part of a map to which a bandwidth leads, for the method that asks for bandwidth and margin.

    A place is left out where ``|L|`` is below 1 before the crossover, where ``|L/(1 + L)|`` never falls through
    ``1/sqrt(2)``, and where it does so at the same frequency as with a higher crossover of the same margin.

    Parameters
    ----------
    loop : Loop
        That the map is of.
    reach : ReachMap
        What positive gains with a stable loop meet.
    step : float
        Between the margins that are looked at [rad], > 0; edges that are not those of ``reach`` are known to it.

    Returns
    -------
    ReachMap
        With the same crossovers.
    """
    levels = np.arange(0.0, math.pi / 2.0 + 1e-9, step)
    crossover = reach.crossover
    grid = _grid(loop, float(crossover[0]))
    at = _answers(loop, crossover)
    before = grid.frequency < crossover[:, None]
    own = np.zeros((levels.size, crossover.size), dtype=bool)
    for k, level in enumerate(levels):
        met = np.any((reach.low <= level) & (level <= reach.high), axis=1)
        if met.any():
            own[k, met] = _own(grid, at[:, met], float(level), crossover=crossover[met], before=before[met])
    return _narrowed(reach, levels, own)


def _answers(loop: Loop, frequency: NDArray[np.float64]) -> NDArray[np.complex128]:
    """The loop with the proportional part alone, and with the integral part alone, shape (2, n)."""
    return np.stack((plant_response(loop, frequency), open_loop(loop, Gains(kp=0.0, ki=1.0), frequency=frequency)))


def _grid(loop: Loop, lowest: float) -> _Grid:
    nyquist = math.pi / loop.plant.period * (1.0 - 1e-6)
    first = _BELOW * lowest
    even = np.geomspace(first, nyquist, max(2, round(_A_DECADE * math.log10(nyquist / first))))
    peaks, spreads = sharp_modes(loop)
    around = (peaks[:, None] + spreads[:, None] * _AROUND).ravel()
    frequency = np.union1d(even, around[(around > first) & (around < nyquist)])
    p, q = _answers(loop, frequency)
    squares = np.stack((np.abs(p) ** 2, (p * q.conj()).real, np.abs(q) ** 2))
    return _Grid(frequency=frequency, doubles=2.0 * np.stack((p.real, q.real)), squares=squares)


def _own(
    grid: _Grid,
    at: NDArray[np.complex128],
    margin: float,
    *,
    crossover: NDArray[np.float64],
    before: NDArray[np.bool_],
) -> NDArray[np.bool_]:
    """Which crossovers a bandwidth leads to, of those that can be met with a margin."""
    p, q = at
    wanted = -np.exp(1j * margin)
    kp = (wanted * q.conj()).imag / (p * q.conj()).imag
    ki = (wanted * p.conj()).imag / (q * p.conj()).imag
    square = np.stack((kp**2, 2.0 * kp * ki, ki**2), axis=1) @ grid.squares
    first = ~np.any((square < 1.0) & before, axis=1)
    # |L|^2 - 2 Re L - 1 falls through zero where |L/(1 + L)|^2 falls through 1/2.
    bandwidth = _first_fall(grid.frequency, square - np.stack((kp, ki), axis=1) @ grid.doubles - 1.0)
    bandwidth[~first] = np.nan
    known = ~np.isnan(bandwidth)
    if np.all(np.diff(bandwidth[known]) > 0.0):
        return known
    low, high = np.minimum(bandwidth[1:], bandwidth[:-1]), np.maximum(bandwidth[1:], bandwidth[:-1])
    between = (low * (1.0 + _CLEARLY) < bandwidth[:, None]) & (bandwidth[:, None] < high * (1.0 - _CLEARLY))
    # From one fall to another the bandwidth jumps, and is nowhere between.
    between &= np.log(high / low) < _JUMP * np.log(crossover[1:] / crossover[:-1])
    shared: NDArray[np.bool_] = np.any(np.triu(between, k=1), axis=1)
    return np.logical_and(known, ~shared, dtype=np.bool_)


def _first_fall(frequency: NDArray[np.float64], above: NDArray[np.float64]) -> NDArray[np.float64]:
    """Where each row of ``above`` first falls through zero, between two frequencies by ratio; NaN where it does not."""
    k = np.argmax(above <= 0.0, axis=1)
    rows = np.arange(len(above))
    falls = k > 0
    before, after = above[rows, k - 1], above[rows, k]
    share = np.divide(before, before - after, out=np.zeros_like(before), where=falls)
    w = np.log(frequency)
    return np.where(falls, np.exp(w[k - 1] + share * (w[k] - w[k - 1])), np.nan)


def _narrowed(reach: ReachMap, levels: NDArray[np.float64], own: NDArray[np.bool_]) -> ReachMap:
    """The stretches of a map cut back to the margins that are marked; an end that is marked stays where it is."""
    inside = (reach.low[:, :, None] <= levels) & (levels <= reach.high[:, :, None])
    marked = inside & own.T[:, None, :]
    some = np.any(marked, axis=2)
    whole = np.logical_and(some, np.all(marked == inside, axis=2))
    rows = []
    for column in range(reach.crossover.size):
        found: list[tuple[float, float]] = []
        for stretch in np.flatnonzero(some[column]):
            ends = (float(reach.low[column, stretch]), float(reach.high[column, stretch]))
            here = inside[column, stretch], marked[column, stretch]
            found += [ends] if whole[column, stretch] else _runs(ends, levels, *here)
        rows.append(found)
    width = max((len(one) for one in rows), default=0)
    low = np.full((len(rows), width), np.nan)
    high = np.full_like(low, np.nan)
    for row, stretches in enumerate(rows):
        for place, (first, last) in enumerate(stretches):
            low[row, place], high[row, place] = first, last
    for one in (low, high):
        one.setflags(write=False)
    return ReachMap(crossover=reach.crossover, low=low, high=high)


def _runs(
    ends: tuple[float, float], levels: NDArray[np.float64], inside: NDArray[np.bool_], marked: NDArray[np.bool_]
) -> list[tuple[float, float]]:
    """The parts of one stretch."""
    within, kept = np.flatnonzero(inside), np.flatnonzero(marked)
    return [
        (
            ends[0] if run[0] == within[0] else float(levels[run[0]]),
            ends[1] if run[-1] == within[-1] else float(levels[run[-1]]),
        )
        for run in np.split(kept, np.flatnonzero(np.diff(kept) > 1) + 1)
    ]
