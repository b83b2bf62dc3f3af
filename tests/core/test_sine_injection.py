"""The open loops against sines sent through the time response.

With an ideal sensor, no friction and no clamp the response is linear, so that the answer to a sine is the sum of the
response's own steps, one for each change of the reference. Both ends of what is measured come out of the trace, and
their ratio at the sine's frequency is the plant of the loop, whatever the loop around it does.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, replace

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.signal import fftconvolve

from gainbench.assess import Assessment, assess
from gainbench.margins import open_loop
from gainbench.model import Duty, Firmware, IntegratorRule, Sheet, SpeedSensor
from gainbench.results import Trace
from gainbench.sampling import Loop, current_loop, hardware, speed_loop
from quantities import assert_quantity
from rigs import fixed_sheet

SHARES = (0.003, 0.02, 0.1, 0.2, 0.3, 0.4)
DECIBEL, DEGREE = 0.1, 1.0
WHY = "what a bench's own injection could tell apart"


@dataclass(frozen=True)
class Case:
    """A sheet without friction, limits or counts."""

    name: str
    sheet: Sheet


def _quiet(
    sheet: Sheet,
    firmware: Firmware,
    *,
    speed_rate: float = 2e3,
    update_delay: float = 1.0,
    speed_delay: int = 0,
    speed_filter: float = 0.0,
) -> Sheet:
    """The same drive without what is not linear, long enough to settle."""
    rig = sheet.rig
    stage = replace(
        rig.stage,
        bus_voltage=1e7,
        current_limit=1e6,
        current_filter=0.0,
        speed_sensor=SpeedSensor.IDEAL,
        speed_rate=speed_rate,
        update_delay=update_delay,
        speed_delay=speed_delay,
        speed_filter=speed_filter,
    )
    machine = replace(rig.machine, coulomb_friction=0.0)
    train = replace(rig.train, load_coulomb_friction=0.0, efficiency=1.0, load_torque=0.0)
    return replace(
        sheet,
        rig=replace(rig, machine=machine, train=train, stage=stage),
        duty=Duty(reference_speed=1.0, length=1.2),
        aims=replace(sheet.aims, firmware=firmware),
    )


def _cases() -> list[Case]:
    forward = Firmware(integrator=IntegratorRule.FORWARD, back_emf_feedforward=True)
    trapezoid = Firmware(integrator=IntegratorRule.TRAPEZOID)
    return [
        Case("one rate", _quiet(fixed_sheet("plain"), Firmware(), speed_rate=10e3)),
        Case("two rates", _quiet(fixed_sheet("plain"), trapezoid, update_delay=0.4, speed_delay=3)),
        Case("elastic", _quiet(fixed_sheet("elastic"), Firmware(), speed_filter=5e-4, update_delay=1.5)),
        Case("field-oriented", _quiet(fixed_sheet("sine"), forward, speed_delay=1)),
    ]


CASES = pytest.mark.parametrize("case", _cases(), ids=lambda case: case.name)
SHARE = pytest.mark.parametrize("share", SHARES)


def _trace(sheet: Sheet) -> tuple[Assessment, Trace]:
    """The response to a step of the reference at the first tick, settled to its end."""
    found = assess(sheet)
    assert found.response is not None
    figures, trace = found.response.figures, found.response.trace
    assert figures.current_limited_s == 0.0
    assert figures.voltage_limited_s == 0.0
    assert abs(trace.speed[-1] - 1.0) < 1e-6
    return found, trace


def _ratio(
    above: NDArray[np.float64], below: NDArray[np.float64], *, omega: float, period: float, every: int
) -> complex:
    """Answer of one signal over that of another at ``omega``, from a sine stepped every so many samples.

    Both signals are answers to the step at sample 0; the sine runs for their length, and its last quarter is read.
    """
    size = len(above)
    stairs = np.zeros(size)
    stairs[::every] = np.diff(np.sin(omega * period * np.arange(0, size, every)), prepend=0.0)
    waves = [fftconvolve(stairs, signal)[:size] for signal in (above, below)]
    begin = 3 * size // 4
    turns = math.floor((size - begin) * omega * period / math.tau)
    count = round(turns * math.tau / (omega * period))
    k = np.arange(begin, begin + count)
    window = np.hanning(count) * np.exp(-1j * omega * period * k)
    top, bottom = (complex(np.sum(wave[k] * window)) for wave in waves)
    return top / bottom


def _compare(measured: complex, predicted: complex) -> None:
    off = measured / predicted
    assert_quantity(20.0 * math.log10(abs(off)), 0.0, atol=DECIBEL, unit="dB", why=WHY)
    assert_quantity(math.degrees(cmath.phase(off)), 0.0, atol=DEGREE, unit="deg", why=WHY)


def _pi(kp: float, ki: float, *, rule: IntegratorRule, omega: float, period: float) -> complex:
    z = cmath.exp(1j * omega * period)
    sums = {
        IntegratorRule.BACKWARD: period * z / (z - 1.0),
        IntegratorRule.FORWARD: period / (z - 1.0),
        IntegratorRule.TRAPEZOID: 0.5 * period * (z + 1.0) / (z - 1.0),
    }
    return kp + ki * sums[rule]


def _library_loops(found: Assessment) -> tuple[Loop, Loop]:
    sheet, plant = found.sheet, found.plant
    own, firmware = hardware(plant, sheet.rig.stage), sheet.aims.firmware
    assert found.current.gains is not None
    outer = speed_loop(own, plant, stage=sheet.rig.stage, firmware=firmware, current=found.current.gains)
    return current_loop(own, firmware), outer


@CASES
@SHARE
def test_speed_loop(case: Case, share: float) -> None:
    found, trace = _trace(case.sheet)
    stage, firmware, gains = case.sheet.rig.stage, case.sheet.aims.firmware, found.speed.gains
    assert gains is not None
    n, Tw = stage.speed_divisor, stage.speed_period
    omega = math.tau * share * stage.speed_rate
    speed, asked = trace.speed[::n], trace.current_reference[stage.speed_delay :: n]
    plant = _ratio(speed[: len(asked)], asked, omega=omega, period=Tw, every=1)
    z = cmath.exp(1j * omega * Tw)
    gain = 1.0 if stage.speed_filter == 0.0 else 1.0 - math.exp(-Tw / stage.speed_filter)
    sensed = gain / (1.0 - (1.0 - gain) / z)
    measured = _pi(gains.kp, gains.ki, rule=firmware.integrator, omega=omega, period=Tw) * sensed * plant
    _, loop = _library_loops(found)
    _compare(measured, complex(open_loop(loop, gains, frequency=np.array([omega]))[0]))


@CASES
@SHARE
def test_current_loop(case: Case, share: float) -> None:
    """At the current loop's rate, beyond half the speed rate too: the sine's images pass the same plant."""
    found, trace = _trace(case.sheet)
    stage, firmware, gains = case.sheet.rig.stage, case.sheet.aims.firmware, found.current.gains
    assert gains is not None
    # A frequency that no multiple of the speed rate folds onto itself or onto zero.
    omega = math.tau * stage.current_rate * (share + 0.0007)
    plant = _ratio(trace.current, trace.voltage, omega=omega, period=stage.current_period, every=stage.speed_divisor)
    measured = plant * _pi(gains.kp, gains.ki, rule=firmware.integrator, omega=omega, period=stage.current_period)
    loop, _ = _library_loops(found)
    _compare(measured, complex(open_loop(loop, gains, frequency=np.array([omega]))[0]))


@CASES
def test_the_response_adds_up(case: Case) -> None:
    """Half the reference gives half of everything: the sum of steps above may stand for a sine."""
    _, whole = _trace(case.sheet)
    half = assess(replace(case.sheet, duty=replace(case.sheet.duty, reference_speed=0.5))).response
    assert half is not None
    for name in ("speed", "current", "voltage", "current_reference"):
        one, two = getattr(whole, name), getattr(half.trace, name)
        assert_quantity(2.0 * two, one, atol=1e-9 * float(np.max(np.abs(one))), unit="SI", why="rounding")
