"""Parquet logs: floats, whole numbers, instants and durations."""

from __future__ import annotations

from datetime import datetime, timedelta

import numpy as np
import polars as pl
import pytest

from gainbench.errors import LogError
from gainbench.evidence import columns
from gainbench.evidence.parquet import ParquetTable


@pytest.fixture
def parquet(tmp_path):
    def write(**series):
        path = tmp_path / "run.parquet"
        pl.DataFrame(series).write_parquet(path)
        return path

    return write


def test_numbers_of_every_type(parquet):
    path = parquet(
        t=pl.Series([0.0, 0.5, None], dtype=pl.Float32),
        i=pl.Series([1, -2, 3], dtype=pl.Int16),
        w=pl.Series([1.5, np.nan, 3.5]),
        state=["a", "b", "c"],
    )
    table = ParquetTable(path)
    assert table.rows == 3
    assert [one.name for one in table.columns] == ["t", "i", "w", "state"]
    assert [one.numeric for one in table.columns] == [True, True, True, False]
    speed, time, current = table.load([2, 0, 1], time=0)
    assert time.missing.tolist() == [False, False, True]
    assert speed.missing.tolist() == [False, True, False]
    assert current.values.tolist() == [1.0, -2.0, 3.0]


@pytest.mark.parametrize("unit", ["ms", "us", "ns"])
@pytest.mark.parametrize("kind", ["instant", "length", "day"])
def test_stamps_are_nanoseconds(parquet, unit, kind):
    steps = [timedelta(milliseconds=k) for k in range(3)]
    if kind == "instant":
        series = pl.Series([datetime(2024, 5, 3) + step for step in steps], dtype=pl.Datetime(unit))
    elif kind == "length":
        series = pl.Series(steps, dtype=pl.Duration(unit))
    else:
        series = pl.Series([step / timedelta(milliseconds=1) * 1e6 for step in steps]).cast(pl.Int64).cast(pl.Time)
    table = ParquetTable(parquet(t=series, i=[1.0, 2.0, 3.0]))
    assert table.columns[0].stamps
    (raw,) = table.load([0], time=0)
    assert raw.stamps
    assert np.diff(raw.values).tolist() == [1_000_000, 1_000_000]


def test_long_counters_keep_their_last_digit(parquet):
    counts = [2**60 + 1, 2**60 + 2, 2**60 + 4]
    path = parquet(n=counts, i=counts)
    time, current = ParquetTable(path).load([0, 1], time=0)
    assert time.values.tolist() == counts
    assert current.values.dtype == np.float64


def test_a_name_is_never_taken_for_a_pattern(parquet):
    path = parquet(**{"^.*$": [1.0, 2.0], "*": [3.0, 4.0]})
    first, second = ParquetTable(path).load([0, 1], time=0)
    assert first.values.tolist() == [1.0, 2.0]
    assert second.values.tolist() == [3.0, 4.0]


def test_damaged_and_large_files_are_refused(parquet, monkeypatch):
    path = parquet(t=[1.0, 2.0], i=[1.0, 2.0])
    table = ParquetTable(path)
    monkeypatch.setattr(columns, "MOST_VALUES", 3)
    with pytest.raises(LogError, match=r"^run\.parquet: too large"):
        table.load([0, 1], time=0)
    path.write_bytes(path.read_bytes()[:-20])
    with pytest.raises(LogError, match=r"^run\.parquet: not a parquet file that can be read: .*export"):
        ParquetTable(path)
