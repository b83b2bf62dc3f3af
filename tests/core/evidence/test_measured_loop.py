"""Open loops out of measured responses: exact where nothing disturbs, unsure where errors count many times over."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.errors import LogError
from gainbench.evidence.frequency_response import MeasuredResponse, Path
from gainbench.evidence.measured_loop import closed_to_open, pi_response, plant_to_open
from gainbench.margins import open_loop, plant_response
from gainbench.model import IntegratorRule
from quantities import assert_quantity
from rigs import fixed_sheet

HERTZ = np.geomspace(2.0, 900.0, 40)
WHY = "the same numbers on another way"


@pytest.fixture(scope="module")
def sheet():
    return fixed_sheet("plain")


def response_of(path: Path, values: np.ndarray, *, coherence: float = 1.0) -> MeasuredResponse:
    return MeasuredResponse(
        name="f.csv",
        path=path,
        frequency_hz=HERTZ,
        measured=values,
        coherence=np.full(HERTZ.size, coherence),
        rate=1.0,
        loop_rate=1.0,
    )


def loops(sheet, name: str) -> tuple[np.ndarray, np.ndarray]:
    """The open loop and the plant in it."""
    found = assess(sheet, simulated=False)
    loop = assessed_loop(found, name)
    w = 2.0 * np.pi * HERTZ
    return open_loop(loop, getattr(found, name).gains, frequency=w), plant_response(loop, w)


@pytest.mark.parametrize(("closed", "plant", "name"), [
    (Path.SPEED_LOOP, Path.SPEED_PLANT, "speed"),
    (Path.CURRENT_LOOP, Path.CURRENT_PLANT, "current"),
])  # fmt: skip
@pytest.mark.parametrize("rule", list(IntegratorRule))
def test_both_ways_lead_to_the_open_loop(sheet, closed, plant, name, rule):
    aims = sheet.aims
    other = replace(sheet, aims=replace(aims, firmware=replace(aims.firmware, integrator=rule)))
    wanted, met = loops(other, name)
    gains = getattr(assess(other, simulated=False), name).gains
    by_closed = closed_to_open(response_of(closed, wanted / (1.0 + wanted)), other)
    by_plant = plant_to_open(response_of(plant, met), other, gains=gains)
    assert_quantity(np.abs(by_closed.open_loop / wanted - 1.0), 0.0, atol=1e-9, unit="1", why=WHY)
    assert_quantity(np.abs(by_plant.open_loop / wanted - 1.0), 0.0, atol=1e-9, unit="1", why=WHY)
    assert by_closed.sure.all()
    assert by_plant.sure.all()


def test_the_pi_is_its_difference_equation(sheet):
    """A sine through the law itself: what is left after the start is C times the sine."""
    from gainbench.results import Gains

    gains, period, hertz = Gains(kp=2.0, ki=300.0), 1e-3, 50.0
    t = period * np.arange(400)
    error = np.exp(2j * np.pi * hertz * t)
    backward = np.cumsum(error) * gains.ki * period
    laws = {
        IntegratorRule.BACKWARD: backward,
        IntegratorRule.FORWARD: backward - gains.ki * period * error,
        IntegratorRule.TRAPEZOID: backward - 0.5 * gains.ki * period * error,
    }
    for rule, sums in laws.items():
        output = gains.kp * error + sums
        # The sum of a sine begins at an offset of its own, which whole turns do not hold.
        seen = np.mean((output * np.conj(error))[-200:])
        told = pi_response(
            gains, replace(sheet.aims.firmware, integrator=rule), frequency_hz=np.array([hertz]), period=period
        )
        assert_quantity(abs(seen - told[0]), 0.0, atol=1e-9, unit="1", why=WHY)


def test_where_the_closed_loop_is_near_one_little_noise_is_much(sheet):
    wanted, _ = loops(sheet, "speed")
    found = closed_to_open(response_of(Path.SPEED_LOOP, wanted / (1.0 + wanted), coherence=0.99), sheet)
    large = np.abs(1.0 + wanted) > 3.0
    assert not found.sure[large].any()
    assert found.sure[np.abs(1.0 + wanted) < 2.0].all()
    assert large.any()


def test_what_is_not_exact_is_refused(sheet):
    aims = sheet.aims
    weighted = replace(sheet, aims=replace(aims, speed=replace(aims.speed, reference_weight=0.5)))
    fed = replace(sheet, aims=replace(aims, firmware=replace(aims.firmware, back_emf_feedforward=True)))
    ones = np.full(HERTZ.size, 0.5 + 0j)
    with pytest.raises(LogError, match=r"weight of 0\.5"):
        closed_to_open(response_of(Path.SPEED_LOOP, ones), weighted)
    with pytest.raises(LogError, match="feedforward"):
        closed_to_open(response_of(Path.CURRENT_LOOP, ones), fed)
    assert closed_to_open(response_of(Path.CURRENT_LOOP, ones), weighted).open_loop[0] == 1.0
