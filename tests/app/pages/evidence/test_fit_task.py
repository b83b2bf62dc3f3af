"""What a fit does, in this process: that it runs in another one is the job's."""

from dataclasses import replace

import numpy as np
import pytest

from gainbench.evidence import read_log
from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench_app.pages.evidence.fit_task import FitRequest, fit


def request_of(desk, *, spans=None):
    sheet = desk.sheet
    count = len(sheet.evidence)
    return FitRequest(sheet=sheet, files=tuple(one.log for one in sheet.evidence), spans=spans or (None,) * count)


def test_a_log_that_cannot_be_used_is_said_and_the_others_go_on(desk, driven_log, log_file, name_log):
    name_log(desk, driven_log, Experiment.DRIVEN)
    gone = log_file("gone.csv", "voltage", "current")
    name_log(desk, gone, Experiment.LOCKED_ROTOR)
    gone.unlink()
    name_log(desk, log_file("still.csv", "voltage", "current"), Experiment.COAST_DOWN)
    told = []
    report = fit(request_of(desk), told.append)
    assert "no such file" in report.runs[1].problem
    assert "speed or angle" in report.runs[2].problem
    good = report.runs[0]
    assert not good.problem
    assert good.fit_percent > 90.0
    assert [one.signal for one in good.traces] == [SignalName.SPEED, SignalName.CURRENT]
    assert report.found.estimates[EstimateName.RESISTANCE].value == pytest.approx(0.6, rel=0.02)
    # A locked rotor comes first, since others use what it tells.
    assert told[0].words == "reading gone.csv"
    assert [one.done for one in told] == sorted(one.done for one in told)
    assert all(one.done < one.steps == 10 for one in told)


def test_it_is_what_the_command_tells_whatever_the_order(desk, driven_log, log_file, name_log):
    name_log(desk, log_file("slow.csv", "speed", "voltage"), Experiment.NO_LOAD)
    name_log(desk, driven_log, Experiment.DRIVEN)
    told = []
    report = fit(request_of(desk), told.append)
    sheet = desk.sheet
    logs = [read_log(one.log, one.columns) for one in sheet.evidence]
    assert report.found == identify(sheet, logs)
    assert [one.words for one in told if one.words.startswith("fitting")] == ["fitting run-07.csv", "fitting slow.csv"]
    assert [run.traces[0].signal for run in report.runs] == [SignalName.VOLTAGE, SignalName.SPEED]


def test_a_span_is_what_counts(desk, driven_log, name_log):
    name_log(desk, driven_log, Experiment.DRIVEN)
    report = fit(request_of(desk, spans=((0.1, 0.4),)), lambda _: None)
    assert any("only 0.1 s to 0.4 s of it was used" in one for one in report.runs[0].remarks)
    assert report.runs[0].traces[0].measured.x[-1] < 0.31
    refused = fit(request_of(desk, spans=((7.0, 8.0),)), lambda _: None)
    assert refused.found is None
    assert "samples lie between" in refused.runs[0].problem


def test_a_step_check_gives_the_figures_of_both(desk, tmp_path):
    trace = desk.assessment.response.trace
    path = tmp_path / "step.csv"
    rows = np.column_stack([trace.time, trace.speed, trace.current, trace.reference])[::4]
    np.savetxt(path, rows, fmt="%.6f", delimiter=",", header="t,w,i,r", comments="")
    columns = tuple(
        LogColumn(signal=signal, column=column, unit=unit)
        for signal, column, unit in (
            (SignalName.TIME, "t", "s"),
            (SignalName.SPEED, "w", "rad/s"),
            (SignalName.CURRENT, "i", "A"),
            (SignalName.SPEED_REFERENCE, "r", "rad/s"),
        )
    )
    entry = EvidenceLog(log=str(path), experiment=Experiment.STEP_CHECK, columns=columns)
    sheet = replace(desk.sheet, evidence=(entry,))
    report = fit(FitRequest(sheet=sheet, files=(str(path),), spans=(None,)), lambda _: None)
    (run,) = report.runs
    assert not run.problem
    rows = {one.name: one for one in run.checks}
    assert set(rows) == {"overshoot", "rise time", "settling time", "peak current"}
    assert rows["rise time"].measured == pytest.approx(rows["rise time"].predicted, abs=0.3)
    assert [one.signal for one in run.traces] == [SignalName.SPEED, SignalName.CURRENT]
    assert not report.found.estimates


def test_a_frequency_response_gives_sizes_and_phases(desk, tmp_path):
    rng = np.random.default_rng(5)
    time = np.arange(6000) / 20e3
    voltage = np.repeat(rng.uniform(-5.0, 5.0, 1500), 4)
    current = np.zeros(voltage.size)
    decay = np.exp(-0.6 / 0.45e-3 / 20e3)
    for k in range(voltage.size - 1):
        current[k + 1] = decay * current[k] + (1.0 - decay) / 0.6 * voltage[k]
    path = tmp_path / "noise.csv"
    np.savetxt(path, np.column_stack([time, voltage, current]), fmt="%.6f", delimiter=",", header="t,u,i", comments="")
    columns = tuple(
        LogColumn(signal=signal, column=column, unit=unit)
        for signal, column, unit in (
            (SignalName.TIME, "t", "s"),
            (SignalName.VOLTAGE, "u", "V"),
            (SignalName.CURRENT, "i", "A"),
        )
    )
    entry = EvidenceLog(log=str(path), experiment=Experiment.FREQUENCY_RESPONSE, columns=columns)
    sheet = replace(desk.sheet, evidence=(entry,))
    (run,) = fit(FitRequest(sheet=sheet, files=(str(path),), spans=(None,)), lambda _: None).runs
    assert not run.problem
    assert 4 <= len(run.checks) <= 24
    assert {one.unit for one in run.checks} == {"dB", "deg"}
    assert run.checks[0].name.startswith("size at ")
