"""What a fit does, without a window: read the logs, identify, and lay the estimates over what was measured."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np

from gainbench.errors import LogError
from gainbench.evidence import Log, read_log
from gainbench.evidence.cutting import cut_log
from gainbench.evidence.estimate import Identification
from gainbench.evidence.fitted_traces import FittedTrace, fitted_traces
from gainbench.evidence.frequency_response import COHERENT, FrequencyCheck, check_frequency_response
from gainbench.evidence.identify import fit_turns, put_together, told_by
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.step_check import StepCheck, check_step
from gainbench.model import EvidenceLog, Experiment, Sheet, SignalName
from gainbench_app.pages.evidence.overview import Array, Envelope, envelope

_MOST_FREQUENCIES = 12


@dataclass(frozen=True, slots=True, kw_only=True)
class FitRequest:
    """What is to be fitted."""

    sheet: Sheet
    files: tuple[str, ...]
    """One for each log of the sheet."""
    spans: tuple[tuple[float, float] | None, ...]
    """The part of each log that counts [s]; None for all of it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class FitProgress:
    """How far a fit has come."""

    done: int
    """Steps that are over."""
    steps: int
    words: str
    """The step that is under way."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ShownTrace:
    """A signal as measured and as the estimates have it, for drawing."""

    signal: SignalName
    measured: Envelope
    """SI over seconds."""
    fitted: Envelope
    residual: Envelope
    fit_percent: float
    words: str
    """How the fitted one came about."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckRow:
    """One figure of a comparison, SI; None where there is none."""

    name: str
    unit: str
    measured: float | None
    predicted: float | None
    digits: int = 3


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RunResult:
    """What came of one log."""

    problem: str = ""
    """Why the log could not be used; empty where it was."""
    fit_percent: float | None = None
    remarks: tuple[str, ...] = ()
    traces: tuple[ShownTrace, ...] = ()
    checks: tuple[CheckRow, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FitReport:
    """What came of a fit."""

    found: Identification | None
    """None where no log could be used."""
    runs: tuple[RunResult, ...]
    """One for each log of the sheet."""


@dataclass(slots=True, kw_only=True)
class _Used:
    """A log that could be used so far."""

    place: int
    entry: EvidenceLog
    log: Log
    outcome: Outcome
    checks: tuple[CheckRow, ...] = ()
    traces: tuple[ShownTrace, ...] = field(default=())


def fit(request: FitRequest, say: Callable[[FitProgress], None]) -> FitReport:
    """Fit the logs of a sheet; one that cannot be used is said, and the others go on.

    Parameters
    ----------
    request : FitRequest
        What to fit.
    say : callable
        Told before every step: three for each log, and one for putting them together.

    Returns
    -------
    FitReport
        Of every log.
    """
    entries = request.sheet.evidence
    steps = 3 * len(entries) + 1
    problems: dict[int, str] = {}
    used: list[_Used] = []
    number = 0
    for turn in fit_turns(entries):
        earlier = [one.outcome for one in used]
        for place in turn:
            entry = entries[place]
            name = Path(entry.log).name
            say(FitProgress(done=2 * number, steps=steps, words=f"reading {name}"))
            try:
                log = read_log(request.files[place], entry.columns)
                span = request.spans[place]
                if span is not None:
                    log = cut_log(log, start=span[0], stop=span[1])
                say(FitProgress(done=2 * number + 1, steps=steps, words=f"fitting {name}"))
                used.append(_told(request.sheet, place, log=log, earlier=earlier))
            except LogError as error:
                problems[place] = str(error)
            except MemoryError:
                problems[place] = f"{name}: there is not enough memory to fit all of it; choose a span of it"
            number += 1
    used.sort(key=lambda one: one.place)
    used.sort(key=lambda one: one.place)
    say(FitProgress(done=2 * len(entries), steps=steps, words="putting the logs together"))
    found = None
    if used:
        kept = replace(request.sheet, evidence=tuple(one.entry for one in used))
        found = put_together(kept, [one.log for one in used], [one.outcome for one in used])
        for number, one in enumerate(used):
            name = Path(one.entry.log).name
            done = 2 * len(entries) + 1 + number
            say(FitProgress(done=done, steps=steps, words=f"laying the estimates over {name}"))
            one.traces += _traces(request.sheet, one, found)
    return FitReport(found=found, runs=_runs(len(entries), problems, used, found))


def _runs(
    count: int, problems: Mapping[int, str], used: list[_Used], found: Identification | None
) -> tuple[RunResult, ...]:
    results = {place: RunResult(problem=words) for place, words in problems.items()}
    if found is not None:
        for one, report in zip(used, found.runs, strict=True):
            results[one.place] = RunResult(
                fit_percent=report.fit_percent, remarks=report.remarks, traces=one.traces, checks=one.checks
            )
    return tuple(results[place] for place in range(count))


def _told(sheet: Sheet, place: int, *, log: Log, earlier: Sequence[Outcome]) -> _Used:
    entry = sheet.evidence[place]
    if entry.experiment is Experiment.STEP_CHECK:
        step = check_step(sheet, log)
        used = _Used(place=place, entry=entry, log=log, outcome=step.outcome, checks=_step_rows(step))
        used.traces = _step_traces(step)
        return used
    if entry.experiment is Experiment.FREQUENCY_RESPONSE:
        response = check_frequency_response(sheet, log)
        return _Used(place=place, entry=entry, log=log, outcome=response.outcome, checks=_frequency_rows(response))
    return _Used(place=place, entry=entry, log=log, outcome=told_by(sheet, entry, log, earlier=earlier))


def _traces(sheet: Sheet, used: _Used, found: Identification) -> tuple[ShownTrace, ...]:
    try:
        traces = fitted_traces(sheet, used.log, experiment=used.entry.experiment, estimates=found.estimates)
    except LogError:
        return ()
    return tuple(_shown(one) for one in traces)


def _shown(trace: FittedTrace) -> ShownTrace:
    freely = "model run freely over each unbroken piece" if trace.free_running else "row by row, for steady speed"
    pieces = trace.bounds.size - 1
    end_to_end = f", {pieces} pieces end to end" if pieces > 1 else ""
    return _drawn(
        trace.signal,
        time=trace.time,
        measured=trace.measured,
        fitted=trace.fitted,
        percent=trace.fit_percent,
        words=freely + end_to_end,
    )


def _step_traces(step: StepCheck) -> tuple[ShownTrace, ...]:
    percent = step.outcome.fit_percent
    words = "the sheet's prediction"
    found = [
        _drawn(
            SignalName.SPEED,
            time=step.time,
            measured=step.measured,
            fitted=step.predicted,
            percent=percent if percent is not None else 0.0,
            words=words,
        )
    ]
    if step.measured_current is not None:
        found.append(
            _drawn(
                SignalName.CURRENT,
                time=step.time,
                measured=step.measured_current,
                fitted=step.predicted_current,
                percent=_percent(step.measured_current, step.predicted_current),
                words=words,
            )
        )
    return tuple(found)


def _percent(measured: Array, fitted: Array) -> float:
    around = float(np.linalg.norm(measured - measured.mean()))
    return 100.0 * (1.0 - float(np.linalg.norm(measured - fitted)) / around) if around > 0.0 else 0.0


def _drawn(
    signal: SignalName, *, time: Array, measured: Array, fitted: Array, percent: float, words: str
) -> ShownTrace:
    return ShownTrace(
        signal=signal,
        measured=envelope(time, measured),
        fitted=envelope(time, fitted),
        residual=envelope(time, measured - fitted),
        fit_percent=percent,
        words=words,
    )


def _step_rows(step: StepCheck) -> tuple[CheckRow, ...]:
    measured, predicted = step.measured_figures, step.predicted_figures
    return (
        CheckRow(
            name="overshoot",
            unit="%",
            measured=measured.overshoot_percent,
            predicted=predicted.overshoot_percent,
        ),
        CheckRow(
            name="rise time",
            unit="ms",
            measured=_thousand(measured.rise_time_s),
            predicted=_thousand(predicted.rise_time_s),
        ),
        CheckRow(
            name="settling time",
            unit="ms",
            measured=_thousand(measured.settling_time_s),
            predicted=_thousand(predicted.settling_time_s),
        ),
        CheckRow(name="peak current", unit="A", measured=measured.peak_current_a, predicted=predicted.peak_current_a),
    )


def _thousand(value: float | None) -> float | None:
    return None if value is None else 1e3 * value


def _frequency_rows(response: FrequencyCheck) -> tuple[CheckRow, ...]:
    """Size and phase at some of the frequencies that can be believed."""
    sure = np.flatnonzero(response.coherence > COHERENT)
    if sure.size > _MOST_FREQUENCIES:
        wanted = np.geomspace(response.frequency_hz[sure[0]], response.frequency_hz[sure[-1]], _MOST_FREQUENCIES)
        at = np.unique([int(np.argmin(np.abs(response.frequency_hz[sure] - one))) for one in wanted])
        sure = sure[at]
    rows = []
    for index in sure:
        hertz = f"{response.frequency_hz[index]:.3g} Hz"
        measured, predicted = response.measured[index], response.predicted[index]
        apart = float(np.degrees(np.angle(measured / predicted)))
        angle = float(np.degrees(np.angle(predicted)))
        rows.append(
            CheckRow(
                name=f"size at {hertz}",
                unit="dB",
                measured=20.0 * float(np.log10(np.abs(measured))),
                predicted=20.0 * float(np.log10(np.abs(predicted))),
            )
        )
        rows.append(CheckRow(name=f"phase at {hertz}", unit="deg", measured=angle + apart, predicted=angle))
    return tuple(rows)
