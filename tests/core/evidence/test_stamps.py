"""Calendar stamps and times of day, against Python's own calendar."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta, timezone

import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.evidence.stamps import is_stamp, nanoseconds


def read(*texts: str | None) -> list[int | None]:
    return nanoseconds(pl.Series(texts, dtype=pl.String)).to_list()


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("1970-01-01T00:00:00", 0),
        ("1970-01-01 00:00:01.5", 1_500_000_000),
        ("1970/1/2 00:00:00,000000001", 86_400_000_000_001),
        ("1970-01-01T02:00:00+02:00", 0),
        ("1969-12-31T22:30:00-0130", 0),
        ("1970-01-01T00:00:00Z", 0),
        ("00:00:01", 1_000_000_000),
        (" 1:02:03.25 ", 3_723_250_000_000),
        ("2024-02-30 00:00:00", None),
        ("2024-13-01 00:00:00", None),
        ("02.01.1970 00:00:00,5", 86_400_500_000_000),
        ("1:00:00 am", 3_600_000_000_000),
        ("12:00:01 AM", 1_000_000_000),
        ("12:00:00 PM", 43_200_000_000_000),
        # Which is the day and which the month nobody knows: a time of day.
        ("03/05/2024 00:00:02", 2_000_000_000),
        ("noon", None),
        ("", None),
        (None, None),
    ],
)
def test_one_stamp(text, expected):
    assert read(text) == [expected]


@given(
    st.datetimes(min_value=datetime(1678, 1, 1), max_value=datetime(2261, 12, 31)),
    st.integers(min_value=-14 * 60, max_value=14 * 60),
    st.sampled_from(["T", " "]),
)
def test_any_instant_is_the_calendars(instant, minutes, joint):
    stamp = instant.replace(tzinfo=timezone(timedelta(minutes=minutes)))
    expected = (stamp - datetime(1970, 1, 1, tzinfo=UTC)) // timedelta(microseconds=1) * 1000
    text = stamp.isoformat(sep=joint, timespec="microseconds")
    assert is_stamp(text)
    assert read(text, text[:19]) == [
        expected,
        (instant.replace(microsecond=0) - datetime(1970, 1, 1)) // timedelta(microseconds=1) * 1000,
    ]


@pytest.mark.parametrize("text", ["1.5", "12:30", "03/05 12:00:00", "2024-05-03", "12:00:00 XM", "x12:00:00", ""])
def test_what_is_no_stamp(text):
    assert not is_stamp(text)
    assert read(text) == [None]
