"""Records: even grids, spikes, thinning behind a filter, stretches of long logs."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.log import Log
from gainbench.evidence.prepared import prepare, stretches, thin, thinned, without_spikes
from gainbench.model import SignalName
from quantities import assert_quantity


def test_irregular_stamps_are_laid_on_an_even_grid():
    rng = np.random.default_rng(1)
    time = np.cumsum(rng.uniform(0.024, 0.038, 500))
    record = prepare(Log(name="a.csv", time=time, signals={SignalName.SPEED: 3.0 * time}))
    grid = time[0] + record.step * np.arange(record.size)
    assert_quantity(record.signals[SignalName.SPEED], 3.0 * grid, atol=1e-12, unit="rad/s", why="a straight line")
    assert any("irregular" in one for one in record.remarks)


def test_single_samples_that_stand_out_are_repaired_and_steps_are_not():
    signal = np.where(np.arange(400) < 200, 0.0, 5.0) + 0.01 * np.sin(np.arange(400))
    broken = signal.copy()
    broken[[50, 300]] += 40.0
    repaired, count = without_spikes(broken)
    assert count == 2
    assert_quantity(repaired, signal, atol=0.02, unit="V", why="the mean of both neighbours")
    assert without_spikes(signal)[1] == 0


def test_what_is_often_is_no_spike():
    signal = np.tile([0.0, 0.0, 9.0, 0.0], 100)
    assert without_spikes(signal)[1] == 0


def test_thinning_keeps_what_is_slow_and_takes_what_would_fold():
    at = np.arange(4000)
    slow, fast = np.sin(2e-3 * at), np.sin(2.0 * np.pi * 0.21 * at)
    inside = slice(20, -20)
    got = thinned(slow + fast, 10)
    assert got.size == 400
    assert_quantity(got[inside], slow[::10][inside], atol=2e-3, unit="1", why="stop band of the Kaiser window, 60 dB")
    assert_quantity(thinned(0.5 * at, 7), 0.5 * at[::7], atol=1e-9, unit="1", why="rounding; a line passes")


def test_thinning_a_record_keeps_its_pieces_and_its_time():
    time = np.concatenate((np.arange(1000), np.arange(2000, 3000))) * 1e-3
    record = prepare(Log(name="a.csv", time=time, signals={SignalName.SPEED: time}))
    found = thin(record, 4)
    assert found.bounds.tolist() == [0, 250, 500]
    assert_quantity(found.step, 4e-3, rtol=1e-9, unit="s", why="rounding")


def test_stretches_hold_the_part_that_moves():
    signal = np.zeros(100_000)
    signal[61_000:61_400] = np.sin(np.arange(400))
    record = prepare(Log(name="a.csv", time=np.arange(signal.size) * 1e-4, signals={SignalName.CURRENT: signal}))
    found = stretches(record, 10_000, by=SignalName.CURRENT)
    assert found.size == 10_000
    assert_quantity(np.sum(found.signals[SignalName.CURRENT] ** 2), np.sum(signal**2), rtol=1e-12, unit="1", why="all")
