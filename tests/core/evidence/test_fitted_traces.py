"""Traces of the estimates over logs of simulated motors: with the true values little is left but the noise."""

import numpy as np
import pytest

from gainbench.evidence.estimate import Estimate, EstimateName
from gainbench.evidence.fitted_traces import fitted_traces
from gainbench.evidence.log import Log
from gainbench.model import Experiment, SignalName
from identified import RATE, TRUE, log_of, sheet_of, some_motion


def estimates(**changed):
    values = {**TRUE, **changed}
    return {
        EstimateName(name): Estimate(value=value, low=value, high=value, run_low=value, run_high=value)
        for name, value in values.items()
    }


@pytest.fixture(scope="module")
def motion():
    return some_motion(2.0)


@pytest.mark.parametrize("moves", ["speed", "angle"])
def test_a_driven_run_gives_speed_and_current(motion, moves):
    log = log_of(motion, only=("voltage", "current", moves))
    sheet = sheet_of(Experiment.DRIVEN)
    speed, current = fitted_traces(sheet, log, experiment=Experiment.DRIVEN, estimates=estimates())
    assert (speed.signal, current.signal) == (SignalName.SPEED, SignalName.CURRENT)
    # 50 dB of noise leave 0.3 % of the signal; runs without a restart and counts of an encoder some more.
    assert speed.fit_percent > 98.0
    assert current.fit_percent > 97.0
    assert np.allclose(speed.residual, speed.measured - speed.fitted)
    assert speed.time[-1] == pytest.approx(2.0, abs=2.0 / RATE)


def test_the_sheets_values_stand_in_for_what_is_not_estimated(motion):
    log = log_of(motion, only=("voltage", "current", "speed"))
    found = fitted_traces(sheet_of(Experiment.DRIVEN, off=1.0), log, experiment=Experiment.DRIVEN, estimates={})
    heavier = fitted_traces(
        sheet_of(Experiment.DRIVEN), log, experiment=Experiment.DRIVEN, estimates=estimates(inertia=4.8e-4)
    )
    # The sheet of these tests knows no friction, which is missed; twice the inertia is missed more.
    assert 60.0 < found[0].fit_percent < 97.0
    assert heavier[0].fit_percent < found[0].fit_percent
    assert found[1].fit_percent > 97.0


def test_without_a_current_the_voltage_drives(motion):
    log = log_of(motion, only=("voltage", "speed"))
    (speed,) = fitted_traces(sheet_of(Experiment.DRIVEN), log, experiment=Experiment.DRIVEN, estimates=estimates())
    assert speed.fit_percent > 96.0


def test_a_locked_rotor_gives_the_current():
    time = np.arange(800) / 10e3
    rise = np.exp(-0.6 / 0.9e-3 / 10e3)
    voltage = np.where(np.arange(800) // 100 % 2 == 0, 6.0, 2.0)
    current = np.zeros(800)
    for k in range(799):
        current[k + 1] = rise * current[k] + (1.0 - rise) / 0.6 * voltage[k]
    log = Log(name="run.csv", time=time, signals={SignalName.VOLTAGE: voltage, SignalName.CURRENT: current})
    sheet = sheet_of(Experiment.LOCKED_ROTOR)
    (found,) = fitted_traces(sheet, log, experiment=Experiment.LOCKED_ROTOR, estimates=estimates())
    assert found.signal is SignalName.CURRENT
    assert found.fit_percent > 98.0


def test_a_coast_down_begins_at_its_highest_speed():
    fall = 1e-4 / 2.4e-4
    time = np.arange(0.0, 1.2, 1e-3)
    drag = 0.03 / 1e-4
    coasting = (300.0 + drag) * np.exp(-fall * time) - drag
    speed = np.concatenate((np.linspace(100.0, 300.0, 200), coasting))
    log = Log(name="run.csv", time=1e-3 * np.arange(speed.size), signals={SignalName.SPEED: speed})
    sheet = sheet_of(Experiment.COAST_DOWN)
    (found,) = fitted_traces(sheet, log, experiment=Experiment.COAST_DOWN, estimates=estimates())
    assert found.measured.size <= time.size + 10
    assert found.fit_percent > 99.0


def test_a_no_load_run_is_put_together_row_by_row():
    steps = np.repeat([50.0, -50.0, 120.0, -120.0], 400)
    drag = 1e-4 * steps + 0.03 * np.sign(steps) - 8e-3
    current = drag / 0.052
    signals = {
        SignalName.SPEED: steps,
        SignalName.CURRENT: current,
        SignalName.VOLTAGE: 0.6 * current + 0.052 * steps,
    }
    log = Log(name="run.csv", time=1e-3 * np.arange(steps.size), signals=signals)
    found = fitted_traces(sheet_of(Experiment.NO_LOAD), log, experiment=Experiment.NO_LOAD, estimates=estimates())
    assert [one.signal for one in found] == [SignalName.CURRENT, SignalName.VOLTAGE]
    assert not any(one.free_running for one in found)
    for one in found:
        # The smoothed speed goes through zero where the measured one jumps.
        assert np.median(np.abs(one.residual)) < 1e-3 * np.abs(one.measured).max()


def test_comparisons_and_short_logs_have_no_such_traces(motion):
    log = log_of(motion, only=("voltage", "current", "speed"))
    sheet = sheet_of(Experiment.STEP_CHECK)
    assert fitted_traces(sheet, log, experiment=Experiment.STEP_CHECK, estimates={}) == ()
    short = Log(name="run.csv", time=log.time[:20], signals={name: one[:20] for name, one in log.signals.items()})
    assert fitted_traces(sheet, short, experiment=Experiment.DRIVEN, estimates={}) == ()
