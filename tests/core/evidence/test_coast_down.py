"""Coast-downs against the closed form."""

from __future__ import annotations

import numpy as np
import pytest

from bench_logs import counted, noisy
from gainbench.errors import LogError
from gainbench.evidence.coast_down import coast_down
from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.evidence.log import Log
from gainbench.evidence.prepared import prepare
from gainbench.model import Experiment, SignalName
from identified import TRUE, sheet_of
from quantities import assert_quantity

STEP, TOP = 1e-3, 200.0
SLOW = TRUE["viscous_friction"] / TRUE["inertia"]
REST = TRUE["coulomb_friction"] / TRUE["viscous_friction"]


def speeds() -> np.ndarray:
    """Run up, then coast to rest."""
    t = STEP * np.arange(3000)
    falls = np.maximum(0.0, (TOP + REST) * np.exp(-SLOW * t) - REST)
    return np.concatenate((np.linspace(0.0, TOP, 300), falls))


def log(*, angle: bool, way: float = 1.0) -> Log:
    speed = speeds()
    time = STEP * np.arange(speed.size)
    if angle:
        turned = np.concatenate(([0.0], np.cumsum(0.5 * (speed[1:] + speed[:-1])) * STEP))
        return Log(name="c.csv", time=time, signals={SignalName.ANGLE: way * counted(turned, 4096)})
    return Log(name="c.csv", time=time, signals={SignalName.SPEED: way * noisy(speed, 40.0, np.random.default_rng(1))})


@pytest.mark.parametrize(("angle", "way"), [(False, 1.0), (False, -1.0), (True, 1.0), (True, -1.0)])
def test_friction_over_inertia_with_the_sheets_inertia(angle, way):
    found = identify(sheet_of(Experiment.COAST_DOWN, off=1.0), [log(angle=angle, way=way)])
    assert set(found.estimates) == {EstimateName.VISCOUS_FRICTION, EstimateName.COULOMB_FRICTION}
    for name, one in found.estimates.items():
        assert_quantity(one.value, TRUE[name.value], rtol=0.02, unit=name.si, why="40 dB of noise over 1800 rows")
    assert any("inertia" in one for one in found.runs[0].remarks)
    assert found.runs[0].fit_percent > 95.0


def test_what_does_not_fall_is_refused():
    time = STEP * np.arange(1000)
    steady = Log(name="s.csv", time=time, signals={SignalName.SPEED: np.full(1000, 50.0)})
    with pytest.raises(LogError, match="coasts down"):
        coast_down(prepare(steady))
    with pytest.raises(LogError, match="speed or angle"):
        coast_down(prepare(Log(name="s.csv", time=time, signals={SignalName.CURRENT: time})))
