"""What is said of elastic trains that were fitted as one body."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from gainbench.evidence.elasticity import elastic_remark
from gainbench.evidence.prepared import Record
from gainbench.model import SignalName
from gainbench.plant import refer
from rigs import fixed_sheet

STEP = 1e-3
PLANT = refer(fixed_sheet("plain").rig)
# Antiresonance at 20 Hz, resonance at 28 Hz.
LOAD = PLANT.motor_inertia
ELASTIC = replace(PLANT, elastic=True, load_inertia=LOAD, stiffness=LOAD * (2.0 * np.pi * 20.0) ** 2, damping=1e-4)


def record(frequency: float) -> Record:
    time = STEP * np.arange(8000)
    current = np.sin(2.0 * np.pi * frequency * time) + 1e-3 * np.random.default_rng(1).standard_normal(8000)
    signals = {SignalName.CURRENT: current, SignalName.SPEED: np.zeros(8000)}
    return Record(name="a.csv", step=STEP, bounds=np.array([0, 8000]), signals=signals, remarks=())


def test_a_rigid_train_needs_no_word():
    assert elastic_remark(record(5.0), PLANT) == ""


@pytest.mark.parametrize(("frequency", "reaches"), [(2.0, False), (25.0, True)])
def test_whether_the_run_reaches_the_resonance(frequency, reaches):
    words = elastic_remark(record(frequency), ELASTIC)
    assert "fitted as one rigid body" in words
    assert "antiresonance at 20 Hz" in words
    assert ("the resonance is at 28.3 Hz" in words) is reaches
