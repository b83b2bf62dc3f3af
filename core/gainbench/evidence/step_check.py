"""Step checks: a closed-loop log over the response that the sheet predicts, with the figures of both."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from gainbench.assess import assess
from gainbench.errors import LogError
from gainbench.evidence.log import Log
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import Record, prepare
from gainbench.model import MAX_TICKS, Duty, Sheet, SignalName
from gainbench.simulate import schedule, speed_figures

Array = NDArray[np.float64]

_STEP = 0.05
"""Share of the largest reference from which on it has moved."""
_REST = 0.05
"""Share of the step that the start may be off rest."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LoggedStep:
    """A step as a log holds it, and where in time it is."""

    name: str
    """Of the log."""
    time: Array
    """From the log's first sample on [s], shape (n,)."""
    speed: Array
    """[rad/s], shape (n,)."""
    signals: Mapping[SignalName, Array]
    """All that the log holds, SI, each of shape (n,)."""
    duty: Duty
    """The duty that the log shows; its instants count from the log's first sample."""
    has_reference: bool
    """Whether the duty was read off a logged reference; without one it is the sheet's."""
    remarks: tuple[str, ...]

    def shift_to(self, duty: Duty) -> float:
        """What is added to the log's time, so that its step begins with that of a duty [s]."""
        return duty.reference_at - self.duty.reference_at if self.has_reference else 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class StepFigures:
    """Figures of a speed step; None where there is none, as in an assessment."""

    overshoot_percent: float | None
    rise_time_s: float | None
    settling_time_s: float | None
    peak_current_a: float | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class StepCheck:
    """A measured step over the predicted one, both at the ticks of the current loop."""

    time: Array
    """From the log's first sample on [s], shape (n,)."""
    reference: Array
    """[rad/s], shape (n,)."""
    measured: Array
    """Speed [rad/s], shape (n,)."""
    predicted: Array
    """Speed [rad/s], shape (n,)."""
    measured_current: Array | None
    """[A], shape (n,); None where the log has none."""
    predicted_current: Array
    """[A], shape (n,)."""
    measured_figures: StepFigures
    predicted_figures: StepFigures
    outcome: Outcome


def check_step(sheet: Sheet, log: Log) -> StepCheck:
    """Lay a logged speed step over the one that the sheet predicts.

    The duty is taken from the logged reference: its height, its instant, its ramp and its end. Without a column of
    the reference the sheet's own duty is taken, beginning with the log.

    Parameters
    ----------
    sheet : Sheet
        Its aims give the gains that the log should have been recorded with.
    log : Log
        With speed [rad/s] or angle [rad]; speed_reference [rad/s] and current [A] where they are.

    Returns
    -------
    StepCheck
        SI.

    Raises
    ------
    LogError
        If there is no motion in the log, no step in its reference, or no response to lay it over.
    """
    return check_logged_step(sheet, logged_step(sheet, prepare(log)))


def logged_step(sheet: Sheet, record: Record) -> LoggedStep:
    """Find the step in a log, without a prediction to lay it over.

    Parameters
    ----------
    sheet : Sheet
        Its duty stands for the one that the log shows where the log has no reference.
    record : Record
        The log as :func:`check_step` takes it, on its even grid.

    Returns
    -------
    LoggedStep
        SI.

    Raises
    ------
    LogError
        If there is no motion in the log, or no step in its reference.
    """
    interrupted = record.bounds.size > 2
    if interrupted:
        record = _first_piece(record)
    measured = _speed(record)
    duty, remarks = _duty(sheet, record, measured)
    if interrupted:
        remarks.append(f"the log is interrupted: only its first {record.length:.4g} s were taken")
    return LoggedStep(
        name=record.name,
        time=np.arange(record.size, dtype=np.float64) * record.step,
        speed=measured,
        signals=record.signals,
        duty=duty,
        has_reference=record.has(SignalName.SPEED_REFERENCE),
        remarks=tuple(remarks),
    )


def check_logged_step(sheet: Sheet, step: LoggedStep) -> StepCheck:
    """Lay a step that was found in a log over the one that the sheet predicts for its duty.

    Parameters
    ----------
    sheet : Sheet
        Its aims give the gains that the log should have been recorded with.
    step : LoggedStep
        From :func:`logged_step`.

    Returns
    -------
    StepCheck
        SI.

    Raises
    ------
    LogError
        If the sheet predicts no response to lay it over.
    """
    stage, duty, time, remarks = sheet.rig.stage, step.duty, step.time, list(step.remarks)
    assessment = assess(replace(sheet, duty=duty))
    if assessment.response is None:
        raise LogError(
            f"{step.name}: the sheet predicts no response to lay this log over: see the findings of its assessment"
        )
    trace = assessment.response.trace
    at_ticks = np.interp(trace.time, time, step.speed)
    current = step.signals.get(SignalName.CURRENT)
    current_at_ticks = None if current is None else np.interp(trace.time, time, current)
    plan = schedule(duty, stage)
    found = speed_figures(at_ticks, trace.reference, duty=duty, plan=plan, stage=stage)
    predicted = assessment.response.figures
    around = float(np.linalg.norm(at_ticks - at_ticks.mean()))
    off = float(np.linalg.norm(at_ticks - trace.speed))
    measured_figures = StepFigures(
        overshoot_percent=found.overshoot_percent,
        rise_time_s=found.rise_time_s,
        settling_time_s=found.settling_time_s,
        peak_current_a=None if current is None else float(np.abs(current).max()),
    )
    predicted_figures = StepFigures(
        overshoot_percent=predicted.overshoot_percent,
        rise_time_s=predicted.rise_time_s,
        settling_time_s=predicted.settling_time_s,
        peak_current_a=predicted.peak_current_a,
    )
    remarks += _words(measured_figures, predicted_figures)
    return StepCheck(
        time=trace.time,
        reference=trace.reference,
        measured=at_ticks,
        predicted=trace.speed,
        measured_current=current_at_ticks,
        predicted_current=trace.current,
        measured_figures=measured_figures,
        predicted_figures=predicted_figures,
        outcome=Outcome(fit_percent=100.0 * (1.0 - off / around) if around > 0.0 else None, remarks=tuple(remarks)),
    )


def _first_piece(record: Record) -> Record:
    """Up to the first gap: what follows it has moved in time."""
    end = int(record.bounds[1])
    return replace(
        record,
        bounds=record.bounds[:2],
        signals={name: values[:end] for name, values in record.signals.items()},
    )


def _speed(record: Record) -> Array:
    if record.has(SignalName.SPEED):
        return record.signals[SignalName.SPEED]
    if record.has(SignalName.ANGLE):
        return np.gradient(record.signals[SignalName.ANGLE], record.step)
    raise LogError(
        f"{record.name}: a step check takes a column of speed or angle, and this log has none; map one to it in"
        " [evidence.columns]"
    )


def _duty(sheet: Sheet, record: Record, measured: Array) -> tuple[Duty, list[str]]:
    """The duty that the log shows, and what is to be said of it."""
    stage = sheet.rig.stage
    length = min(record.step * (record.size - 1), (MAX_TICKS - 1) / stage.current_rate)
    reference = record.signals.get(SignalName.SPEED_REFERENCE)
    if reference is None:
        kept = min(length, sheet.duty.length)
        words = "the log has no reference: the sheet's duty was taken to begin with it"
        return replace(sheet.duty, length=kept, load_at=min(sheet.duty.load_time, kept)), [words]
    size = float(np.abs(reference).max())
    moved = np.flatnonzero(np.abs(reference - reference[0]) > _STEP * size)
    if size == 0.0 or moved.size == 0:
        raise LogError(f"{record.name}: its speed reference never steps, so there is nothing to lay a response over")
    first = int(moved[0])
    if max(abs(reference[0]), abs(float(np.mean(measured[: max(1, first)])))) > _REST * size:
        raise LogError(
            f"{record.name}: a step check begins at rest, and this log begins at {float(measured[0]):.4g} rad/s; cut it"
            " or record it again from standstill"
        )
    peak = int(np.flatnonzero(np.abs(reference) > (1.0 - 1e-3) * size)[0])
    top = float(reference[peak])
    after = np.flatnonzero(np.abs(reference[peak:] - top) > _STEP * size)
    # The reference had moved by the share that counts as a step; a ramp began earlier.
    duration = record.step * (peak - first) / (1.0 - _STEP)
    ramp = 0.0 if peak - first <= 1 else size / duration
    start = record.step * (first if ramp == 0.0 else max(0.0, peak - size / ramp / record.step))
    stop = record.step * (peak + int(after[0])) if after.size else None
    duty = Duty(reference_speed=top, length=length, reference_at=min(start, length), reference_ramp=ramp, stop_at=stop)
    return duty, []


def _words(measured: StepFigures, predicted: StepFigures) -> list[str]:
    """The figures of both, side by side."""
    rows = (
        ("overshoot", measured.overshoot_percent, predicted.overshoot_percent, 1.0, "%"),
        ("rise time", measured.rise_time_s, predicted.rise_time_s, 1e3, "ms"),
        ("settling time", measured.settling_time_s, predicted.settling_time_s, 1e3, "ms"),
        ("peak current", measured.peak_current_a, predicted.peak_current_a, 1.0, "A"),
    )
    words = []
    for name, seen, told, size, label in rows:
        if seen is None and told is None:
            continue
        pair = [f"{size * one:.4g} {label}" if one is not None else "none" for one in (seen, told)]
        words.append(f"{name}: {pair[0]} measured, {pair[1]} predicted")
    return words
