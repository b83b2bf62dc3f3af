"""From raw columns to a log: stamps in order, missing samples told, signals finite; every repair becomes a remark."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.errors import LogError
from gainbench.evidence.columns import Raw
from gainbench.evidence.log import Log, gap_length
from gainbench.evidence.suspicion import suspicions
from gainbench.model import SignalName

LEAST_SAMPLES = 10
"""Rows that a log has at least: less is a slip, not a run."""
_LONGEST_FILLED = 2
"""Samples that are filled in between their neighbours, where they are missing in a row."""
_MOST_FILLED = 0.01
"""Share of a signal that is filled in at most: a signal with more holes was logged at a slower rate."""
_MOST_REPEATED = 0.2
_NANOSECOND = 1e-9
_DAY = 86_400 * 10**9
_ENDS_EARLY = 0.05

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Scaled:
    """A raw column and what one of it is."""

    raw: Raw
    column: str
    """Its header, for messages."""
    factor: float
    """One of it in SI."""


def clean(name: str, time: Scaled, *, signals: Mapping[SignalName, Scaled], remarks: tuple[str, ...]) -> Log:
    """Put a log in order.

    Parameters
    ----------
    name : str
        The file's name, for messages.
    time : Scaled
        The stamps.
    signals : mapping
        The raw columns with their factors to SI.
    remarks : tuple of str
        What was noticed before.

    Returns
    -------
    Log
        With those remarks and all that was repaired.

    Raises
    ------
    LogError
        If time runs backwards or hardly moves, a column holds no numbers, or too little is left.
    """
    told = list(remarks)
    stamps, stamped = _seconds(time)
    if not stamped.any():
        raise LogError(f'{name}: column "{time.column}" holds no time; map the column with the stamps to time')
    values, missing = {}, {}
    for signal, one in signals.items():
        values[signal], missing[signal] = _scaled(one)
        if missing[signal].all():
            raise LogError(f'{name}: column "{one.column}" ({signal}) holds no numbers; map another column to {signal}')
    told += _unstamped(stamped, missing)
    kept = _in_order(name, time, stamps=stamps, stamped=stamped, told=told)
    stamps = stamps[kept] - stamps[kept][0]
    values = {signal: own[kept] for signal, own in values.items()}
    missing = {signal: own[kept] for signal, own in missing.items()}
    told += _early_ends(missing)
    for signal, own in values.items():
        told += _fill(signal, own, missing=missing[signal], time=stamps)
    whole = ~np.logical_or.reduce([np.zeros(stamps.size, dtype=np.bool_), *missing.values()])
    if int(whole.sum()) < LEAST_SAMPLES:
        raise LogError(
            f"{name}: too short: {int(whole.sum())} rows hold a number in every column that is asked for,"
            f" at least {LEAST_SAMPLES} are needed; record a longer run, or map columns that were logged together"
        )
    if not whole.all():
        without = " or ".join(signal for signal, own in missing.items() if own.any())
        told.append(f"{_count(int((~whole).sum()), 'row')} without {without} left out")
        stamps = stamps[whole] - stamps[whole][0]
        values = {signal: own[whole] for signal, own in values.items()}
    told += _timing(stamps, time)
    told += suspicions(values)
    if values and all(np.ptp(own) == 0.0 for own in values.values()):
        raise LogError(f"{name}: every signal is constant, so that nothing follows from it; record a run that moves")
    for array in (stamps, *values.values()):
        array.setflags(write=False)
    return Log(name=name, time=stamps, signals=values, remarks=tuple(told))


def _count(number: int, word: str) -> str:
    return f"{number} {word}{'' if number == 1 else 's'}"


def _scaled(one: Scaled) -> tuple[Floats, Flags]:
    """A signal in SI, and where it is missing; what overflows is missing as well."""
    with np.errstate(over="ignore", invalid="ignore"):
        values = one.raw.values * one.factor
    missing = one.raw.missing | ~np.isfinite(values)
    return values.astype(np.float64, copy=False), missing


def _seconds(time: Scaled) -> tuple[Floats, Flags]:
    """Stamps from the first one on [s], and where there is one; whole numbers lose nothing on the way."""
    raw = time.raw
    given = np.flatnonzero(~raw.missing)
    if not given.size:
        return np.zeros(raw.values.size), ~raw.missing
    with np.errstate(over="ignore", invalid="ignore"):
        since = raw.values - raw.values[given[0]]
        if raw.stamps and raw.values[given].min() >= 0 and raw.values[given].max() < _DAY:
            # Times of day begin anew at midnight.
            stood = since[given]
            since[given] = stood + _DAY * np.cumsum(np.diff(stood, prepend=stood[0]) < -_DAY // 2)
        seconds = since * (_NANOSECOND if raw.stamps else time.factor)
    return seconds.astype(np.float64, copy=False), ~raw.missing & np.isfinite(seconds)


def _unstamped(stamped: Flags, missing: Mapping[SignalName, Flags]) -> Iterator[str]:
    """Rows with numbers and no stamp; empty lines say nothing."""
    filled = np.logical_or.reduce([np.zeros(stamped.size, dtype=np.bool_), *(~own for own in missing.values())])
    lost = int((filled & ~stamped).sum())
    if lost:
        yield f"{_count(lost, 'row')} without a time stamp left out"


def _in_order(name: str, time: Scaled, *, stamps: Floats, stamped: Flags, told: list[str]) -> NDArray[np.intp]:
    """Rows with a stamp that is later than the one before."""
    rows = np.flatnonzero(stamped)
    steps = np.diff(stamps[rows])
    if rows.size > 1 and np.all(steps == 0.0):
        raise LogError(
            f'{name}: the time in column "{time.column}" does not move; map the column with the stamps to time'
        )
    back = np.flatnonzero(steps < 0.0)
    if back.size:
        place = int(back[0])
        before, after = float(stamps[rows[place]]), float(stamps[rows[place + 1]])
        raise LogError(
            f"{name}: time runs backwards at data row {int(rows[place + 1]) + 1}: {after:.6g} s come after"
            f" {before:.6g} s (from the first stamp on); cut the log there if it holds two runs or a counter began"
            " anew, or sort its rows by time"
        )
    again = int((steps == 0.0).sum())
    if again > _MOST_REPEATED * rows.size:
        raise LogError(
            f"{name}: {again} of {rows.size} rows repeat the stamp before them: the stamps are coarser than the"
            " samples; export them with more digits, or map a sample counter to time, with the period as its scale"
        )
    if again:
        told.append(f"{_count(again, 'row')} with a repeated time stamp left out")
    return rows[np.concatenate(([True], steps > 0.0))] if rows.size else rows


def _early_ends(missing: Mapping[SignalName, Flags]) -> Iterator[str]:
    """Signals whose column is shorter than the log."""
    for signal, own in missing.items():
        given = np.flatnonzero(~own)
        behind = own.size - 1 - int(given[-1]) if given.size else own.size
        if behind > _ENDS_EARLY * own.size:
            yield f"{signal} ends {_count(behind, 'row')} before the log does: its columns are of different length"


def _fill(signal: SignalName, values: Floats, *, missing: Flags, time: Floats) -> Iterator[str]:
    """Fill single holes in place, and take them from what is missing."""
    holes = np.flatnonzero(missing)
    if not holes.size or holes.size == values.size:
        return
    starts = holes[np.concatenate(([True], np.diff(holes) > 1))]
    ends = holes[np.concatenate((np.diff(holes) > 1, [True]))]
    longest = gap_length(np.diff(time)) * (_LONGEST_FILLED + 1)
    inside = (starts > 0) & (ends < values.size - 1) & (ends - starts < _LONGEST_FILLED)
    short = np.flatnonzero(inside)
    short = short[time[ends[short] + 1] - time[starts[short] - 1] <= longest]
    filled = np.concatenate([np.arange(starts[one], ends[one] + 1) for one in short] or [np.zeros(0, dtype=np.intp)])
    if not filled.size or filled.size > _MOST_FILLED * values.size:
        return
    given = np.flatnonzero(~missing)
    values[filled] = np.interp(time[filled], time[given], values[given])
    missing[filled] = False
    yield f"{_count(filled.size, 'missing sample')} of {signal} filled in between the neighbours"


def _timing(time: Floats, column: Scaled) -> Iterator[str]:
    """Gaps, uneven intervals, and stamps that are too large for their digits."""
    steps = np.diff(time)
    middle = float(np.median(steps))
    gaps = np.flatnonzero(steps > gap_length(steps))
    if gaps.size:
        worst = int(gaps[np.argmax(steps[gaps])])
        yield (
            f"{_count(gaps.size, 'gap')} in time, the longest {steps[worst]:.4g} s at {time[worst]:.6g} s,"
            f" where samples are {middle:.4g} s apart"
        )
    usual = np.delete(steps, gaps)
    if usual.size and np.ptp(usual) > 0.1 * middle:
        yield f"time is irregular: samples are {usual.min():.4g} to {usual.max():.4g} s apart"
    if column.raw.values.dtype.kind == "f":
        largest = float(np.max(np.abs(column.raw.values), initial=0.0, where=~column.raw.missing))
        grain = float(np.spacing(largest)) * abs(column.factor)
        if grain > 0.01 * middle:
            yield f"the stamps are so large that they are good to {grain:.2g} s only"
