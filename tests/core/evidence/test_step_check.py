"""Step checks: a predicted response laid over itself, over a noisy one, over another drive's."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.errors import LogError
from gainbench.evidence.log import Log
from gainbench.evidence.prepared import prepare
from gainbench.evidence.step_check import check_step, logged_step
from gainbench.model import Duty, Sheet, SignalName
from quantities import assert_quantity
from rigs import fixed_sheet

DUTY = Duty(reference_speed=50.0, reference_at=0.01, length=0.2)


@pytest.fixture(scope="module")
def sheet() -> Sheet:
    return replace(fixed_sheet("plain"), duty=DUTY)


def log_of(sheet: Sheet, *, every: int = 2, reference: bool = True, offset: float = 0.0) -> Log:
    trace = assess(sheet).response.trace
    signals = {SignalName.SPEED: trace.speed[::every] + offset, SignalName.CURRENT: trace.current[::every]}
    if reference:
        signals[SignalName.SPEED_REFERENCE] = trace.reference[::every]
    return Log(name="step.csv", time=trace.time[::every] + 7.0, signals=signals)


@pytest.mark.parametrize("reference", [True, False])
def test_the_prediction_lies_on_itself(sheet, reference):
    found = check_step(sheet, log_of(sheet, reference=reference))
    assert found.outcome.fit_percent > 98.0
    seen, told = found.measured_figures, found.predicted_figures
    assert_quantity(seen.overshoot_percent, told.overshoot_percent, atol=0.2, unit="%", why="every second tick")
    assert_quantity(seen.rise_time_s, told.rise_time_s, atol=3e-4, unit="s", why="every second tick")
    assert_quantity(seen.peak_current_a, told.peak_current_a, rtol=0.02, unit="A", why="every second tick")
    assert any(one.startswith("overshoot: ") for one in found.outcome.remarks)


def test_a_ramp_and_a_stop_are_read_off_the_reference(sheet):
    ramped = replace(sheet, duty=replace(DUTY, reference_ramp=1000.0, stop_at=0.15))
    found = check_step(sheet, log_of(ramped))
    assert found.outcome.fit_percent > 97.0


@pytest.mark.parametrize("reference", [True, False])
def test_a_logged_step_is_shifted_to_begin_with_that_of_a_duty(sheet, reference):
    step = logged_step(sheet, prepare(log_of(sheet, reference=reference)))
    assert_quantity(step.duty.reference_at, DUTY.reference_at, atol=1e-4, unit="s", why="a row of the log")
    later = replace(DUTY, reference_at=0.03)
    # Without a logged reference nothing tells where the step is but that the log begins with the duty.
    moved = 0.03 - step.duty.reference_at if reference else 0.0
    assert_quantity(step.shift_to(later), moved, atol=1e-12, unit="s", why="one difference")
    assert set(step.signals) >= {SignalName.SPEED, SignalName.CURRENT}


def test_what_follows_a_gap_is_not_laid_over(sheet):
    log = log_of(sheet)
    late = log.time[log.time.size // 2]
    kept = (log.time < late) | (log.time > late + 0.01)
    cut = Log(name="gap.csv", time=log.time[kept], signals={name: one[kept] for name, one in log.signals.items()})
    step = logged_step(sheet, prepare(cut))
    assert_quantity(step.time[-1], late - log.time[0], atol=1e-3, unit="s", why="a row of the log")
    assert any("interrupted" in one for one in step.remarks)
    assert check_step(sheet, cut).outcome.fit_percent > 98.0


def test_another_drive_fits_worse(sheet):
    machine = replace(sheet.rig.machine, rotor_inertia=sheet.rig.machine.rotor_inertia * 4.0)
    other = replace(sheet, rig=replace(sheet.rig, machine=machine))
    gains = assess(sheet)
    assert gains.response is not None
    found = check_step(other, log_of(sheet))
    assert found.outcome.fit_percent < check_step(sheet, log_of(sheet)).outcome.fit_percent


def test_a_log_that_begins_in_motion_is_refused(sheet):
    with pytest.raises(LogError, match="at rest"):
        check_step(sheet, log_of(sheet, offset=20.0))


def test_a_log_without_a_step_or_motion_is_refused(sheet):
    time = np.arange(500) * 1e-3
    flat = {SignalName.SPEED: np.zeros(500), SignalName.SPEED_REFERENCE: np.zeros(500)}
    with pytest.raises(LogError, match="never steps"):
        check_step(sheet, Log(name="flat.csv", time=time, signals=flat))
    with pytest.raises(LogError, match="speed or angle"):
        check_step(sheet, Log(name="blind.csv", time=time, signals={SignalName.CURRENT: time}))
