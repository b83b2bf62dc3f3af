"""Locked-rotor runs: steps and pulses, and a supply that takes its time."""

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

RATE = 5000.0
LOCKED = replace(ONE, constant=np.array([1e-9]))
"""A rotor that nothing turns."""


def voltages(kind: str) -> np.ndarray:
    rows = np.arange(2000)
    if kind == "step":
        return np.where(rows < 200, 0.0, 3.0)[None]
    if kind == "pulses":
        return np.where(rows % 400 < 200, 3.0, 0.0)[None]
    return (3.0 * (1.0 - np.exp(-np.maximum(0, rows - 200) / 15.0)))[None]


@pytest.mark.parametrize("kind", ["step", "pulses", "slow supply"])
def test_resistance_and_inductance(kind):
    log = log_of(run(LOCKED, voltages(kind), rate=RATE), only=("voltage", "current"))
    found = identify(sheet_of(Experiment.LOCKED_ROTOR), [log]).estimates
    assert set(found) == {EstimateName.RESISTANCE, EstimateName.INDUCTANCE}
    for name, one in found.items():
        assert_quantity(one.value, TRUE[name.value], rtol=0.02, unit=name.si, why="50 dB of noise, short transients")
        assert 0.9 * one.low < TRUE[name.value] < 1.1 * one.high


def test_a_constant_voltage_tells_no_inductance():
    log = log_of(run(LOCKED, np.full((1, 2000), 3.0), rate=RATE), only=("voltage", "current"))
    # What is left once the start has settled.
    late = replace(log, time=log.time[500:], signals={name: one[500:] for name, one in log.signals.items()})
    found = identify(sheet_of(Experiment.LOCKED_ROTOR), [late])
    assert EstimateName.INDUCTANCE not in found.estimates
    assert any("inductance" in one for one in found.runs[0].remarks)


def test_a_rotor_that_turned_is_said():
    log = log_of(run(ONE, voltages("step"), rate=RATE), only=("voltage", "current", "speed"))
    found = identify(sheet_of(Experiment.LOCKED_ROTOR), [log])
    assert any("the rotor turned" in one for one in found.runs[0].remarks)


def test_without_voltage_it_is_refused():
    log = log_of(run(LOCKED, voltages("step"), rate=RATE), only=("current",))
    with pytest.raises(LogError, match="voltage"):
        identify(sheet_of(Experiment.LOCKED_ROTOR), [log])
