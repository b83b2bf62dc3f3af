"""What is repaired in a log, what is said about it, and what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from gainbench.errors import LogError
from gainbench.evidence.cleaning import LEAST_SAMPLES, Scaled, clean
from gainbench.evidence.columns import Raw
from gainbench.evidence.log import Log
from gainbench.model import SignalName

N = 400
TIME = np.arange(N) / 1000.0
WAVE = np.sin(17.0 * TIME) + 0.01 * np.cos(3000.0 * TIME)


def scaled(values, factor=1.0, stamps=False) -> Scaled:
    values = np.array(values)
    missing = np.zeros(values.size, dtype=bool) if values.dtype.kind == "i" else ~np.isfinite(values)
    return Scaled(raw=Raw(values=values, missing=missing, stamps=stamps), column="c", factor=factor)


def cleaned(time, factor=1.0, stamps=False, **signals) -> Log:
    own = {SignalName(name): scaled(values) for name, values in (signals or {"speed": WAVE}).items()}
    return clean("run.csv", scaled(time, factor, stamps), signals=own, remarks=("first",))


def with_holes(values, *holes):
    values = np.array(values)
    for hole in holes:
        values[hole] = np.nan
    return values


def test_a_log_without_fault_is_left_alone():
    log = cleaned(1700.0 + TIME, speed=WAVE, current=-WAVE)
    assert log.remarks == ("first",)
    assert np.abs(log.time - TIME).max() < 1e-12
    assert np.array_equal(log.signals[SignalName.CURRENT], -WAVE)


def test_units_and_scale_are_one_factor():
    log = clean("run.csv", scaled(TIME, 1e-3), signals={SignalName.SPEED: scaled(WAVE, -2.0)}, remarks=())
    assert np.array_equal(log.signals[SignalName.SPEED], -2.0 * WAVE)
    assert log.time[-1] == pytest.approx(TIME[-1] * 1e-3, rel=1e-15)


def test_counters_and_stamps_lose_nothing():
    count = 1_700_000_000_123_456_789 + 1000 * np.arange(N)
    assert np.array_equal(cleaned(count, factor=1e-9).time, 1000 * np.arange(N) * 1e-9)
    assert np.array_equal(cleaned(count, stamps=True).time, 1000 * np.arange(N) * 1e-9)


def test_times_of_day_begin_anew_at_midnight():
    day = 86_400 * 10**9
    stamps = (day - 2 * 10**8 + 10**6 * np.arange(N)) % day
    assert np.array_equal(cleaned(stamps, stamps=True).time, 10**6 * np.arange(N) * 1e-9)
    with pytest.raises(LogError, match="backwards"):
        cleaned(stamps + day, stamps=True)


def test_repeated_stamps_are_left_out():
    time = TIME.copy()
    time[[50, 51, 200]] = time[[49, 49, 199]]
    log = cleaned(time)
    assert log.time.size == N - 3
    assert "3 rows with a repeated time stamp left out" in log.remarks
    assert np.array_equal(log.signals[SignalName.SPEED], np.delete(WAVE, [50, 51, 200]))


def test_rows_without_a_stamp_are_left_out_and_empty_ones_not_spoken_of():
    time, wave = with_holes(TIME, 7, 8), with_holes(WAVE, 8)
    log = cleaned(time, speed=wave)
    assert log.time.size == N - 2
    assert "1 row without a time stamp left out" in log.remarks


def test_single_holes_are_filled_and_long_ones_break_the_log():
    log = cleaned(TIME, speed=with_holes(WAVE, 30, slice(100, 102), slice(200, 210)), current=WAVE)
    assert log.time.size == N - 10
    assert "3 missing samples of speed filled in between the neighbours" in log.remarks
    assert "10 rows without speed left out" in log.remarks
    assert any(remark.startswith("1 gap in time, the longest 0.011 s at 0.199 s") for remark in log.remarks)
    assert log.signals[SignalName.SPEED][30] == pytest.approx((WAVE[29] + WAVE[31]) / 2.0, rel=1e-12)
    assert [piece.stop - piece.start for piece in log.pieces] == [200, 190]


def test_a_hole_across_a_gap_is_not_filled():
    time = np.where(TIME < 0.2, TIME, TIME + 5.0)
    log = cleaned(time, speed=with_holes(WAVE, 200))
    assert log.time.size == N - 1
    assert "1 row without speed left out" in log.remarks


def test_a_signal_logged_at_a_slower_rate_is_not_invented():
    every = np.full(N, np.nan)
    every[::4] = WAVE[::4]
    log = cleaned(TIME, speed=every, current=WAVE)
    assert np.array_equal(log.signals[SignalName.SPEED], WAVE[::4])
    assert "300 rows without speed left out" in log.remarks


def test_columns_of_different_length_are_told():
    log = cleaned(TIME, speed=with_holes(WAVE, slice(300, None)), current=WAVE)
    assert "speed ends 100 rows before the log does: its columns are of different length" in log.remarks
    assert log.time.size == 300


def test_gaps_and_uneven_time_are_told():
    log = cleaned(np.where(TIME < 0.1, TIME, TIME + 0.25))
    assert "1 gap in time, the longest 0.251 s at 0.099 s, where samples are 0.001 s apart" in log.remarks
    uneven = np.cumsum(np.random.default_rng(2).uniform(0.9e-3, 1.4e-3, size=N))
    (remark,) = (one for one in cleaned(uneven).remarks if "irregular" in one)
    assert remark.startswith("time is irregular: samples are 0.0009")


def test_stamps_too_large_for_their_digits_are_told():
    coarse = cleaned(1.7e9 + 1e-5 * np.arange(N))
    assert any("good to 2.4e-07 s only" in remark for remark in coarse.remarks)


def test_a_constant_signal_is_told_and_a_log_of_constants_refused():
    log = cleaned(TIME, speed=np.zeros(N), current=WAVE)
    assert "speed is constant at 0 rad/s" in log.remarks
    with pytest.raises(LogError, match=r"^run\.csv: every signal is constant"):
        cleaned(TIME, speed=np.zeros(N), current=np.ones(N))


@pytest.mark.parametrize(
    ("time", "speed", "reason"),
    [
        (np.full(N, np.nan), WAVE, 'column "c" holds no time; map'),
        (np.full(N, 3.0), WAVE, "does not move"),
        (TIME[::-1], WAVE, "runs backwards at data row 2: -0.001 s come after 0 s"),
        (np.where(TIME < 0.2, TIME, TIME - 0.15), WAVE, "backwards at data row 201: 0.05 s come after 0.199 s"),
        (np.floor(TIME * 200.0), WAVE, "320 of 400 rows repeat the stamp before them: .* more digits"),
        (TIME, np.full(N, np.nan), r'column "c" \(speed\) holds no numbers'),
        (TIME[:9], WAVE[:9], f"too short: 9 rows .* at least {LEAST_SAMPLES} are needed"),
        (TIME, with_holes(WAVE, slice(5, None)), "too short: 5 rows"),
    ],
)
def test_what_is_refused(time, speed, reason):
    with pytest.raises(LogError, match=rf"^run\.csv: .*(?:{reason})"):
        cleaned(time, speed=speed)


ANY = st.floats(allow_nan=True, allow_infinity=True, width=64)


@given(
    st.integers(min_value=1, max_value=40).flatmap(
        lambda size: st.tuples(
            hnp.arrays(float, size, elements=st.floats(min_value=0.0, max_value=2.0) | ANY),
            hnp.arrays(float, size, elements=ANY),
            hnp.arrays(float, size, elements=ANY),
        )
    ),
    st.booleans(),
)
def test_any_numbers_are_a_log_or_refused(arrays, in_order):
    time, speed, current = arrays
    try:
        log = cleaned(np.sort(time) if in_order else time, factor=1e3, speed=speed, current=current)
    except LogError as error:
        assert str(error).startswith("run.csv: ")  # noqa: PT017
        return
    assert log.time.size >= LEAST_SAMPLES
    assert np.all(np.isin(log.signals[SignalName.SPEED], speed) | (len(log.remarks) > 1))
