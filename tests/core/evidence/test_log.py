"""A log: what it is made of, its rate, its pieces, and whether it is long and fast enough."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from gainbench.errors import LogError
from gainbench.evidence.log import Log, demand, gap_length
from gainbench.model import SignalName
from quantities import assert_quantity

ROUNDING = "a sum of rounded intervals"


def log(time, **signals) -> Log:
    time = np.asarray(time, dtype=float)
    return Log(name="run.csv", time=time, signals=signals or {"speed": np.sin(time)})


def test_a_log_cannot_be_changed_and_leaves_what_it_was_made_from():
    time = np.arange(10.0)
    speed = time * 2.0
    made = log(time, speed=speed)
    with pytest.raises(ValueError, match="read-only"):
        made.signals[SignalName.SPEED][0] = 1.0
    with pytest.raises(TypeError):
        made.signals[SignalName.SPEED] = speed
    speed[0] = time[0] = -1.0
    assert made.time[0] == made.signals[SignalName.SPEED][0] == 0.0
    assert made.has(SignalName.SPEED)
    assert not made.has(SignalName.SPEED, SignalName.CURRENT)


@pytest.mark.parametrize(
    ("time", "signals", "reason"),
    [
        ([0.0], {"speed": [0.0]}, "rises strictly"),
        ([0.0, 1.0, 1.0], {"speed": [0.0, 1.0, 2.0]}, "rises strictly"),
        ([0.0, 2.0, 1.0], {"speed": [0.0, 1.0, 2.0]}, "rises strictly"),
        ([0.0, 1.0, np.nan], {"speed": [0.0, 1.0, 2.0]}, "rises strictly"),
        ([0.0, 1.0], {"speed": [0.0]}, "as long as its time"),
        ([0.0, 1.0], {"speed": [0.0, np.inf]}, "finite"),
        ([0.0, 1.0], {"time": [0.0, 1.0]}, "no signal"),
        ([0.0, 1.0], {"force": [0.0, 1.0]}, "force"),
    ],
)
def test_what_is_no_log_is_not_made(time, signals, reason):
    arrays = {name: np.array(values) for name, values in signals.items()}
    with pytest.raises(ValueError, match=reason):
        Log(name="x", time=np.array(time), signals=arrays)


def test_the_rate_is_the_usual_one():
    time = np.delete(np.arange(1000) * 1e-3, [200, 201, 600])
    made = log(time)
    assert_quantity(made.rate, 1000.0, rtol=1e-9, unit="Hz", why=ROUNDING)
    assert_quantity(made.period, 1e-3, rtol=1e-9, unit="s", why=ROUNDING)
    assert_quantity(made.length, 0.999, rtol=1e-12, unit="s", why=ROUNDING)


def test_pieces_are_what_lies_between_gaps():
    time = np.delete(np.arange(1000) * 1e-3, [200, 201, 600])
    made = log(time)
    assert made.pieces == (slice(0, 200), slice(200, 598), slice(598, 997))
    assert_quantity(made.gaps, [3e-3, 2e-3], rtol=1e-9, unit="s", why=ROUNDING)
    assert made.is_regular
    whole = log(np.arange(10.0))
    assert whole.pieces == (slice(0, 10),)
    assert whole.gaps.size == 0


def test_a_logger_that_spreads_its_stamps_has_no_gaps():
    rng = np.random.default_rng(1)
    made = log(np.cumsum(rng.uniform(26e-3, 36e-3, size=500)))
    assert len(made.pieces) == 1
    assert not made.is_regular


def test_rounded_stamps_are_regular_and_a_changed_rate_is_not():
    thirds = np.round(np.arange(3000) / 30.0, 3)
    assert log(thirds).is_regular
    assert not log(np.concatenate((np.arange(100) * 1e-3, 0.1 + np.arange(100) * 1.2e-3))).is_regular
    assert not log([0.0, 1.0, 2.5, 3.0]).is_regular
    # Two rates in two pieces have no common period.
    assert not log(np.concatenate((np.arange(100) * 1e-3, 5.0 + np.arange(100) * 1.1e-3))).is_regular


@given(hnp.arrays(float, st.integers(min_value=1, max_value=50), elements=st.floats(min_value=1e-6, max_value=10.0)))
def test_pieces_hold_every_sample_once(intervals):
    made = log(np.concatenate(([0.0], np.cumsum(intervals))))
    held = [index for piece in made.pieces for index in range(piece.start, piece.stop)]
    assert held == list(range(intervals.size + 1))
    assert made.gaps.size == len(made.pieces) - 1
    assert np.all(made.gaps > gap_length(np.diff(made.time)))


def test_a_log_that_is_too_slow_or_too_short_says_what_it_takes():
    made = log(np.arange(100) * 1e-2)
    demand(made, purpose="the inertia", rate=100.0 * (1.0 - 1e-9), length=0.9)
    with pytest.raises(LogError) as caught:
        demand(made, purpose="the inductance", rate=2000.0)
    assert str(caught.value) == (
        "run.csv: too slow for the inductance: it has 100 samples a second, it takes at least 2000;"
        " record it again with an interval of at most 0.0005 s"
    )
    with pytest.raises(LogError, match=r"too short for the friction: it is 0\.99 s long, it takes at least 2 s"):
        demand(made, purpose="the friction", length=2.0)
