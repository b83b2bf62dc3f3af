"""Frequency responses: what a log of a chirp, a multisine or noise says of a loop, over what the sheet predicts."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from gainbench.assess import Assessment, assess
from gainbench.errors import LogError
from gainbench.evidence.log import Log
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import Record, prepare
from gainbench.margins import open_loop, plant_response
from gainbench.model import Sheet, SignalName, SpeedSensor
from gainbench.sampling import current_loop, hardware, speed_loop

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

COHERENT = 0.95
"""Coherence from which on a measured response is held against the predicted one."""
_LINES = 12
"""Neighbouring lines of a band, at least."""
_SHARE = 0.14
"""Of its frequency that a band spans, where that is more."""
_ROUGH = 0.3
"""Share of a source's power over a band that no straight line explains, from which on it is rough."""
_DEAR = 3.0
"""Times by which the record's ends may raise the variance of a response where they are told from it; above that, as at
the end of a chirp, they are left in."""
_MUCH_BETTER = 2.0
"""Times by which they must lower what is left of the answer to be told in spite of that."""
_LEAST = 5e-3
"""Share of the strongest band below which a band was not excited."""
_PER_RATE = 1e-3
"""Share by which the log's rate may miss a whole number of ticks."""


class Path(StrEnum):
    """From which signal to which a response was measured."""

    SPEED_LOOP = "speed reference to speed"
    SPEED_PLANT = "current reference to speed"
    CURRENT_LOOP = "current reference to current"
    CURRENT_PLANT = "voltage to current"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MeasuredResponse:
    """A frequency response as a log tells it."""

    name: str
    """Of the log."""
    path: Path
    frequency_hz: Array
    """Where the input was excited, rising [Hz], shape (n,)."""
    measured: Complex
    """In the output's unit over the input's, shape (n,)."""
    coherence: Array
    """0 to 1, shape (n,)."""
    rate: float
    """Of the rows that were taken [Hz]."""
    loop_rate: float
    """Of the ticks of the loop [Hz]."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FrequencyCheck:
    """A measured frequency response over the predicted one."""

    path: Path
    frequency_hz: Array
    """Where the input was excited, rising [Hz], shape (n,)."""
    measured: Complex
    """In the output's unit over the input's, shape (n,)."""
    predicted: Complex
    coherence: Array
    """0 to 1, shape (n,)."""
    outcome: Outcome


def check_frequency_response(sheet: Sheet, log: Log) -> FrequencyCheck:
    """Estimate a frequency response from a log and predict the same from the sheet.

    Over a band of neighbouring lines ``Y = G R + T``, with a response G and what the record's beginning and end leave,
    T, both smooth over the band. In a closed loop, where the reference was logged too, the plant's response is
    that from reference to answer over that from reference to input, which noise in the loop does not bias. Which
    response it is follows from the columns: speed_reference and speed, current_reference and speed, current_reference
    and current, voltage and current.

    Parameters
    ----------
    sheet : Sheet
        Its aims give the gains that the log should have been recorded with.
    log : Log
        With one of those pairs, the values as the firmware has them at its ticks.

    Returns
    -------
    FrequencyCheck
        SI.

    Raises
    ------
    LogError
        If the columns make no such pair, nothing was excited, or the sheet has no stable loop to compare with.

    References
    ----------
    R. Pintelon, J. Schoukens, System Identification: A Frequency Domain Approach, 2nd ed., 2012, chapter 7, for the
    local polynomial method (from memory).
    """
    return check_measured_response(sheet, measured_response(sheet, prepare(log)))


def measured_response(sheet: Sheet, record: Record) -> MeasuredResponse:
    """Estimate a frequency response from a log, without a prediction: see :func:`check_frequency_response`.

    Parameters
    ----------
    sheet : Sheet
        Of its stage come the ticks of the loops, and the sensor where the log has an angle.
    record : Record
        The log on its even grid.

    Returns
    -------
    MeasuredResponse
        SI.

    Raises
    ------
    LogError
        If the columns make no pair, or nothing was excited.
    """
    path, excited, given, answer = _signals(record, sheet)
    stage = sheet.rig.stage
    loop_rate = stage.speed_rate if path in (Path.SPEED_LOOP, Path.SPEED_PLANT) else stage.current_rate
    rate, picked = _at_ticks(record.step, loop_rate, excited)
    frequency, measured, coherence = _response(
        excited[picked], given[picked], answer[picked], rate=rate, below=0.5 * min(rate, loop_rate)
    )
    if frequency.size == 0:
        raise LogError(f"{record.name}: nothing was excited in it: its input is constant")
    return MeasuredResponse(
        name=record.name,
        path=path,
        frequency_hz=frequency,
        measured=measured,
        coherence=coherence,
        rate=rate,
        loop_rate=loop_rate,
    )


def check_measured_response(sheet: Sheet, response: MeasuredResponse) -> FrequencyCheck:
    """Predict what was measured from the sheet, and hold both against each other.

    Parameters
    ----------
    sheet : Sheet
        Its aims give the gains that the log should have been recorded with.
    response : MeasuredResponse
        From :func:`measured_response`.

    Returns
    -------
    FrequencyCheck
        SI.

    Raises
    ------
    LogError
        If the sheet has no stable loop to compare with.
    """
    path, rate, loop_rate = response.path, response.rate, response.loop_rate
    frequency, measured, coherence = response.frequency_hz, response.measured, response.coherence
    assessment = assess(sheet, simulated=False)
    predicted = _predicted(path, assessment, response.name, frequency=2.0 * np.pi * frequency)
    sure = coherence > COHERENT
    remarks = [f"{path.value}: {int(sure.sum())} of {frequency.size} frequencies with a coherence above {COHERENT:g}"]
    percent = None
    if sure.any():
        ratio = measured[sure] / predicted[sure]
        db, deg = 20.0 * np.log10(np.abs(ratio)), np.degrees(np.angle(ratio))
        remarks.append(
            f"against the prediction there: {float(np.abs(db).max()):.2g} dB and {float(np.abs(deg).max()):.2g} degrees"
            f" at most, {float(np.sqrt(np.mean(db**2))):.2g} dB and {float(np.sqrt(np.mean(deg**2))):.2g} degrees root"
            " mean square"
        )
        off = np.linalg.norm(measured[sure] - predicted[sure]) / np.linalg.norm(measured[sure])
        percent = 100.0 * (1.0 - float(off))
    if abs(rate - loop_rate) > _PER_RATE * loop_rate:
        remarks.append(
            f"the log has {rate:.5g} rows a second and the loop {loop_rate:.5g} ticks: delays of a part of a tick show"
        )
    return FrequencyCheck(
        path=path,
        frequency_hz=frequency,
        measured=measured,
        predicted=predicted,
        coherence=coherence,
        outcome=Outcome(fit_percent=percent, remarks=tuple(remarks)),
    )


def _signals(record: Record, sheet: Sheet) -> tuple[Path, Array, Array, Array]:
    """Which path the columns make: what was excited, what is given to the path, and its answer."""
    signals = record.signals
    name = SignalName
    speed = signals.get(name.SPEED)
    if speed is None and record.has(name.ANGLE):
        speed = _windowed(record, sheet)
    excitation = signals.get(name.SPEED_REFERENCE)
    if speed is not None and excitation is not None and not record.has(name.CURRENT_REFERENCE):
        return Path.SPEED_LOOP, excitation, excitation, speed
    wanted = signals.get(name.CURRENT_REFERENCE)
    if speed is not None and wanted is not None:
        return Path.SPEED_PLANT, wanted if excitation is None else excitation, wanted, speed
    current = signals.get(name.CURRENT)
    voltage = signals.get(name.VOLTAGE)
    if current is not None and wanted is not None:
        if voltage is not None:
            return Path.CURRENT_PLANT, wanted, voltage, current
        return Path.CURRENT_LOOP, wanted, wanted, current
    if current is not None and voltage is not None:
        return Path.CURRENT_PLANT, voltage, voltage, current
    raise LogError(
        f"{record.name}: a frequency response takes speed_reference and speed, current_reference and speed or current,"
        " or voltage and current; map a pair of them in [evidence.columns]"
    )


def _windowed(record: Record, sheet: Sheet) -> Array:
    """Speed as the sheet's sensor makes it of an angle."""
    stage = sheet.rig.stage
    angle = record.signals[SignalName.ANGLE]
    window = stage.speed_window if stage.speed_sensor is SpeedSensor.ENCODER else 1
    rows = max(1, round(window * stage.speed_period / record.step))
    before = np.concatenate((np.full(rows, angle[0]), angle[:-rows]))
    speed = (angle - before) / (rows * record.step)
    if stage.speed_filter <= 0.0:
        return np.asarray(speed)
    from scipy.signal import lfilter

    gain = -math.expm1(-record.step / stage.speed_filter)
    return np.asarray(lfilter([gain], [1.0, gain - 1.0], speed))


def _at_ticks(step: float, loop_rate: float, excited: Array) -> tuple[float, slice]:
    """The rows at the loop's ticks, where the log has whole numbers of rows per tick."""
    rate = 1.0 / step
    factor = round(rate / loop_rate)
    if factor < 2 or abs(rate / loop_rate - factor) > _PER_RATE * factor:
        return rate, slice(None)
    moves = np.abs(np.diff(excited, prepend=excited[0]))
    count = moves.size // factor * factor
    phase = int(np.argmax(moves[:count].reshape(-1, factor).sum(axis=0)))
    return rate / factor, slice(phase, None, factor)


def _response(
    excited: Array, given: Array, answer: Array, *, rate: float, below: float
) -> tuple[Array, Complex, Array]:
    """Frequencies up to a limit [Hz], response and coherence, by a local polynomial over each band."""
    n = excited.size
    frequency = np.asarray(np.fft.rfftfreq(n, 1.0 / rate), dtype=np.float64)
    frequency = frequency[frequency < below * (1.0 - 1e-9)]
    r, u, y = (np.fft.rfft(one - one.mean()) for one in (excited, given, answer))
    edges = _bands(frequency)
    power = np.array([float(np.sum(np.abs(r[a:b]) ** 2)) for a, b in edges])
    # Between a band's power, even for a slow sweep, and its power per line, even for noise.
    strength = power / np.sqrt([b - a for a, b in edges])
    found: list[tuple[float, complex, float]] = []
    for (a, b), size, strong in zip(edges, power, strength, strict=True):
        if not strong > _LEAST * strength.max():
            continue
        middle = float(np.sum(frequency[a:b] * np.abs(r[a:b]) ** 2) / size)
        x = (frequency[a:b] - middle) / max(frequency[b - 1] - frequency[a], 1e-300)
        to_answer, sure = _local(r[a:b], y[a:b], x)
        to_given = _local(r[a:b], u[a:b], x)[0] if given is not excited else 1.0
        if to_given != 0.0:
            found.append((middle, to_answer / to_given, sure))
    if not found:
        return np.zeros(0), np.zeros(0, dtype=np.complex128), np.zeros(0)
    middles, responses, coherence = zip(*found, strict=True)
    return np.array(middles), np.array(responses), np.array(coherence)


def _local(source: Complex, answer: Complex, x: Array) -> tuple[complex, float]:
    """Response at x = 0 and coherence over one band: ``answer = (G0 + G1 x + G2 x^2) source + T0 + T1 x``.

    What the record's beginning and end leave in the lines is as smooth over them as the response is. It can be told
    from what the source makes only where the source is rough over the band, as noise and lines are and a chirp is not.
    """
    smooth = np.stack((np.ones_like(source), x.astype(np.complex128)), axis=1)
    rough = source - smooth @ np.linalg.lstsq(smooth, source, rcond=None)[0]
    columns = np.stack((source, x * source, x**2 * source), axis=1)
    values, rest = _laid_on(columns, answer)
    if np.sum(np.abs(rough) ** 2) > _ROUGH * np.sum(np.abs(source) ** 2):
        whole = np.hstack((columns, smooth))
        with_ends, less = _laid_on(whole, answer)
        better = np.sum(np.abs(rest) ** 2) > _MUCH_BETTER * np.sum(np.abs(less) ** 2)
        if better or _doubt(whole) < _DEAR * _doubt(columns):
            columns, values, rest = whole, with_ends, less
    own = answer - columns[:, 3:] @ values[3:]
    free = max(1, x.size - columns.shape[1])
    noise, power = float(np.sum(np.abs(rest) ** 2)) / free, float(np.mean(np.abs(own) ** 2))
    return complex(values[0]), float(np.clip(1.0 - noise / power, 0.0, 1.0)) if power > 0.0 else 0.0


def _laid_on(columns: Complex, answer: Complex) -> tuple[Complex, Complex]:
    """Least squares of an answer over columns, and what is left of it."""
    size = np.sqrt(np.mean(np.abs(columns) ** 2, axis=0))
    size[size == 0.0] = 1.0
    values = np.linalg.lstsq(columns / size, answer, rcond=1e-9)[0] / size
    return values, answer - columns @ values


def _doubt(columns: Complex) -> float:
    """Variance of the first coefficient for noise of unit variance."""
    return float(np.linalg.pinv(columns.conj().T @ columns, rcond=1e-15, hermitian=True)[0, 0].real)


def _bands(frequency: Array) -> list[tuple[int, int]]:
    """First and last line of bands of neighbouring lines, wider with the frequency."""
    edges: list[tuple[int, int]] = []
    first = 1
    while first + _LINES <= frequency.size:
        width = max(_LINES, int(_SHARE * first))
        last = first + width
        # What is left above the last band is part of it, where it is no band of its own.
        if last + width > frequency.size:
            last = frequency.size
        edges.append((first, last))
        first = last
    return edges


def _predicted(path: Path, assessment: Assessment, name: str, *, frequency: Array) -> Complex:
    """The same response of the sheet's own loops, at these frequencies [rad/s]."""
    sheet = assessment.sheet
    stage, firmware = sheet.rig.stage, sheet.aims.firmware
    own = hardware(assessment.plant, stage)
    inner = current_loop(own, firmware)
    if path is Path.CURRENT_PLANT:
        return plant_response(inner, frequency)
    current = assessment.current
    if current.gains is None or current.figures is None or not current.figures.stable:
        raise LogError(f"{name}: the sheet's current loop is not stable, so that there is nothing to compare with")
    if path is Path.CURRENT_LOOP:
        loop = open_loop(inner, current.gains, frequency=frequency)
        return np.asarray(loop / (1.0 + loop))
    outer = speed_loop(own, assessment.plant, stage=stage, firmware=firmware, current=current.gains)
    if path is Path.SPEED_PLANT:
        return plant_response(outer, frequency)
    speed = assessment.speed
    if speed.gains is None or speed.figures is None or not speed.figures.stable:
        raise LogError(f"{name}: the sheet's speed loop is not stable, so that there is nothing to compare with")
    loop = open_loop(outer, speed.gains, frequency=frequency)
    plant = plant_response(outer, frequency)
    less = (1.0 - sheet.aims.speed.reference_weight) * speed.gains.kp
    return np.asarray((loop - less * plant) / (1.0 + loop))
