"""Numbers come out of a text as they stand in it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from gainbench.errors import LogError
from gainbench.evidence import columns
from gainbench.evidence.text_table import TextTable


def test_only_what_is_asked_for_in_the_order_it_is_asked_for(written, as_text, run):
    table = TextTable(written(as_text(run)))
    assert [one.name for one in table.columns] == ["t", "i", "w"]
    assert table.rows == len(run)
    assert table.columns[0].first_values == ("0", "0.001", "0.002", "0.003", "0.004")
    speed, time, again = table.load([2, 0, 2], time=0)
    assert np.array_equal(speed.values, run[:, 2])
    assert np.array_equal(time.values, run[:, 0])
    assert np.array_equal(again.values, run[:, 2])
    assert not speed.missing.any()


@given(
    values=st.lists(st.tuples(*[st.floats(allow_nan=False, allow_infinity=False)] * 2), min_size=3, max_size=20),
    layout=st.sampled_from([(";", "."), (";", ","), (",", "."), ("\t", ","), (" ", "."), (" ", ","), ("|", ".")]),
    end=st.sampled_from(["\n", "\r\n", "\r"]),
    quoted=st.booleans(),
)
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_every_float_comes_back_to_the_last_bit(written, values, layout, end, quoted):
    separator, mark = layout
    quote = '"' if quoted and separator != " " else ""
    fields = [[f"{quote}{value!r}{quote}".replace(".", mark) for value in row] for row in [(0.5, 0.5), *values]]
    text = end.join([separator.join(["t", "i"]), *(separator.join(row) for row in fields), ""])
    table = TextTable(written(text))
    for place, raw in enumerate(table.load([0, 1], time=0)):
        assert raw.values.tolist() == [0.5, *(row[place] for row in values)]


def test_missing_numbers_are_told(written):
    rows = ["0.1;1", "0.2;", "0.3;NaN", "0.4;inf", "0.5", "0.6;x", "0.7;7", "0.8;8;9", "", "0.9;9"]
    time, current = TextTable(written("\n".join(["t;i", *rows]))).load([0, 1], time=0)
    assert time.missing.tolist() == [False] * 8 + [True, False]
    assert current.missing.tolist() == [False, True, True, True, True, True, False, False, True, False]
    assert current.values[~current.missing].tolist() == [1.0, 7.0, 8.0, 9.0]


def test_comments_quotes_and_padding(written):
    text = '# made here\n"t" , "i"\n0.5 , 1.5 \n# paused\n1.5 , "-2.5" \n 2.5,3 \n'
    table = TextTable(written(text))
    assert table.rows == 3
    time, current = table.load([0, 1], time=0)
    assert time.values.tolist() == [0.5, 1.5, 2.5]
    assert current.values.tolist() == [1.5, -2.5, 3.0]


def test_a_stray_quote_costs_one_number_only(written, as_text, run):
    lines = as_text(run).split("\n")
    lines[10] = '"' + lines[10]
    time, speed = TextTable(written("\n".join(lines))).load([0, 2], time=0)
    assert time.missing.sum() == 1
    assert speed.values.size == len(run)


def test_quoted_decimal_commas_between_commas(written):
    text = "t,i\n" + "\n".join(f'"0,{k}","{k},25"' for k in range(9))
    time, current = TextTable(written(text)).load([0, 1], time=0)
    assert time.values.tolist() == [k / 10 for k in range(9)]
    assert current.values.tolist() == [k + 0.25 for k in range(9)]


def test_long_counters_and_stamps_keep_their_last_digit(written):
    counts = [1_700_000_000_123_456_789 + 1001 * k for k in range(9)]
    (count,) = TextTable(written("\n".join(["n,i", *(f"{n},1.5" for n in counts)]))).load([0], time=0)
    assert count.values.tolist() == counts
    text = "\n".join(["when,i", *(f"2024-05-03T12:34:56.00000000{k}Z,1.5" for k in range(9))])
    (when,) = TextTable(written(text)).load([0], time=0)
    assert when.stamps
    assert np.diff(when.values).tolist() == [1] * 8


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "utf-16-le", "cp1252", "utf-32"])
def test_encodings(written, as_text, run, encoding):
    text = as_text(run, header="Zeit;Strom µ;Winkel °", mark=",")
    _, current = TextTable(written(text, encoding=encoding)).load([0, 1], time=0)
    assert np.array_equal(current.values, run[:, 1])


def test_rows_beyond_the_limit_are_refused_and_not_read(written, as_text, run, monkeypatch):
    table = TextTable(written(as_text(run)))
    monkeypatch.setattr(columns, "MOST_VALUES", 2 * len(run) - 1)
    with pytest.raises(LogError, match=r"^run\.csv: too large"):
        table.load([0, 1], time=0)
    assert table.load([0], time=0)[0].values.size == len(run)
