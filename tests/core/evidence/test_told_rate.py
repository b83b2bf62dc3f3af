"""The sampling period that a file tells beside its rows."""

from __future__ import annotations

import pytest

from gainbench.evidence.told_rate import is_counter, period_in, period_of
from quantities import assert_quantity


@pytest.mark.parametrize(
    ("line", "period"),
    [
        ("# Sample rate: 2000 Hz", 5e-4),
        ("Sampling Frequency (kHz);20", 5e-5),
        ("Abtastrate: 2,5 kHz", 4e-4),
        ("Sample Interval,5.000E-4,s", 5e-4),
        ("Abtastzeit [ms];0,5", 5e-4),
        ("XINCR 4.0e-6", 4e-6),
        ("Horizontal Units,s,Time Step = 20 us", 2e-5),
        ("dt=0.5ms", 5e-4),
        ("fs = 10 kS/s", 1e-4),
        ("Record Length,8000", None),
        ("width = 12", None),
        ("Operator: N.N., sample 12 of 40", None),
    ],
)
def test_lines_above_the_rows(line, period):
    found = period_in(["Model,DSO", line])
    if period is None:
        assert found is None
    else:
        assert_quantity(found, period, rtol=1e-12, unit="s", why="one number and its unit")


def test_single_numbers_by_their_names():
    assert period_of({"gain": 3.0, "run.Ts": 1e-3}) == 1e-3
    assert period_of({"Fs": 500.0}) == 2e-3
    assert period_of({"gain": 3.0, "dt": 0.0}) is None


def test_counters_by_their_names():
    assert all(is_counter(name) for name in ("Sample", "#", "n", "Index", "[row]"))
    assert not any(is_counter(name) for name in ("t", "time", "speed", "ms"))
