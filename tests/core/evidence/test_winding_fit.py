"""The winding fitted to long logs and to noise on its voltage."""

from __future__ import annotations

import numpy as np

from gainbench.evidence.prepared import prepare
from gainbench.evidence.winding_fit import MOST_ROWS, fit_winding, outlier_remark
from identified import log_of, some_motion
from quantities import assert_quantity

START = np.array([1.0, 2e-3])


def test_a_long_log_is_stood_for_by_stretches():
    record = prepare(log_of(some_motion(30.0), only=("voltage", "current", "speed")))
    assert record.size > MOST_ROWS
    found = fit_winding(record, turning=True, start=START)
    assert_quantity(found.values, [0.6, 0.9e-3, 0.052], rtol=0.01, unit="1", why="50 dB of noise over 40000 rows")
    assert any("stretches" in one for one in found.remarks)


def test_noise_on_the_voltage_does_not_draw_the_inductance():
    offs = []
    for seed in range(8):
        record = prepare(log_of(some_motion(seed=seed), only=("voltage", "current", "speed"), decibel=30.0, seed=seed))
        offs.append(fit_winding(record, turning=True, start=START).values[1] / 0.9e-3 - 1.0)
    assert_quantity(np.mean(offs), 0.0, atol=0.025, unit="1", why="3 % of noise; eight fits of 2 % each")


def test_words_for_outliers():
    class Fit:
        outliers = 1

    assert outlier_remark(Fit(), "current") == ["current: 1 sample far off the fit left out"]
    Fit.outliers = 0
    assert outlier_remark(Fit(), "current") == []
