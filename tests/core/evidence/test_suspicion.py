"""Constant and clipped signals are told from rests and staircases."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.evidence.suspicion import samples_on_limit, suspicions
from gainbench.model import SignalName

TIME = np.arange(5000) * 1e-3
NOISE = np.random.default_rng(3).normal(scale=0.05, size=TIME.size)
WAVE = 10.0 * np.sin(7.0 * TIME) + NOISE


def test_a_cut_off_wave_is_told_with_its_limit_and_its_samples():
    cut = np.clip(WAVE, -9.0, 8.0)
    told = list(suspicions({SignalName.CURRENT: cut}))
    assert samples_on_limit(cut, 8.0) == pytest.approx(np.sum(cut == 8.0), rel=0.05)
    assert len(told) == 2
    assert told[0].startswith("current sits on its largest value, 8 A, for ")
    assert told[1].startswith("current sits on its smallest value, -9 A, for ")


@pytest.mark.parametrize(
    "values",
    [
        WAVE,
        np.round(WAVE),
        np.sign(np.sin(7.0 * TIME)) * 24.0,
        np.where(TIME < 1.0, 0.0, 5.0 + NOISE),
        np.where(TIME < 1.0, 0.0, -5.0 + NOISE),
        np.clip(np.round(TIME * 3.0), 0.0, 8.0),
        np.array([1.0, 2.0, 3.0]),
    ],
    ids=["wave", "coarse", "square", "rest before", "rest above", "staircase", "three samples"],
)
def test_what_is_not_clipped(values):
    assert list(suspicions({SignalName.CURRENT: values})) == []


def test_references_and_angles_may_rest_on_their_limits():
    cut = np.clip(WAVE, -9.0, 8.0)
    signals = {SignalName.SPEED_REFERENCE: cut, SignalName.CURRENT_REFERENCE: cut, SignalName.ANGLE: cut}
    assert list(suspicions(signals)) == []


def test_a_constant_is_told():
    assert list(suspicions({SignalName.SPEED: np.full(10, 3.0)})) == ["speed is constant at 3 rad/s"]
    assert list(suspicions({SignalName.ANGLE: np.zeros(10)})) == ["angle is constant at 0 rad"]
