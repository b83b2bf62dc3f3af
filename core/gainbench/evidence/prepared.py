"""A log on one even grid, spikes repaired: what every experiment starts from."""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.log import Log
from gainbench.evidence.suspicion import cut_off
from gainbench.evidence.unwrapping import unwrapped
from gainbench.model import SignalName

Array = NDArray[np.float64]

_SHORTEST = 8
"""Samples of a piece below which it tells nothing."""
_SPIKE = 8.0
"""A sample that stands out on both sides by this many times the usual steps is a spike."""
_SPIKE_SHARE = 0.05
"""Of the signal's range that it must stand out by as well."""
_MOST_SPIKES = 0.02
"""Share of samples above which they are no spikes but the signal."""
_BESIDE = 2
"""Samples to either side of a clipped one that are left out with it."""
_PIECE = 64
"""Samples between clipped ones below which a piece is left out."""
_LEFT = 0.3
"""Share of a record that must be left."""
_STRETCHES = 20
"""That stand for a long record where every row of a stretch is wanted."""
_TAPS = 10
"""Half length of the anti-alias filter, in samples of the thinned record."""
_PASS = 0.8
"""Cut of the anti-alias filter, as a share of the new Nyquist frequency."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Record:
    """Signals on an even grid, in one or more unbroken pieces laid end to end."""

    name: str
    step: float
    """[s]."""
    bounds: NDArray[np.int64]
    """First sample of each piece, and the number of samples at the end, shape (n_pieces + 1,)."""
    signals: Mapping[SignalName, Array]
    remarks: tuple[str, ...]

    @property
    def size(self) -> int:
        """Number of samples."""
        return int(self.bounds[-1])

    @property
    def length(self) -> float:
        """Time covered [s]."""
        return self.step * (self.size - (self.bounds.size - 1))

    def has(self, *names: SignalName) -> bool:
        """Whether it holds all of some signals."""
        return all(name in self.signals for name in names)


def prepare(log: Log) -> Record:
    """Put a log on an even grid and repair what stands out as a spike.

    Parameters
    ----------
    log : Log
        As it was read.

    Returns
    -------
    Record
        Its remarks are those of the log and what was done here.
    """
    remarks = list(log.remarks)
    step = log.period
    signals: dict[SignalName, Array] = {}
    pieces = [piece for piece in log.pieces if piece.stop - piece.start >= _SHORTEST] or list(log.pieces)
    regular = log.is_regular
    grids: list[Array] = []
    if regular:
        lengths = [piece.stop - piece.start for piece in pieces]
        spans = sum(float(log.time[piece.stop - 1] - log.time[piece.start]) for piece in pieces)
        step = spans / max(1, sum(lengths) - len(lengths))
    else:
        for piece in pieces:
            span = float(log.time[piece.stop - 1] - log.time[piece.start])
            grids.append(log.time[piece.start] + step * np.arange(int(span / step + 1e-9) + 1))
        remarks.append(
            f"the stamps are irregular, {1e3 * step:.4g} ms in the median: the signals were laid on an even grid of it"
        )
        lengths = [grid.size for grid in grids]
    for name, given in log.signals.items():
        values = given
        if name is SignalName.ANGLE:
            values, said = unwrapped(given, log.name)
            remarks += [said] if said else []
        repaired, count = without_spikes(values)
        if count:
            remarks.append(f"{name.value}: {count} spike{'s' if count > 1 else ''} of one sample left out")
        if regular:
            whole = len(pieces) == 1 and pieces[0].stop - pieces[0].start == values.size
            signals[name] = repaired if whole else np.concatenate([repaired[piece] for piece in pieces])
        else:
            signals[name] = np.concatenate([np.interp(grid, log.time, repaired) for grid in grids])
    bounds = np.concatenate(([0], np.cumsum(lengths))).astype(np.int64)
    return Record(name=log.name, step=step, bounds=bounds, signals=signals, remarks=tuple(remarks))


def without_clipped(record: Record) -> Record:
    """A record cut where a measured current or speed sits on its limit: what is beyond it nobody knows.

    A voltage on its limit is a supply that gives all it has, and is what the machine gets.

    Parameters
    ----------
    record : Record
        On its even grid.

    Returns
    -------
    Record
        In more pieces, of which the short ones are left out; the record itself where nothing is cut off, or too little
        would be left.
    """
    clipped = np.zeros(record.size, dtype=np.bool_)
    for name in (SignalName.CURRENT, SignalName.SPEED):
        if name in record.signals:
            clipped |= cut_off(record.signals[name])
    if not clipped.any():
        return record
    edges = np.flatnonzero(clipped)
    for near in range(1, _BESIDE + 1):
        clipped[np.maximum(edges - near, 0)] = True
        clipped[np.minimum(edges + near, record.size - 1)] = True
    starts = np.zeros(record.size, dtype=np.bool_)
    starts[record.bounds[:-1]] = True
    number = np.cumsum(starts | np.diff(clipped, prepend=False))
    firsts = np.flatnonzero(np.diff(number, prepend=0))
    lasts = np.append(firsts[1:], record.size)
    kept = (~clipped[firsts]) & (lasts - firsts >= _PIECE)
    lengths = (lasts - firsts)[kept]
    if lengths.sum() < _LEFT * record.size:
        return record
    keep = np.concatenate([np.arange(a, b) for a, b in zip(firsts[kept], lasts[kept], strict=True)])
    said = f"{record.size - keep.size} samples on and beside a limit of the measurement left out"
    return Record(
        name=record.name,
        step=record.step,
        bounds=np.concatenate(([0], np.cumsum(lengths))).astype(np.int64),
        signals={name: values[keep] for name, values in record.signals.items()},
        remarks=(*record.remarks, said),
    )


def without_spikes(values: Array) -> tuple[Array, int]:
    """A signal with single samples that stand out on both sides replaced by their neighbours' mean, and how many."""
    if values.size < _SHORTEST:
        return values, 0
    steps = np.diff(values)
    sample = np.abs(steps[:: max(1, steps.size // 20_000)])
    spread = values[:: max(1, values.size // 20_000)]
    low, high = np.percentile(spread, [1.0, 99.0])
    limit = max(_SPIKE * float(np.percentile(sample, 95.0)), _SPIKE_SHARE * float(high - low))
    large = np.flatnonzero(np.abs(steps) > limit)
    if limit <= 0.0 or large.size == 0:
        return values, 0
    pairs = large[:-1][(np.diff(large) == 1) & (steps[large[:-1]] * steps[large[1:]] < 0.0)] + 1
    if pairs.size == 0 or pairs.size > _MOST_SPIKES * values.size:
        return values, 0
    repaired = values.copy()
    repaired[pairs] = 0.5 * (values[pairs - 1] + values[pairs + 1])
    return repaired, int(pairs.size)


def thin(record: Record, factor: int) -> Record:
    """Every ``factor``-th sample behind an anti-alias filter without phase.

    The same linear filter on every signal leaves the equations between them as they are.

    Parameters
    ----------
    record : Record
        On its even grid.
    factor : int
        1 leaves it as it is.

    Returns
    -------
    Record
        On a grid ``factor`` times as wide; pieces that get too short are left out.
    """
    if factor <= 1:
        return record
    kept = [
        (first, last)
        for first, last in zip(record.bounds[:-1], record.bounds[1:], strict=True)
        if (last - first) // factor >= _SHORTEST
    ]
    if not kept:
        return record
    signals = {
        name: np.concatenate([thinned(values[first:last], factor) for first, last in kept])
        for name, values in record.signals.items()
    }
    lengths = [-(-(last - first) // factor) for first, last in kept]
    bounds = np.concatenate(([0], np.cumsum(lengths))).astype(np.int64)
    return Record(name=record.name, step=record.step * factor, bounds=bounds, signals=signals, remarks=record.remarks)


def thinned(values: Array, factor: int) -> Array:
    """One unbroken signal, low-passed without phase and thinned.

    The ends are held by an odd reflection, which keeps a slope.

    Parameters
    ----------
    values : ndarray, shape (n,)
        In any unit.
    factor : int
        Every how many samples one is kept.

    Returns
    -------
    ndarray, shape (ceil(n/factor),)
    """
    from scipy.signal import firwin, upfirdn

    if factor <= 1:
        return values
    half = min(_TAPS * factor, values.size - 1)
    taps = firwin(2 * half + 1, _PASS / factor, window=("kaiser", 6.0))
    front = 2.0 * values[0] - values[half:0:-1]
    back = 2.0 * values[-1] - values[-2 : -half - 2 : -1]
    whole = np.concatenate((front, values, back))
    # The filter's delay and the reflected front are ``half`` samples each.
    skipped = 2 * half % factor
    start = 2 * half // factor
    found = upfirdn(taps, whole[skipped:], down=factor)[start : start - (-values.size // factor)]
    return np.asarray(found, dtype=np.float64)


def stretches(record: Record, rows: int, *, by: SignalName) -> Record:
    """Unbroken stretches of a long record, every row of them: those in which a signal moves most, and an even choice.

    Parameters
    ----------
    record : Record
        On its even grid.
    rows : int
        How many to keep, about.
    by : SignalName
        The signal whose variance within a stretch says how much it tells.

    Returns
    -------
    Record
        The record itself where it is no longer than that.
    """
    if record.size <= rows:
        return record
    length = max(_SHORTEST, rows // _STRETCHES)
    starts = np.concatenate(
        [np.arange(first, last - length + 1, length) for first, last in itertools.pairwise(record.bounds)]
    )
    if starts.size <= _STRETCHES:
        return record
    values = record.signals[by]
    moves = np.array([float(np.var(values[start : start + length])) for start in starts])
    most = np.argsort(moves)[::-1][: _STRETCHES // 2]
    rest = np.setdiff1d(np.arange(starts.size), most)
    even = rest[np.linspace(0, rest.size - 1, _STRETCHES - most.size).round().astype(np.int64)]
    chosen = np.sort(np.concatenate((most, even)))
    signals = {
        name: np.concatenate([one[starts[index] : starts[index] + length] for index in chosen])
        for name, one in record.signals.items()
    }
    bounds = length * np.arange(chosen.size + 1, dtype=np.int64)
    return Record(name=record.name, step=record.step, bounds=bounds, signals=signals, remarks=record.remarks)
