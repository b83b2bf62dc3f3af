"""Crossings read off a drawn curve."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.findings.crossings import crosses_again, crossings
from gainbench.results import LoopCurve


def test_an_integrator_with_delay_crosses_once_with_its_margin(bench):
    (only,) = crossings(bench.curve(60.0, delay=1e-3, nyquist=1e3))
    assert only.falling
    # The logarithm of an integrator's gain is straight in that of the frequency, the phase of a delay nearly so.
    assert only.frequency_hz == pytest.approx(60.0, rel=1e-9)
    assert only.margin_deg == pytest.approx(90.0 - 360.0 * 60.0 * 1e-3, abs=1e-3)


def test_a_peak_makes_three(bench):
    found = crossings(bench.curve(60.0, delay=1e-3, nyquist=1e3, bumps=((200.0, 8.0),)))
    assert [one.falling for one in found] == [True, False, True]
    assert crosses_again(bench.curve(60.0, delay=1e-3, nyquist=1e3, bumps=((200.0, 8.0),)))
    assert not crosses_again(bench.curve(60.0, delay=1e-3, nyquist=1e3))
    assert 60.0 < found[1].frequency_hz < 200.0 < found[2].frequency_hz


def test_phase_beyond_half_a_turn_is_negative(bench):
    (only,) = crossings(bench.curve(60.0, delay=5e-3, nyquist=1e3))
    # 90 deg less 360 * 60 * 0.005 = 108 deg leaves -18 deg.
    assert only.margin_deg == pytest.approx(-18.0, abs=0.02)


def test_no_crossing_and_a_vanishing_gain():
    frequency = np.array([1.0, 2.0, 4.0])
    assert crossings(LoopCurve(frequency_hz=frequency, open_loop=np.array([0.5j, 0.4j, 0.3j]))) == ()
    (only,) = crossings(LoopCurve(frequency_hz=frequency, open_loop=np.array([2.0 + 0j, 0j, 0j])))
    assert only.falling
    assert np.isfinite([only.frequency_hz, only.margin_deg]).all()
