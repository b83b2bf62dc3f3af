"""Columns are found by their names or their place, and what does not fit into memory is refused."""

from __future__ import annotations

import builtins
import io

import pytest

from gainbench.errors import LogError
from gainbench.evidence import columns
from gainbench.evidence.columns import FileColumn, find_column, most_rows, refuse_too_large

FOUND = (
    FileColumn(name="Time [s]", others=("Time", "t")),
    FileColumn(name="speed"),
    FileColumn(name="speed"),
    FileColumn(name="Speed"),
    FileColumn(name="state", numeric=False),
    FileColumn(name="column 1"),
)


@pytest.mark.parametrize(
    ("wanted", "place"),
    [("Time [s]", 0), (" t ", 0), ("TIME", 0), ("Speed", 3), ("column 3", 2), ("state", 4), ("column 1", 5)],
)
def test_a_column_is_found(wanted, place):
    assert find_column(FOUND, wanted, name="run.csv") == place


@pytest.mark.parametrize(
    ("wanted", "reason"),
    [
        ("speed", 'more than one column is called "speed": name it by its place, "column 2" and "column 3"'),
        ("SPEED", '"column 2" and "column 3" and "column 4"'),
        ("Tme", "Time is near"),
        ("torque", "the file has Time \\[s\\], speed, speed, Speed, column 1"),
        ("column 7", 'no column "column 7"'),
        ("", 'no column ""'),
    ],
)
def test_a_column_is_not_found(wanted, reason):
    with pytest.raises(LogError, match=rf"^run\.csv: .*{reason}"):
        find_column(FOUND, wanted, name="run.csv")


def test_a_file_of_many_columns_names_some():
    many = [FileColumn(name=f"c{place}") for place in range(50)]
    with pytest.raises(LogError, match=r"c0, c1, .*c11 and 38 more$"):
        find_column(many, "torque", name="run.csv")


def meminfo(kilobytes):
    def opened(path, *args, **kwargs):
        assert str(path) == "/proc/meminfo"
        return io.StringIO(f"MemTotal: 99999999 kB\nMemAvailable: {kilobytes} kB\n")

    return opened


def test_what_is_too_large_depends_on_rows_columns_and_memory(monkeypatch):
    monkeypatch.setattr(builtins, "open", meminfo(10**9))
    assert most_rows(4) == columns.MOST_VALUES // 4
    refuse_too_large(columns.MOST_VALUES, 1, name="run.csv")
    with pytest.raises(LogError, match=r"^run\.csv: too large: about 2e\+08 rows of 2 columns, at most 1e\+08 .*cut"):
        refuse_too_large(columns.MOST_VALUES, 2, name="run.csv")
    monkeypatch.setattr(builtins, "open", meminfo(1000))
    assert most_rows(1) == int(0.6 * 1024_000 / 32)
    with pytest.raises(LogError, match="too large"):
        refuse_too_large(30_000, 1, name="run.csv")


def test_a_system_that_tells_nothing_of_its_memory_has_the_set_limit(monkeypatch):
    def refused(*args, **kwargs):
        raise FileNotFoundError

    monkeypatch.setattr(builtins, "open", refused)
    monkeypatch.setattr(columns.os, "sysconf", refused)
    assert most_rows(1) == columns.MOST_VALUES
