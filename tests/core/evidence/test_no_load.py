"""No-load runs."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from bench_logs import run
from gainbench.errors import LogError
from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.model import Experiment
from identified import ONE, TRUE, log_of, sheet_of
from quantities import assert_quantity

FREE = replace(ONE, offset=np.zeros(1))
BOTH = np.repeat([4.0, 8.0, 12.0, 16.0, -4.0, -8.0, -12.0, -16.0], 1600)[None]


def found(voltage: np.ndarray, *only: str):
    log = log_of(run(FREE, voltage, rate=2000.0), only=only)
    return identify(sheet_of(Experiment.NO_LOAD, off=1.0), [log])


@pytest.mark.parametrize("rows", [6400, 12800])
def test_constant_and_friction(rows):
    told = found(BOTH[:, :rows], "voltage", "current", "speed")
    got = told.estimates
    why = "50 dB of noise over some thousand steady rows"
    assert_quantity(
        got[EstimateName.BACK_EMF_CONSTANT].value, TRUE["back_emf_constant"], rtol=2e-3, unit="V*s/rad", why=why
    )
    for name in (EstimateName.VISCOUS_FRICTION, EstimateName.COULOMB_FRICTION):
        assert_quantity(got[name].value, TRUE[name.value], rtol=0.05, unit=name.si, why=why)
    assert EstimateName.INERTIA not in got
    assert any("resistance" in one for one in told.runs[0].remarks)


def test_voltage_alone_tells_the_constant():
    told = found(BOTH, "voltage", "speed")
    assert list(told.estimates) == [EstimateName.TORQUE_CONSTANT, EstimateName.BACK_EMF_CONSTANT]
    value = told.estimates[EstimateName.BACK_EMF_CONSTANT].value
    assert_quantity(value, 0.052, rtol=0.1, unit="V*s/rad", why="the drop over the resistance is in it")
    assert any("no current" in one for one in told.runs[0].remarks)


def test_without_motion_it_is_refused():
    with pytest.raises(LogError, match="speed or angle"):
        found(BOTH, "voltage", "current")
